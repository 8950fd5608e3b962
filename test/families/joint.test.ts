import { readFileSync } from "node:fs";
import { describe, expect, it } from "vitest";
import {
  type CorrectionName,
  comparisonP,
  familyDecider,
  type FamilyProblem,
  holdFamily,
} from "../../src/families/index.ts";
import {
  allPairs,
  closedAdjustedP,
  contrastCovariance,
  correlationOf,
  problemOf,
  subsets,
  testRandom,
} from "./problems.ts";

interface Row {
  readonly method: string;
  readonly parameters: Record<string, unknown>;
  readonly value: string;
}
const table = (name: string): readonly Row[] =>
  JSON.parse(readFileSync(new URL(`../reference/tables/${name}.json`, import.meta.url), "utf8"));
const dfOf = (row: Row) => (row.parameters.df === "inf" ? Number.POSITIVE_INFINITY : Number(row.parameters.df));
const sidesOf = (row: Row) => (row.parameters.sides === "one-sided" ? "upper" : "two-sided") as "upper" | "two-sided";
const spread = <T>(count: number, value: T) => new Array<T>(count).fill(value);

/** A family with one error term, every standard error 1, the first statistic given and the others on zero. */
function joint(
  correlation: readonly (readonly number[])[],
  df: number,
  sides: "upper" | "two-sided",
  first: number,
  more: Partial<FamilyProblem> = {},
) {
  const count = correlation.length;
  return problemOf({
    estimates: [first, ...spread(count - 1, 0)],
    df: spread(count, df),
    commonDf: df,
    correlation,
    sides,
    ...more,
  });
}
const equicorrelated = (count: number, value: number) =>
  Array.from({ length: count }, (_, i) => Array.from({ length: count }, (__, j) => (i === j ? 1 : value)));
const againstOne = { kind: "against one", means: null, repeated: false, within: false } as const;
const pairsShape = (means: number) => ({ kind: "all pairs", means, repeated: false, within: false }) as const;
/** Product form of comparisons with one control. */
const withControl = (control: number, sizes: readonly number[]) =>
  sizes.map((a, i) => sizes.map((b, j) => (i === j ? 1 : Math.sqrt((a * b) / ((control + a) * (control + b))))));

const criticalOf = (answer: { readonly lower: readonly (number | null)[] }, first: number) => first - answer.lower[0]!;

describe("dunnett against the tables (computed for this project, 18 digits)", () => {
  const some = (rows: readonly Row[], step: number) => rows.filter((_, i) => i % step === 0);
  it.each(some(table("dunnett-quantiles"), 9))("critical value, $parameters", (row) => {
    const { comparisons, alpha } = row.parameters as { comparisons: number; alpha: string };
    const problem = joint(equicorrelated(comparisons, 0.5), dfOf(row), sidesOf(row), 1, {
      shape: againstOne,
      error: Number(alpha),
    });
    const answer = holdFamily("dunnett", problem);
    expect(answer.intervals).toBe("simultaneous");
    expect(Math.abs(criticalOf(answer, 1) / Number(row.value) - 1)).toBeLessThan(1e-9);
  });
  it.each(some(table("dunnett-unequal-sizes"), 2))("$method, $parameters", (row) => {
    const { n_control, n_treatments, c, alpha } = row.parameters as {
      n_control: number;
      n_treatments: number[];
      c?: string;
      alpha?: string;
    };
    const problem = joint(withControl(n_control, n_treatments), dfOf(row), sidesOf(row), Number(c ?? 1), {
      shape: againstOne,
      error: Number(alpha ?? 0.05),
    });
    const answer = holdFamily("dunnett", problem);
    const found = c === undefined ? criticalOf(answer, 1) : answer.adjustedP[0]!;
    expect(Math.abs(found / Number(row.value) - 1)).toBeLessThan(1e-9);
    expect(holdFamily("single-step", problem).adjustedP[0]).toBe(answer.adjustedP[0]);
  });
});

describe("tukey against the studentized range table (computed for this project, 18 digits)", () => {
  const rows = table("studentized-range-quantiles").filter((row) => (row.parameters.means as number) <= 12);
  it.each(rows.filter((_, i) => i % 5 === 0))("critical value, $parameters", (row) => {
    const means = row.parameters.means as number;
    const count = (means * (means - 1)) / 2;
    const first = Number(row.value) / Math.SQRT2;
    const problem = joint(equicorrelated(count, 0.5), dfOf(row), "two-sided", first, {
      shape: pairsShape(means),
      error: Number(row.parameters.alpha),
    });
    const answer = holdFamily("tukey", problem);
    expect(Math.abs(criticalOf(answer, first) / first - 1)).toBeLessThan(1e-9);
    expect(Math.abs(answer.adjustedP[0]! / Number(row.parameters.alpha) - 1)).toBeLessThan(1e-8);
  });
});

describe("single-step against deterministic integration over contrast sets (table, computed for this project)", () => {
  // The joint tail is promised to 1e-6; sets of rank 2 and 3 come out far closer.
  it.each(table("contrast-sets").filter((_, i) => i % 4 === 0))(
    "$parameters.set, $parameters.sizes, $parameters.sides, df $parameters.df, c $parameters.c",
    (row) => {
      const { sizes, contrasts, c } = row.parameters as { sizes: number[]; contrasts: number[][]; c: string };
      const correlation = correlationOf(
        contrastCovariance(
          contrasts,
          sizes.map((n) => 1 / n),
        ),
      );
      const { adjustedP, monteCarloError } = holdFamily(
        "single-step",
        joint(correlation, dfOf(row), sidesOf(row), Number(c)),
      );
      expect(Math.abs(adjustedP[0]! - Number(row.value))).toBeLessThan(2e-6);
      expect(monteCarloError!).toBeLessThan(2e-6);
    },
  );
});

/** Random families of contrasts over independent means with one error term. */
function randomFamily(random: () => number, most: number) {
  const means = 3 + Math.floor(random() * 2);
  const rows = allPairs(means);
  const count = Math.min(rows.length, 2 + Math.floor(random() * (most - 1)));
  const weights = rows.sort(() => random() - 0.5).slice(0, count);
  const sizes = Array.from({ length: means }, () => 4 + Math.floor(random() * 12));
  const covariance = contrastCovariance(
    weights,
    sizes.map((n) => 1 / n),
  );
  const df = sizes.reduce((a, b) => a + b, 0) - means;
  const standardErrors = covariance.map((row, i) => Math.sqrt(row[i]!));
  return {
    weights,
    standardErrors,
    df: spread(count, df),
    commonDf: df,
    correlation: correlationOf(covariance),
    estimates: standardErrors.map((se) => se * 3.5 * (random() + random() - 0.8)),
  };
}

describe("step-down joint t (Westfall 1997, free steps)", () => {
  it("is the closure of the largest statistic's joint test (random families)", () => {
    const random = testRandom(71);
    for (let k = 0; k < 15; k++) {
      const fields = randomFamily(random, 3);
      const sides = (["two-sided", "upper", "lower"] as const)[k % 3]!;
      const problem = problemOf({ ...fields, sides });
      const { adjustedP } = holdFamily("step-down", problem);
      const local = (rows: readonly number[]) => {
        const cut = <T>(values: readonly T[]) => rows.map((i) => values[i]!);
        const part = problemOf({
          estimates: cut(fields.estimates),
          standardErrors: cut(fields.standardErrors),
          df: cut(fields.df),
          commonDf: fields.commonDf,
          correlation: cut(fields.correlation).map(cut),
          sides,
        });
        return Math.min(...holdFamily("single-step", part).adjustedP);
      };
      const wanted = closedAdjustedP(problem.p, local, subsets(problem.p.length));
      for (const [i, value] of wanted.entries())
        expect(Math.abs(adjustedP[i]! - value), `case ${k}, row ${i}`).toBeLessThan(3e-6);
    }
  });

  it("rejects what single-step, holm and dunnett reject, and lies above the own p", () => {
    const random = testRandom(72);
    for (let k = 0; k < 25; k++) {
      const problem = problemOf(randomFamily(random, 6));
      const down = holdFamily("step-down", problem);
      const one = holdFamily("single-step", problem);
      const holm = holdFamily("holm", problem);
      for (const i of problem.p.keys()) {
        expect(down.adjustedP[i]!).toBeLessThanOrEqual(one.adjustedP[i]! + 3e-6);
        expect(down.adjustedP[i]!).toBeLessThanOrEqual(holm.adjustedP[i]! + 3e-6);
        expect(down.adjustedP[i]!).toBeGreaterThanOrEqual(problem.p[i]!);
      }
    }
  });

  it("with uncorrelated comparisons and infinite df is Sidak's test in steps (table p-value-adjustment)", () => {
    for (const row of table("p-value-adjustment").filter(({ method }) => method.startsWith("Sidak step down"))) {
      const p = (row.parameters.p as string[]).map(Number).slice(0);
      if (p.length > 6) continue;
      // Statistics whose two-sided normal p are those of the table.
      const problem = joint(equicorrelated(p.length, 0), Number.POSITIVE_INFINITY, "two-sided", 1, {});
      const estimates = p.map((value) => zOf(value));
      const { adjustedP } = holdFamily("step-down", { ...problem, estimates, p });
      for (const [i, value] of (row.value as unknown as string[]).entries())
        expect(Math.abs(adjustedP[i]! - Number(value))).toBeLessThan(2e-6);
    }
  });
});

/** Two-sided normal quantile by bisection on the own p. */
function zOf(p: number): number {
  let [low, high] = [0, 40];
  for (let k = 0; k < 200; k++) {
    const middle = (low + high) / 2;
    if (
      comparisonP({
        estimate: middle,
        standardError: 1,
        df: Number.POSITIVE_INFINITY,
        sides: "two-sided",
        margin: null,
      }) > p
    )
      low = middle;
    else high = middle;
  }
  return low;
}

describe("thresholds of joint methods", () => {
  /** Moves one row's estimate until the decision turns; the own p there is the threshold by its definition. */
  function byDefinition(name: CorrectionName, problem: FamilyProblem, row: number): number {
    const at = (statistic: number) => {
      const estimates = problem.estimates.map((value, i) =>
        i === row ? statistic * problem.standardErrors[i]! : value,
      );
      const p = problemOf({ ...problem, estimates, p: undefined as never }).p;
      const own = comparisonP({
        estimate: statistic,
        standardError: 1,
        df: problem.df[row]!,
        sides: problem.sides,
        margin: null,
      });
      return { rejected: holdFamily(name, { ...problem, estimates, p: p ?? problem.p }).rejected[row]!, own };
    };
    let [low, high] = [0.5, 8];
    for (let k = 0; k < 16; k++) {
      const middle = (low + high) / 2;
      if (at(middle).rejected) high = middle;
      else low = middle;
    }
    return at(high).own;
  }
  it("are the largest p of its own with which the row would have been rejected", () => {
    const random = testRandom(73);
    for (let k = 0; k < 2; k++) {
      for (const name of ["single-step", "step-down"] as const) {
        const fields = randomFamily(random, 3);
        const problem = problemOf({ ...fields, sides: k % 2 === 0 ? "two-sided" : "upper" });
        const { threshold, adjustedP, rejected } = holdFamily(name, problem);
        for (const row of problem.p.keys()) {
          expect(
            Math.abs(threshold[row]! / byDefinition(name, problem, row) - 1),
            `${name}, case ${k}, row ${row}`,
          ).toBeLessThan(1e-3);
          expect(problem.p[row]! <= threshold[row]!).toBe(rejected[row]);
          expect(adjustedP[row]! <= problem.error).toBe(rejected[row]);
        }
      }
    }
  });
});

describe("comparisons with error terms of their own", () => {
  it("uncorrelated, single-step is Sidak on the own p, whatever the df", () => {
    const problem = problemOf({ estimates: [2.5, 2, 3], df: [4, 9.5, 30], correlation: equicorrelated(3, 0) });
    const found = holdFamily("single-step", problem);
    const wanted = holdFamily("sidak", problem);
    for (const i of [0, 1, 2]) {
      expect(Math.abs(found.adjustedP[i]! - wanted.adjustedP[i]!)).toBeLessThan(2e-6);
      expect(Math.abs(found.threshold[i]! / wanted.threshold[i]! - 1)).toBeLessThan(1e-4);
      expect(found.lower[i]!).toBeCloseTo(wanted.lower[i]!, 3);
    }
    expect(found.notes.map(({ code }) => code)).toContain("joint-normal-scores");
  });
  it("games-howell with one df is the range at it", () => {
    const shape = pairsShape(3);
    const estimates = [3, 1, -2];
    const own = holdFamily("games-howell", problemOf({ estimates, shape }));
    const pooled = holdFamily("tukey", problemOf({ estimates, shape, commonDf: 20 }));
    expect(own.adjustedP).toEqual(pooled.adjustedP);
    expect(own.lower).toEqual(pooled.lower);
  });
});

describe("margins in joint methods", () => {
  const margin = { type: "equivalence", value: 3, better: null } as const;
  it("of one comparison is the two one-sided tests", () => {
    const problem = problemOf({ estimates: [0.8], correlation: [[1]], commonDf: 20, margin });
    expect(holdFamily("single-step", problem).adjustedP[0]!).toBeCloseTo(problem.p[0]!, 12);
  });
  it("takes the worst ends: opposite ends of two comparisons with correlation r behave as -r", () => {
    const at = (r: number) =>
      holdFamily(
        "single-step",
        problemOf({ estimates: [0.5, 0], commonDf: 20, correlation: equicorrelated(2, r), margin }),
      ).adjustedP[0]!;
    const directed = (r: number) =>
      holdFamily(
        "single-step",
        problemOf({ estimates: [2.5, 0], commonDf: 20, correlation: equicorrelated(2, r), sides: "upper" }),
      ).adjustedP[0]!;
    expect(at(0.6)).toBeCloseTo(directed(-0.6), 6);
    expect(at(-0.6)).toBeCloseTo(directed(-0.6), 6);
  });
  it("limits agree with decisions, and step-down rejects what single-step rejects", () => {
    const random = testRandom(74);
    for (let k = 0; k < 20; k++) {
      const fields = randomFamily(random, 3);
      const problem = problemOf({ ...fields, standardErrors: fields.standardErrors.map((se) => 2 * se), margin });
      const one = holdFamily("single-step", problem);
      const down = holdFamily("step-down", problem);
      for (const answer of [one, down])
        for (const [i, rejected] of answer.rejected.entries()) {
          expect(answer.intervals).toBe("simultaneous");
          expect(answer.lower[i]! >= -3 && answer.upper[i]! <= 3).toBe(rejected);
        }
      for (const i of problem.p.keys()) expect(down.adjustedP[i]!).toBeLessThanOrEqual(one.adjustedP[i]! + 3e-6);
    }
  });
});

describe("familyDecider", () => {
  it("decides as holdFamily does, for every method", () => {
    const random = testRandom(75);
    const names: readonly CorrectionName[] = [
      "none",
      "bonferroni",
      "sidak",
      "holm",
      "hochberg",
      "hommel",
      "shaffer",
      "tukey",
      "scheffe",
      "single-step",
      "step-down",
      "fixed sequence",
      "fallback",
      "bh",
      "by",
    ];
    const weights = allPairs(3);
    const covariance = contrastCovariance(weights, [1 / 5, 1 / 8, 1 / 12]);
    const base = {
      weights,
      standardErrors: covariance.map((row, i) => Math.sqrt(row[i]!)),
      df: spread(3, 22),
      commonDf: 22,
      correlation: correlationOf(covariance),
      shape: pairsShape(3),
    };
    for (const name of names) {
      const decide = familyDecider(name, problemOf({ ...base, estimates: [0, 0, 0] }));
      for (let k = 0; k < (name === "single-step" || name === "step-down" ? 40 : 200); k++) {
        const problem = problemOf({
          ...base,
          estimates: base.standardErrors.map((se) => se * 4 * (random() + random() - 0.8)),
        });
        expect(decide({ p: problem.p }), `${name}, case ${k}, p ${problem.p}`).toEqual(
          holdFamily(name, problem).rejected,
        );
      }
    }
  });
  it("follows correlations and df that change with the study", () => {
    const random = testRandom(76);
    for (const name of ["games-howell", "single-step", "step-down"] as const) {
      const template = problemOf({ estimates: [0, 0, 0], correlation: equicorrelated(3, 0.5), shape: pairsShape(3) });
      const decide = familyDecider(name, template);
      for (let k = 0; k < 15; k++) {
        const df = [0, 1, 2].map(() => 5 + 20 * random());
        const correlation = correlationOf(contrastCovariance(allPairs(3), [random(), random(), random()]));
        const problem = problemOf({
          estimates: [0, 1, 2].map(() => 5 * (random() - 0.3)),
          df,
          correlation,
          shape: pairsShape(3),
        });
        expect(decide({ p: problem.p, df, correlation }), `${name}, case ${k}`).toEqual(
          holdFamily(name, problem).rejected,
        );
      }
    }
  });
});
