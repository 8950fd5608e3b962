import { readFileSync } from "node:fs";
import { describe, expect, it } from "vitest";
import { cellStatistics, oneWayAnalysis } from "../../../src/models/index.ts";
import { exactData } from "./between-data.ts";

const folder = new URL("../../reference/nist-strd/", import.meta.url);
const certified = JSON.parse(readFileSync(new URL("certified.json", folder), "utf8")) as Record<
  string,
  { kind: string; file: string; certified: Record<string, string>; exact: Record<string, string> }
>;

/** Digits that agree: minus the logarithm of the relative error, 15 where there is none. */
function agreeingDigits(value: number, wanted: string): number {
  const error = Math.abs(value - Number(wanted)) / Math.abs(Number(wanted));
  return error === 0 ? 15 : Math.min(15, -Math.log10(error));
}

describe("one-way analysis of variance on NIST StRD (certified values)", () => {
  const sets = Object.entries(certified).filter(([, set]) => set.kind === "one-way analysis of variance");
  it.each(sets)("%s agrees to 13 digits in F, sums of squares, mean squares, R squared and residual sd", (_, set) => {
    const lines = readFileSync(new URL(set.file, folder), "utf8").trim().split("\n").slice(1);
    const rows = lines.map((line) => line.split(",") as [string, string]);
    const analysis = oneWayAnalysis(cellStatistics(exactData(rows)));
    const effect = analysis.effects[0]!;
    const found: Record<string, number> = {
      between_ss: effect.sumOfSquares!,
      between_ms: effect.meanSquare!,
      f: effect.value!,
      within_ss: analysis.error!.sumOfSquares,
      within_ms: analysis.error!.meanSquare,
      r_squared: analysis.rSquared!,
      residual_sd: analysis.residualSd!,
    };
    expect(effect.df1).toBe(Number(set.certified.between_df));
    expect(effect.df2).toBe(Number(set.certified.within_df));
    for (const [name, value] of Object.entries(found)) {
      expect(agreeingDigits(value, set.exact[name]!), name).toBeGreaterThanOrEqual(13);
      expect(agreeingDigits(value, set.certified[name]!), name).toBeGreaterThanOrEqual(13);
    }
  });
  it("the largest of the simulated sets, rebuilt by their published rule, agree too (2,001 per treatment; F 2001, recalled)", () => {
    // Treatment means .4, .3, .5, .3, .5 ...; the first value of each, then .1 below and .1 above in turn.
    for (const leading of ["1", "1000000", "1000000000000"]) {
      const rows = Array.from({ length: 9 * 2001 }, (_, row): readonly [string, string] => {
        const treatment = Math.floor(row / 2001);
        const place = row % 2001;
        const level = treatment === 0 ? 4 : treatment % 2 === 1 ? 3 : 5;
        const tenth = level + (place === 0 ? 0 : place % 2 === 1 ? -1 : 1);
        return [`${treatment}`, `${leading}.${tenth}`];
      });
      const analysis = oneWayAnalysis(cellStatistics(exactData(rows)));
      expect(agreeingDigits(analysis.effects[0]!.value!, "2001")).toBeGreaterThanOrEqual(13);
      expect(agreeingDigits(analysis.effects[0]!.sumOfSquares!, "160.08")).toBeGreaterThanOrEqual(13);
      expect(agreeingDigits(analysis.error!.sumOfSquares, "180")).toBeGreaterThanOrEqual(13);
      expect(agreeingDigits(analysis.residualSd!, "0.1")).toBeGreaterThanOrEqual(13);
    }
  });
  it("has sets of every difficulty", () => expect(sets.length).toBeGreaterThanOrEqual(8));
});
