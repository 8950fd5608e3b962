import type { CellStatistics, ModelData } from "../../design/types.ts";
import { DomainError } from "../../numeric/index.ts";
import { addTo, type CompensatedSum, newSum, totalOf } from "./compensated-sum.ts";

/**
 * Count, mean and sum of squared deviations of each cell, in two compensated passes over the offsets. An empty cell has
 * n 0, mean 0, sum of squares 0.
 *
 * @throws DomainError when an offset is not finite or a cell index is outside the design
 * @source two-pass with correction: chan-golub-leveque-1983 (Am. Stat. 37, 242-247)
 */
export function cellStatistics(data: Pick<ModelData, "rows" | "response" | "cells" | "cellCount">): CellStatistics {
  const { offsets, center } = data.response;
  const n = new Float64Array(data.cellCount);
  const sums = Array.from({ length: data.cellCount }, newSum);
  for (let row = 0; row < data.rows; row++) {
    const cell = data.cells[row]!;
    const value = offsets[row]!;
    if (!Number.isFinite(value)) throw new DomainError(`response in row ${row + 1}`, value, "a finite number");
    if (!(cell >= 0 && cell < data.cellCount)) {
      throw new DomainError(`cell of row ${row + 1}`, cell, `0 to ${data.cellCount - 1}`);
    }
    n[cell]!++;
    addTo(sums[cell]!, value);
  }
  const mean = n.map((count, cell) => (count === 0 ? 0 : totalOf(sums[cell]!) / count));
  const squares = Array.from({ length: data.cellCount }, newSum);
  const rest = Array.from({ length: data.cellCount }, newSum);
  for (let row = 0; row < data.rows; row++) {
    const cell = data.cells[row]!;
    const deviation = offsets[row]! - mean[cell]!;
    addTo(squares[cell]!, deviation * deviation);
    addTo(rest[cell]!, deviation);
  }
  // The deviations from a rounded mean do not sum to zero exactly; their square is what the rounding added.
  const sumOfSquares = n.map((count, cell) =>
    count < 2 ? 0 : Math.max(0, totalOf(squares[cell]!) - totalOf(rest[cell]!) ** 2 / count),
  );
  return { center, n, mean, sumOfSquares };
}

/**
 * Statistics of coarser cells from those of finer ones, without the rows.
 * @param cellOf coarser cell of each finer cell, for instance from `coarserCells` of the design room
 * @param count number of coarser cells
 */
export function mergedCells(statistics: CellStatistics, cellOf: ArrayLike<number>, count: number): CellStatistics {
  const n = new Float64Array(count);
  const sums: CompensatedSum[] = Array.from({ length: count }, newSum);
  for (let cell = 0; cell < statistics.n.length; cell++) {
    n[cellOf[cell]!]! += statistics.n[cell]!;
    addTo(sums[cellOf[cell]!]!, statistics.n[cell]! * statistics.mean[cell]!);
  }
  const mean = n.map((size, cell) => (size === 0 ? 0 : totalOf(sums[cell]!) / size));
  const squares: CompensatedSum[] = Array.from({ length: count }, newSum);
  for (let cell = 0; cell < statistics.n.length; cell++) {
    if (statistics.n[cell] === 0) continue;
    const coarse = cellOf[cell]!;
    addTo(squares[coarse]!, statistics.sumOfSquares[cell]!);
    addTo(squares[coarse]!, statistics.n[cell]! * (statistics.mean[cell]! - mean[coarse]!) ** 2);
  }
  return { center: statistics.center, n, mean, sumOfSquares: Float64Array.from(squares, totalOf) };
}

/** What is left within cells: the error of every between-subjects analysis. */
export interface ErrorTerm {
  readonly df: number;
  readonly sumOfSquares: number;
  readonly meanSquare: number;
}

/** Observations in all cells. */
export function observationsOf(statistics: CellStatistics): number {
  return statistics.n.reduce((sum, size) => sum + size, 0);
}

/** Cells that hold at least one observation. */
export function filledCells(statistics: CellStatistics): number[] {
  return Array.from(statistics.n.keys()).filter((cell) => statistics.n[cell]! > 0);
}

/** Pooled error of the cells; df may be 0, then `meanSquare` is 0 and means nothing. */
export function pooledError(statistics: CellStatistics): ErrorTerm {
  const total = newSum();
  for (const value of statistics.sumOfSquares) addTo(total, value);
  const df = observationsOf(statistics) - filledCells(statistics).length;
  const sumOfSquares = totalOf(total);
  return { df, sumOfSquares, meanSquare: df > 0 ? sumOfSquares / df : 0 };
}

/**
 * Sum of squares that stands for no variance at all: what rounding of the recorded values can leave.
 * Values are held to about 1e-16 of their size after centring, so that a spread of 1e-14 of it is rounding.
 */
export function roundingFloor(statistics: CellStatistics): number {
  const largest = statistics.mean.reduce((most, mean) => Math.max(most, Math.abs(mean)), 0);
  return observationsOf(statistics) * (1e-14 * largest) ** 2;
}
