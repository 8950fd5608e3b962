import type { Watch } from "../../host/index.ts";
import type { ModelData } from "../../design/types.ts";
import { choleskyInPlace, traceOfProduct } from "./block-algebra.ts";
import type { CollapsedRows } from "./collapsed-rows.ts";
import { type CovarianceParameter, type CovarianceStructure, covarianceParameters } from "./covariance-structure.ts";
import { addProjectionTerms, connectedBlocks, rowsOfBlocks } from "./direct-blocks.ts";
import type { Criterion, Engine, Evaluation, Pieces } from "./engine.ts";
import type { FixedPart } from "./fixed-part.ts";
import { solveFixed } from "./fixed-solution.ts";

/** A connected block known only by cross-products of its random effects (Z), fixed effects (X) and responses. */
interface ReducedBlock {
  readonly size: number;
  /** Per term: position of each level's first effect; the others of the level follow. */
  readonly places: readonly Int32Array[];
  readonly zz: Float64Array;
  readonly zx: Float64Array;
  readonly zy: Float64Array;
}

interface Reduced {
  readonly blocks: readonly ReducedBlock[];
  readonly xx: Float64Array;
  readonly xy: Float64Array;
  readonly yy: number;
}

/** What the blocks add up to at given parameters, for the parameters of the random terms (m of them). */
interface Sums {
  readonly logDeterminant: number;
  readonly a: Float64Array;
  readonly b: Float64Array;
  readonly squares: number;
}

interface DerivativeSums {
  /** tr V^-1 V_k; tr V^-1 V_k V^-1 V_l. */
  readonly trace: Float64Array;
  readonly pairs: Float64Array;
  /** X' V^-1 V_k V^-1 X; the same with two V's, symmetric. */
  readonly fixed: readonly Float64Array[];
  readonly fixedPairs: readonly (readonly Float64Array[])[];
  /** r' V^-1 V_k V^-1 r; with two V's; X' V^-1 V_k V^-1 r. */
  readonly quadratic: Float64Array;
  readonly quadraticPairs: Float64Array;
  readonly pulls: readonly Float64Array[];
}

/** Lower Cholesky factor of a positive semidefinite matrix; a vanishing pivot leaves a column of zeros. */
function semidefiniteFactor(matrix: Float64Array, size: number): Float64Array {
  const factor = new Float64Array(size * size);
  for (let column = 0; column < size; column++) {
    let pivot = matrix[column * size + column]!;
    for (let k = 0; k < column; k++) pivot -= factor[column * size + k]! ** 2;
    if (!(pivot > 1e-15 * matrix[column * size + column]!)) continue;
    const root = Math.sqrt(pivot);
    factor[column * size + column] = root;
    for (let row = column + 1; row < size; row++) {
      let value = matrix[row * size + column]!;
      for (let k = 0; k < column; k++) value -= factor[row * size + k]! * factor[column * size + k]!;
      factor[row * size + column] = value / root;
    }
  }
  return factor;
}

/** Largest number of random effects in a connected block: the dense work of this engine grows with its cube. */
export function mostEffects(structure: CovarianceStructure, rows: CollapsedRows): number {
  const { blockOf, blocks } = connectedBlocks(structure, rows);
  const count = new Int32Array(blocks);
  for (const term of structure.terms) {
    const seen = new Uint8Array(term.levels);
    for (let code = 0; code < rows.count; code++) {
      const level = term.codes[rows.representative[code]!]!;
      if (seen[level] === 1) continue;
      seen[level] = 1;
      count[blockOf[code]!]! += term.columns.length;
    }
  }
  return count.reduce((most, value) => Math.max(most, value), 0);
}

/**
 * Engine for random effects that go together (slopes with their intercept) whatever the number of rows: blocks are reduced to
 * cross-products once, and inverted by way of their random effects. One residual variance.
 */
export function reducedEngine(
  data: ModelData,
  structure: CovarianceStructure,
  fixed: FixedPart,
  rows: CollapsedRows,
  watch: Watch,
): Engine {
  const p = fixed.columns;
  const { blockOf, blocks } = connectedBlocks(structure, rows);
  const { start, list } = rowsOfBlocks(blockOf, blocks);
  const position = structure.terms.map((term) => new Int32Array(term.levels).fill(-1));
  const shells = Array.from({ length: blocks }, (_, block) => {
    let size = 0;
    const places = structure.terms.map((term, index) => {
      const own: number[] = [];
      for (let at = start[block]!; at < start[block + 1]!; at++) {
        const level = term.codes[rows.representative[list[at]!]!]!;
        if (position[index]![level] !== -1) continue;
        position[index]![level] = size;
        own.push(size);
        size += term.columns.length;
      }
      return Int32Array.from(own);
    });
    return { size, places };
  });
  const places: number[] = [];
  const values: number[] = [];
  const xPlaces: number[] = [];
  const xValues: number[] = [];
  const readRow = (code: number) => {
    const row = rows.representative[code]!;
    places.length = 0;
    values.length = 0;
    xPlaces.length = 0;
    xValues.length = 0;
    for (const [index, term] of structure.terms.entries()) {
      const first = position[index]![term.codes[row]!]!;
      for (const [column, own] of term.columns.entries()) {
        const value = own === null ? 1 : own[row]!;
        if (value === 0) continue;
        places.push(first + column);
        values.push(value);
      }
    }
    xPlaces.push(fixed.columnOfCell[data.cells[row]!]!);
    xValues.push(1);
    for (const [index, covariate] of fixed.covariates.entries()) {
      xPlaces.push(fixed.cellColumns + index);
      xValues.push(covariate.values[row]!);
    }
  };
  const xx = new Float64Array(p * p);
  const products = shells.map(({ size }, block) => {
    if ((block & 255) === 0) watch.checkpoint();
    const zz = new Float64Array(size * size);
    const zx = new Float64Array(size * p);
    for (let at = start[block]!; at < start[block + 1]!; at++) {
      const code = list[at]!;
      readRow(code);
      const weight = rows.size[code]!;
      for (let a = 0; a < places.length; a++) {
        const left = weight * values[a]!;
        for (let b = 0; b < places.length; b++) zz[places[a]! * size + places[b]!]! += left * values[b]!;
        for (let b = 0; b < xPlaces.length; b++) zx[places[a]! * p + xPlaces[b]!]! += left * xValues[b]!;
      }
      for (let a = 0; a < xPlaces.length; a++) {
        for (let b = 0; b < xPlaces.length; b++)
          xx[xPlaces[a]! * p + xPlaces[b]!]! += weight * xValues[a]! * xValues[b]!;
      }
    }
    return { zz, zx };
  });
  const withResponse = (means: Float64Array, pureSum: number): Engine => {
    const xy = new Float64Array(p);
    let yy = pureSum;
    const reduced = shells.map(({ size, places: own }, block): ReducedBlock => {
      const zy = new Float64Array(size);
      for (let at = start[block]!; at < start[block + 1]!; at++) {
        const code = list[at]!;
        readRow(code);
        const weighted = rows.size[code]! * means[code]!;
        yy += weighted * means[code]!;
        for (let a = 0; a < places.length; a++) zy[places[a]!]! += weighted * values[a]!;
        for (let a = 0; a < xPlaces.length; a++) xy[xPlaces[a]!]! += weighted * xValues[a]!;
      }
      return { size, places: own, ...products[block]!, zy };
    });
    return engineOf({ blocks: reduced, xx, xy, yy }, structure, data.rows, rows, watch, (theta, beta, normal) => {
      const residual = theta[theta.length - 1]!;
      const factors = termFactors(structure, covarianceParameters(structure), theta);
      const response = new Float64Array(rows.count);
      for (const [block, shell] of shells.entries()) {
        const drawn = new Float64Array(shell.size);
        for (const [index, term] of structure.terms.entries()) {
          const width = term.columns.length;
          for (const first of shell.places[index]!) {
            const white = Array.from({ length: width }, normal);
            for (let i = 0; i < width; i++) {
              for (let j = 0; j <= i; j++) drawn[first + i]! += factors[index]![i * width + j]! * white[j]!;
            }
          }
        }
        for (let at = start[block]!; at < start[block + 1]!; at++) {
          const code = list[at]!;
          readRow(code);
          let value = Math.sqrt(residual / rows.size[code]!) * normal();
          for (let a = 0; a < places.length; a++) value += values[a]! * drawn[places[a]!]!;
          for (let a = 0; a < xPlaces.length; a++)
            value += xValues[a]! * (beta[xPlaces[a]!]! - rows.shift[xPlaces[a]!]!);
          response[code] = value;
        }
      }
      let pure = 0;
      for (let at = 0; at < rows.pureDf[0]!; at++) pure += residual * normal() ** 2;
      return withResponse(response, pure);
    });
  };
  return withResponse(rows.mean, rows.pureSum[0]!);
}

/** Cholesky factor of each term's covariance, columns x columns. */
function termFactors(
  structure: CovarianceStructure,
  parameters: readonly CovarianceParameter[],
  theta: Float64Array,
): Float64Array[] {
  const covariances = structure.terms.map((term) => new Float64Array(term.columns.length ** 2));
  for (const [index, parameter] of parameters.entries()) {
    if (parameter.kind !== "random") continue;
    const width = structure.terms[parameter.term]!.columns.length;
    covariances[parameter.term]![parameter.row * width + parameter.column] = theta[index]!;
    covariances[parameter.term]![parameter.column * width + parameter.row] = theta[index]!;
  }
  return covariances.map((covariance, index) => semidefiniteFactor(covariance, structure.terms[index]!.columns.length));
}

function engineOf(
  reduced: Reduced,
  structure: CovarianceStructure,
  rows: number,
  collapsed: CollapsedRows,
  watch: Watch,
  simulate: (theta: Float64Array, beta: Float64Array, normal: () => number) => Engine,
): Engine {
  const parameters = covarianceParameters(structure);
  const residualIndex = parameters.length - 1;
  const p = collapsed.shift.length;
  const largest = reduced.blocks.reduce((most, block) => Math.max(most, block.size), 0);
  // Per block: T = Z'V^-1 Z and U = Z'V^-1 X and Z'V^-1 y at the parameters last evaluated.
  const t = reduced.blocks.map((block) => new Float64Array(block.size * block.size));
  const u = reduced.blocks.map((block) => new Float64Array(block.size * p));
  const v = reduced.blocks.map((block) => new Float64Array(block.size));
  const half = new Float64Array(largest * largest);
  const inner = new Float64Array(largest * largest);
  const right = new Float64Array(largest * (p + 1));

  /** Applies Lambda' of all terms to rows of a block's array (size x width), level by level. */
  const applyFactors = (
    block: ReducedBlock,
    factors: readonly Float64Array[],
    from: Float64Array,
    width: number,
    out: Float64Array,
  ) => {
    out.fill(0, 0, block.size * width);
    for (const [index, term] of structure.terms.entries()) {
      const columns = term.columns.length;
      const factor = factors[index]!;
      for (const first of block.places[index]!) {
        for (let i = 0; i < columns; i++) {
          for (let j = 0; j <= i; j++) {
            const value = factor[i * columns + j]!;
            if (value === 0) continue;
            const to = (first + j) * width;
            const source = (first + i) * width;
            for (let c = 0; c < width; c++) out[to + c]! += value * from[source + c]!;
          }
        }
      }
    }
  };

  const reduce = (theta: Float64Array): Sums | null => {
    const residual = theta[residualIndex]!;
    const factors = termFactors(structure, parameters, theta);
    const a = reduced.xx.map((value) => value / residual);
    const b = reduced.xy.map((value) => value / residual);
    let squares = reduced.yy / residual;
    let logDeterminant = rows * Math.log(residual);
    for (const [index, block] of reduced.blocks.entries()) {
      if ((index & 255) === 0) watch.checkpoint();
      const { size, zz } = block;
      // half = Lambda' Z'Z; inner = I + Lambda' Z'Z Lambda / residual, and its factor.
      applyFactors(block, factors, zz, size, half);
      const transposed = t[index]!;
      for (let i = 0; i < size; i++) for (let j = 0; j < size; j++) transposed[j * size + i] = half[i * size + j]!;
      applyFactors(block, factors, transposed, size, inner);
      for (let i = 0; i < size; i++) {
        for (let j = 0; j < size; j++) inner[i * size + j] = inner[i * size + j]! / residual + (i === j ? 1 : 0);
      }
      const own = choleskyInPlace(inner, size);
      if (Number.isNaN(own)) return null;
      logDeterminant += own;
      forwardSolve(inner, size, half, size);
      const out = t[index]!;
      for (let i = 0; i < size * size; i++) out[i] = zz[i]! / residual;
      subtractProducts(half, half, size, size, size, 1 / residual ** 2, out);
      // The same for X and y.
      applyFactors(block, factors, block.zx, p, right);
      forwardSolve(inner, size, right, p);
      const ownU = u[index]!;
      for (let i = 0; i < size * p; i++) ownU[i] = block.zx[i]! / residual;
      subtractProducts(half, right, size, size, p, 1 / residual ** 2, ownU);
      subtractProducts(right, right, size, p, p, 1 / residual ** 2, a);
      const yRight = right.subarray(size * p, size * p + size);
      applyFactors(block, factors, block.zy, 1, yRight);
      forwardSolve(inner, size, yRight, 1);
      const ownV = v[index]!;
      for (let i = 0; i < size; i++) ownV[i] = block.zy[i]! / residual;
      subtractProducts(half, yRight, size, size, 1, 1 / residual ** 2, ownV);
      subtractProducts(right, yRight, size, p, 1, 1 / residual ** 2, b);
      for (let i = 0; i < size; i++) squares -= yRight[i]! ** 2 / residual ** 2;
    }
    return { logDeterminant, a, b, squares };
  };

  /** Index pairs of a parameter's places in a block: effects `row` and `column` of every level of its term. */
  const placesOf = (block: ReducedBlock, parameter: CovarianceParameter) => {
    if (parameter.kind !== "random") throw new Error("The residual has no places.");
    return { firsts: block.places[parameter.term]!, row: parameter.row, column: parameter.column };
  };

  /** out (size x width) = E_k from: swaps the two effects of a level, or keeps the one. */
  const select = (
    block: ReducedBlock,
    parameter: CovarianceParameter,
    from: Float64Array,
    width: number,
    out: Float64Array,
  ) => {
    out.fill(0, 0, block.size * width);
    const { firsts, row, column } = placesOf(block, parameter);
    for (const first of firsts) {
      for (let c = 0; c < width; c++) {
        out[(first + row) * width + c]! += from[(first + column) * width + c]!;
        if (row !== column) out[(first + column) * width + c]! += from[(first + row) * width + c]!;
      }
    }
  };

  const derivativeSums = (random: readonly number[], beta: Float64Array): DerivativeSums => {
    const m = random.length;
    const trace = new Float64Array(m);
    const pairs = new Float64Array(m * m);
    const fixed = random.map(() => new Float64Array(p * p));
    const fixedPairs = random.map((_, k) => random.slice(0, k + 1).map(() => new Float64Array(p * p)));
    const quadratic = new Float64Array(m);
    const quadraticPairs = new Float64Array(m * m);
    const pulls = random.map(() => new Float64Array(p));
    const chosenT = random.map(() => new Float64Array(largest * largest));
    const chosenU = random.map(() => new Float64Array(largest * p));
    const chosenE = random.map(() => new Float64Array(largest));
    const throughU = new Float64Array(largest * p);
    const throughE = new Float64Array(largest);
    const e = new Float64Array(largest);
    for (const [index, block] of reduced.blocks.entries()) {
      if ((index & 63) === 0) watch.checkpoint();
      const { size } = block;
      const ownT = t[index]!;
      const ownU = u[index]!;
      for (let i = 0; i < size; i++) {
        let value = v[index]![i]!;
        for (let c = 0; c < p; c++) value -= ownU[i * p + c]! * beta[c]!;
        e[i] = value;
      }
      for (let k = 0; k < m; k++) {
        const parameter = parameters[random[k]!]!;
        select(block, parameter, ownT, size, chosenT[k]!);
        select(block, parameter, ownU, p, chosenU[k]!);
        select(block, parameter, e, 1, chosenE[k]!);
        for (let i = 0; i < size; i++) {
          trace[k]! += chosenT[k]![i * size + i]!;
          quadratic[k]! += e[i]! * chosenE[k]![i]!;
        }
        addProducts(ownU, chosenU[k]!, size, p, p, fixed[k]!);
        addProducts(ownU, chosenE[k]!, size, p, 1, pulls[k]!);
      }
      for (let l = 0; l < m; l++) {
        multiplyInto(ownT, chosenU[l]!, size, size, p, throughU);
        multiplyInto(ownT, chosenE[l]!, size, size, 1, throughE);
        for (let k = l; k < m; k++) {
          pairs[k * m + l]! += traceOfProduct(chosenT[k]!, chosenT[l]!, size);
          const pair = fixedPairs[k]![l]!;
          for (let i = 0; i < size; i++) {
            quadraticPairs[k * m + l]! += chosenE[k]![i]! * throughE[i]!;
            for (let c = 0; c < p; c++) {
              const left = 0.5 * chosenU[k]![i * p + c]!;
              if (left === 0) continue;
              for (let d = 0; d < p; d++) {
                pair[c * p + d]! += left * throughU[i * p + d]!;
                pair[d * p + c]! += left * throughU[i * p + d]!;
              }
            }
          }
        }
      }
    }
    for (let k = 0; k < m; k++) {
      for (let l = 0; l < k; l++) {
        pairs[l * m + k] = pairs[k * m + l]!;
        quadraticPairs[l * m + k] = quadraticPairs[k * m + l]!;
      }
    }
    return { trace, pairs, fixed, fixedPairs, quadratic, quadraticPairs, pulls };
  };

  const computed = (
    theta: Float64Array,
    active: readonly number[],
    criterion: Criterion,
    nullBasis: Float64Array | null,
  ) => {
    const sums = reduce(theta);
    if (sums === null) return null;
    const { a, b } = sums;
    const solution = solveFixed(a, b, p, nullBasis, collapsed.shift);
    if (solution === null) return null;
    const { beta, phi } = solution;
    let quadratic = sums.squares;
    const score = b.slice();
    for (let i = 0; i < p; i++) {
      quadratic -= 2 * beta[i]! * b[i]!;
      for (let j = 0; j < p; j++) {
        quadratic += beta[i]! * a[i * p + j]! * beta[j]!;
        score[i]! -= a[i * p + j]! * beta[j]!;
      }
    }
    const restricted = criterion === "REML";
    const deviance =
      sums.logDeterminant +
      quadratic +
      (restricted ? rows - p : rows) * Math.log(2 * Math.PI) +
      (restricted ? solution.logDeterminant : 0);
    if (!Number.isFinite(deviance)) return null;

    const random = active.filter((index) => index !== residualIndex);
    const m = random.length;
    const own = derivativeSums(random, beta);
    // V is the weighted sum of its parts: what the residual has of any sum is what the others leave.
    const residual = theta[residualIndex]!;
    const weight = random.map((index) => theta[index]!);
    const rest = (total: number, of: (k: number) => number) =>
      (total - weight.reduce((sum, value, k) => sum + value * of(k), 0)) / residual;
    const restOf = (total: Float64Array, of: (k: number) => Float64Array) =>
      total.map((value, at) => rest(value, (k) => of(k)[at]!));
    const width = m + 1;
    const extended = (single: Float64Array, pairs: Float64Array, total: number) => {
      const singles = Float64Array.from([...single, rest(total, (k) => single[k]!)]);
      const all = new Float64Array(width * width);
      for (let k = 0; k < m; k++) for (let l = 0; l < m; l++) all[k * width + l] = pairs[k * m + l]!;
      for (let l = 0; l < m; l++) {
        const value = rest(single[l]!, (k) => pairs[k * m + l]!);
        all[m * width + l] = value;
        all[l * width + m] = value;
      }
      all[m * width + m] = rest(singles[m]!, (k) => all[m * width + k]!);
      return { singles, all };
    };
    const traces = extended(own.trace, own.pairs, rows);
    const quadratics = extended(own.quadratic, own.quadraticPairs, quadratic);
    const fixed = [...own.fixed, restOf(a, (k) => own.fixed[k]!)];
    const pairOf = (k: number, l: number) => own.fixedPairs[Math.max(k, l)]![Math.min(k, l)]!;
    const withResidual = random.map((_, l) => restOf(fixed[l]!, (k) => pairOf(k, l)));
    const corner = restOf(fixed[m]!, (k) => withResidual[k]!);
    const q = (k: number, l: number) =>
      k === m ? (l === m ? corner : withResidual[l]!) : l === m ? withResidual[k]! : pairOf(k, l);
    const pulls = [...own.pulls, restOf(score, (k) => own.pulls[k]!)];

    const place = active.map((index) => (index === residualIndex ? m : random.indexOf(index)));
    const r = active.length;
    const gradient = new Float64Array(r);
    const information = new Float64Array(r * r);
    const hessian = new Float64Array(r * r);
    const derivatives = place.map((k) => fixed[k]!.map((value) => -value));
    for (const [i, k] of place.entries()) {
      const hat = restricted ? traceOfProduct(phi, fixed[k]!, p) : 0;
      gradient[i] = traces.singles[k]! - hat - quadratics.singles[k]!;
      for (let j = 0; j <= i; j++) {
        const l = place[j]!;
        information[i * r + j] = 0.5 * traces.all[k * width + l]! - (restricted ? traceOfProduct(phi, q(k, l), p) : 0);
        let curvature = quadratics.all[k * width + l]!;
        for (let c = 0; c < p; c++)
          for (let d = 0; d < p; d++) curvature -= pulls[k]![c]! * phi[c * p + d]! * pulls[l]![d]!;
        hessian[i * r + j] = 2 * curvature;
      }
    }
    if (restricted) addProjectionTerms(derivatives, phi, p, information);
    for (let i = 0; i < r; i++) {
      for (let j = 0; j <= i; j++) {
        hessian[i * r + j]! -= 2 * information[i * r + j]!;
        information[j * r + i] = information[i * r + j]!;
        hessian[j * r + i] = hessian[i * r + j]!;
      }
    }
    const evaluation: Evaluation = {
      deviance,
      beta: beta.map((value, index) => value + collapsed.shift[index]!),
      phi,
      gradient,
      information,
      hessian,
    };
    const pieces: Pieces = {
      phi,
      p: derivatives,
      q: place.map((k, i) => place.slice(0, i + 1).map((l) => q(k, l))),
      information,
    };
    return { evaluation, pieces };
  };

  return {
    parameters,
    columns: p,
    rows,
    startingVariance: collapsed.variance,
    varianceFloor: 0,
    closeEnough: largest > 150 ? 1e-14 : 1e-18,
    watch,
    evaluate: (theta, active, criterion, nullBasis) =>
      computed(theta, active, criterion, nullBasis)?.evaluation ?? null,
    pieces(theta, active) {
      const found = computed(theta, active, "REML", null);
      if (found === null) throw new Error("Pieces were asked for at parameters without a covariance.");
      return found.pieces;
    },
    simulated: simulate,
  };
}

/** Solves L x = right in place, right size x width. */
function forwardSolve(factor: Float64Array, size: number, right: Float64Array, width: number): void {
  for (let row = 0; row < size; row++) {
    for (let k = 0; k < row; k++) {
      const value = factor[row * size + k]!;
      if (value === 0) continue;
      for (let c = 0; c < width; c++) right[row * width + c]! -= value * right[k * width + c]!;
    }
    const pivot = 1 / factor[row * size + row]!;
    for (let c = 0; c < width; c++) right[row * width + c]! *= pivot;
  }
}

/** out -= scale * left' right; left rows x a, right rows x b, out a x b. */
function subtractProducts(
  left: Float64Array,
  right: Float64Array,
  rows: number,
  a: number,
  b: number,
  scale: number,
  out: Float64Array,
): void {
  for (let row = 0; row < rows; row++) {
    for (let i = 0; i < a; i++) {
      const value = scale * left[row * a + i]!;
      if (value === 0) continue;
      for (let j = 0; j < b; j++) out[i * b + j]! -= value * right[row * b + j]!;
    }
  }
}

/** out += left' right; left rows x a, right rows x b, out a x b. */
function addProducts(
  left: Float64Array,
  right: Float64Array,
  rows: number,
  a: number,
  b: number,
  out: Float64Array,
): void {
  subtractProducts(left, right, rows, a, b, -1, out);
}

/** out = left right; left rows x inner, right inner x columns. */
function multiplyInto(
  left: Float64Array,
  right: Float64Array,
  rows: number,
  inner: number,
  columns: number,
  out: Float64Array,
): void {
  out.fill(0, 0, rows * columns);
  for (let i = 0; i < rows; i++) {
    for (let k = 0; k < inner; k++) {
      const value = left[i * inner + k]!;
      if (value === 0) continue;
      for (let j = 0; j < columns; j++) out[i * columns + j]! += value * right[k * columns + j]!;
    }
  }
}
