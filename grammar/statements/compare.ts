import type { CompareStatement } from "../ast.ts";
import { besideClause } from "../clause-parts.ts";
import { nameText } from "../print.ts";
import { defineStatement } from "../statement.ts";
import { name, optional, sequence } from "../syntax.ts";

export const compare = defineStatement<CompareStatement>({
  verb: "compare",
  group: "analyse",
  help: "Tests one declared family, always whole, and holds its error as declared.",
  details: ["Each row has its estimate, interval, own and adjusted p, threshold and effect size."],
  example: "compare primary",
  syntax: sequence(name("family", "a family", "families"), optional(besideClause())),
  build: (read) => ({ kind: "compare", family: read.name("family"), beside: read.has("beside"), span: read.span }),
  print: (it) => [`compare ${nameText(it.family)}${it.beside ? " beside other methods" : ""}`],
});
