/** Bad arguments are refused by name, never answered with NaN; the edges of the range have their limits. */
import { describe, expect, it } from "vitest";
import * as numeric from "../../src/numeric/index.ts";

type Call = readonly [name: string, compute: (...values: number[]) => number, good: readonly number[]];

/** Good arguments; each is replaced in turn by something it must not be. */
const calls: readonly Call[] = [
  ["normalUpperTail", numeric.normalUpperTail, [1]],
  ["normalLowerTail", numeric.normalLowerTail, [1]],
  ["normalLogUpperTail", numeric.normalLogUpperTail, [1]],
  ["normalDensity", numeric.normalDensity, [1]],
  ["normalQuantile", numeric.normalQuantile, [0.3]],
  ["normalUpperQuantile", numeric.normalUpperQuantile, [0.3]],
  ["errorFunction", numeric.errorFunction, [1]],
  ["errorFunctionComplement", numeric.errorFunctionComplement, [1]],
  ["tUpperTail", numeric.tUpperTail, [1, 3]],
  ["tLowerTail", numeric.tLowerTail, [1, 3]],
  ["tTwoSidedTail", numeric.tTwoSidedTail, [1, 3]],
  ["tLogUpperTail", numeric.tLogUpperTail, [1, 3]],
  ["tQuantile", numeric.tQuantile, [0.3, 3]],
  ["tUpperQuantile", numeric.tUpperQuantile, [0.3, 3]],
  ["fUpperTail", numeric.fUpperTail, [1, 3, 9]],
  ["fLowerTail", numeric.fLowerTail, [1, 3, 9]],
  ["fLogUpperTail", numeric.fLogUpperTail, [1, 3, 9]],
  ["fQuantile", numeric.fQuantile, [0.3, 3, 9]],
  ["fUpperQuantile", numeric.fUpperQuantile, [0.3, 3, 9]],
  ["chiSquareUpperTail", numeric.chiSquareUpperTail, [1, 3]],
  ["chiSquareLowerTail", numeric.chiSquareLowerTail, [1, 3]],
  ["chiSquareLogUpperTail", numeric.chiSquareLogUpperTail, [1, 3]],
  ["chiSquareQuantile", numeric.chiSquareQuantile, [0.3, 3]],
  ["chiSquareUpperQuantile", numeric.chiSquareUpperQuantile, [0.3, 3]],
  ["gammaUpperTail", numeric.gammaUpperTail, [1, 3, 2]],
  ["gammaLowerTail", numeric.gammaLowerTail, [1, 3, 2]],
  ["gammaQuantile", numeric.gammaQuantile, [0.3, 3, 2]],
  ["gammaUpperQuantile", numeric.gammaUpperQuantile, [0.3, 3, 2]],
  ["betaLowerTail", numeric.betaLowerTail, [0.3, 3, 2]],
  ["betaUpperTail", numeric.betaUpperTail, [0.3, 3, 2]],
  ["betaLogLowerTail", numeric.betaLogLowerTail, [0.3, 3, 2]],
  ["betaLogUpperTail", numeric.betaLogUpperTail, [0.3, 3, 2]],
  ["betaQuantile", numeric.betaQuantile, [0.3, 3, 2]],
  ["betaUpperQuantile", numeric.betaUpperQuantile, [0.3, 3, 2]],
  ["logGamma", numeric.logGamma, [3]],
  ["logBeta", numeric.logBeta, [3, 2]],
  ["regularizedGammaLower", numeric.regularizedGammaLower, [3, 2]],
  ["regularizedGammaUpper", numeric.regularizedGammaUpper, [3, 2]],
  ["noncentralTLowerTail", numeric.noncentralTLowerTail, [1, 3, 2]],
  ["noncentralTUpperTail", numeric.noncentralTUpperTail, [1, 3, 2]],
  ["noncentralTQuantile", numeric.noncentralTQuantile, [0.3, 3, 2]],
  ["noncentralFLowerTail", numeric.noncentralFLowerTail, [1, 3, 9, 2]],
  ["noncentralFUpperTail", numeric.noncentralFUpperTail, [1, 3, 9, 2]],
  ["noncentralFQuantile", numeric.noncentralFQuantile, [0.3, 3, 9, 2]],
  ["noncentralChiSquareLowerTail", numeric.noncentralChiSquareLowerTail, [1, 3, 2]],
  ["noncentralChiSquareUpperTail", numeric.noncentralChiSquareUpperTail, [1, 3, 2]],
  ["noncentralChiSquareQuantile", numeric.noncentralChiSquareQuantile, [0.3, 3, 2]],
  [
    "noncentralityForT",
    (t, df, probability) => numeric.noncentralityForT({ t: t!, df: df!, probability: probability! }),
    [1, 3, 0.3],
  ],
  [
    "noncentralityForF",
    (ratio, df1, df2, probability) =>
      numeric.noncentralityForF({ ratio: ratio!, df1: df1!, df2: df2!, probability: probability! }),
    [5, 3, 9, 0.975],
  ],
  [
    "maximumFRatioUpperTail",
    (ratio, variances, df) => numeric.maximumFRatioUpperTail(ratio!, { variances: variances!, df: df! }),
    [2, 3, 9],
  ],
  [
    "maximumFRatioUpperQuantile",
    (p, variances, df) => numeric.maximumFRatioUpperQuantile(p!, { variances: variances!, df: df! }),
    [0.05, 3, 9],
  ],
] as readonly Call[];

describe("out of the domain", () => {
  it.each(calls)("%s refuses NaN in any place and answers good arguments with a number", (_name, compute, good) => {
    expect(compute(...good)).not.toBeNaN();
    for (let place = 0; place < good.length; place++) {
      expect(() => compute(...good.map((value, i) => (i === place ? Number.NaN : value)))).toThrow(numeric.DomainError);
    }
  });

  it.each(calls.filter(([name]) => name.endsWith("Quantile")))(
    "%s refuses a p outside [0, 1]",
    (_name, compute, good) => {
      for (const p of [-1e-300, 1 + 2 ** -52, Infinity]) {
        expect(() => compute(p, ...good.slice(1))).toThrow(numeric.DomainError);
      }
    },
  );

  it.each(calls.filter(([, , good]) => good.length > 1))(
    "%s refuses a second argument of 0 or below",
    (_name, compute, good) => {
      // regularized gamma takes x there, and 0 is a good x
      if (_name.startsWith("regularized")) return expect(compute(good[0]!, 0)).toBeGreaterThanOrEqual(0);
      for (const bad of [0, -1, -Infinity]) {
        expect(() => compute(good[0]!, bad, ...good.slice(2))).toThrow(numeric.DomainError);
      }
    },
  );

  it("the error names the argument, its value and the allowed range", () => {
    try {
      numeric.fUpperTail(1, -2, 5);
      expect.unreachable();
    } catch (error) {
      expect(error).toMatchObject({ argument: "df1", value: -2, allowed: ">= 0.001, Infinity allowed" });
    }
  });

  it("negative ratios, negative noncentralities, probabilities 0 and 1 of a limit, whole numbers of variances", () => {
    const { DomainError } = numeric;
    expect(() => numeric.fUpperTail(-1, 2, 5)).toThrow(DomainError);
    expect(() => numeric.noncentralFUpperTail(1, 2, 5, -1)).toThrow(DomainError);
    expect(() => numeric.noncentralFUpperTail(1, 2, 5, Infinity)).toThrow(DomainError);
    expect(() => numeric.noncentralTUpperTail(1, 2, Infinity)).toThrow(DomainError);
    expect(() => numeric.noncentralityForT({ t: 1, df: 5, probability: 0 })).toThrow(DomainError);
    expect(() => numeric.noncentralityForT({ t: Infinity, df: 5, probability: 0.5 })).toThrow(DomainError);
    expect(() => numeric.noncentralityForF({ ratio: 1, df1: 2, df2: 5, probability: 1 })).toThrow(DomainError);
    expect(() => numeric.maximumFRatioUpperTail(2, { variances: 2.5, df: 5 })).toThrow(DomainError);
    expect(() => numeric.maximumFRatioUpperTail(2, { variances: 1, df: 5 })).toThrow(DomainError);
    expect(() => numeric.betaLowerTail(1.5, 2, 5)).toThrow(DomainError);
  });
});

describe("at the edges of the range", () => {
  it("tails are 0 and 1, quantiles the ends of the range", () => {
    expect(numeric.normalUpperTail(Infinity)).toBe(0);
    expect(numeric.normalUpperTail(-Infinity)).toBe(1);
    expect(numeric.normalQuantile(0)).toBe(-Infinity);
    expect(numeric.normalUpperQuantile(0)).toBe(Infinity);
    expect(numeric.tUpperTail(Infinity, 3)).toBe(0);
    expect(numeric.tUpperTail(-Infinity, 3)).toBe(1);
    expect(numeric.tLogUpperTail(Infinity, 3)).toBe(-Infinity);
    expect(numeric.tQuantile(0.5, 3)).toBe(0);
    expect(numeric.tUpperQuantile(0, 3)).toBe(Infinity);
    expect(numeric.fUpperTail(0, 3, 5)).toBe(1);
    expect(numeric.fUpperTail(Infinity, 3, 5)).toBe(0);
    expect(numeric.fLowerTail(0, 3, 5)).toBe(0);
    expect(numeric.fUpperQuantile(1, 3, 5)).toBe(0);
    expect(numeric.fUpperQuantile(0, 3, 5)).toBe(Infinity);
    expect(numeric.chiSquareUpperTail(0, 3)).toBe(1);
    expect(numeric.chiSquareUpperTail(Infinity, 3)).toBe(0);
    expect(numeric.betaLowerTail(0, 3, 5)).toBe(0);
    expect(numeric.betaLowerTail(1, 3, 5)).toBe(1);
    expect(numeric.betaUpperQuantile(0, 3, 5)).toBe(1);
    expect(numeric.noncentralTUpperTail(Infinity, 3, 1)).toBe(0);
    expect(numeric.noncentralFUpperTail(0, 3, 5, 1)).toBe(1);
    expect(numeric.noncentralChiSquareLowerTail(Infinity, 3, 1)).toBe(1);
    expect(numeric.maximumFRatioUpperTail(1, { variances: 3, df: 5 })).toBe(1);
    expect(numeric.noncentralityForF({ ratio: 0, df1: 3, df2: 5, probability: 0.975 })).toBe(0);
  });

  it("with both df of F infinite the ratio is 1", () => {
    expect(numeric.fUpperTail(1.01, Infinity, Infinity)).toBe(0);
    expect(numeric.fUpperTail(0.99, Infinity, Infinity)).toBe(1);
    expect(numeric.fUpperQuantile(0.05, Infinity, Infinity)).toBe(1);
  });
});

describe("far corners of the parameters answer quickly with a number", () => {
  // each of these once gave NaN, a value outside [0, 1] or no answer
  it("tails", () => {
    expect(numeric.noncentralTUpperTail(1.0777274558643939e191, 373.17649930627977, -964992)).toBe(0);
    expect(numeric.noncentralFLowerTail(4.9e-29, 9.8e6, 8.6e6, 45)).toBe(0);
    expect(numeric.noncentralChiSquareUpperTail(5.4e27, 156, 19)).toBe(0);
    expect(numeric.noncentralFLowerTail(1e-323, 0.5, 0.3, 1)).toBeGreaterThanOrEqual(0);
    expect(numeric.fLowerTail(4.9e-29, 9.8e6, 8.6e6)).toBe(0);
    expect(numeric.tUpperTail(2e142, 6.7e299)).toBe(0);
  });

  it("quantiles", () => {
    expect(numeric.tQuantile(2.5436713498249756e-233, 12697273.255763043)).toBeLessThan(-32);
    expect(numeric.chiSquareQuantile(2.7242628042217604e-84, 0.003937787450554443)).toBe(0);
    expect(numeric.chiSquareUpperQuantile(0.9359792051836848, 0.0021809473800679215)).toBe(0);
    const b = 0.00212470214040818;
    expect(numeric.betaQuantile(1.0871966979016149e-233, 47700.24345875188, b)).toBeGreaterThan(0.98);
  });
});
