import type { Aim, Goal, SizeStatement } from "../ast.ts";
import { planningClauses, planningOf } from "../clause-parts.ts";
import { nameText, numberText } from "../print.ts";
import { defineStatement } from "../statement.ts";
import { clauses, number, optional, part, rule, sequence, words } from "../syntax.ts";
import { planningText } from "./planning-text.ts";

export const size = defineStatement<SizeStatement>({
  verb: "size",
  group: "plan",
  help: "How many subjects the study needs, under the declared correction.",
  details: [
    "On every comparison: the power to find them all. On any: at least one. On each: every one taken by itself.",
    "Subjects are counted in total; the answer also gives them for each group.",
  ],
  example: "size primary for 90% power on every comparison",
  syntax: sequence(
    rule("aim", "aim"),
    words("for"),
    number("power", "a power"),
    words("power"),
    optional(part("Which comparisons the power is about.", rule("goal", "goal"))),
    clauses(...planningClauses()),
  ),
  build: (read) => ({
    kind: "size",
    aim: read.built<Aim>("aim"),
    power: read.share("power", "The power"),
    goal: read.builtOrNull<Goal>("goal") ?? "every",
    ...planningOf(read),
    span: read.span,
  }),
  print: (it) => [
    `size ${it.aim.family === null ? "omnibus" : nameText(it.aim.family)} for ${numberText(it.power)} power${it.goal === "every" ? "" : ` on ${it.goal} comparison`}`,
    ...planningText(it),
  ],
});
