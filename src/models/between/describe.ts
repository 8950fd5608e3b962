import type { CellStatistics, ModelData } from "../../design/types.ts";
import { DomainError, tUpperQuantile } from "../../numeric/index.ts";

/** Description of one cell in the response's unit; what one or no observation cannot tell is null. */
export interface CellDescription {
  readonly cell: number;
  readonly n: number;
  readonly mean: number | null;
  readonly sd: number | null;
  readonly standardError: number | null;
  readonly lower: number | null;
  readonly upper: number | null;
}

/**
 * Mean, spread, standard error and t interval of every cell, each from its own observations.
 * @param level of the interval, 0 < level < 1
 */
export function describeCells(statistics: CellStatistics, level: number): CellDescription[] {
  if (!(level > 0 && level < 1)) throw new DomainError("level", level, "0 < level < 1");
  return Array.from(statistics.n, (n, cell): CellDescription => {
    if (n === 0) return { cell, n, mean: null, sd: null, standardError: null, lower: null, upper: null };
    const mean = statistics.center + statistics.mean[cell]!;
    if (n === 1) return { cell, n, mean, sd: null, standardError: null, lower: null, upper: null };
    const sd = Math.sqrt(statistics.sumOfSquares[cell]! / (n - 1));
    const standardError = sd / Math.sqrt(n);
    const half = tUpperQuantile((1 - level) / 2, n - 1) * standardError;
    return { cell, n, mean, sd, standardError, lower: mean - half, upper: mean + half };
  });
}

export interface CellQuartiles {
  readonly median: number | null;
  readonly lowerQuartile: number | null;
  readonly upperQuartile: number | null;
}

/**
 * Sample quantile by their definition 8: positions (n + 1/3) p + 1/3, approximately median-unbiased whatever the distribution.
 * @param sorted ascending, at least one value
 * @param p 0 <= p <= 1
 * @source hyndman-fan-1996 (Am. Stat. 50, 361-365), definition 8, the one they recommend
 */
export function sampleQuantile(sorted: ArrayLike<number>, p: number): number {
  if (sorted.length === 0) throw new DomainError("sorted", "empty", "at least one value");
  if (!(p >= 0 && p <= 1)) throw new DomainError("p", p, "0 <= p <= 1");
  const position = (sorted.length + 1 / 3) * p + 1 / 3;
  const below = Math.floor(position + 4 * Number.EPSILON);
  const share = Math.max(0, position - below);
  const at = (index: number) => sorted[Math.min(sorted.length, Math.max(1, index)) - 1]!;
  return share < 4 * Number.EPSILON ? at(below) : at(below) + share * (at(below + 1) - at(below));
}

/** Median and quartiles of every cell (definition of `sampleQuantile`), in the response's unit. */
export function cellQuartiles(data: Pick<ModelData, "rows" | "response" | "cells" | "cellCount">): CellQuartiles[] {
  const values = Array.from({ length: data.cellCount }, (): number[] => []);
  for (let row = 0; row < data.rows; row++) values[data.cells[row]!]!.push(data.response.offsets[row]!);
  return values.map((list) => {
    if (list.length === 0) return { median: null, lowerQuartile: null, upperQuartile: null };
    const sorted = Float64Array.from(list).sort();
    const quantile = (p: number) => data.response.center + sampleQuantile(sorted, p);
    return { median: quantile(0.5), lowerQuartile: quantile(0.25), upperQuartile: quantile(0.75) };
  });
}
