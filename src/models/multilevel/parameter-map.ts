import type { CovarianceStructure } from "./covariance-structure.ts";
import type { Engine } from "./engine.ts";

/**
 * How the search moves: free coordinates phi, and the covariance parameters theta they stand for. Single variances are their
 * own coordinate with a lower bound; a covariance matrix of several effects is written by its Cholesky factor, so that it
 * cannot leave the positive semidefinite ones.
 */
export interface ParameterMap {
  readonly size: number;
  /** Lower bound per coordinate; -Infinity where there is none. */
  readonly lower: Float64Array;
  readonly start: Float64Array;
  theta(phi: Float64Array): Float64Array;
  /** Derivative of theta by phi, parameters x size, flat row-major. */
  jacobian(phi: Float64Array): Float64Array;
  /**
   * The same coordinates a little inside: a covariance matrix that has lost a dimension is given some of it back, since its
   * Cholesky coordinates have no slope there and a search that starts from it cannot see whether it should leave.
   */
  inside(phi: Float64Array): Float64Array;
  /** Adds the curvature of theta itself: target += sum of slopes_k times the second derivatives of theta_k, size x size. */
  addCurvature(slopes: Float64Array, target: Float64Array): void;
}

/** Residual variances below this share of the data's variance mean that the model fits the rows exactly. */
export const residualFloor = 1e-10;

interface MatrixBlock {
  /** Index into theta of entry (row, column), column <= row. */
  readonly entries: readonly { readonly theta: number; readonly row: number; readonly column: number }[];
  readonly width: number;
}

/** Coordinates for the active parameters of an engine. */
export function parameterMap(engine: Engine, structure: CovarianceStructure, active: readonly number[]): ParameterMap {
  const singles: number[] = [];
  const matrices = new Map<number, MatrixBlock>();
  for (const index of active) {
    const parameter = engine.parameters[index]!;
    const term = parameter.kind === "random" ? structure.terms[parameter.term]! : null;
    if (parameter.kind === "residual" || term === null || !term.correlated || term.columns.length === 1) {
      singles.push(index);
      continue;
    }
    const block = matrices.get(parameter.term) ?? { entries: [], width: term.columns.length };
    matrices.set(parameter.term, {
      ...block,
      entries: [...block.entries, { theta: index, row: parameter.row, column: parameter.column }],
    });
  }
  const blocks = [...matrices.values()];
  const size = singles.length + blocks.reduce((sum, block) => sum + block.entries.length, 0);
  const lower = new Float64Array(size).fill(Number.NEGATIVE_INFINITY);
  const start = new Float64Array(size);
  const variance = engine.startingVariance;
  const parts = new Set(active.map((index) => partOf(engine, index))).size;
  for (const [at, index] of singles.entries()) {
    lower[at] = variance * (engine.parameters[index]!.kind === "residual" ? residualFloor : engine.varianceFloor);
    start[at] = variance / parts;
  }
  let offset = singles.length;
  const offsets = blocks.map((block) => {
    const own = offset;
    for (const [at, { row, column }] of block.entries.entries()) {
      if (row === column) start[own + at] = Math.sqrt(variance / parts) * matrixStart(engine, structure, block, row);
    }
    offset += block.entries.length;
    return own;
  });
  const factorEntry = (own: number, phi: Float64Array, row: number, column: number) =>
    column > row ? 0 : phi[own + (row * (row + 1)) / 2 + column]!;
  return {
    size,
    lower,
    start,
    theta(phi) {
      const theta = new Float64Array(engine.parameters.length);
      for (const [at, index] of singles.entries()) theta[index] = phi[at]!;
      for (const [b, block] of blocks.entries()) {
        for (const { theta: index, row, column } of block.entries) {
          let value = 0;
          for (let k = 0; k <= column; k++) {
            value += factorEntry(offsets[b]!, phi, row, k) * factorEntry(offsets[b]!, phi, column, k);
          }
          theta[index] = value;
        }
      }
      return theta;
    },
    jacobian(phi) {
      const jacobian = new Float64Array(engine.parameters.length * size);
      for (const [at, index] of singles.entries()) jacobian[index * size + at] = 1;
      for (const [b, block] of blocks.entries()) {
        const own = offsets[b]!;
        for (const { theta: index, row, column } of block.entries) {
          // d (L L')[row, column] / d L[row, k] = L[column, k], and the other way round.
          for (let k = 0; k <= column; k++) {
            jacobian[index * size + own + (row * (row + 1)) / 2 + k]! += factorEntry(own, phi, column, k);
            jacobian[index * size + own + (column * (column + 1)) / 2 + k]! += factorEntry(own, phi, row, k);
          }
        }
      }
      return jacobian;
    },
    inside(phi) {
      const moved = phi.slice();
      for (const [b, block] of blocks.entries()) {
        const own = offsets[b]!;
        for (let row = 0; row < block.width; row++) {
          let variance = 0;
          for (let k = 0; k <= row; k++) variance += factorEntry(own, phi, row, k) ** 2;
          const at = own + (row * (row + 1)) / 2 + row;
          if (phi[at]! ** 2 < 0.04 * variance) moved[at] = 0.2 * Math.sqrt(variance);
          else if (variance === 0) moved[at] = 0.2 * Math.abs(start[at]!);
        }
      }
      return moved;
    },
    addCurvature(slopes, target) {
      for (const [b, block] of blocks.entries()) {
        const own = offsets[b]!;
        for (const { theta: index, row, column } of block.entries) {
          for (let k = 0; k <= column; k++) {
            const left = own + (row * (row + 1)) / 2 + k;
            const right = own + (column * (column + 1)) / 2 + k;
            target[left * size + right]! += slopes[index]!;
            target[right * size + left]! += slopes[index]!;
          }
        }
      }
    },
  };
}

const partOf = (engine: Engine, index: number) => {
  const parameter = engine.parameters[index]!;
  return parameter.kind === "residual" ? -1 : parameter.term;
};

/** Slopes start in the unit of their covariate: one standard deviation of it moves as much as the intercept varies. */
function matrixStart(engine: Engine, structure: CovarianceStructure, block: MatrixBlock, row: number): number {
  const parameter = engine.parameters[block.entries[0]!.theta]!;
  const column = parameter.kind === "random" ? structure.terms[parameter.term]!.columns[row] : null;
  if (column === null || column === undefined) return 1;
  let squares = 0;
  let used = 0;
  for (const value of column) {
    if (value === 0) continue;
    squares += value * value;
    used++;
  }
  return used === 0 ? 1 : 1 / Math.sqrt(squares / used);
}
