import { describe, expect, it } from "vitest";
import {
  adjustedMeans,
  betweenContrasts,
  cellStatistics,
  factorialAnalysis,
  homogeneousSlopes,
  oneWayAnalysis,
} from "../../../src/models/index.ts";
import { hedgesFactor } from "../../../src/models/effect-size/index.ts";
import { factorData } from "./between-data.ts";
import { expectClose } from "./close.ts";
import { betweenFixtures, type FactorialCase } from "./fixtures.ts";

const letters = ["a", "b", "c"];

function dataOf(it: FactorialCase) {
  const columns = Object.fromEntries(it.codes.map((codes, factor) => [letters[factor]!, codes.map(String)]));
  const levels = Object.fromEntries(
    it.levels.map((count, factor) => [letters[factor]!, Array.from({ length: count }, (_, level) => String(level))]),
  );
  const covariates = Object.fromEntries(it.covariates.map((values, index) => [`x${index}`, values]));
  return factorData(columns, it.y, { levels, covariates });
}

const cases = betweenFixtures.factorial.map(
  (it) => [`${it.levels.join(" x ")}, ${it.y.length} rows, ${it.covariates.length} covariates`, it] as const,
);

describe("factorial and covariance analysis against least squares on full design matrices (NumPy)", () => {
  it.each(cases)("%s", (_, it) => {
    const data = dataOf(it);
    for (const [adjustment, wanted] of [
      ["cells weigh equally", it.equal],
      ["respecting marginality", it.marginal],
    ] as const) {
      const analysis = factorialAnalysis({ data, factors: data.factors, adjustment });
      expect(analysis.error!.df).toBe(it.error.df);
      expectClose(analysis.error!.sumOfSquares, it.error.sumOfSquares, 1e-11, "error");
      expectClose(analysis.rSquared, it.rSquared, 1e-11, "R squared");
      for (const [index, term] of it.covariateTests.entries()) {
        const effect = analysis.effects.find((candidate) => candidate.effect === `x${index}`);
        expectClose(effect!.value, term.f, 1e-9, `covariate ${index}`);
      }
      for (const term of wanted) {
        const name = term.effect.map((factor) => letters[factor]!).join(" x ");
        const effect = analysis.effects.find((candidate) => candidate.effect === name);
        // With an empty cell a sum-coded model still "tests" a main effect, but of means that no data speak of; ours names it.
        if (effect === undefined && adjustment === "cells weigh equally" && analysis.notes.length > 0) {
          expect(analysis.notes).toContainEqual({ code: "effect-not-estimable", facts: { effect: name } });
          continue;
        }
        expect(effect!.df1).toBe(term.df);
        expectClose(effect!.sumOfSquares, term.sumOfSquares, 1e-9, `${adjustment} ${name}`);
        expectClose(effect!.value, term.f, 1e-9, `${adjustment} ${name}`);
        expectClose(effect!.p, term.p, 1e-8, `${adjustment} ${name}`);
        // Likelihood ratio of the two models, from their residual sums of squares.
        const without = it.error.sumOfSquares + term.sumOfSquares;
        const deviance = it.y.length * Math.log(without / it.error.sumOfSquares);
        expectClose(effect!.likelihoodRatio!.statistic, deviance, 1e-9, `${adjustment} ${name}`);
      }
    }
  });
});

describe("covariates", () => {
  const withCovariates = cases.filter(([, it]) => it.covariates.length > 0);
  it.each(withCovariates)("adjusted means, slopes and their tests: %s", (_, it) => {
    const data = dataOf(it);
    const { means, slopes } = adjustedMeans(data, 0.95);
    for (const wanted of it.adjusted!) {
      expectClose(means[wanted.cell]!.mean, wanted.mean, 1e-11, "mean");
      expectClose(means[wanted.cell]!.standardError, wanted.standardError, 1e-10, "standard error");
    }
    for (const [index, slope] of it.slopes!.entries()) expectClose(slopes[index]!.slope, slope, 1e-10, "slope");
    const weights = new Float64Array(data.cellCount);
    weights[0] = -1;
    weights[data.cellCount - 1] = 1;
    const comparison = betweenContrasts({ data, contrasts: [{ name: "last - first", weights }] });
    expect(comparison.errorTerm).toBe("covariance");
    // In units of the spread within cells, whatever the covariates explain.
    const statistics = cellStatistics(data);
    const within = statistics.sumOfSquares.reduce((sum, value) => sum + value, 0);
    const df = it.y.length - statistics.n.filter((size) => size > 0).length;
    const size = comparison.effectSizes[0]!;
    expectClose(size.value, (hedgesFactor(df) * it.adjustedDifference!.estimate) / Math.sqrt(within / df), 1e-9, "g");
    expectClose(comparison.estimates[0], it.adjustedDifference!.estimate, 1e-10, "difference");
    expectClose(comparison.standardErrors[0], it.adjustedDifference!.standardError, 1e-10, "its standard error");
    const tests = homogeneousSlopes(data);
    for (const [index, wanted] of (it.slopesTests ?? []).entries()) {
      expect([tests[index]!.df1, tests[index]!.df2]).toEqual([wanted.df1, wanted.df2]);
      expectClose(tests[index]!.value, wanted.f, 1e-9, "slopes F");
      expectClose(tests[index]!.p, wanted.p, 1e-8, "slopes p");
    }
  });
  it("one that does not vary within groups is an error", () => {
    const groups = ["a", "a", "b", "b", "c", "c"];
    const data = factorData({ a: groups }, [1, 2, 3, 5, 4, 7], { covariates: { x: [1, 1, 2, 2, 3, 3] } });
    expect(() => factorialAnalysis({ data, factors: data.factors })).toThrow(
      expect.objectContaining({ code: "covariate-constant" }),
    );
  });
});

describe("identities of the factorial analysis", () => {
  const groups = ["a", "a", "a", "b", "b", "b", "b", "c", "c"];
  const values = [3.1, 4.2, 5.7, 1.1, 2.5, 3.3, 2.8, 6.4, 7.9];
  it("with one factor it is the one-way analysis, from rows and from statistics", () => {
    const data = factorData({ group: groups }, values);
    const oneWay = oneWayAnalysis(cellStatistics(data));
    for (const source of [data, cellStatistics(data)]) {
      for (const adjustment of ["cells weigh equally", "respecting marginality"] as const) {
        const effect = factorialAnalysis({ data: source, factors: data.factors, adjustment }).effects[0]!;
        for (const key of ["value", "p", "sumOfSquares", "partialEtaSquared", "omegaSquared"] as const) {
          expectClose(effect[key], oneWay.effects[0]![key]!, 1e-12, key);
        }
      }
    }
  });
  it("shift, scale and the order of levels change no F", () => {
    const data = (factor: number, shift: number, levels: string[]) =>
      factorData(
        { group: groups, other: ["x", "y", "x", "x", "y", "y", "x", "y", "x"] },
        values.map((v) => factor * v + shift),
        {
          levels: { group: levels, other: ["x", "y"] },
        },
      );
    const base = data(1, 0, ["a", "b", "c"]);
    const wanted = factorialAnalysis({ data: base, factors: base.factors }).effects.map((effect) => effect.value!);
    for (const other of [data(-3, 100, ["a", "b", "c"]), data(1, 0, ["c", "a", "b"])]) {
      const found = factorialAnalysis({ data: other, factors: other.factors }).effects;
      for (const [index, effect] of found.entries()) expectClose(effect.value, wanted[index]!, 1e-9, effect.effect);
    }
  });
  it("in balanced data sums of squares add up and both adjustments agree", () => {
    const a: string[] = [];
    const b: string[] = [];
    const y: number[] = [];
    for (let row = 0; row < 24; row++) {
      a.push(`a${row % 2}`);
      b.push(`b${Math.floor(row / 2) % 3}`);
      y.push(((row * 7919) % 101) / 7);
    }
    const data = factorData({ a, b }, y);
    const equal = factorialAnalysis({ data, factors: data.factors });
    const marginal = factorialAnalysis({ data, factors: data.factors, adjustment: "respecting marginality" });
    const mean = y.reduce((sum, value) => sum + value, 0) / 24;
    const total = y.reduce((sum, value) => sum + (value - mean) ** 2, 0);
    const sum = equal.effects.reduce((all, effect) => all + effect.sumOfSquares!, equal.error!.sumOfSquares);
    expectClose(sum, total, 1e-12, "total");
    for (const [index, effect] of equal.effects.entries()) {
      expectClose(effect.value, marginal.effects[index]!.value!, 1e-10, effect.effect);
    }
  });
  it("generalised eta squared counts measured factors into every effect's variation (Olejnik & Algina 2003)", () => {
    const a = ["p", "p", "p", "p", "q", "q", "q", "q"];
    const sex = ["f", "f", "m", "m", "f", "f", "m", "m"];
    const data = factorData({ a, sex }, [1, 2, 4, 6, 3, 5, 9, 8]);
    const measured = data.factors.map((factor) => ({ ...factor, measured: factor.name === "sex" }));
    const { effects, error } = factorialAnalysis({ data, factors: measured });
    const [first, second, both] = effects.map((effect) => effect.sumOfSquares!) as [number, number, number];
    const variation = second + both + error!.sumOfSquares;
    expectClose(effects[0]!.generalizedEtaSquared, first / (first + variation), 1e-12, "manipulated");
    expectClose(effects[1]!.generalizedEtaSquared, second / variation, 1e-12, "measured");
    expectClose(effects[2]!.generalizedEtaSquared, both / variation, 1e-12, "interaction");
  });
});

describe("designs that cannot be analysed say why", () => {
  it.each([
    ["one observation per cell", { a: ["1", "1", "2", "2"], b: ["1", "2", "1", "2"] }, [1, 2, 3, 5], "no-error-df"],
    ["no variance within cells", { a: ["1", "1", "2", "2"], b: ["1", "1", "2", "2"] }, [1, 1, 3, 3], "zero-variance"],
    ["a single group", { a: ["1", "1", "1"] }, [1, 2, 3], "too-few-groups"],
  ])("%s", (_, columns, values, code) => {
    const data = factorData(columns as unknown as Record<string, string[]>, values);
    expect(() => factorialAnalysis({ data, factors: data.factors })).toThrow(expect.objectContaining({ code }));
  });
});
