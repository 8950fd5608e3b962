/** What every distribution must obey, on random points: tails add up, move the right way, mirror, and invert. */
import fc from "fast-check";
import { describe, expect, it } from "vitest";
import * as numeric from "../../src/numeric/index.ts";
import { relativeError } from "./worst-case.ts";

const seed = 20261201;
const run = { seed, numRuns: 400 };
const fewer = { seed, numRuns: 60 };

const df = fc.oneof(
  fc.integer({ min: 1, max: 200 }),
  fc.double({ min: 0.3, max: 50, noNaN: true }),
  fc.double({ min: 0, max: 9, noNaN: true }).map((exponent) => 10 ** exponent),
);
const shape = df.map((value) => value / 2);
/** Probabilities from 1e-250 to 1 - 1e-9, dense at both ends. */
const probability = fc.oneof(
  fc.double({ min: 1e-9, max: 1 - 1e-9, noNaN: true }),
  fc.double({ min: -250, max: -1, noNaN: true }).map((exponent) => 10 ** exponent),
);
const positive = fc.oneof(
  fc.double({ min: 0, max: 20, noNaN: true }),
  fc.double({ min: -30, max: 30, noNaN: true }).map((exponent) => 10 ** exponent),
);
const anySign = fc.oneof(
  fc.double({ min: -40, max: 40, noNaN: true }),
  positive,
  positive.map((value) => -value),
);
const noncentrality = fc.oneof(
  fc.double({ min: 0, max: 60, noNaN: true }),
  fc.double({ min: 0, max: 5, noNaN: true }).map((exponent) => 10 ** exponent),
);

interface Distribution<P extends readonly number[]> {
  readonly name: string;
  readonly point: fc.Arbitrary<number>;
  readonly parameters: fc.Arbitrary<P>;
  readonly lower: (x: number, ...parameters: P) => number;
  readonly upper: (x: number, ...parameters: P) => number;
  readonly logUpper?: (x: number, ...parameters: P) => number;
  readonly quantile?: (p: number, ...parameters: P) => number;
  readonly upperQuantile?: (p: number, ...parameters: P) => number;
  readonly slow?: boolean;
}

const distributions: readonly Distribution<number[]>[] = [
  {
    name: "normal",
    point: anySign,
    parameters: fc.constant([]),
    lower: numeric.normalLowerTail,
    upper: numeric.normalUpperTail,
    logUpper: numeric.normalLogUpperTail,
    quantile: numeric.normalQuantile,
    upperQuantile: numeric.normalUpperQuantile,
  },
  {
    name: "t",
    point: anySign,
    parameters: fc.tuple(df),
    lower: numeric.tLowerTail,
    upper: numeric.tUpperTail,
    logUpper: numeric.tLogUpperTail,
    quantile: numeric.tQuantile,
    upperQuantile: numeric.tUpperQuantile,
  } as Distribution<number[]>,
  {
    name: "F",
    point: positive,
    parameters: fc.tuple(df, df),
    lower: numeric.fLowerTail,
    upper: numeric.fUpperTail,
    logUpper: numeric.fLogUpperTail,
    quantile: numeric.fQuantile,
    upperQuantile: numeric.fUpperQuantile,
  } as Distribution<number[]>,
  {
    name: "chi-square",
    point: positive,
    parameters: fc.tuple(df),
    lower: numeric.chiSquareLowerTail,
    upper: numeric.chiSquareUpperTail,
    logUpper: numeric.chiSquareLogUpperTail,
    quantile: numeric.chiSquareQuantile,
    upperQuantile: numeric.chiSquareUpperQuantile,
  } as Distribution<number[]>,
  {
    name: "gamma",
    point: positive,
    parameters: fc.tuple(shape, fc.double({ min: 0.01, max: 100, noNaN: true })),
    lower: numeric.gammaLowerTail,
    upper: numeric.gammaUpperTail,
    quantile: numeric.gammaQuantile,
    upperQuantile: numeric.gammaUpperQuantile,
  } as Distribution<number[]>,
  {
    name: "beta",
    point: fc.double({ min: 0, max: 1, noNaN: true }),
    parameters: fc.tuple(shape, shape),
    lower: numeric.betaLowerTail,
    upper: numeric.betaUpperTail,
    logUpper: numeric.betaLogUpperTail,
    quantile: numeric.betaQuantile,
    upperQuantile: numeric.betaUpperQuantile,
  } as Distribution<number[]>,
  {
    name: "noncentral t",
    point: anySign,
    parameters: fc.tuple(
      df,
      fc.oneof(
        noncentrality,
        noncentrality.map((value) => -value),
      ),
    ),
    lower: numeric.noncentralTLowerTail,
    upper: numeric.noncentralTUpperTail,
    quantile: numeric.noncentralTQuantile,
    slow: true,
  } as Distribution<number[]>,
  {
    name: "noncentral F",
    point: positive,
    parameters: fc.tuple(df, df, noncentrality),
    lower: numeric.noncentralFLowerTail,
    upper: numeric.noncentralFUpperTail,
    quantile: numeric.noncentralFQuantile,
    slow: true,
  } as Distribution<number[]>,
  {
    name: "noncentral chi-square",
    point: positive,
    parameters: fc.tuple(df, noncentrality),
    lower: numeric.noncentralChiSquareLowerTail,
    upper: numeric.noncentralChiSquareUpperTail,
    quantile: numeric.noncentralChiSquareQuantile,
    slow: true,
  } as Distribution<number[]>,
];

describe.each(distributions)("$name", (distribution) => {
  const { point, parameters, lower, upper, logUpper, quantile, upperQuantile } = distribution;
  const settings = distribution.slow ? fewer : run;

  it("lower and upper tail add to 1 and lie in [0, 1]", () =>
    fc.assert(
      fc.property(point, parameters, (x, theta) => {
        const below = lower(x, ...theta);
        const above = upper(x, ...theta);
        expect(below).toBeGreaterThanOrEqual(0);
        expect(above).toBeGreaterThanOrEqual(0);
        expect(below).toBeLessThanOrEqual(1);
        expect(above).toBeLessThanOrEqual(1);
        expect(Math.abs(below + above - 1)).toBeLessThan(1e-12);
      }),
      settings,
    ));

  it("the upper tail falls and the lower tail rises", () =>
    fc.assert(
      fc.property(point, point, parameters, (one, other, theta) => {
        const near = Math.min(one, other);
        const far = Math.max(one, other);
        // neighbours closer than the rounding of the tails may tie or cross by a few last digits
        expect(upper(far, ...theta)).toBeLessThanOrEqual(upper(near, ...theta) * (1 + 2e-12));
        expect(lower(near, ...theta)).toBeLessThanOrEqual(lower(far, ...theta) * (1 + 2e-12));
      }),
      settings,
    ));

  if (logUpper !== undefined) {
    it("the log of the upper tail is the log of it, and stays finite where the tail underflows", () =>
      fc.assert(
        fc.property(point, parameters, (x, theta) => {
          const log = logUpper(x, ...theta);
          const tail = upper(x, ...theta);
          if (tail > 1e-300) expect(Math.abs(log - Math.log(tail))).toBeLessThan(1e-11);
          else expect(log).toBeLessThan(-690);
          if (tail < 0.99 && log > -1e300) expect(log).toBeLessThan(0);
        }),
        settings,
      ));
  }

  if (quantile !== undefined) {
    it("the lower quantile inverts the lower tail", () =>
      fc.assert(
        fc.property(probability, parameters, (p, theta) => {
          const x = quantile(p, ...theta);
          // where the quantile underflows or sits on the edge of the range there is nothing to invert
          fc.pre(x !== 0 || p === 0.5);
          fc.pre(Number.isFinite(x) && Math.abs(x) > 1e-290 && Math.abs(x) < 1e290);
          if (distribution.name === "beta") fc.pre(x < 0.999);
          const allowed = 1e-10 + allowance(p, lower, x, theta);
          expect(relativeError(lower(x, ...theta), p)).toBeLessThan(allowed);
        }),
        settings,
      ));
  }
  if (upperQuantile !== undefined) {
    it("the upper quantile inverts the upper tail", () =>
      fc.assert(
        fc.property(probability, parameters, (p, theta) => {
          const x = upperQuantile(p, ...theta);
          fc.pre(Number.isFinite(x) && Math.abs(x) > 1e-290 && Math.abs(x) < 1e290);
          if (distribution.name === "beta") fc.pre(x < 0.999);
          const allowed = 1e-10 + allowance(p, upper, x, theta);
          expect(relativeError(upper(x, ...theta), p)).toBeLessThan(allowed);
        }),
        settings,
      ));
  }
});

/** How far a tail moves relatively when its argument moves by one part in 1e15: no quantile can be held to less. */
function allowance(p: number, tail: (x: number, ...theta: number[]) => number, x: number, theta: number[]): number {
  const step = 1e-6;
  const moved = tail(x * (1 + step), ...theta);
  return (Math.abs(moved - p) / p / step) * 4e-15;
}

describe("mirror images", () => {
  it("normal and t are symmetric to the last digit", () =>
    fc.assert(
      fc.property(anySign, df, (x, freedom) => {
        expect(numeric.normalUpperTail(x)).toBe(numeric.normalLowerTail(-x));
        expect(numeric.tUpperTail(x, freedom)).toBe(numeric.tLowerTail(-x, freedom));
        expect(numeric.tTwoSidedTail(x, freedom)).toBe(numeric.tTwoSidedTail(-x, freedom));
      }),
      run,
    ));

  it("F with exchanged degrees of freedom is the reciprocal", () =>
    fc.assert(
      fc.property(fc.double({ min: 0.01, max: 100, noNaN: true }), shape, shape, (ratio, df1, df2) => {
        const direct = numeric.fUpperTail(ratio, df1, df2);
        const mirrored = numeric.fLowerTail(1 / ratio, df2, df1);
        // 1 / ratio is rounded: the tail may move by that rounding times the elasticity, at most the larger df
        fc.pre(direct > 1e-300);
        expect(relativeError(mirrored, direct)).toBeLessThan(1e-12 + 4e-16 * (df1 + df2));
      }),
      run,
    ));

  it("beta with exchanged shapes is mirrored at 1/2", () =>
    fc.assert(
      fc.property(fc.integer({ min: 1, max: 1023 }), shape, shape, (part, a, b) => {
        const x = part / 1024; // exact, as is 1 - x
        expect(relativeError(numeric.betaUpperTail(1 - x, b, a), numeric.betaLowerTail(x, a, b))).toBeLessThan(1e-13);
      }),
      run,
    ));

  it("noncentral t with the noncentrality turned round is the mirror image", () =>
    fc.assert(
      fc.property(anySign, df, fc.double({ min: -50, max: 50, noNaN: true }), (t, freedom, delta) => {
        expect(numeric.noncentralTUpperTail(t, freedom, delta)).toBe(numeric.noncentralTLowerTail(-t, freedom, -delta));
      }),
      fewer,
    ));
});
