import { readFileSync } from "node:fs";
import { describe, expect, it } from "vitest";
import { tTwoSidedTail } from "../../../src/numeric/index.ts";
import { ModelError } from "../../../src/models/model-error.ts";
import { repeatedMeasuresAnalysis, withinContrasts, withinIntervals } from "../../../src/models/within/index.ts";
import { modelData } from "./model-data.ts";

// Computed by test/models/within/fixtures/generate.py: scipy.stats t tests on the subjects' scores.
const { comparisons } = JSON.parse(
  readFileSync(new URL("./fixtures/repeated-measures.json", import.meta.url), "utf8"),
) as {
  comparisons: {
    response: number[];
    subject: number[];
    a: number[];
    g: number[];
    tests: { name: string; weights: number[]; error: "equal" | "unequal"; t: number; p: number; df: number }[];
    paired: { t: number; p: number; df: number };
    morey: { mean: number[]; half: number[] };
  };
};

const mixed = (variances: "equal" | "unequal", covariance: "sphericity" | null = null) =>
  modelData({
    response: comparisons.response,
    center: 50,
    factors: [
      { name: "g", codes: comparisons.g, within: false },
      { name: "a", codes: comparisons.a, within: true },
    ],
    units: { person: comparisons.subject },
    variances,
    covariance,
  });
const within = (covariance: "sphericity" | null = null) =>
  modelData({
    response: comparisons.response,
    factors: [{ name: "a", codes: comparisons.a, within: true }],
    units: { person: comparisons.subject },
    covariance,
  });

const weights = (...values: number[]) => Float64Array.from(values);
const pair = (plus: number, minus: number, cells: number) => {
  const own = new Float64Array(cells);
  own[plus] = 1;
  own[minus] = -1;
  return { name: `${plus} - ${minus}`, weights: own };
};

describe("contrast scores", () => {
  it.each(comparisons.tests)("$name: t, df and p as from SciPy", ({ name, weights: own, error, t, p, df }) => {
    const result = withinContrasts(mixed(error), [{ name, weights: Float64Array.from(own) }]);
    const statistic = result.estimates[0]! / result.standardErrors[0]!;
    expect(statistic / t).toBeCloseTo(1, 10);
    expect(result.df[0]! / df).toBeCloseTo(1, 10);
    expect(tTwoSidedTail(statistic, result.df[0]!) / p).toBeCloseTo(1, 8);
  });

  it("is the paired t test between two levels, and F of those levels alone is t squared", () => {
    const result = withinContrasts(within(), [pair(2, 0, 3)]);
    const t = result.estimates[0]! / result.standardErrors[0]!;
    expect(t / comparisons.paired.t).toBeCloseTo(1, 10);
    expect(result.df[0]).toBe(12);
    const kept = comparisons.a.flatMap((level, row) => (level === 1 ? [] : [row]));
    const two = repeatedMeasuresAnalysis(
      modelData({
        response: kept.map((row) => comparisons.response[row]!),
        factors: [{ name: "a", codes: kept.map((row) => comparisons.a[row]! / 2), within: true }],
        units: { person: kept.map((row) => comparisons.subject[row]!) },
      }),
    );
    expect(two.effects[0]!.value! / t ** 2).toBeCloseTo(1, 10);
  });

  it("correlates estimates as their scores do", () => {
    const result = withinContrasts(within(), [pair(1, 0, 3), pair(2, 0, 3), pair(2, 1, 3)]);
    const scores = (plus: number, minus: number) =>
      Array.from({ length: 13 }, (_, s) => comparisons.response[3 * s + plus]! - comparisons.response[3 * s + minus]!);
    const correlation = (x: number[], y: number[]) => {
      const mean = (v: number[]) => v.reduce((a, b) => a + b, 0) / v.length;
      const [mx, my] = [mean(x), mean(y)];
      const product = (u: number[], mu: number, v: number[], mv: number) =>
        u.reduce((sum, value, index) => sum + (value - mu) * (v[index]! - mv), 0);
      return product(x, mx, y, my) / Math.sqrt(product(x, mx, x, mx) * product(y, my, y, my));
    };
    expect(result.correlation[0]![1]).toBeCloseTo(correlation(scores(1, 0), scores(2, 0)), 12);
    expect(result.correlation[1]![2]).toBeCloseTo(correlation(scores(2, 0), scores(2, 1)), 12);
    expect(result.commonDf).toBeNull();
  });

  it("adds up: sums of squares of orthogonal comparisons are the effect's, under sphericity with the effect's own error", () => {
    const contrasts = [pair(1, 0, 3), { name: "2 - others", weights: weights(-0.5, -0.5, 1) }];
    const result = withinContrasts(within("sphericity"), contrasts);
    const [effect] = repeatedMeasuresAnalysis(within()).effects;
    expect(result.commonDf).toBe(effect!.df2);
    const sum = result.estimates.reduce((total, estimate, i) => total + (estimate / result.standardErrors[i]!) ** 2, 0);
    expect(sum / 2 / effect!.value!).toBeCloseTo(1, 10);
    expect(result.correlation[0]![1]).toBeCloseTo(0, 12);
  });

  it("pools groups for a simple effect, and shares one error among comparisons of subjects' means", () => {
    const simple = withinContrasts(mixed("equal"), [{ name: "1 - 0 at g1", weights: weights(0, 0, 0, -1, 1, 0) }]);
    expect(simple.df[0]).toBe(11);
    const both = withinContrasts(mixed("equal"), [
      { name: "g", weights: weights(-1 / 3, -1 / 3, -1 / 3, 1 / 3, 1 / 3, 1 / 3) },
    ]);
    expect(both.commonDf).toBe(11);
    expect(both.errorTerm).toBe("pooled");
  });

  it("takes Satterthwaite's df where the groups weigh their cells differently", () => {
    const result = withinContrasts(mixed("equal"), [{ name: "odd", weights: weights(0, -1, 0, 0, 0, 1) }]);
    expect(result.df[0]!).toBeGreaterThan(11);
    expect(result.df[0]!).toBeLessThan(22);
  });

  it("gives an effect size whose interval contains it and excludes zero exactly when the test does", () => {
    const result = withinContrasts(within(), [pair(2, 0, 3), pair(1, 0, 3)], { level: 0.95 });
    for (const [index, size] of result.effectSizes.entries()) {
      const p = tTwoSidedTail(result.estimates[index]! / result.standardErrors[index]!, result.df[index]!);
      expect(size!.lower).toBeLessThan(size!.value);
      expect(size!.upper).toBeGreaterThan(size!.value);
      expect(size!.lower > 0 || size!.upper < 0).toBe(p < 0.05);
    }
    const difference = withinContrasts(within(), [pair(2, 0, 3)], { standardiser: "difference spread" });
    // d of differences is t over root n; Hedges's factor for 12 df is 0.936 (Hedges 1981, recalled).
    const t = comparisons.paired.t;
    expect(difference.effectSizes[0]!.value / (t / Math.sqrt(13))).toBeCloseTo(0.936, 3);
    expect(withinContrasts(within(), [pair(2, 0, 3)], { scale: "log" }).effectSizes[0]!.name).toBe("ratio");
  });

  it("refuses scores that do not vary, empty groups and groups of one", () => {
    const code = (work: () => unknown) => {
      try {
        work();
      } catch (error) {
        return error instanceof ModelError ? error.code : String(error);
      }
      return "no error";
    };
    const same = modelData({
      response: [1, 2, 3, 5, 6, 8, 2, 3, 1],
      factors: [{ name: "a", codes: [0, 1, 2, 0, 1, 2, 0, 1, 2], within: true }],
      units: { person: [0, 0, 0, 1, 1, 1, 2, 2, 2] },
    });
    expect(code(() => withinContrasts(same, [pair(1, 0, 3)]))).toBe("zero-variance");
    const lone = (variances: "equal" | "unequal", levels: number) =>
      modelData({
        response: [1, 2, 3, 5, 6, 9, 2, 8],
        factors: [
          { name: "g", codes: [0, 0, 0, 0, 0, 0, 1, 1], within: false, levels },
          { name: "a", codes: [0, 1, 0, 1, 0, 1, 0, 1], within: true },
        ],
        units: { person: [0, 0, 1, 1, 2, 2, 3, 3] },
        variances,
      });
    expect(code(() => withinContrasts(lone("unequal", 2), [pair(3, 2, 4)]))).toBe("group-of-one");
    expect(code(() => withinContrasts(lone("equal", 3), [pair(5, 4, 6)]))).toBe("empty-cell");
  });
});

describe("within-subject intervals", () => {
  it("are Cousineau's with Morey's correction, written out in NumPy", () => {
    const { intervals } = withinIntervals(within(), ["a"], 0.95);
    for (const [cell, interval] of intervals.entries()) {
      expect(interval.mean).toBeCloseTo(comparisons.morey.mean[cell]!, 10);
      expect((interval.upper - interval.lower) / 2).toBeCloseTo(comparisons.morey.half[cell]!, 10);
      expect(interval.cell).toBe(cell);
    }
  });
  it("match the paired comparison between two levels: half width is t times the standard error over root 2", () => {
    const kept = comparisons.a.flatMap((level, row) => (level === 1 ? [] : [row]));
    const two = modelData({
      response: kept.map((row) => comparisons.response[row]!),
      factors: [{ name: "a", codes: kept.map((row) => comparisons.a[row]! / 2), within: true }],
      units: { person: kept.map((row) => comparisons.subject[row]!) },
    });
    const { intervals } = withinIntervals(two, ["a"], 0.95);
    const contrast = withinContrasts(two, [pair(1, 0, 2)]);
    // Standard normal quantities cancel: both use t of 12 df (Morey 2008).
    const half = (intervals[0]!.upper - intervals[0]!.lower) / 2;
    expect(half / ((2.178812829663418 * contrast.standardErrors[0]!) / Math.SQRT2)).toBeCloseTo(1, 10);
  });
});
