import type { ModelData } from "../../design/types.ts";
import type { CovarianceStructure } from "./covariance-structure.ts";
import type { FixedPart } from "./fixed-part.ts";

/** Rows alike in cell, levels and covariates as one: their mean, their number, and what varies among them. */
export interface CollapsedRows {
  readonly count: number;
  /** Collapsed row of each row. */
  readonly of: Int32Array;
  /** A row of the data behind each collapsed row. */
  readonly representative: Int32Array;
  readonly size: Float64Array;
  /** Mean of the responses' offsets minus the mean of the row's cell. */
  readonly mean: Float64Array;
  /** Means of the filled cells, per fixed column (0 for covariates): what was taken out. */
  readonly shift: Float64Array;
  /** Per residual stratum (one where there is none): df and sum of squares within collapsed rows. */
  readonly pureDf: Float64Array;
  readonly pureSum: Float64Array;
  /** Variance around the cells' means. */
  readonly variance: number;
}

/** Numbers the pairs (code, level) that occur. */
function pairCodes(
  codes: Int32Array,
  count: number,
  levels: Int32Array,
  width: number,
): { codes: Int32Array; count: number } {
  const next = new Int32Array(codes.length);
  let used = 0;
  if (count * width <= 8_000_000) {
    const seen = new Int32Array(count * width).fill(-1);
    for (let row = 0; row < codes.length; row++) {
      const key = codes[row]! * width + levels[row]!;
      if (seen[key] === -1) seen[key] = used++;
      next[row] = seen[key]!;
    }
    return { codes: next, count: used };
  }
  const seen = new Map<number, number>();
  for (let row = 0; row < codes.length; row++) {
    const key = codes[row]! * width + levels[row]!;
    let code = seen.get(key);
    if (code === undefined) {
      code = used++;
      seen.set(key, code);
    }
    next[row] = code;
  }
  return { codes: next, count: used };
}

function groupsOfRows(
  data: ModelData,
  structure: CovarianceStructure,
  fixed: FixedPart,
): { codes: Int32Array; count: number } {
  let grouped = { codes: data.cells, count: data.cellCount };
  for (const term of structure.terms) grouped = pairCodes(grouped.codes, grouped.count, term.codes, term.levels);
  // Covariates (and the slopes that stand on them) must agree too; otherwise every row stands for itself.
  const first = new Int32Array(grouped.count).fill(-1);
  for (let row = 0; row < data.rows; row++) {
    const code = grouped.codes[row]!;
    if (first[code] === -1) first[code] = row;
    else if (fixed.covariates.some(({ values }) => values[row] !== values[first[code]!])) {
      return { codes: Int32Array.from({ length: data.rows }, (_, index) => index), count: data.rows };
    }
  }
  // Numbered anew, since codes of cells need not all occur.
  const number = new Int32Array(grouped.count).fill(-1);
  const codes = new Int32Array(data.rows);
  let count = 0;
  for (let row = 0; row < data.rows; row++) {
    const code = grouped.codes[row]!;
    if (number[code] === -1) number[code] = count++;
    codes[row] = number[code]!;
  }
  return { codes, count };
}

/** Collapses the rows and takes the cells' means out of them. */
export function collapseRows(data: ModelData, structure: CovarianceStructure, fixed: FixedPart): CollapsedRows {
  const { offsets } = data.response;
  const { codes, count } = groupsOfRows(data, structure, fixed);
  const cellSize = new Float64Array(fixed.cellColumns);
  const shift = new Float64Array(fixed.columns);
  for (let row = 0; row < data.rows; row++) {
    const column = fixed.columnOfCell[data.cells[row]!]!;
    cellSize[column]!++;
    shift[column]! += offsets[row]!;
  }
  for (let column = 0; column < fixed.cellColumns; column++) shift[column]! /= cellSize[column]!;
  const size = new Float64Array(count);
  const mean = new Float64Array(count);
  const representative = new Int32Array(count);
  for (let row = 0; row < data.rows; row++) {
    const code = codes[row]!;
    if (size[code] === 0) representative[code] = row;
    size[code]!++;
    mean[code]! += offsets[row]! - shift[fixed.columnOfCell[data.cells[row]!]!]!;
  }
  for (let code = 0; code < count; code++) mean[code]! /= size[code]!;
  const strata = Math.max(1, structure.residual.strata);
  const pureDf = new Float64Array(strata);
  const pureSum = new Float64Array(strata);
  let around = 0;
  for (let row = 0; row < data.rows; row++) {
    const stratum = structure.residual.stratumOf?.[row] ?? 0;
    const deviation = offsets[row]! - shift[fixed.columnOfCell[data.cells[row]!]!]!;
    pureDf[stratum]!++;
    pureSum[stratum]! += (deviation - mean[codes[row]!]!) ** 2;
    around += deviation ** 2;
  }
  for (let code = 0; code < count; code++) pureDf[structure.residual.stratumOf?.[representative[code]!] ?? 0]!--;
  return {
    count,
    of: codes,
    representative,
    size,
    mean,
    shift,
    pureDf,
    pureSum,
    variance: around / Math.max(1, data.rows - fixed.cellColumns),
  };
}
