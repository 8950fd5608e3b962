import type { Aim, CalibrateStatement } from "../ast.ts";
import { seedClause, seedOf } from "../clause-parts.ts";
import { clauseText, nameText, numberText } from "../print.ts";
import { problem } from "../problems.ts";
import { BuildProblem } from "../reader.ts";
import { defineStatement } from "../statement.ts";
import { clauses, either, number, optional, part, rule, sequence, words } from "../syntax.ts";

export const calibrate = defineStatement<CalibrateStatement>({
  verb: "calibrate",
  group: "plan",
  help: "The family error, power and coverage that the declared procedure really has, by simulated studies.",
  details: [
    "With this design's sizes, spreads, shape and missing cells, under no difference and under expect.",
    "Shards of one calibration may run on several machines and are merged exactly.",
  ],
  example: "calibrate primary with 20000 studies",
  syntax: sequence(
    rule("aim", "aim"),
    optional(words("with"), number("studies", "a number of studies"), words("studies")),
    clauses(
      seedClause(),
      part(
        "The number of subjects of each simulated study.",
        words("subjects"),
        number("subjects", "a number of subjects"),
      ),
      part(
        "Whose sizes and spreads the studies have: the data's or the plan's.",
        words("from"),
        either(words("data", "basis"), words("plan", "basis")),
      ),
      part(
        "One part of the studies, so that others can run elsewhere.",
        words("shard"),
        number("shard", "a number"),
        words("of"),
        number("shards", "a number of shards"),
      ),
    ),
  ),
  build: (read) => {
    const index = read.wholeOrNull("shard", "The shard");
    const of = read.wholeOrNull("shards", "The number of shards");
    if (index !== null && of !== null && index.value > of.value) {
      throw new BuildProblem(
        problem("number-range", index.span, {
          what: "The shard",
          value: index.text,
          allowed: `from 1 to ${of.text}`,
          percent: null,
        }),
      );
    }
    return {
      kind: "calibrate",
      aim: read.built<Aim>("aim"),
      studies: read.wholeOrNull("studies", "The number of studies"),
      seed: seedOf(read),
      subjects: read.wholeOrNull("subjects", "The number of subjects", 2),
      basis: read.word<"data" | "plan">("basis"),
      shard: index === null || of === null ? null : { index, of },
      span: read.span,
    };
  },
  print: (it) => [
    `calibrate ${it.aim.family === null ? "omnibus" : nameText(it.aim.family)}${it.studies === null ? "" : ` with ${numberText(it.studies)} studies`}`,
    ...clauseText("seed", it.seed),
    ...clauseText("subjects", it.subjects),
    ...(it.basis === null ? [] : [`from ${it.basis}`]),
    ...(it.shard === null ? [] : [`shard ${numberText(it.shard.index)} of ${numberText(it.shard.of)}`]),
  ],
});
