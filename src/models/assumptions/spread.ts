import type { ModelData } from "../../design/types.ts";
import { fUpperTail } from "../../numeric/index.ts";
import { sampleQuantile } from "../between/describe.ts";
import { exactSum } from "../between/compensated-sum.ts";

export interface SpreadTest {
  readonly value: number;
  readonly df1: number;
  readonly df2: number;
  readonly p: number;
}

/** Values of each cell that has at least two, since the spread of a single one is unknown. */
export function valuesByCell(data: Pick<ModelData, "rows" | "response" | "cells" | "cellCount">): number[][] {
  const values = Array.from({ length: data.cellCount }, (): number[] => []);
  for (let row = 0; row < data.rows; row++) values[data.cells[row]!]!.push(data.response.offsets[row]!);
  return values;
}

/**
 * Analysis of variance of the distances from each group's centre: do the groups spread alike?
 * - "median": Brown and Forsythe's form, which stands non-normal data
 * - "mean": Levene's
 *
 * @param groups values of each group; groups with fewer than two are left out
 * @returns null where fewer than two groups are left, or the distances do not vary within groups
 * @source levene-1960 (in Olkin, Contributions to Probability and Statistics); brown-forsythe-1974b (J. Am. Stat. Assoc. 69, 364-367)
 */
export function spreadTest(groups: readonly (readonly number[])[], centre: "median" | "mean"): SpreadTest | null {
  const used = groups.filter((values) => values.length > 1);
  const distances = used.map((values) => {
    const middle =
      centre === "mean" ? exactSum(values) / values.length : sampleQuantile(Float64Array.from(values).sort(), 0.5);
    return values.map((value) => Math.abs(value - middle));
  });
  const count = distances.reduce((sum, values) => sum + values.length, 0);
  const df1 = used.length - 1;
  const df2 = count - used.length;
  if (df1 < 1 || df2 < 1) return null;
  const means = distances.map((values) => exactSum(values) / values.length);
  const grand = exactSum(distances.flat()) / count;
  const between = exactSum(means.map((mean, group) => distances[group]!.length * (mean - grand) ** 2));
  const within = exactSum(distances.flatMap((values, group) => values.map((value) => (value - means[group]!) ** 2)));
  if (!(within > 1e-24 * count * grand ** 2)) return null;
  const value = between / df1 / (within / df2);
  return { value, df1, df2, p: fUpperTail(value, df1, df2) };
}
