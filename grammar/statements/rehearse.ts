import type { RehearseStatement } from "../ast.ts";
import { seedClause, seedOf } from "../clause-parts.ts";
import { clauseText, numberText, onOneLine } from "../print.ts";
import { defineStatement } from "../statement.ts";
import { clauses, number, sequence, words } from "../syntax.ts";

export const rehearse = defineStatement<RehearseStatement>({
  verb: "rehearse",
  group: "plan",
  help: "Simulates data from expect and loads them as if read, marked as a rehearsal everywhere.",
  details: ["The whole analysis can be tried before the study; read drops the rehearsal."],
  example: "rehearse with 24 subjects, seed 7",
  syntax: sequence(words("with"), number("subjects", "a number of subjects"), words("subjects"), clauses(seedClause())),
  build: (read) => ({
    kind: "rehearse",
    subjects: read.whole("subjects", "The number of subjects", 2),
    seed: seedOf(read),
    span: read.span,
  }),
  print: (it) => onOneLine(`rehearse with ${numberText(it.subjects)} subjects`, clauseText("seed", it.seed)),
});
