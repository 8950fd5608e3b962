import type { SubjectsStatement } from "../ast.ts";
import { defineStatement } from "../statement.ts";
import { unitPartsOf, unitPrint, unitSyntax } from "./unit-parts.ts";

export const subjects = defineStatement<SubjectsStatement>({
  verb: "subjects",
  group: "declare",
  help: "Names the column of the sampling unit: the participants, animals or plots that were drawn.",
  details: [
    "Each subject is one independent unit, however many rows it has.",
    "Nested in: litters, fields or teams that hold several subjects; innermost first.",
  ],
  example: "subjects animal nested in herd\n  slopes age",
  syntax: unitSyntax(),
  build: (read) => ({ kind: "subjects", ...unitPartsOf(read), span: read.span }),
  print: unitPrint,
});
