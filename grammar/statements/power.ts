import type { Aim, PowerStatement } from "../ast.ts";
import { planningClauses, planningOf } from "../clause-parts.ts";
import { nameText, numbersText } from "../print.ts";
import { defineStatement } from "../statement.ts";
import { clauses, list, number, rule, sequence, words } from "../syntax.ts";
import { planningText } from "./planning-text.ts";

export const power = defineStatement<PowerStatement>({
  verb: "power",
  group: "plan",
  help: "The power at given numbers of subjects, under the declared correction.",
  details: ["Subjects are counted in total; the answer also gives them for each group."],
  example: "power of primary with 20, 40, 60 subjects",
  syntax: sequence(
    words("of"),
    rule("aim", "aim"),
    words("with"),
    list("subjects", number("count", "a number of subjects")),
    words("subjects"),
    clauses(...planningClauses()),
  ),
  build: (read) => ({
    kind: "power",
    aim: read.built<Aim>("aim"),
    subjects: read.groups("subjects").map((each) => each.whole("count", "The number of subjects", 2)),
    ...planningOf(read),
    span: read.span,
  }),
  print: (it) => [
    `power of ${it.aim.family === null ? "omnibus" : nameText(it.aim.family)} with ${numbersText(it.subjects)} subjects`,
    ...planningText(it),
  ],
});
