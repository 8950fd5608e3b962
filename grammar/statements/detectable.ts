import type { Aim, DetectableStatement, Goal } from "../ast.ts";
import { planningClauses, planningOf } from "../clause-parts.ts";
import { nameText, numbersText, numberText } from "../print.ts";
import { defineStatement } from "../statement.ts";
import { clauses, list, number, optional, part, rule, sequence, words } from "../syntax.ts";
import { planningText } from "./planning-text.ts";

export const detectable = defineStatement<DetectableStatement>({
  verb: "detectable",
  group: "plan",
  help: "The smallest effect that a given number of subjects can show with the power asked for.",
  details: ["The expected pattern of means is kept, and made larger or smaller as a whole."],
  example: "detectable primary with 24 subjects for 80% power",
  syntax: sequence(
    optional(words("of")),
    rule("aim", "aim"),
    words("with"),
    list("subjects", number("count", "a number of subjects")),
    words("subjects for"),
    number("power", "a power"),
    words("power"),
    optional(part("Which comparisons the power is about.", rule("goal", "goal"))),
    clauses(...planningClauses()),
  ),
  build: (read) => ({
    kind: "detectable",
    aim: read.built<Aim>("aim"),
    subjects: read.groups("subjects").map((each) => each.whole("count", "The number of subjects", 2)),
    power: read.share("power", "The power"),
    goal: read.builtOrNull<Goal>("goal") ?? "every",
    ...planningOf(read),
    span: read.span,
  }),
  print: (it) => [
    `detectable ${it.aim.family === null ? "omnibus" : nameText(it.aim.family)} with ${numbersText(it.subjects)} subjects for ${numberText(it.power)} power${it.goal === "every" ? "" : ` on ${it.goal} comparison`}`,
    ...planningText(it),
  ],
});
