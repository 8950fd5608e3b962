import { describe, expect, it } from "vitest";
import type { Contrast } from "../../../src/design/types.ts";
import {
  betweenContrasts,
  brownForsytheAnalysis,
  cellStatistics,
  mergedCells,
  oneWayAnalysis,
  welchAnalysis,
} from "../../../src/models/index.ts";
import { tTwoSidedTail } from "../../../src/numeric/index.ts";
import { factorData, groupData } from "./between-data.ts";
import { expectClose } from "./close.ts";
import { betweenFixtures } from "./fixtures.ts";

const dataOf = (groups: readonly (readonly number[])[]) =>
  groupData(
    groups.flatMap((values, group) => values.map(() => `g${group}`)),
    groups.flat(),
  );
const pair = (name: string, cells: number, plus: number, minus: number): Contrast => ({
  name,
  weights: Float64Array.from({ length: cells }, (_, cell) => (cell === plus ? 1 : cell === minus ? -1 : 0)),
});
const cases = betweenFixtures.groups.map((it) => [it.groups.map((values) => values.length).join(", "), it] as const);

describe("one-way tests of groups with unequal sizes and spreads (SciPy; Welch 1951 and Brown & Forsythe 1974 in NumPy)", () => {
  it.each(cases)("group sizes %s", (_, it) => {
    const statistics = cellStatistics(dataOf(it.groups));
    const oneWay = oneWayAnalysis(statistics).effects[0]!;
    expectClose(oneWay.value, it.oneWay.f, 1e-11, "F");
    expectClose(oneWay.p, it.oneWay.p, 1e-10, "p");
    const [lower, upper] = oneWay.partialEtaSquaredInterval!;
    if (it.partialEtaSquared[0] === 0) expect(lower).toBe(0);
    else expectClose(lower, it.partialEtaSquared[0], 1e-6, "lower limit");
    expectClose(upper, it.partialEtaSquared[1], 1e-6, "upper limit");
    const welch = welchAnalysis(statistics).effects[0]!;
    expectClose(welch.value, it.welch.f, 1e-11, "Welch's F");
    expectClose(welch.df2, it.welch.df2, 1e-11, "its df");
    expectClose(welch.p, it.welch.p, 1e-9, "its p");
    const brownForsythe = brownForsytheAnalysis(statistics).effects[0]!;
    expectClose(brownForsythe.value, it.brownForsythe.f, 1e-11, "F*");
    expectClose(brownForsythe.df2, it.brownForsythe.df2, 1e-11, "its df");
    expectClose(brownForsythe.p, it.brownForsythe.p, 1e-9, "its p");
  });
});

describe("comparisons of group means (pooled: NumPy; Welch: SciPy's t test; g's interval: SciPy's noncentral t)", () => {
  it.each(cases)("group sizes %s", (_, it) => {
    const data = dataOf(it.groups);
    const contrasts = it.pairs.map(({ i, j }) => pair(`${j} - ${i}`, it.groups.length, j, i));
    const pooled = betweenContrasts({ data: cellStatistics(data), contrasts });
    const unequal = betweenContrasts({ data, contrasts, variances: "unequal" });
    expect([pooled.errorTerm, pooled.commonDf]).toEqual(["pooled", data.rows - it.groups.length]);
    expect([unequal.errorTerm, unequal.commonDf]).toEqual(["unequal variances", null]);
    for (const [index, wanted] of it.pairs.entries()) {
      const t = pooled.estimates[index]! / pooled.standardErrors[index]!;
      expectClose(pooled.estimates[index], wanted.estimate, 1e-11, "estimate");
      expectClose(pooled.standardErrors[index], wanted.pooledStandardError, 1e-12, "standard error");
      expectClose(tTwoSidedTail(t, pooled.df[index]!), wanted.pooledP, 1e-10, "p");
      const size = pooled.effectSizes[index]!;
      expect(size.name).toBe("g");
      expectClose(size.value, wanted.g, 1e-11, "g");
      expect(Math.abs(size.lower - wanted.gLower)).toBeLessThan(1e-8);
      expect(Math.abs(size.upper - wanted.gUpper)).toBeLessThan(1e-8);
      const welchT = unequal.estimates[index]! / unequal.standardErrors[index]!;
      expectClose(welchT, wanted.welchT, 1e-11, "Welch t");
      expectClose(unequal.df[index], wanted.welchDf, 1e-11, "Welch df");
      expectClose(tTwoSidedTail(welchT, unequal.df[index]!), wanted.welchP, 1e-10, "Welch p");
    }
  });
  it("correlations are those of weights over sizes, by simulation-free algebra", () => {
    const data = dataOf([
      [1, 2, 3, 9],
      [2, 5],
      [4, 4.5, 8],
    ]);
    const contrasts = [pair("b - a", 3, 1, 0), pair("c - a", 3, 2, 0)];
    // Many against one: the shared group's share of both variances.
    const pooled = betweenContrasts({ data, contrasts });
    expectClose(pooled.correlation[0]![1], 0.25 / Math.sqrt((0.25 + 1 / 2) * (0.25 + 1 / 3)), 1e-12);
    const unequal = betweenContrasts({ data, contrasts, variances: "unequal" });
    const [a, b, c] = [12.916666666666666 / 4, 4.5 / 2, 4.75 / 3] as const;
    expectClose(unequal.correlation[1]![0], a / Math.sqrt((a + b) * (a + c)), 1e-12);
  });
  it("standardisers: the control's spread, the average spread; a difference spread does not exist between subjects", () => {
    const data = dataOf([
      [1, 2, 3, 9],
      [2, 5, 7],
      [4, 4.5, 8],
    ]);
    const ask = (standardiser: "control spread" | "average spread" | "difference spread") =>
      betweenContrasts({ data, contrasts: [pair("b - a", 3, 1, 0)], standardiser, controlCells: [0] });
    const estimate = 14 / 3 - 3.75;
    // Hedges's factor for 3 df: gamma(1.5) / (sqrt(1.5) gamma(1)) = 0.7236 (closed form sqrt(pi) / 2 / sqrt(1.5)).
    const factor = Math.sqrt(Math.PI) / 2 / Math.sqrt(1.5);
    expectClose(
      ask("control spread").effectSizes[0]!.value,
      (factor * estimate) / Math.sqrt(12.916666666666666),
      1e-12,
    );
    const variances = [12.916666666666666, 19 / 3] as const;
    const df = (variances[0] + variances[1]) ** 2 / (variances[0] ** 2 / 3 + variances[1] ** 2 / 2);
    const d = estimate / Math.sqrt((variances[0] + variances[1]) / 2);
    const size = ask("average spread").effectSizes[0]!;
    // Hedges's own approximation of the factor, good to 1e-3 here.
    expectClose(size.value, d * (1 - 3 / (4 * df - 1)), 3e-3);
    const none = ask("difference spread");
    expect(none.effectSizes[0]).toBeNull();
    expect(none.notes[0]!.code).toBe("standardiser-not-defined");
  });
  it("on log scale the effect size is the ratio with the t interval", () => {
    const data = dataOf([[1, 2, 4, 8].map(Math.log), [2, 6, 18].map(Math.log)]);
    const found = betweenContrasts({ data, contrasts: [pair("b - a", 2, 1, 0)], scale: "log" });
    const size = found.effectSizes[0]!;
    expect(size.name).toBe("ratio");
    expectClose(size.value, 6 / Math.sqrt(8), 1e-12);
    expectClose(size.lower * size.upper, size.value ** 2, 1e-12);
    // t with 5 df at 97.5%: 2.570581835636 (common table value 2.571)
    expectClose(Math.log(size.upper / size.value), 2.5705818356363146 * found.standardErrors[0]!, 1e-9);
  });
});

describe("identities", () => {
  it("between two groups F is the square of t, pooled and Welch", () => {
    const it = betweenFixtures.groups.find((candidate) => candidate.groups.length === 2)!;
    const statistics = cellStatistics(dataOf(it.groups));
    const t = it.pairs[0]!.estimate / it.pairs[0]!.pooledStandardError;
    expectClose(oneWayAnalysis(statistics).effects[0]!.value, t ** 2, 1e-11);
    expectClose(welchAnalysis(statistics).effects[0]!.value, it.pairs[0]!.welchT ** 2, 1e-11);
    expectClose(welchAnalysis(statistics).effects[0]!.df2, it.pairs[0]!.welchDf, 1e-11);
    expectClose(brownForsytheAnalysis(statistics).effects[0]!.value, it.pairs[0]!.welchT ** 2, 1e-11);
  });
  it("merged cells have the statistics of the merged rows", () => {
    const a = ["x", "x", "y", "y", "y", "x", "z"];
    const b = ["p", "q", "p", "p", "q", "q", "p"];
    const values = [3, 4.5, 1, 7, 2.25, 9, 5];
    const fine = cellStatistics(factorData({ a, b }, values));
    const coarse = cellStatistics(factorData({ a }, values));
    const merged = mergedCells(fine, [0, 0, 1, 1, 2, 2], 3);
    for (const key of ["n", "mean", "sumOfSquares"] as const) {
      for (const [cell, value] of coarse[key].entries()) expect(merged[key][cell]).toBeCloseTo(value, 12);
    }
  });
});

describe("what cannot be told is an error with its code", () => {
  const refused = (work: () => unknown, code: string) => expect(work).toThrow(expect.objectContaining({ code }));
  it("one observation in a group under unequal variances", () => {
    const data = dataOf([[1, 2, 3], [4], [5, 6]]);
    refused(() => welchAnalysis(cellStatistics(data)), "group-of-one");
    refused(() => brownForsytheAnalysis(cellStatistics(data)), "group-of-one");
    refused(
      () => betweenContrasts({ data, contrasts: [pair("b - a", 3, 1, 0)], variances: "unequal" }),
      "group-of-one",
    );
    // A comparison that does not touch the group is possible.
    expect(betweenContrasts({ data, contrasts: [pair("c - a", 3, 2, 0)], variances: "unequal" }).df[0]).toBeGreaterThan(
      1,
    );
  });
  it("no variance in one group, in all groups, also far from zero", () => {
    refused(
      () =>
        welchAnalysis(
          cellStatistics(
            dataOf([
              [1, 2, 3],
              [4, 4, 4],
            ]),
          ),
        ),
      "group-without-variance",
    );
    refused(
      () =>
        oneWayAnalysis(
          cellStatistics(
            dataOf([
              [0.1, 0.1, 0.1],
              [0.3, 0.3],
            ]),
          ),
        ),
      "zero-variance",
    );
    refused(
      () =>
        oneWayAnalysis(
          cellStatistics(
            dataOf([
              [1e9 + 0.1, 1e9 + 0.1],
              [1e9 + 0.3, 1e9 + 0.3],
            ]),
          ),
        ),
      "zero-variance",
    );
  });
  it("one observation per group, one group, an empty cell", () => {
    refused(() => oneWayAnalysis(cellStatistics(dataOf([[1], [2], [3]]))), "no-error-df");
    refused(() => oneWayAnalysis(cellStatistics(dataOf([[1, 2, 3]]))), "too-few-groups");
    const data = factorData({ a: ["x", "x", "y", "y"] }, [1, 2, 4, 3], { levels: { a: ["x", "y", "z"] } });
    refused(() => betweenContrasts({ data, contrasts: [pair("z - x", 3, 2, 0)] }), "empty-cell");
    const analysis = oneWayAnalysis(cellStatistics(data), { cellNames: ["x", "y", "z"] });
    expect(analysis.effects[0]!.df1).toBe(1);
    expect(analysis.notes).toEqual([{ code: "empty-cells", facts: { count: 1, cells: ["z"] } }]);
  });
});
