/** Shapiro-Wilk against Royston's formulas in 40 digits (mpmath) and against SciPy: fixtures/generate-shapiro-wilk.py. */
import { readFileSync } from "node:fs";
import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { DomainError, shapiroWilk } from "../../src/numeric/index.ts";
import { expectClose, relativeError, reportWorstCases } from "./worst-case.ts";

reportWorstCases();

interface Sample {
  readonly shape: string;
  readonly values: readonly number[] | null;
  readonly w: string;
  readonly p: string;
  readonly scipyW: string | null;
  readonly scipyP: string | null;
}

const samples: readonly Sample[] = JSON.parse(
  readFileSync(new URL("./fixtures/shapiro-wilk.json", import.meta.url), "utf8"),
);

function valuesOf(sample: Sample): readonly number[] {
  return sample.values ?? Array.from({ length: 5000 }, (_, i) => i * i);
}

describe("Shapiro-Wilk", () => {
  it("agrees with Royston's formulas evaluated in 40 digits", () => {
    for (const sample of samples) {
      const { w, p } = shapiroWilk(valuesOf(sample));
      const at = `${sample.shape}, n = ${valuesOf(sample).length}`;
      expectClose("W", w, sample.w, 1e-13, at);
      // p depends on log(1 - W): the rounding of W's ingredients is magnified by 1 / (1 - W)
      if (Number(sample.p) > 1e-280) expectClose("p of W", p, sample.p, 1e-10, at);
      else expect(p).toBeLessThan(1e-279);
    }
  });

  it("agrees with SciPy 1.10, which computes W in single precision (every W is a binary32 number), to 2e-6", () => {
    for (const sample of samples) {
      if (sample.scipyW === null || sample.scipyP === null) continue;
      const { w, p } = shapiroWilk(valuesOf(sample));
      expectClose("W against SciPy", w, sample.scipyW, 2e-6, `n = ${valuesOf(sample).length}`);
      // p is a function of log(1 - W), with slope at most about 1: a single-precision W moves it by that over 1 - W
      expect(Math.abs(p - Number(sample.scipyP))).toBeLessThan(2e-6 / (1 - w));
    }
  });

  it("does not change with order, shift, scale or sign", () =>
    fc.assert(
      fc.property(fc.uniqueArray(fc.integer({ min: -1000, max: 1000 }), { minLength: 3, maxLength: 60 }), (values) => {
        const { w, p } = shapiroWilk(values);
        expect(shapiroWilk([...values].reverse())).toEqual({ w, p });
        const moved = shapiroWilk(values.map((value) => -8 * value + 64));
        expect(relativeError(moved.w, w)).toBeLessThan(1e-13);
        expect(w).toBeGreaterThan(0);
        expect(w).toBeLessThanOrEqual(1);
        expect(p).toBeGreaterThanOrEqual(0);
        expect(p).toBeLessThanOrEqual(1);
      }),
      { seed: 3, numRuns: 200 },
    ));

  it("leaves its argument alone", () => {
    const values = Object.freeze([3, 1, 2, 9]);
    shapiroWilk(values);
    expect(values).toEqual([3, 1, 2, 9]);
  });

  it("works for values whose squares would overflow or underflow", () => {
    const values = [1, 2, 4, 4.5, 7];
    const { w } = shapiroWilk(values);
    expect(relativeError(shapiroWilk(values.map((value) => value * 2 ** 1000)).w, w)).toBeLessThan(1e-13);
    expect(relativeError(shapiroWilk(values.map((value) => value * 2 ** -1000)).w, w)).toBeLessThan(1e-13);
  });

  it("refuses too few, too many, equal and infinite values", () => {
    expect(() => shapiroWilk([1, 2])).toThrow(DomainError);
    expect(() => shapiroWilk(new Array<number>(5001).fill(0).map((_, i) => i))).toThrow(DomainError);
    expect(() => shapiroWilk([4, 4, 4, 4])).toThrow(DomainError);
    expect(() => shapiroWilk([1, 2, Infinity])).toThrow(DomainError);
    expect(() => shapiroWilk([1, 2, Number.NaN])).toThrow(DomainError);
  });
});
