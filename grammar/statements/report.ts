import type { ReportStatement } from "../ast.ts";
import { quoted } from "../print.ts";
import { defineStatement } from "../statement.ts";
import { optional, sequence, text, words } from "../syntax.ts";

export const report = defineStatement<ReportStatement>({
  verb: "report",
  group: "record",
  help: "Writes the report: design, data and exclusions, results, deviations from the plan, methods and references.",
  details: ["To a file: .html, .md or .docx."],
  example: 'report to "glove.html"',
  syntax: sequence(optional(words("to"), text("path", "a file in quotes", "files"))),
  build: (read) => ({ kind: "report", path: read.nameOrNull("path"), span: read.span }),
  print: (it) => [it.path === null ? "report" : `report to ${quoted(it.path.text)}`],
});
