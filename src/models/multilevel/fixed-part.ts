import type { ModelData } from "../../design/types.ts";
import { estimablePart } from "../estimable.ts";
import { ModelError } from "../model-error.ts";
import { effectBasis, subsets } from "../within/orthonormal.ts";
import { choleskyInPlace } from "./block-algebra.ts";

/**
 * Fixed effects as one mean per filled cell, then one slope per covariate. Every effect and comparison is a linear
 * combination of them, so that omnibus and comparisons ask about the same means.
 */
export interface FixedPart {
  readonly columns: number;
  readonly cellColumns: number;
  /** Column of each cell; -1 for an empty one. */
  readonly columnOfCell: Int32Array;
  readonly empty: readonly boolean[];
  readonly covariates: readonly { readonly name: string; readonly values: Float64Array }[];
}

/** A hypothesis: columns x df, flat row-major; the estimates' combinations that it holds at zero. */
export interface Hypothesis {
  readonly effect: string;
  readonly df: number;
  /** df before empty cells took their share. */
  readonly wantedDf: number;
  readonly weights: Float64Array;
}

/**
 * @throws ModelError "rank-deficient" where a covariate is a combination of the cells and the other covariates
 */
export function fixedPart(data: ModelData): FixedPart {
  const rowsOfCell = new Int32Array(data.cellCount);
  for (const cell of data.cells) rowsOfCell[cell]!++;
  const columnOfCell = new Int32Array(data.cellCount).fill(-1);
  let cellColumns = 0;
  for (let cell = 0; cell < data.cellCount; cell++) if (rowsOfCell[cell]! > 0) columnOfCell[cell] = cellColumns++;
  refuseDependentCovariates(data, rowsOfCell);
  return {
    columns: cellColumns + data.covariates.length,
    cellColumns,
    columnOfCell,
    empty: Array.from(rowsOfCell, (rows) => rows === 0),
    covariates: data.covariates.map(({ name, values }) => ({ name, values })),
  };
}

/** What is left of each covariate within cells must not vanish, nor depend on the others. */
function refuseDependentCovariates(data: ModelData, rowsOfCell: Int32Array): void {
  const count = data.covariates.length;
  if (count === 0) return;
  const inside = data.covariates.map(({ values }) => {
    const mean = new Float64Array(data.cellCount);
    for (let row = 0; row < data.rows; row++) mean[data.cells[row]!]! += values[row]! / rowsOfCell[data.cells[row]!]!;
    return values.map((value, row) => value - mean[data.cells[row]!]!);
  });
  const gram = new Float64Array(count * count);
  for (let i = 0; i < count; i++) {
    for (let j = 0; j < count; j++) {
      for (let row = 0; row < data.rows; row++) gram[i * count + j]! += inside[i]![row]! * inside[j]![row]!;
    }
  }
  const vanished = data.covariates.findIndex(({ values }, i) => {
    const whole = values.reduce((sum, value) => sum + value * value, 0);
    return !(gram[i * count + i]! > 1e-20 * whole);
  });
  if (vanished < 0 && !Number.isNaN(choleskyInPlace(gram, count, 1e-10))) return;
  const named = vanished < 0 ? "A covariate" : `"${data.covariates[vanished]!.name}"`;
  throw new ModelError(
    "rank-deficient",
    `${named} can be computed from the factors or from another covariate: their effects cannot be told apart.`,
    "Leave one of them out.",
  );
}

/**
 * One hypothesis per effect of the factors (main effects first) and per covariate. Effects that empty cells leave without any
 * estimable part have df 0.
 */
export function effectHypotheses(data: ModelData, fixed: FixedPart): Hypothesis[] {
  const levels = data.factors.map((factor) => factor.levels.length);
  const ofFactors = subsets(levels.length).flatMap((flags) => {
    const wanted = effectBasis(levels, flags);
    const wantedDf = wanted[0]!.length;
    if (wantedDf === 0) return [];
    const part = estimablePart(wanted, fixed.empty);
    const df = part[0]!.length;
    const weights = new Float64Array(fixed.columns * df);
    for (const [cell, row] of part.entries()) {
      const column = fixed.columnOfCell[cell]!;
      if (column >= 0) weights.set(row, column * df);
    }
    const effect = data.factors.flatMap((factor, index) => (flags[index] === true ? [factor.name] : [])).join(" x ");
    return [{ effect, df, wantedDf, weights }];
  });
  const ofCovariates = fixed.covariates.map(({ name }, index) => {
    const weights = new Float64Array(fixed.columns);
    weights[fixed.cellColumns + index] = 1;
    return { effect: name, df: 1, wantedDf: 1, weights };
  });
  return [...ofFactors, ...ofCovariates];
}

/**
 * Basis of the estimates that satisfy a hypothesis: columns x (columns - df), flat row-major, orthonormal.
 * Built by completing an orthonormal basis of the hypothesis (Gram-Schmidt, twice for accuracy).
 */
export function nullBasis(hypothesis: Hypothesis, columns: number): Float64Array {
  const vectors: Float64Array[] = [];
  const orthogonalise = (vector: Float64Array) => {
    for (let pass = 0; pass < 2; pass++) {
      for (const other of vectors) {
        let product = 0;
        for (let i = 0; i < columns; i++) product += other[i]! * vector[i]!;
        for (let i = 0; i < columns; i++) vector[i]! -= product * other[i]!;
      }
    }
    const length = Math.sqrt(vector.reduce((sum, value) => sum + value * value, 0));
    return length;
  };
  const push = (vector: Float64Array, length: number) => vectors.push(vector.map((value) => value / length));
  for (let column = 0; column < hypothesis.df; column++) {
    const vector = Float64Array.from(
      { length: columns },
      (_, row) => hypothesis.weights[row * hypothesis.df + column]!,
    );
    push(vector, orthogonalise(vector));
  }
  const rest = columns - hypothesis.df;
  // Unit vectors in the order of how much of them is still missing, so that none is nearly dependent.
  while (vectors.length < columns) {
    let best = 0;
    let most = -1;
    for (let unit = 0; unit < columns; unit++) {
      const left = 1 - vectors.reduce((sum, vector) => sum + vector[unit]! ** 2, 0);
      if (left > most) {
        most = left;
        best = unit;
      }
    }
    const vector = new Float64Array(columns);
    vector[best] = 1;
    push(vector, orthogonalise(vector));
  }
  const basis = new Float64Array(columns * rest);
  for (let column = 0; column < rest; column++) {
    for (let row = 0; row < columns; row++) basis[row * rest + column] = vectors[hypothesis.df + column]![row]!;
  }
  return basis;
}
