/** Joint probabilities against identities, SciPy, mpmath and each other: every route is forced where another one knows the answer. */
import { readFileSync } from "node:fs";
import { describe, expect, it } from "vitest";
import { unionTailByLattice } from "../../src/numeric/directional-lattice.ts";
import * as numeric from "../../src/numeric/index.ts";
import { latticeMean } from "../../src/numeric/lattice.ts";
import { latticeRules } from "../../src/numeric/lattice-vectors.ts";
import { rectangleIntegrand, sequentialRectangle } from "../../src/numeric/rectangle-lattice.ts";

const fixture = JSON.parse(readFileSync(new URL("./fixtures/joint.json", import.meta.url), "utf8"));
const { multivariateTProbability, multivariateTUpperTail } = numeric;
const none = Number.NEGATIVE_INFINITY;
const normal = Number.POSITIVE_INFINITY;

const equicorrelated = (count: number, r: number) =>
  Array.from({ length: count }, (_, i) => Array.from({ length: count }, (__, j) => (i === j ? 1 : r)));

function pairs(sizes: readonly number[]): number[][] {
  const rows: number[][] = [];
  for (let i = 0; i < sizes.length; i++) {
    for (let j = 0; j < i; j++) {
      const spread = Math.sqrt(1 / sizes[i]! + 1 / sizes[j]!);
      rows.push(sizes.map((n, k) => (k === i ? 1 : k === j ? -1 : 0) / Math.sqrt(n) / spread));
    }
  }
  return rows.map((a, p) => rows.map((b, q) => (p === q ? 1 : a.reduce((sum, value, k) => sum + value * b[k]!, 0))));
}

function byLattice(
  correlation: numeric.Matrix,
  lower: number[],
  upper: number[],
  df: number,
  most: number,
  shift = lower.map(() => 0),
) {
  const sequential = sequentialRectangle({ lower, upper, shift, correlation, df });
  return latticeMean({
    ...rectangleIntegrand(sequential, df),
    seed: 5,
    allowedError: () => 1e-6,
    mostEvaluations: most,
  });
}

function byDirections(correlation: numeric.Matrix, limit: number, df: number, most: number) {
  const { factor, rank } = numeric.semidefiniteFactor(correlation, 1e-11);
  const rows = factor.flatMap((row) => [row.map((value) => value / limit), row.map((value) => -value / limit)]);
  return unionTailByLattice({ rows, rank, df, seed: 5, allowedError: () => 0, mostEvaluations: most });
}

describe("many-to-one and all-pairs structures are recognised and equal the general routes", () => {
  it.each([
    [4, 2.5, 10],
    [6, 3.2, 25],
    [5, 2.2, normal],
  ])(
    "equicorrelated 0.5, %i statistics, limit %d, df %d: lattices agree with Dunnett to their error",
    (count, limit, df) => {
      const exact = numeric.dunnettUpperTail({ correlation: 0.5, comparisons: count, value: limit, df });
      const recognised = multivariateTUpperTail({ limit, correlation: equicorrelated(count, 0.5), df });
      expect(recognised.method).toBe("product correlation, quadrature");
      expect(Math.abs(recognised.probability / exact - 1)).toBeLessThan(1e-13);
      const inside = byLattice(
        equicorrelated(count, 0.5),
        new Array(count).fill(-limit),
        new Array(count).fill(limit),
        df,
        60000,
      );
      expect(Math.abs(1 - inside.value - exact)).toBeLessThan(inside.error);
      const union = byDirections(equicorrelated(count, 0.5), limit, df, 30000);
      expect(Math.abs(union.probability - exact)).toBeLessThan(union.error);
    },
  );

  it.each([
    [4, 2.6, 12],
    [5, 4.5, 20],
    [6, 6, 30],
  ])(
    "all pairs of %i equal groups, limit %d, df %d: lattices agree with the studentized range (singular matrix)",
    (means, limit, df) => {
      const correlation = pairs(new Array(means).fill(7));
      const exact = numeric.studentizedRangeUpperTail(limit * Math.SQRT2, means, df);
      const tail = multivariateTUpperTail({ limit, correlation, df });
      expect(tail.method).toBe("studentized range");
      expect(Math.abs(tail.probability / exact - 1)).toBeLessThan(1e-12);
      const count = correlation.length;
      const inside = byLattice(correlation, new Array(count).fill(-limit), new Array(count).fill(limit), df, 60000);
      expect(Math.abs(1 - inside.value - exact)).toBeLessThan(inside.error + 1e-12);
      const union = byDirections(correlation, limit, df, 30000);
      expect(Math.abs(union.probability - exact)).toBeLessThan(union.error);
      // relative error stays bounded in the tail
      if (exact < 1e-3) expect(union.error / exact).toBeLessThan(0.02);
    },
  );

  it("three equal groups: circle, range and rectangle agree to 1e-13", () => {
    for (const df of [3, 17.5, normal]) {
      const exact = numeric.studentizedRangeUpperTail(3 * Math.SQRT2, 3, df);
      // an unnoticeable inequality keeps the range from being recognised
      const circle = multivariateTUpperTail({ limit: 3, correlation: pairs([5, 5, 5 + 1e-9]), df });
      expect(circle.method).toBe("directions, quadrature");
      expect(Math.abs(circle.probability / exact - 1)).toBeLessThan(1e-8);
      expect(
        Math.abs(
          1 -
            multivariateTProbability({ lower: [-3, -3, -3], upper: [3, 3, 3], correlation: pairs([5, 5, 5]), df })
              .probability -
            exact,
        ),
      ).toBeLessThan(1e-13);
    }
  });
});

describe("closed forms", () => {
  it("orthants: two and three variables by arcsines (Sheppard 1899), equicorrelated 0.5 by 1 / (count + 1)", () => {
    for (const r of [-0.9, -0.3, 0.2, 0.99]) {
      const found = multivariateTProbability({
        lower: [0, 0],
        upper: [normal, normal],
        correlation: equicorrelated(2, r),
        df: 5,
      });
      expect(Math.abs(found.probability - (0.25 + Math.asin(r) / (2 * Math.PI)))).toBeLessThan(1e-10);
    }
    const [a, b, c] = [0.6, -0.4, 0.1];
    const three = [
      [1, a, b],
      [a, 1, c],
      [b, c, 1],
    ];
    const orthant = multivariateTProbability({
      lower: [0, 0, 0],
      upper: [normal, normal, normal],
      correlation: three,
      df: 4,
    });
    expect(
      Math.abs(orthant.probability - (0.125 + (Math.asin(a) + Math.asin(b) + Math.asin(c)) / (4 * Math.PI))),
    ).toBeLessThan(1e-10);
    for (const count of [4, 7]) {
      const lattice = byLattice(
        equicorrelated(count, 0.5),
        new Array(count).fill(0),
        new Array(count).fill(normal),
        normal,
        40000,
      );
      expect(Math.abs(lattice.value - 1 / (count + 1))).toBeLessThan(lattice.error);
    }
  });

  it("rank 1: statistics that are one and the same, or its negative", () => {
    const same = [
      [1, -1],
      [-1, 1],
    ];
    const tail = multivariateTUpperTail({ limit: 2.1, correlation: same, df: 9 });
    expect(Math.abs(tail.probability - numeric.tTwoSidedTail(2.1, 9))).toBeLessThan(1e-14);
    const upper = multivariateTUpperTail({ limit: [2.1, 3], correlation: same, df: 9, sides: "upper" });
    expect(Math.abs(upper.probability - numeric.tUpperTail(2.1, 9) - numeric.tUpperTail(3, 9))).toBeLessThan(1e-14);
    const inside = multivariateTProbability({
      lower: [-2.1, none],
      upper: [3, 2.1],
      correlation: equicorrelated(2, 1),
      df: 9,
    });
    expect(Math.abs(inside.probability - (1 - 2 * numeric.tUpperTail(2.1, 9)))).toBeLessThan(1e-12);
  });

  it("one shifted variable is noncentral t", () => {
    for (const [upper, mean, df] of [
      [1.5, 2, 8],
      [3, -1, 2.5],
      [0.4, 0.7, 40],
    ] as const) {
      const found = multivariateTProbability({ lower: [none], upper: [upper], correlation: [[1]], df, means: [mean] });
      expect(Math.abs(found.probability - numeric.noncentralTLowerTail(upper, df, mean))).toBeLessThan(1e-11);
    }
  });
});

describe("against SciPy and mpmath (test/numeric/fixtures/generate-joint.py)", () => {
  it("two shifted variables over a common deviation, 1e-9", () => {
    for (const { df, rho, shift, lower, upper, value } of fixture.t) {
      const found = multivariateTProbability({ lower, upper, correlation: equicorrelated(2, rho), df, means: shift });
      expect(Math.abs(found.probability - value), JSON.stringify({ df, rho })).toBeLessThan(1e-9);
      // the lattice sees the same
      const lattice = byLattice(equicorrelated(2, rho), lower, upper, df, 9000, shift);
      expect(Math.abs(lattice.value - value), JSON.stringify({ df, rho })).toBeLessThan(1.5 * lattice.error);
    }
  });

  it("four to seven normal variables of any correlation, within both errors", () => {
    for (const { lower, upper, correlation, value, error } of fixture.normal) {
      const low = lower.map((limit: number | null) => limit ?? none);
      const found = multivariateTProbability({
        lower: low,
        upper,
        correlation,
        df: normal,
        absoluteError: 2e-5,
        mostEvaluations: 2e6,
      });
      expect(found.method).toBe("lattice");
      expect(found.error).toBeLessThanOrEqual(2e-5);
      expect(Math.abs(found.probability - value)).toBeLessThan(found.error + error);
    }
  });

  it("any of two far out, relative 1e-12", () => {
    for (const { rho, limits, value } of fixture["bivariate upper"]) {
      const [a, b] = limits.map(Number);
      const found = multivariateTUpperTail({
        limit: [a, b],
        correlation: equicorrelated(2, Number(rho)),
        df: normal,
        sides: "upper",
      });
      expect(Math.abs(found.probability / Number(value) - 1), `${rho} ${limits}`).toBeLessThan(1e-12);
    }
  });
});

describe("invariances", () => {
  it("the order of the statistics and the sign of two-sided ones do not matter, to the reported error", () => {
    const correlation = pairs([4, 9, 5, 12, 7]);
    const order = [7, 2, 9, 0, 4, 1, 8, 3, 6, 5];
    const sign = order.map((_, i) => (i % 3 === 0 ? -1 : 1));
    const turned = order.map((i, a) => order.map((j, b) => sign[a]! * sign[b]! * correlation[i]![j]!));
    for (const limit of [2.5, 4.8]) {
      const one = multivariateTUpperTail({ limit, correlation, df: 32, absoluteError: 3e-5, mostEvaluations: 1e5 });
      const other = multivariateTUpperTail({
        limit,
        correlation: turned,
        df: 32,
        absoluteError: 3e-5,
        mostEvaluations: 1e5,
        seed: 9,
      });
      expect(Math.abs(one.probability - other.probability)).toBeLessThan(one.error + other.error);
    }
  });

  it("the same seed gives the same bits, another seed the same number", () => {
    const ask = (seed: number) =>
      multivariateTUpperTail({ limit: 2.7, correlation: pairs([3, 9, 5, 4, 6]), df: 22, seed, absoluteError: 1e-4 });
    expect(ask(3)).toEqual(ask(3));
    expect(ask(3).probability).not.toBe(ask(4).probability);
    expect(Math.abs(ask(3).probability - ask(4).probability)).toBeLessThan(ask(3).error + ask(4).error);
  });

  it("more limits never lower the tail; the tail lies between that of one and Bonferroni's sum", () => {
    const correlation = pairs([4, 9, 5, 12]);
    for (const limit of [0.5, 2, 5]) {
      let before = 0;
      for (let count = 1; count <= 6; count++) {
        const part = correlation.slice(0, count).map((row) => row.slice(0, count));
        const { probability } = multivariateTUpperTail({ limit, correlation: part, df: 11 });
        const single = numeric.tTwoSidedTail(limit, 11);
        expect(probability).toBeGreaterThanOrEqual(before - 1e-12);
        expect(probability).toBeLessThanOrEqual(Math.min(1, count * single) + 1e-12);
        before = probability;
      }
    }
  });

  it("one-sided limits at or below 0", () => {
    const exact =
      1 -
      multivariateTProbability({
        lower: [none, none, none],
        upper: [-0.5, 0.2, -1],
        correlation: equicorrelated(3, 0.3),
        df: 6,
      }).probability;
    const found = multivariateTUpperTail({
      limit: [-0.5, 0.2, -1],
      correlation: equicorrelated(3, 0.3),
      df: 6,
      sides: "upper",
    });
    expect(Math.abs(found.probability - exact)).toBeLessThan(1e-12);
    const common = multivariateTUpperTail({ limit: -0.4, correlation: equicorrelated(3, 0.3), df: 6, sides: "upper" });
    const inside = multivariateTProbability({
      lower: [none, none, none],
      upper: [-0.4, -0.4, -0.4],
      correlation: equicorrelated(3, 0.3),
      df: 6,
    });
    expect(Math.abs(common.probability + inside.probability - 1)).toBeLessThan(1e-11);
  });
});

describe("equicoordinate quantiles", () => {
  it("invert the tail, by every route", () => {
    for (const [correlation, df, p] of [
      [equicorrelated(4, 0.5), 14, 0.05],
      [pairs([6, 6, 6, 6]), 20, 0.01],
      [pairs([3, 8, 5]), 13, 0.1],
      [pairs([3, 8, 5, 9]), normal, 0.05],
      [equicorrelated(3, -0.3), 7, 0.2],
    ] as const) {
      for (const sides of ["two-sided", "upper"] as const) {
        const { value } = numeric.equicoordinateQuantile({ p, correlation, df, sides });
        const back = multivariateTUpperTail({ limit: value, correlation, df, sides }).probability;
        expect(Math.abs(back / p - 1), `${sides} ${df}`).toBeLessThan(1e-9);
      }
    }
  });

  it("on a lattice within the reported error of the studentized range", () => {
    // recognised as balanced only when exactly so
    const correlation = pairs([5, 5, 5, 5, 5 + 1e-7]);
    for (const p of [0.05, 0.001]) {
      const exact = numeric.studentizedRangeUpperQuantile(p, 5, 20) / Math.SQRT2;
      const found = numeric.equicoordinateQuantile({
        p,
        correlation,
        df: 20,
        absoluteError: 1e-3,
        mostEvaluations: 1e5,
      });
      expect(found.method).toContain("lattice");
      expect(Math.abs(found.value - exact)).toBeLessThan(found.error);
    }
  });
});

describe("arguments out of domain", () => {
  it.each([
    ["q", () => numeric.studentizedRangeUpperTail(-1, 3, 5)],
    ["means", () => numeric.studentizedRangeUpperTail(1, 1, 5)],
    ["means", () => numeric.studentizedRangeUpperTail(1, 2.5, 5)],
    ["df", () => numeric.studentizedRangeUpperTail(1, 3, 0)],
    ["p", () => numeric.studentizedRangeUpperQuantile(1, 3, 5)],
    ["loadings", () => numeric.dunnettUpperTail({ loadings: [1], value: 1, df: 5 })],
    ["sizes", () => numeric.dunnettUpperTail({ sizes: { control: 0, treatments: [3] }, value: 1, df: 5 })],
    ["correlation", () => numeric.dunnettUpperTail({ correlation: -0.1, comparisons: 2, value: 1, df: 5 })],
    ["matrix", () => multivariateTUpperTail({ limit: 1, correlation: equicorrelated(5, -0.5), df: 5 })],
    ["correlation", () => multivariateTUpperTail({ limit: 1, correlation: [[2]], df: 5 })],
    ["limit", () => multivariateTUpperTail({ limit: [1, 2, 3], correlation: equicorrelated(2, 0), df: 5 })],
    ["lower", () => multivariateTProbability({ lower: [1], upper: [0], correlation: [[1]], df: 5 })],
    ["means", () => multivariateTProbability({ lower: [0], upper: [1], correlation: [[1]], df: 5, means: [normal] })],
  ] as const)("%s is named", (argument, compute) => {
    expect(compute).toThrow(numeric.DomainError);
    try {
      compute();
    } catch (error) {
      expect((error as numeric.DomainError).argument).toBe(argument);
    }
  });
});

describe("lattice rules", () => {
  it("integrate a smooth periodic product exactly to many digits, better with more points", () => {
    let before = 1;
    for (const { points, vector } of latticeRules.filter((_, i) => i % 2 === 0 && i < 10)) {
      let sum = 0;
      for (let k = 0; k < points; k++) {
        let product = 1;
        for (let d = 0; d < 4; d++) {
          const x = ((k * vector[d]!) / points) % 1;
          product *= 1 + 2 * (x * x - x + 1 / 6);
        }
        sum += product;
      }
      const error = Math.abs(sum / points - 1);
      expect(error).toBeLessThan(before);
      before = error / 2;
    }
    expect(before).toBeLessThan(1e-5);
  });
});
