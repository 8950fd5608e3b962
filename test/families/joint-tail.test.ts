import { describe, expect, it } from "vitest";
import { jointUpperTail } from "../../src/families/joint-tail.ts";
import { silentWatch } from "../../src/host/index.ts";
import { studentizedRangeUpperTail } from "../../src/numeric/index.ts";
import { allPairs, contrastCovariance, correlationOf, testRandom } from "./problems.ts";
import { tailByDirections } from "./spherical.ts";

describe("joint tails of sets that are no product", () => {
  it("agree with midpoint rules over circle and sphere, of any sign and side", () => {
    const random = testRandom(81);
    for (let k = 0; k < 8; k++) {
      const means = 3 + (k % 2);
      const weights = allPairs(means);
      const correlation = correlationOf(
        contrastCovariance(
          weights,
          weights[0]!.map(() => 0.1 + random()),
        ),
      );
      const sides = k % 3 === 0 ? "upper" : "two-sided";
      const limit = 1.5 + 2 * random();
      const df = k % 4 === 0 ? Number.POSITIVE_INFINITY : 3 + 30 * random();
      const { p } = jointUpperTail({ correlation, df, sides, limit, watch: silentWatch });
      const wanted = tailByDirections(correlation, df, sides, limit, means === 3 ? 4000 : 900);
      // The midpoint rule is second order: 900 directions around the sphere leave below 1e-5 (300 left 3e-5).
      expect(Math.abs(p - wanted), `case ${k}`).toBeLessThan(means === 3 ? 1e-7 : 1e-5);
    }
  });

  it("lie within their stated error of the studentized range for all pairs of 4 to 8 means", () => {
    for (const means of [4, 5, 6, 8])
      for (const limit of [2.5, 3.2, 4.5]) {
        const correlation = correlationOf(contrastCovariance(allPairs(means), new Array(means).fill(1)));
        const { p, error } = jointUpperTail({ correlation, df: 40, sides: "two-sided", limit, watch: silentWatch });
        expect(Math.abs(p - studentizedRangeUpperTail(limit * Math.SQRT2, means, 40))).toBeLessThan(error);
        expect(error).toBeLessThan(1e-3);
      }
  });

  it("one-sided limits below zero: missed only when all lie below", () => {
    // Two uncorrelated normal statistics: 1 - P(Z < -1)^2; three contrasts of rank 2 summing to zero always reach zero.
    const pair = [
      [1, 0],
      [0, 1],
    ];
    const { p } = jointUpperTail({
      correlation: pair,
      df: Number.POSITIVE_INFINITY,
      sides: "upper",
      limit: -1,
      watch: silentWatch,
    });
    expect(p).toBeCloseTo(1 - 0.15865525393145707 ** 2, 12);
    const circle = [
      [1, -0.5, -0.5],
      [-0.5, 1, -0.5],
      [-0.5, -0.5, 1],
    ];
    expect(
      jointUpperTail({ correlation: circle, df: 10, sides: "upper", limit: -0.5, watch: silentWatch }).p,
    ).toBeCloseTo(1, 12);
  });

  it("a rough tail lies within its stated error of the full one", () => {
    const random = testRandom(82);
    for (let k = 0; k < 20; k++) {
      const correlation = correlationOf(
        contrastCovariance(
          allPairs(4),
          [1, 2, 3, 4].map(() => 0.1 + random()),
        ),
      );
      const it = {
        correlation,
        df: Number.POSITIVE_INFINITY,
        sides: "two-sided",
        limit: 2 + random(),
        watch: silentWatch,
      } as const;
      const rough = jointUpperTail({ ...it, roughly: true });
      expect(Math.abs(rough.p - jointUpperTail(it).p)).toBeLessThan(rough.error);
    }
  });
});
