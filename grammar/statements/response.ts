import type { ResponseStatement } from "../ast.ts";
import { nameText, onOneLine, quoted } from "../print.ts";
import { defineStatement } from "../statement.ts";
import { clauses, either, name, optional, part, sequence, text, words } from "../syntax.ts";

export const response = defineStatement<ResponseStatement>({
  verb: "response",
  group: "declare",
  help: "Declares the measured quantity whose means are compared.",
  details: [
    "The label and the unit are printed on tables and axes.",
    "On log scale differences are analysed as ratios, and given back as ratios.",
  ],
  example: 'response seconds "assembly time" in "s", lower is better',
  syntax: sequence(
    name("name", "a column", "columns"),
    optional(text("label", "a label in quotes")),
    optional(words("in"), text("unit", "a unit in quotes")),
    clauses(
      part(
        "Which direction is better; claims of not being worse need it.",
        either(words("lower", "better"), words("higher", "better")),
        words("is better"),
      ),
      part("Analyses the logarithm; results are given back as ratios.", words("on log scale", "log")),
    ),
  ),
  build: (read) => ({
    kind: "response",
    name: read.name("name"),
    label: read.nameOrNull("label"),
    unit: read.nameOrNull("unit"),
    better: read.word<"lower" | "higher">("better"),
    scale: read.word("log") === null ? "linear" : "log",
    span: read.span,
  }),
  print: (it) =>
    onOneLine(
      [
        `response ${nameText(it.name)}`,
        ...(it.label === null ? [] : [quoted(it.label.text)]),
        ...(it.unit === null ? [] : [`in ${quoted(it.unit.text)}`]),
      ].join(" "),
      it.better === null ? [] : [`${it.better} is better`],
      it.scale === "log" ? ["on log scale"] : [],
    ),
});
