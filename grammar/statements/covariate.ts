import type { CovariateStatement } from "../ast.ts";
import { nameText, onOneLine } from "../print.ts";
import { defineStatement } from "../statement.ts";
import { clauses, either, name, optional, part, sequence, words } from "../syntax.ts";

export const covariate = defineStatement<CovariateStatement>({
  verb: "covariate",
  group: "declare",
  help: "Declares a numeric column that the means are adjusted for.",
  details: ["It is centred at its mean unless told otherwise."],
  example: "covariate experience between operators",
  syntax: sequence(
    name("name", "a column", "columns"),
    optional(either(words("within", "varies"), words("between", "varies")), optional(name("unit", "a unit", "units"))),
    clauses(part("The values are taken as they are, not centred at their mean.", words("not centred", "raw"))),
  ),
  build: (read) => ({
    kind: "covariate",
    name: read.name("name"),
    varies: read.word<"within" | "between">("varies"),
    unit: read.nameOrNull("unit"),
    centred: read.word("raw") === null,
    span: read.span,
  }),
  print: (it) =>
    onOneLine(
      [
        `covariate ${nameText(it.name)}`,
        ...(it.varies === null ? [] : [it.varies]),
        ...(it.unit === null ? [] : [nameText(it.unit)]),
      ].join(" "),
      it.centred ? [] : ["not centred"],
    ),
});
