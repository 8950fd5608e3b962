/** Numbers that must coincide although they come by different routes, closed forms, limits and inversions. */
import fc from "fast-check";
import { describe, expect, it } from "vitest";
import * as numeric from "../../src/numeric/index.ts";
import { relativeError } from "./worst-case.ts";

const run = { seed: 20261202, numRuns: 300 };
const fewer = { seed: 20261202, numRuns: 60 };
const df = fc.oneof(fc.integer({ min: 1, max: 300 }), fc.double({ min: 0.3, max: 80, noNaN: true }));
const size = fc.double({ min: 0.01, max: 30, noNaN: true });

function expectSame(actual: number, expected: number, tolerance: number): void {
  expect(relativeError(actual, expected), `${actual} against ${expected}`).toBeLessThanOrEqual(tolerance);
}

describe("closed forms (DLMF 8.17, 26; common practice)", () => {
  it("F with 2 numerator df is a power", () =>
    fc.assert(
      fc.property(size, df, (ratio, freedom) => {
        const expected = Math.exp((-freedom / 2) * Math.log1p((2 * ratio) / freedom));
        expectSame(numeric.fUpperTail(ratio, 2, freedom), expected, 1e-13);
      }),
      run,
    ));

  it("t with 1 df is an arc tangent, with 2 df a square root", () =>
    fc.assert(
      fc.property(size, (t) => {
        expectSame(numeric.tUpperTail(t, 1), Math.atan(1 / t) / Math.PI, 1e-14);
        const root = Math.sqrt(2 + t * t);
        expectSame(numeric.tUpperTail(t, 2), 1 / (root * (root + t)), 1e-14);
      }),
      run,
    ));

  it("chi-square with 2 df is exponential, with 4 df a polynomial more", () =>
    fc.assert(
      fc.property(fc.double({ min: 0, max: 1300, noNaN: true }), (x) => {
        expectSame(numeric.chiSquareUpperTail(x, 2), Math.exp(-x / 2), 2e-13);
        expectSame(numeric.chiSquareUpperTail(x, 4), Math.exp(-x / 2) * (1 + x / 2), 2e-13);
      }),
      run,
    ));

  it("six independent tests at 5% are all right with probability 0.95^6 (common practice)", () => {
    // the least of six p-values: beta(1, 6)
    expectSame(numeric.betaLowerTail(0.05, 1, 6), 1 - 0.95 ** 6, 1e-14);
  });
});

describe("one distribution in the clothes of another", () => {
  it("t squared is F with 1 numerator df", () =>
    fc.assert(
      fc.property(size, df, (t, freedom) =>
        expectSame(numeric.fUpperTail(t * t, 1, freedom), numeric.tTwoSidedTail(t, freedom), 1e-13),
      ),
      run,
    ));

  it("z squared is chi-square with 1 df", () =>
    fc.assert(
      fc.property(size, (z) => expectSame(numeric.chiSquareUpperTail(z * z, 1), 2 * numeric.normalUpperTail(z), 2e-13)),
      run,
    ));

  it("the error function is the normal distribution at another scale", () =>
    fc.assert(
      fc.property(fc.double({ min: 0, max: 20, noNaN: true }), (x) => {
        const tail = 2 * numeric.normalUpperTail(x * Math.SQRT2);
        // x sqrt(2) is rounded: the tail moves by 2 x^2 roundings
        expectSame(numeric.errorFunctionComplement(x), tail, 1e-15 + 4e-16 * x * x);
        expect(Math.abs(numeric.errorFunction(x) + numeric.errorFunctionComplement(x) - 1)).toBeLessThan(4e-16);
      }),
      run,
    ));

  it("regularized gamma functions are the gamma distribution of scale 1", () =>
    fc.assert(
      fc.property(size, df, (x, shape) => {
        expect(numeric.regularizedGammaLower(shape, x)).toBe(numeric.gammaLowerTail(x, shape, 1));
        expect(numeric.regularizedGammaUpper(shape, x)).toBe(numeric.gammaUpperTail(x, shape, 1));
      }),
      run,
    ));

  it("infinitely many df are the limit that large df approach", () => {
    for (const x of [0.3, 1, 2.5, 6]) {
      expectSame(numeric.tUpperTail(x, 1e15), numeric.tUpperTail(x, Infinity), 1e-12);
      expectSame(numeric.fUpperTail(x, 3, 1e15), numeric.fUpperTail(x, 3, Infinity), 1e-12);
      expectSame(numeric.fUpperTail(x, 1e15, 7), numeric.fUpperTail(x, Infinity, 7), 1e-12);
      expectSame(numeric.fLowerTail(x, 1e15, 7), numeric.fLowerTail(x, Infinity, 7), 1e-12);
      expectSame(numeric.noncentralTUpperTail(x, 1e15, 2), numeric.noncentralTUpperTail(x, Infinity, 2), 1e-12);
      expectSame(numeric.noncentralFUpperTail(x, 3, 1e15, 4), numeric.noncentralFUpperTail(x, 3, Infinity, 4), 1e-12);
    }
    for (const p of [1e-200, 1e-8, 0.05, 0.7]) {
      expectSame(numeric.fUpperQuantile(p, 3, 1e16), numeric.fUpperQuantile(p, 3, Infinity), 1e-10);
      expectSame(numeric.fUpperQuantile(p, 1e16, 7), numeric.fUpperQuantile(p, Infinity, 7), 1e-10);
    }
  });

  it("noncentral t squared is noncentral F with 1 numerator df (quadrature against Poisson mixture)", () =>
    fc.assert(
      fc.property(size, df, fc.double({ min: 0.01, max: 60, noNaN: true }), (t, freedom, delta) => {
        const both = numeric.noncentralTUpperTail(t, freedom, delta) + numeric.noncentralTLowerTail(-t, freedom, delta);
        const ratio = numeric.noncentralFUpperTail(t * t, 1, freedom, delta * delta);
        if (both > 1e-280) expectSame(ratio, both, 1e-11);
      }),
      run,
    ));

  it("noncentral chi-square with 1 df is a shifted normal", () =>
    fc.assert(
      fc.property(size, fc.double({ min: 0.01, max: 300, noNaN: true }), (root, delta) => {
        const above = numeric.normalUpperTail(root - delta) + numeric.normalUpperTail(root + delta);
        const tail = numeric.noncentralChiSquareUpperTail(root * root, 1, delta * delta);
        if (above > 1e-280) expectSame(tail, above, 1e-11);
      }),
      run,
    ));

  it("the maximum F ratio of two variances is a two-sided F", () =>
    fc.assert(
      fc.property(fc.double({ min: 1.001, max: 60, noNaN: true }), df, (ratio, freedom) => {
        const twoSided = 2 * numeric.fUpperTail(ratio, freedom, freedom);
        if (twoSided > 1e-290) {
          expectSame(numeric.maximumFRatioUpperTail(ratio, { variances: 2, df: freedom }), twoSided, 1e-12);
        }
      }),
      { seed: 5, numRuns: 40 },
    ));
});

describe("limits of intervals by inversion", () => {
  it("the noncentrality for t gives back the probability", () =>
    fc.assert(
      fc.property(
        fc.double({ min: -40, max: 40, noNaN: true }),
        df,
        fc.double({ min: 0.0005, max: 0.9995, noNaN: true }),
        (t, freedom, probability) => {
          const noncentrality = numeric.noncentralityForT({ t, df: freedom, probability });
          expectSame(numeric.noncentralTUpperTail(t, freedom, noncentrality), probability, 1e-11);
        },
      ),
      fewer,
    ));

  it("the noncentrality for F gives back the probability, or is 0 where the central tail is already as large", () =>
    fc.assert(
      fc.property(
        fc.double({ min: 0.01, max: 400, noNaN: true }),
        df,
        df,
        fc.double({ min: 0.0005, max: 0.9995, noNaN: true }),
        (ratio, df1, df2, probability) => {
          const noncentrality = numeric.noncentralityForF({ ratio, df1, df2, probability });
          if (noncentrality === 0) {
            expect(numeric.fUpperTail(ratio, df1, df2)).toBeGreaterThanOrEqual(probability);
          } else {
            expectSame(numeric.noncentralFUpperTail(ratio, df1, df2, noncentrality), probability, 1e-10);
          }
        },
      ),
      fewer,
    ));

  it("noncentralities up to 1e5 work in every direction", () => {
    for (const noncentrality of [1e3, 1e4, 1e5]) {
      for (const p of [1e-10, 0.025, 0.5, 0.975]) {
        const t = numeric.noncentralTQuantile(p, 12.5, noncentrality);
        expectSame(numeric.noncentralTLowerTail(t, 12.5, noncentrality), p, 1e-10);
        expectSame(numeric.noncentralityForT({ t, df: 12.5, probability: 1 - p }), noncentrality, 1e-6);
        const ratio = numeric.noncentralFQuantile(p, 3, 40, noncentrality);
        expectSame(numeric.noncentralFLowerTail(ratio, 3, 40, noncentrality), p, 1e-10);
        const x = numeric.noncentralChiSquareQuantile(p, 3, noncentrality);
        expectSame(numeric.noncentralChiSquareLowerTail(x, 3, noncentrality), p, 1e-10);
      }
    }
  });
});
