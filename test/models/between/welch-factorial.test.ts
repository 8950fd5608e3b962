import { describe, expect, it } from "vitest";
import type { Contrast } from "../../../src/design/types.ts";
import { betweenContrasts, cellStatistics, welchAnalysis, welchFactorialAnalysis } from "../../../src/models/index.ts";
import { fUpperTail } from "../../../src/numeric/index.ts";
import { factorData, groupData } from "./between-data.ts";
import { expectClose } from "./close.ts";
import { betweenFixtures } from "./fixtures.ts";

/** Normal variates for a simulation in a test, from a small public-domain generator (mulberry32) and Box & Muller 1958. */
function normalSource(seed: number) {
  let state = seed >>> 0;
  const uniform = () => {
    state = (state + 0x6d2b79f5) >>> 0;
    let value = Math.imul(state ^ (state >>> 15), state | 1);
    value ^= value + Math.imul(value ^ (value >>> 7), value | 61);
    return (((value ^ (value >>> 14)) >>> 0) + 0.5) / 2 ** 32;
  };
  return () => Math.sqrt(-2 * Math.log(uniform())) * Math.cos(2 * Math.PI * uniform());
}

describe("effects of several factors with a variance per cell (Johansen 1980)", () => {
  it("with one factor it is Welch's test (itself checked against NumPy)", () => {
    for (const it of betweenFixtures.groups) {
      const data = groupData(
        it.groups.flatMap((values, group) => values.map(() => `g${group}`)),
        it.groups.flat(),
      );
      const statistics = cellStatistics(data);
      const effect = welchFactorialAnalysis(statistics, data.factors).effects[0]!;
      const welch = welchAnalysis(statistics).effects[0]!;
      expectClose(effect.value, welch.value!, 1e-11);
      expectClose(effect.df2, welch.df2!, 1e-11);
    }
  });
  it("effects with one contrast are squares of Welch's t with its df", () => {
    const a = ["x", "x", "x", "y", "y", "x", "x", "y", "y", "y", "y"];
    const b = ["p", "p", "p", "p", "p", "q", "q", "q", "q", "q", "q"];
    const data = factorData({ a, b }, [1, 2, 4, 6, 9, 3, 3.5, 8, 7, 1, 12]);
    const contrasts: Contrast[] = [
      { name: "a", weights: Float64Array.from([-0.5, -0.5, 0.5, 0.5]) },
      { name: "b", weights: Float64Array.from([-0.5, 0.5, -0.5, 0.5]) },
      { name: "a x b", weights: Float64Array.from([1, -1, -1, 1]) },
    ];
    const wanted = betweenContrasts({ data, contrasts, variances: "unequal" });
    for (const [index, effect] of welchFactorialAnalysis(cellStatistics(data), data.factors).effects.entries()) {
      expect(effect.effect).toBe(contrasts[index]!.name);
      expectClose(effect.value, (wanted.estimates[index]! / wanted.standardErrors[index]!) ** 2, 1e-11);
      expectClose(effect.df2, wanted.df[index]!, 1e-11);
    }
  });
  it("holds its level where small cells have large spread (4,000 simulated studies, seed 5; four Monte Carlo errors)", () => {
    const normal = normalSource(5);
    const sizes = [6, 14, 8, 10, 7, 15];
    const spreads = [4, 1, 3, 1.5, 3, 1];
    const factors = [
      { name: "a", levels: ["1", "2"] },
      { name: "b", levels: ["1", "2", "3"] },
    ];
    const studies = 4000;
    const rejected = [0, 0, 0];
    for (let study = 0; study < studies; study++) {
      const n = Float64Array.from(sizes);
      const mean = new Float64Array(6);
      const sumOfSquares = new Float64Array(6);
      for (let cell = 0; cell < 6; cell++) {
        const values = Array.from({ length: sizes[cell]! }, () => spreads[cell]! * normal());
        mean[cell] = values.reduce((sum, value) => sum + value, 0) / sizes[cell]!;
        sumOfSquares[cell] = values.reduce((sum, value) => sum + (value - mean[cell]!) ** 2, 0);
      }
      const { effects } = welchFactorialAnalysis({ center: 0, n, mean, sumOfSquares }, factors);
      for (const [index, effect] of effects.entries()) {
        if (fUpperTail(effect.value!, effect.df1!, effect.df2!) < 0.05) rejected[index]!++;
      }
    }
    const tolerance = 4 * Math.sqrt((0.05 * 0.95) / studies);
    for (const count of rejected) expect(Math.abs(count / studies - 0.05)).toBeLessThan(tolerance);
  });
});
