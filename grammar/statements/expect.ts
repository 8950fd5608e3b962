import type { ExpectedLevels, ExpectStatement } from "../ast.ts";
import { allocationClause, allocationOf, costClause, costOf } from "../clause-parts.ts";
import { allocationText, clauseText, nameText, numbersText, numberText } from "../print.ts";
import { problem } from "../problems.ts";
import { BuildProblem, type Read } from "../reader.ts";
import { defineStatement } from "../statement.ts";
import {
  clauses,
  either,
  group,
  level,
  list,
  name,
  number,
  part,
  repeat,
  repeatAtLeastOnce,
  sequence,
  type Syntax,
  words,
} from "../syntax.ts";

const byLevel = (label: string, what: string): Syntax =>
  group(
    label,
    name("factor", "a factor", "factors"),
    repeat(words("by"), name("factor", "a factor", "factors")),
    list("values", sequence(repeatAtLeastOnce(level("level")), number("value", what))),
  );

function levelsOf(read: Read): ExpectedLevels {
  const factors = read.names("factor");
  const values = read
    .groups("values")
    .map((each) => ({ levels: each.names("level"), value: each.number("value"), span: each.span }));
  for (const { levels, span } of values) {
    if (levels.length === factors.length) continue;
    // A number where the value should stand, with more behind it: the next pair was not separated.
    const early = levels[factors.length];
    const next = levels[factors.length + 1];
    if (early !== undefined && next !== undefined && !early.quoted && /^[\d.]/.test(early.text)) {
      throw new BuildProblem(
        problem("missing-comma", next.span, { before: `the number ${early.text}`, found: `"${next.text}"` }),
      );
    }
    throw new BuildProblem(
      problem("levels-per-value", span, { levels: levels.length, factors: factors.map((each) => each.text) }),
    );
  }
  return { factors, values: values.map(({ levels, value }) => ({ levels, value })) };
}

const levelsText = (it: ExpectedLevels): string =>
  `${it.factors.map(nameText).join(" by ")} ${it.values.map((each) => `${each.levels.map(nameText).join(" ")} ${numberText(each.value)}`).join(", ")}`;

function aboveZero(read: Read, label: string, what: string) {
  const value = read.numberOrNull(label);
  if (value === null || value.value > 0) return value;
  throw new BuildProblem(
    problem("number-range", value.span, { what, value: value.text, allowed: "more than 0", percent: null }),
  );
}

export const expect = defineStatement<ExpectStatement>({
  verb: "expect",
  group: "plan",
  help: "Says what the study is expected to find, for size, power, rehearse and calibrate.",
  details: [
    "Means by level: glove bare 41, knit 46. By cells of two factors: glove by shift bare day 41, bare night 43.",
    "Several lines of means add up: what one leaves open is taken as equal.",
    "A full pattern of correlations is the lower triangle, row by row: 2 with 1, 3 with 1, 3 with 2 ...",
  ],
  example: `expect seconds
  glove bare 41, nitrile 43, knit 46, leather 52
  spread 9, correlation 0.6`,
  continues: true,
  syntax: sequence(
    name("response", "the response", "response"),
    clauses(
      part(
        "The standard deviation of the cells, one for all or by level.",
        words("spread", "spread"),
        either(number("spread_", "a standard deviation"), byLevel("spreadBy", "a standard deviation")),
      ),
      part(
        "The correlation between two values of one subject, one for all or the lower triangle.",
        words("correlation", "correlation"),
        list("correlations", number("value", "a correlation")),
      ),
      part("The share of subjects that drop out.", words("dropout"), number("dropout", "a share of the subjects")),
      part(
        "The share of cells that stay empty by chance.",
        words("missing"),
        number("missing", "a share of the cells"),
      ),
      part(
        "The shape of the values around their means.",
        words("shape"),
        either(words("normal", "shape"), words("skewed", "shape"), words("heavy tails", "shape")),
      ),
      allocationClause(),
      costClause(),
      part("The expected mean of each level, or of each cell of several factors.", byLevel("means", "a mean")),
    ),
  ),
  build: (read) => {
    const spread = aboveZero(read, "spread_", "The spread");
    const spreadBy = read.group("spreadBy");
    const byLevelSpread = spreadBy === null ? null : levelsOf(spreadBy);
    for (const { value } of byLevelSpread?.values ?? []) {
      if (value.value > 0) continue;
      throw new BuildProblem(
        problem("number-range", value.span, {
          what: "The spread",
          value: value.text,
          allowed: "more than 0",
          percent: null,
        }),
      );
    }
    const correlation =
      read.word("correlation") === null ? null : read.groups("correlations").map((each) => each.number("value"));
    for (const value of correlation ?? []) {
      if (value.value >= -1 && value.value < 1) continue;
      throw new BuildProblem(
        problem("number-range", value.span, {
          what: "The correlation",
          value: value.text,
          allowed: "from -1 to less than 1",
          percent: null,
        }),
      );
    }
    return {
      kind: "expect",
      response: read.name("response"),
      means: read.groups("means").map(levelsOf),
      spread: read.word("spread") === null ? null : { common: spread, byLevel: byLevelSpread },
      correlation,
      dropout: read.shareOrNull("dropout", "The dropout", "zero"),
      missing: read.shareOrNull("missing", "The missing share", "zero"),
      shape: read.word<"normal" | "skewed" | "heavy tails">("shape"),
      allocation: allocationOf(read),
      cost: costOf(read),
      span: read.span,
    };
  },
  print: (it) => [
    `expect ${nameText(it.response)}`,
    ...it.means.map(levelsText),
    ...(it.spread === null
      ? []
      : [`spread ${it.spread.byLevel !== null ? levelsText(it.spread.byLevel) : numberText(it.spread.common!)}`]),
    ...(it.correlation === null ? [] : [`correlation ${numbersText(it.correlation)}`]),
    ...clauseText("dropout", it.dropout),
    ...clauseText("missing", it.missing),
    ...(it.shape === null ? [] : [`shape ${it.shape}`]),
    ...allocationText(it.allocation),
    ...clauseText("cost", it.cost, " per subject"),
  ],
});
