import type { CellStatistics } from "../design/types.ts";
import { silentWatch, type Watch } from "../host/index.ts";
import type { NumberColumn } from "./types.ts";

/** Rows between two looks at the watch: well under 20 ms. */
const rowsPerLook = 1 << 18;

/**
 * Count, mean and sum of squared deviations of each cell, all of the column's offsets.
 *
 * Two passes: means by compensated summation (Neumaier 1974), then squared deviations from the cell's own mean, also
 * compensated, with the correction for what the mean's rounding left (Chan, Golub & LeVeque 1983, eq. 1.7).
 *
 * @param codes cell of each row, 0 <= code < cellCount; a negative code leaves the row out, as does a missing value
 * @returns arrays of length cellCount; mean and sum of squares are 0 where n is 0
 */
export function cellSums(
  column: Pick<NumberColumn, "center" | "offsets">,
  codes: Int32Array,
  cellCount: number,
  watch: Watch = silentWatch,
): CellStatistics {
  const { offsets } = column;
  const n = new Float64Array(cellCount);
  const mean = new Float64Array(cellCount);
  const lost = new Float64Array(cellCount);
  for (let row = 0; row < codes.length; row++) {
    if ((row & (rowsPerLook - 1)) === 0) watch.checkpoint();
    const cell = codes[row]!;
    const value = offsets[row]!;
    if (cell < 0 || Number.isNaN(value)) continue;
    n[cell]!++;
    const sum = mean[cell]!;
    const next = sum + value;
    lost[cell]! += Math.abs(sum) >= Math.abs(value) ? sum - next + value : value - next + sum;
    mean[cell] = next;
  }
  for (let cell = 0; cell < cellCount; cell++) mean[cell] = n[cell] === 0 ? 0 : (mean[cell]! + lost[cell]!) / n[cell]!;
  const squares = new Float64Array(cellCount);
  const residue = new Float64Array(cellCount);
  lost.fill(0);
  for (let row = 0; row < codes.length; row++) {
    if ((row & (rowsPerLook - 1)) === 0) watch.checkpoint();
    const cell = codes[row]!;
    const value = offsets[row]!;
    if (cell < 0 || Number.isNaN(value)) continue;
    const deviation = value - mean[cell]!;
    residue[cell]! += deviation;
    const square = deviation * deviation;
    const sum = squares[cell]!;
    const next = sum + square;
    lost[cell]! += sum >= square ? sum - next + square : square - next + sum;
    squares[cell] = next;
  }
  for (let cell = 0; cell < cellCount; cell++) {
    if (n[cell] === 0) continue;
    squares[cell] = Math.max(0, squares[cell]! + lost[cell]! - (residue[cell]! * residue[cell]!) / n[cell]!);
  }
  return { center: column.center, n, mean, sumOfSquares: squares };
}
