import type { ItemsStatement } from "../ast.ts";
import { defineStatement } from "../statement.ts";
import { unitPartsOf, unitPrint, unitSyntax } from "./unit-parts.ts";

export const items = defineStatement<ItemsStatement>({
  verb: "items",
  group: "declare",
  help: "Names the column of a second sampling unit that crosses the subjects, such as passages or stimuli.",
  details: ["With items, effects are meant to hold for other items of the kind too, not only for these."],
  example: "items passage",
  syntax: unitSyntax(),
  build: (read) => ({ kind: "items", ...unitPartsOf(read), span: read.span }),
  print: unitPrint,
});
