import type { BlocksStatement } from "../ast.ts";
import { defineStatement } from "../statement.ts";
import { unitPartsOf, unitPrint, unitSyntax } from "./unit-parts.ts";

export const blocks = defineStatement<BlocksStatement>({
  verb: "blocks",
  group: "declare",
  help: "Names the column of a blocking unit, such as a day, a batch or a field.",
  details: ["Differences between blocks are taken out of the error."],
  example: "blocks batch",
  syntax: unitSyntax(),
  build: (read) => ({ kind: "blocks", ...unitPartsOf(read), span: read.span }),
  print: unitPrint,
});
