import type { Watch } from "../../host/index.ts";
import type { ModelData } from "../../design/types.ts";
import { choleskyInPlace, inverseFromFactor, multiply, traceOfProduct } from "./block-algebra.ts";
import type { CollapsedRows } from "./collapsed-rows.ts";
import { type CovarianceParameter, type CovarianceStructure, covarianceParameters } from "./covariance-structure.ts";
import type { Criterion, Engine, Evaluation, Pieces } from "./engine.ts";
import type { FixedPart } from "./fixed-part.ts";
import { solveFixed } from "./fixed-solution.ts";

/**
 * Blocks of rows that no random effect connects (a subject, a herd). Blocks with the same pattern share one covariance matrix;
 * of their responses only the sums and the sums of products are kept, so that the work does not depend on how many there are.
 */
interface Pattern {
  readonly size: number;
  readonly fixedColumns: Int32Array;
  /** Covariates, size x covariates. */
  readonly covariates: Float64Array;
  readonly counts: Float64Array;
  /** Per term: level within the block of each collapsed row. */
  readonly levels: readonly Int32Array[];
  /** Per term: size x columns, or null where the only column is 1. */
  readonly columns: readonly (Float64Array | null)[];
  readonly strata: Int32Array;
  readonly blocks: number;
  readonly sum: Float64Array;
  readonly products: Float64Array;
  /** Inverse covariance at the last evaluated parameters. */
  readonly inverse: Float64Array;
}

interface BlockData {
  readonly patterns: readonly Pattern[];
  readonly shift: Float64Array;
  readonly pureDf: Float64Array;
  readonly pureSum: Float64Array;
  readonly rows: number;
  readonly startingVariance: number;
  /** Sum of log counts of collapsed rows: a constant of the likelihood. */
  readonly logCounts: number;
}

/** Block (connected component of rows that share a level of some term) of each collapsed row. */
export function connectedBlocks(
  structure: CovarianceStructure,
  rows: CollapsedRows,
): { blockOf: Int32Array; blocks: number } {
  const offsets: number[] = [];
  let total = 0;
  for (const term of structure.terms) {
    offsets.push(total);
    total += term.levels;
  }
  const parent = Int32Array.from({ length: total }, (_, index) => index);
  const find = (node: number) => {
    let root = node;
    while (parent[root] !== root) root = parent[root]!;
    let at = node;
    while (parent[at] !== root) {
      const next = parent[at]!;
      parent[at] = root;
      at = next;
    }
    return root;
  };
  const first = structure.terms[0]!;
  for (const [index, term] of structure.terms.entries()) {
    for (const row of rows.representative) {
      const left = find(first.codes[row]!);
      const right = find(offsets[index]! + term.codes[row]!);
      if (left !== right) parent[right] = left;
    }
  }
  const number = new Int32Array(total).fill(-1);
  const blockOf = new Int32Array(rows.count);
  let blocks = 0;
  for (let code = 0; code < rows.count; code++) {
    const root = find(first.codes[rows.representative[code]!]!);
    if (number[root] === -1) number[root] = blocks++;
    blockOf[code] = number[root]!;
  }
  return { blockOf, blocks };
}

/** Collapsed rows of each block, as runs of one list. */
export function rowsOfBlocks(blockOf: Int32Array, blocks: number): { start: Int32Array; list: Int32Array } {
  const start = new Int32Array(blocks + 1);
  for (const block of blockOf) start[block + 1]!++;
  for (let block = 0; block < blocks; block++) start[block + 1]! += start[block]!;
  const at = start.slice();
  const list = new Int32Array(blockOf.length);
  for (let row = 0; row < blockOf.length; row++) list[at[blockOf[row]!]!++] = row;
  return { start, list };
}

function gatherPatterns(
  data: ModelData,
  structure: CovarianceStructure,
  fixed: FixedPart,
  rows: CollapsedRows,
): Pattern[] {
  const { blockOf, blocks } = connectedBlocks(structure, rows);
  const { start, list } = rowsOfBlocks(blockOf, blocks);
  const byKey = new Map<string, Pattern & { blocks: number }>();
  const patterns: Pattern[] = [];
  const cellOf = (code: number) => data.cells[rows.representative[code]!]!;
  // Only columns that are not a function of the cell make a block unlike the others beyond cells, counts and levels.
  const rowLevel = fixed.covariates.length > 0;
  for (let block = 0; block < blocks; block++) {
    const members = list
      .slice(start[block]!, start[block + 1]!)
      .sort((left, right) => cellOf(left) - cellOf(right) || left - right);
    const size = members.length;
    const levels = structure.terms.map((term) => {
      const seen = new Map<number, number>();
      return Int32Array.from(members, (code) => {
        const level = term.codes[rows.representative[code]!]!;
        let local = seen.get(level);
        if (local === undefined) {
          local = seen.size;
          seen.set(level, local);
        }
        return local;
      });
    });
    const counts = Float64Array.from(members, (code) => rows.size[code]!);
    const key = rowLevel ? null : `${Array.from(members, cellOf)}|${counts}|${levels.join("|")}`;
    let pattern = key === null ? undefined : byKey.get(key);
    if (pattern === undefined) {
      pattern = {
        size,
        fixedColumns: Int32Array.from(members, (code) => fixed.columnOfCell[cellOf(code)]!),
        covariates: Float64Array.from(
          Array.from(members).flatMap((code) =>
            fixed.covariates.map(({ values }) => values[rows.representative[code]!]!),
          ),
        ),
        counts,
        levels,
        columns: structure.terms.map((term) =>
          term.columns.length === 1 && term.columns[0] === null
            ? null
            : Float64Array.from(
                Array.from(members).flatMap((code) =>
                  term.columns.map((column) => (column === null ? 1 : column[rows.representative[code]!]!)),
                ),
              ),
        ),
        strata: Int32Array.from(members, (code) => structure.residual.stratumOf?.[rows.representative[code]!] ?? 0),
        blocks: 0,
        sum: new Float64Array(size),
        products: new Float64Array(size * size),
        inverse: new Float64Array(size * size),
      };
      patterns.push(pattern);
      if (key !== null) byKey.set(key, pattern);
    }
    pattern.blocks++;
    addResponse(
      pattern,
      Float64Array.from(members, (code) => rows.mean[code]!),
    );
  }
  return patterns;
}

function addResponse(pattern: Pick<Pattern, "size" | "sum" | "products">, response: Float64Array): void {
  const { size, sum, products } = pattern;
  for (let i = 0; i < size; i++) {
    sum[i]! += response[i]!;
    for (let j = 0; j < size; j++) products[i * size + j]! += response[i]! * response[j]!;
  }
}

/** Largest number of collapsed rows of a block: what the dense work of this engine grows with, cubed. */
export function largestBlock(structure: CovarianceStructure, rows: CollapsedRows): number {
  const { blockOf, blocks } = connectedBlocks(structure, rows);
  const size = new Int32Array(blocks);
  for (const block of blockOf) size[block]!++;
  return size.reduce((most, value) => Math.max(most, value), 0);
}

/** Engine for blocks of moderate size: any structure linear in its parameters, dense within a block. */
export function directEngine(
  data: ModelData,
  structure: CovarianceStructure,
  fixed: FixedPart,
  rows: CollapsedRows,
  watch: Watch,
): Engine {
  return engineOf(
    {
      patterns: gatherPatterns(data, structure, fixed, rows),
      shift: rows.shift,
      pureDf: rows.pureDf,
      pureSum: rows.pureSum,
      rows: data.rows,
      startingVariance: rows.variance,
      logCounts: rows.size.reduce((sum, size) => sum + Math.log(size), 0),
    },
    structure,
    fixed,
    watch,
  );
}

function engineOf(blocks: BlockData, structure: CovarianceStructure, fixed: FixedPart, watch: Watch): Engine {
  const parameters = covarianceParameters(structure);
  const p = fixed.columns;
  const covariates = fixed.covariates.length;
  const widths = structure.terms.map((term) => term.columns.length);
  const largest = blocks.patterns.reduce((most, pattern) => Math.max(most, pattern.size), 0);
  const buffer = () => new Float64Array(largest * largest);

  /** out = derivative of the pattern's covariance by one parameter. */
  const fillDerivative = (pattern: Pattern, parameter: CovarianceParameter, out: Float64Array) => {
    const { size } = pattern;
    if (parameter.kind === "residual") {
      out.fill(0, 0, size * size);
      for (let i = 0; i < size; i++) {
        if (pattern.strata[i] === parameter.stratum) out[i * size + i] = 1 / pattern.counts[i]!;
      }
      return;
    }
    const levels = pattern.levels[parameter.term]!;
    const columns = pattern.columns[parameter.term];
    if (columns === null || columns === undefined) {
      for (let i = 0; i < size; i++) for (let j = 0; j < size; j++) out[i * size + j] = levels[i] === levels[j] ? 1 : 0;
      return;
    }
    const width = widths[parameter.term]!;
    const { row, column } = parameter;
    const twice = row === column ? 0.5 : 1;
    for (let i = 0; i < size; i++) {
      for (let j = 0; j < size; j++) {
        out[i * size + j] =
          levels[i] === levels[j]
            ? twice *
              (columns[i * width + row]! * columns[j * width + column]! +
                columns[i * width + column]! * columns[j * width + row]!)
            : 0;
      }
    }
  };

  const covariance = (
    pattern: Pattern,
    theta: Float64Array,
    active: readonly number[],
    scratch: Float64Array,
    out: Float64Array,
  ) => {
    const length = pattern.size * pattern.size;
    out.fill(0, 0, length);
    for (const index of active) {
      const value = theta[index]!;
      fillDerivative(pattern, parameters[index]!, scratch);
      for (let at = 0; at < length; at++) out[at]! += value * scratch[at]!;
    }
  };

  /** target += factor * X' matrix X. */
  const addFixedProducts = (pattern: Pattern, matrix: Float64Array, factor: number, target: Float64Array) => {
    const { size, fixedColumns } = pattern;
    const first = fixed.cellColumns;
    for (let i = 0; i < size; i++) {
      const rowI = fixedColumns[i]! * p;
      for (let j = 0; j < size; j++) {
        const value = factor * matrix[i * size + j]!;
        target[rowI + fixedColumns[j]!]! += value;
        for (let a = 0; a < covariates; a++) {
          const left = value * pattern.covariates[i * covariates + a]!;
          target[rowI + first + a]! += value * pattern.covariates[j * covariates + a]!;
          target[(first + a) * p + fixedColumns[j]!]! += left;
          for (let b = 0; b < covariates; b++) {
            target[(first + a) * p + first + b]! += left * pattern.covariates[j * covariates + b]!;
          }
        }
      }
    }
  };

  const fittedMeans = (pattern: Pattern, beta: Float64Array, out: Float64Array) => {
    for (let i = 0; i < pattern.size; i++) {
      let value = beta[pattern.fixedColumns[i]!]!;
      for (let a = 0; a < covariates; a++)
        value += pattern.covariates[i * covariates + a]! * beta[fixed.cellColumns + a]!;
      out[i] = value;
    }
  };

  /** out = X phi X'. */
  const fittedCovariance = (pattern: Pattern, phi: Float64Array, out: Float64Array) => {
    const { size, fixedColumns } = pattern;
    const first = fixed.cellColumns;
    for (let i = 0; i < size; i++) {
      for (let j = 0; j < size; j++) {
        let value = phi[fixedColumns[i]! * p + fixedColumns[j]!]!;
        for (let a = 0; a < covariates; a++) {
          const ofI = pattern.covariates[i * covariates + a]!;
          const ofJ = pattern.covariates[j * covariates + a]!;
          value += ofI * phi[(first + a) * p + fixedColumns[j]!]! + ofJ * phi[fixedColumns[i]! * p + first + a]!;
          for (let b = 0; b < covariates; b++) {
            value += ofI * pattern.covariates[j * covariates + b]! * phi[(first + a) * p + first + b]!;
          }
        }
        out[i * size + j] = value;
      }
    }
  };

  const matrix = buffer();
  const scratch = buffer();
  const fitted = new Float64Array(largest);

  const invertAll = (theta: Float64Array, active: readonly number[]) => {
    let logDeterminant = 0;
    for (const [index, pattern] of blocks.patterns.entries()) {
      if ((index & 255) === 0) watch.checkpoint();
      covariance(pattern, theta, active, scratch, matrix);
      const own = choleskyInPlace(matrix, pattern.size, 1e-13);
      if (Number.isNaN(own)) return Number.NaN;
      inverseFromFactor(matrix, pattern.size, pattern.inverse, scratch);
      logDeterminant += pattern.blocks * own;
    }
    return logDeterminant;
  };

  /** Sums over patterns of X' V^-1 X and X' V^-1 y, and y' V^-1 y. */
  const crossProducts = () => {
    const a = new Float64Array(p * p);
    const b = new Float64Array(p);
    let squares = 0;
    for (const pattern of blocks.patterns) {
      const { size, inverse, fixedColumns } = pattern;
      addFixedProducts(pattern, inverse, pattern.blocks, a);
      for (let i = 0; i < size; i++) {
        let weighted = 0;
        for (let j = 0; j < size; j++) weighted += inverse[i * size + j]! * pattern.sum[j]!;
        b[fixedColumns[i]!]! += weighted;
        for (let c = 0; c < covariates; c++)
          b[fixed.cellColumns + c]! += weighted * pattern.covariates[i * covariates + c]!;
      }
      squares += traceOfProduct(inverse, pattern.products, size);
    }
    return { a, b, squares };
  };

  const pureDeviance = (theta: Float64Array) => {
    let sum = 0;
    for (const [index, parameter] of parameters.entries()) {
      if (parameter.kind !== "residual" || blocks.pureDf[parameter.stratum] === 0) continue;
      const df = blocks.pureDf[parameter.stratum]!;
      sum += df * Math.log(theta[index]!) + blocks.pureSum[parameter.stratum]! / theta[index]!;
    }
    return sum;
  };

  const derivativeBuffers = parameters.map(() => ({
    derivative: buffer(),
    weighted: buffer(),
    hat: buffer(),
    rest: buffer(),
  }));
  const hat = buffer();
  const rest = buffer();

  /** Gradient and expected information, given the solution; inverses are those of the last `invertAll`. */
  const derivatives = (
    theta: Float64Array,
    active: readonly number[],
    criterion: Criterion,
    beta: Float64Array,
    phi: Float64Array,
  ) => {
    const r = active.length;
    const gradient = new Float64Array(r);
    const information = new Float64Array(r * r);
    // r'V^-1 V_k V^-1 V_l V^-1 r, and X'V^-1 V_k V^-1 r: what second derivatives need beyond the information.
    const quadratics = new Float64Array(r * r);
    const pulls = active.map(() => new Float64Array(p));
    const restricted = criterion === "REML";
    const fixedDerivatives = active.map(() => new Float64Array(restricted ? p * p : 0));
    for (const [index, pattern] of blocks.patterns.entries()) {
      if ((index & 63) === 0) watch.checkpoint();
      const { size, inverse, blocks: count } = pattern;
      fittedMeans(pattern, beta, fitted);
      for (let i = 0; i < size; i++) {
        for (let j = 0; j < size; j++) {
          scratch[i * size + j] =
            pattern.products[i * size + j]! -
            pattern.sum[i]! * fitted[j]! -
            fitted[i]! * pattern.sum[j]! +
            count * fitted[i]! * fitted[j]!;
        }
      }
      multiply(inverse, scratch, size, matrix);
      multiply(matrix, inverse, size, rest);
      if (restricted) {
        fittedCovariance(pattern, phi, scratch);
        multiply(inverse, scratch, size, matrix);
        multiply(matrix, inverse, size, hat);
      }
      for (let k = 0; k < r; k++) {
        const buffers = derivativeBuffers[k]!;
        fillDerivative(pattern, parameters[active[k]!]!, buffers.derivative);
        multiply(inverse, buffers.derivative, size, buffers.weighted);
        let trace = 0;
        for (let at = 0; at < size * size; at++) {
          const gap = count * (inverse[at]! - (restricted ? hat[at]! : 0)) - rest[at]!;
          trace += gap * buffers.derivative[at]!;
        }
        gradient[k]! += trace;
        multiply(rest, buffers.derivative, size, buffers.rest);
        multiply(buffers.weighted, inverse, size, scratch);
        for (let i = 0; i < size; i++) {
          let pull = 0;
          for (let j = 0; j < size; j++) pull += scratch[i * size + j]! * (pattern.sum[j]! - count * fitted[j]!);
          pulls[k]![pattern.fixedColumns[i]!]! += pull;
          for (let c = 0; c < covariates; c++) {
            pulls[k]![fixed.cellColumns + c]! += pull * pattern.covariates[i * covariates + c]!;
          }
        }
        if (restricted) {
          multiply(hat, buffers.derivative, size, buffers.hat);
          addFixedProducts(pattern, scratch, -count, fixedDerivatives[k]!);
        }
        for (let l = 0; l <= k; l++) {
          const other = derivativeBuffers[l]!;
          let value = traceOfProduct(buffers.weighted, other.weighted, size);
          if (restricted) value -= 2 * traceOfProduct(buffers.hat, other.weighted, size);
          information[k * r + l]! += 0.5 * count * value;
          quadratics[k * r + l]! += traceOfProduct(buffers.rest, other.weighted, size);
        }
      }
    }
    if (restricted) addProjectionTerms(fixedDerivatives, phi, p, information);
    const hessian = new Float64Array(r * r);
    for (let k = 0; k < r; k++) {
      for (let l = 0; l <= k; l++) {
        let curvature = quadratics[k * r + l]!;
        for (let i = 0; i < p; i++) {
          for (let j = 0; j < p; j++) curvature -= pulls[k]![i]! * phi[i * p + j]! * pulls[l]![j]!;
        }
        hessian[k * r + l] = 2 * curvature - 2 * information[k * r + l]!;
      }
      const parameter = parameters[active[k]!]!;
      if (parameter.kind === "residual") {
        const value = theta[active[k]!]!;
        const df = blocks.pureDf[parameter.stratum]!;
        gradient[k]! += df / value - blocks.pureSum[parameter.stratum]! / value ** 2;
        information[k * r + k]! += (0.5 * df) / value ** 2;
        hessian[k * r + k]! += (2 * blocks.pureSum[parameter.stratum]!) / value ** 3 - df / value ** 2;
      }
      for (let l = 0; l < k; l++) {
        information[l * r + k] = information[k * r + l]!;
        hessian[l * r + k] = hessian[k * r + l]!;
      }
    }
    return { gradient, information, hessian, fixedDerivatives };
  };

  const engine: Engine = {
    parameters,
    columns: p,
    rows: blocks.rows,
    startingVariance: blocks.startingVariance,
    varianceFloor: 0,
    closeEnough: 1e-19,
    watch,
    evaluate(theta, active, criterion, nullBasis): Evaluation | null {
      const logDeterminant = invertAll(theta, active);
      if (Number.isNaN(logDeterminant)) return null;
      const { a, b, squares } = crossProducts();
      const solution = solveFixed(a, b, p, nullBasis, blocks.shift);
      if (solution === null) return null;
      let quadratic = squares;
      for (let i = 0; i < p; i++) {
        quadratic -= 2 * solution.beta[i]! * b[i]!;
        for (let j = 0; j < p; j++) quadratic += solution.beta[i]! * a[i * p + j]! * solution.beta[j]!;
      }
      const free = criterion === "REML" ? blocks.rows - p : blocks.rows;
      const deviance =
        logDeterminant +
        quadratic +
        pureDeviance(theta) +
        blocks.logCounts +
        free * Math.log(2 * Math.PI) +
        (criterion === "REML" ? solution.logDeterminant : 0);
      if (!Number.isFinite(deviance)) return null;
      const { gradient, information, hessian } = derivatives(theta, active, criterion, solution.beta, solution.phi);
      const beta = solution.beta.map((value, index) => value + blocks.shift[index]!);
      return { deviance, beta, phi: solution.phi, gradient, information, hessian };
    },
    pieces(theta, active): Pieces {
      const evaluation = engine.evaluate(theta, active, "REML", null);
      if (evaluation === null) throw new Error("Pieces were asked for at parameters without a covariance.");
      const r = active.length;
      const q = active.map((_, k) => active.slice(0, k + 1).map(() => new Float64Array(p * p)));
      const shifted = evaluation.beta.map((value, index) => value - blocks.shift[index]!);
      const { information, fixedDerivatives } = derivatives(theta, active, "REML", shifted, evaluation.phi);
      const seconds = active.map(() => buffer());
      for (const [index, pattern] of blocks.patterns.entries()) {
        if ((index & 63) === 0) watch.checkpoint();
        const { size, inverse } = pattern;
        for (let k = 0; k < r; k++) {
          const { derivative, weighted } = derivativeBuffers[k]!;
          fillDerivative(pattern, parameters[active[k]!]!, derivative);
          multiply(inverse, derivative, size, weighted);
          multiply(weighted, inverse, size, seconds[k]!);
        }
        for (let k = 0; k < r; k++) {
          for (let l = 0; l <= k; l++) {
            multiply(derivativeBuffers[k]!.weighted, seconds[l]!, size, scratch);
            for (let i = 0; i < size; i++) {
              for (let j = 0; j < i; j++) {
                const mean = 0.5 * (scratch[i * size + j]! + scratch[j * size + i]!);
                scratch[i * size + j] = mean;
                scratch[j * size + i] = mean;
              }
            }
            addFixedProducts(pattern, scratch, pattern.blocks, q[k]![l]!);
          }
        }
      }
      return { phi: evaluation.phi, p: fixedDerivatives, q, information };
    },
    simulated(theta, beta, normal): Engine {
      const shifted = beta.map((value, index) => value - blocks.shift[index]!);
      const all = parameters.map((_, index) => index);
      const patterns = blocks.patterns.map((pattern) => {
        const { size } = pattern;
        const drawn = {
          ...pattern,
          sum: new Float64Array(size),
          products: new Float64Array(size * size),
          inverse: new Float64Array(size * size),
        };
        covariance(pattern, theta, all, scratch, matrix);
        const failed = Number.isNaN(choleskyInPlace(matrix, size, 0));
        if (failed) throw new Error("A simulated response was asked for at parameters without a covariance.");
        fittedMeans(pattern, shifted, fitted);
        const white = new Float64Array(size);
        const response = new Float64Array(size);
        for (let block = 0; block < pattern.blocks; block++) {
          for (let i = 0; i < size; i++) white[i] = normal();
          for (let i = 0; i < size; i++) {
            let value = fitted[i]!;
            for (let j = 0; j <= i; j++) value += matrix[i * size + j]! * white[j]!;
            response[i] = value;
          }
          addResponse(drawn, response);
        }
        return drawn;
      });
      const pureSum = new Float64Array(blocks.pureSum.length);
      for (const [index, parameter] of parameters.entries()) {
        if (parameter.kind !== "residual") continue;
        for (let at = 0; at < blocks.pureDf[parameter.stratum]!; at++)
          pureSum[parameter.stratum]! += theta[index]! * normal() ** 2;
      }
      return engineOf({ ...blocks, patterns, pureSum }, structure, fixed, watch);
    },
  };
  return engine;
}

/** information[k, l] += tr(phi P_k phi P_l) / 2, lower triangle. */
export function addProjectionTerms(
  fixedDerivatives: readonly Float64Array[],
  phi: Float64Array,
  p: number,
  information: Float64Array,
): void {
  const r = fixedDerivatives.length;
  const products = fixedDerivatives.map((derivative) => {
    const out = new Float64Array(p * p);
    multiply(phi, derivative, p, out);
    return out;
  });
  for (let k = 0; k < r; k++) {
    for (let l = 0; l <= k; l++) information[k * r + l]! += 0.5 * traceOfProduct(products[k]!, products[l]!, p);
  }
}
