import type { ExportedResult, ExportStatement } from "../ast.ts";
import { nameText, quoted } from "../print.ts";
import { problem } from "../problems.ts";
import { BuildProblem } from "../reader.ts";
import { defineStatement } from "../statement.ts";
import { choice, either, name, optional, part, sequence, text, words } from "../syntax.ts";

const results: readonly ExportedResult[] = [
  "omnibus",
  "description",
  "check",
  "data",
  "picture",
  "power",
  "size",
  "detectable",
  "calibration",
  "ledger",
  "plan",
];

export const exportStatement = defineStatement<ExportStatement>({
  verb: "export",
  group: "record",
  help: "Writes the latest result of a kind to a file.",
  details: ["Tables: .csv, .json, .parquet. Pictures: .svg, .png, .json."],
  example: 'export comparisons primary to "primary.csv"',
  syntax: sequence(
    choice(
      "a kind of result",
      part(
        "The comparisons of a family, or the latest ones.",
        words("comparisons", "what"),
        optional(name("name", "a family", "families")),
      ),
      part("The latest result of that kind.", either(...results.map((each) => words(each, "what")))),
    ),
    words("to"),
    text("path", "a file in quotes", "files"),
  ),
  build: (read) => {
    const path = read.name("path");
    if (path.text.trim() === "") throw new BuildProblem(problem("name-empty", path.span, { what: "The file" }));
    return {
      kind: "export",
      what: read.word<ExportedResult>("what")!,
      name: read.nameOrNull("name"),
      path,
      span: read.span,
    };
  },
  print: (it) => [`export ${it.what}${it.name === null ? "" : ` ${nameText(it.name)}`} to ${quoted(it.path.text)}`],
});
