import type { Watch } from "../../host/index.ts";
import type { ModelData } from "../../design/types.ts";
import { choleskyInPlace, inverseFromFactor } from "./block-algebra.ts";
import type { CollapsedRows } from "./collapsed-rows.ts";
import { type CovarianceStructure, covarianceParameters } from "./covariance-structure.ts";
import { crossedPieces } from "./crossed-pieces.ts";
import type { Engine, Evaluation } from "./engine.ts";
import type { FixedPart } from "./fixed-part.ts";
import { solveFixed } from "./fixed-solution.ts";

/**
 * The random effects in two parts. Those of one unit (the one with most effects) fall into small blocks that touch each other
 * only through the rest; eliminating them first leaves a dense system in the rest alone. This is a sparse Cholesky factorisation
 * whose ordering is known in advance.
 */
export interface EliminationBlock {
  /** First column of the block among all random effects. */
  readonly start: number;
  readonly size: number;
  /** Component (index of the parameter) of each column. */
  readonly component: Int32Array;
  /** Cross-products within the block, size x size. */
  readonly within: Float64Array;
  /** Columns of the rest that the block meets, and cross-products with them, size x touched. */
  readonly touched: Int32Array;
  readonly across: Float64Array;
}

/** Cross-products of rows with random effects (Z), fixed effects (X) and responses: all that the fit sees of the data. */
export interface CrossProducts {
  /** Fixed effects. */
  readonly p: number;
  readonly rows: number;
  /** Random effects in all, and those of the rest (last). */
  readonly q: number;
  readonly rest: number;
  readonly blocks: readonly EliminationBlock[];
  readonly restComponent: Int32Array;
  /** rest x rest. */
  readonly restProducts: Float64Array;
  /** q x p. */
  readonly zx: Float64Array;
  readonly zy: Float64Array;
  readonly xx: Float64Array;
  readonly xy: Float64Array;
  readonly yy: number;
  /** Number of random effects of each component. */
  readonly effects: Float64Array;
  readonly shift: Float64Array;
}

/** Factorisation at given parameters: M = I + Lambda Z'Z Lambda, in units of the residual variance. */
export interface Factorisation {
  readonly logDeterminant: number;
  /** Square roots of variance over residual variance, per random effect. */
  readonly lambda: Float64Array;
  /** Per block: inverse of its own part (size x size) and that times its cross-products (size x touched). */
  readonly inverses: readonly Float64Array[];
  readonly reach: readonly Float64Array[];
  /** Inverse of the eliminated system in the rest, rest x rest. */
  readonly restInverse: Float64Array;
}

interface ColumnLayout {
  readonly columnOf: readonly Int32Array[];
  readonly blockOfColumn: Int32Array;
  readonly componentOf: Int32Array;
  readonly blockCount: number;
  readonly blockColumns: number;
  readonly q: number;
}

/** Whether each level of a coding belongs to one level of another. */
function nestedIn(inner: Int32Array, innerLevels: number, outer: Int32Array, rows: Int32Array): boolean {
  const owner = new Int32Array(innerLevels).fill(-1);
  for (const row of rows) {
    const at = inner[row]!;
    if (owner[at] === -1) owner[at] = outer[row]!;
    else if (owner[at] !== outer[row]) return false;
  }
  return true;
}

/** Components (term and column) with the effects of one unit's blocks first, the rest behind. */
function layOutColumns(data: ModelData, structure: CovarianceStructure, rows: CollapsedRows): ColumnLayout {
  const { representative } = rows;
  const candidates = data.units.map((unit) => {
    const inside = structure.terms.map((term) => nestedIn(term.codes, term.levels, unit.codes, representative));
    const effects = structure.terms.reduce(
      (sum, term, index) => sum + (inside[index] ? term.levels * term.columns.length : 0),
      0,
    );
    return { unit, inside, effects };
  });
  const chosen = candidates.reduce((best, own) => (own.effects > best.effects ? own : best));
  const blockCount = chosen.unit.count;
  // Effects of a block stand together: count per block, then hand out positions.
  const perBlock = new Int32Array(blockCount + 1);
  const owners = structure.terms.map((term, index) => {
    if (chosen.inside[index] !== true) return null;
    const owner = new Int32Array(term.levels);
    for (const row of representative) owner[term.codes[row]!] = chosen.unit.codes[row]!;
    for (const block of owner) perBlock[block + 1]! += term.columns.length;
    return owner;
  });
  for (let block = 0; block < blockCount; block++) perBlock[block + 1]! += perBlock[block]!;
  const blockColumns = perBlock[blockCount]!;
  const next = perBlock.slice();
  let rest = blockColumns;
  const q = structure.terms.reduce((sum, term) => sum + term.levels * term.columns.length, 0);
  const blockOfColumn = new Int32Array(q).fill(-1);
  const componentOf = new Int32Array(q);
  const columnOf: Int32Array[] = [];
  let component = 0;
  for (const [index, term] of structure.terms.entries()) {
    const owner = owners[index] ?? null;
    for (let column = 0; column < term.columns.length; column++) {
      const positions = new Int32Array(term.levels);
      for (let level = 0; level < term.levels; level++) {
        const at = owner === null ? rest++ : next[owner[level]!]!++;
        positions[level] = at;
        componentOf[at] = component;
        blockOfColumn[at] = owner === null ? -1 : owner[level]!;
      }
      columnOf.push(positions);
      component++;
    }
  }
  return { columnOf, blockOfColumn, componentOf, blockCount, blockColumns, q };
}

/** Engine for crossed units and for blocks with many rows: independent random effects, one residual variance. */
export function crossedEngine(
  data: ModelData,
  structure: CovarianceStructure,
  fixed: FixedPart,
  rows: CollapsedRows,
  watch: Watch,
): Engine {
  const layout = layOutColumns(data, structure, rows);
  const p = fixed.columns;
  const components = structure.terms.flatMap((term) => term.columns.map((column) => ({ term, column })));
  const restSize = layout.q - layout.blockColumns;
  const starts = new Int32Array(layout.blockCount);
  const sizes = new Int32Array(layout.blockCount);
  for (let column = layout.blockColumns - 1; column >= 0; column--) {
    starts[layout.blockOfColumn[column]!] = column;
    sizes[layout.blockOfColumn[column]!]!++;
  }
  // Which columns of the rest each block meets.
  const touchedBy = Array.from({ length: layout.blockCount }, () => new Map<number, number>());
  const eachColumn = (code: number, visit: (column: number, value: number) => void) => {
    const row = rows.representative[code]!;
    for (const [index, { term, column }] of components.entries()) {
      const value = column === null ? 1 : column[row]!;
      if (value !== 0) visit(layout.columnOf[index]![term.codes[row]!]!, value);
    }
  };
  const blockOfCode = new Int32Array(rows.count).fill(-1);
  for (let code = 0; code < rows.count; code++) {
    eachColumn(code, (column) => {
      if (column < layout.blockColumns) blockOfCode[code] = layout.blockOfColumn[column]!;
    });
    if (blockOfCode[code] === -1) continue;
    const touched = touchedBy[blockOfCode[code]!]!;
    eachColumn(code, (column) => {
      if (column >= layout.blockColumns && !touched.has(column)) touched.set(column, touched.size);
    });
  }
  const blocks = Array.from({ length: layout.blockCount }, (_, block): EliminationBlock => {
    const size = sizes[block]!;
    const touched = touchedBy[block]!;
    return {
      start: starts[block]!,
      size,
      component: layout.componentOf.slice(starts[block]!, starts[block]! + size),
      within: new Float64Array(size * size),
      touched: Int32Array.from(
        [...touched.keys()].sort((left, right) => left - right),
        (column) => column - layout.blockColumns,
      ),
      across: new Float64Array(size * touched.size),
    };
  });
  // Positions follow the sorted order from here on.
  for (const [index, block] of blocks.entries()) {
    for (const [at, column] of block.touched.entries()) touchedBy[index]!.set(column + layout.blockColumns, at);
  }
  const restProducts = new Float64Array(restSize * restSize);
  const zx = new Float64Array(layout.q * p);
  const xx = new Float64Array(p * p);
  const columns: number[] = [];
  const values: number[] = [];
  const xColumns: number[] = [];
  const xValues: number[] = [];
  const readRow = (code: number) => {
    columns.length = 0;
    values.length = 0;
    xColumns.length = 0;
    xValues.length = 0;
    eachColumn(code, (column, value) => {
      columns.push(column);
      values.push(value);
    });
    const row = rows.representative[code]!;
    xColumns.push(fixed.columnOfCell[data.cells[row]!]!);
    xValues.push(1);
    for (const [index, covariate] of fixed.covariates.entries()) {
      xColumns.push(fixed.cellColumns + index);
      xValues.push(covariate.values[row]!);
    }
  };
  for (let code = 0; code < rows.count; code++) {
    if ((code & 4095) === 0) watch.checkpoint();
    readRow(code);
    const weight = rows.size[code]!;
    const block = blockOfCode[code] === -1 ? null : blocks[blockOfCode[code]!]!;
    for (let a = 0; a < columns.length; a++) {
      const left = columns[a]!;
      const scaled = weight * values[a]!;
      for (let b = 0; b < columns.length; b++) {
        const right = columns[b]!;
        const value = scaled * values[b]!;
        if (left < layout.blockColumns) {
          const own = block!;
          if (right < layout.blockColumns) own.within[(left - own.start) * own.size + right - own.start]! += value;
          else {
            const at = touchedBy[blockOfCode[code]!]!.get(right)!;
            own.across[(left - own.start) * own.touched.length + at]! += value;
          }
        } else if (right >= layout.blockColumns) {
          restProducts[(left - layout.blockColumns) * restSize + right - layout.blockColumns]! += value;
        }
      }
      for (let b = 0; b < xColumns.length; b++) zx[left * p + xColumns[b]!]! += scaled * xValues[b]!;
    }
    for (let a = 0; a < xColumns.length; a++) {
      for (let b = 0; b < xColumns.length; b++)
        xx[xColumns[a]! * p + xColumns[b]!]! += weight * xValues[a]! * xValues[b]!;
    }
  }
  const effects = new Float64Array(components.length);
  for (const component of layout.componentOf) effects[component]!++;

  const responseProducts = (means: Float64Array, pureSum: number) => {
    const zy = new Float64Array(layout.q);
    const xy = new Float64Array(p);
    let yy = pureSum;
    for (let code = 0; code < rows.count; code++) {
      readRow(code);
      const weighted = rows.size[code]! * means[code]!;
      yy += weighted * means[code]!;
      for (let a = 0; a < columns.length; a++) zy[columns[a]!]! += weighted * values[a]!;
      for (let a = 0; a < xColumns.length; a++) xy[xColumns[a]!]! += weighted * xValues[a]!;
    }
    return { zy, xy, yy };
  };
  const shared = {
    p,
    rows: data.rows,
    q: layout.q,
    rest: restSize,
    blocks,
    restComponent: layout.componentOf.slice(layout.blockColumns),
    restProducts,
    zx,
    xx,
    effects,
    shift: rows.shift,
  };
  const engineWith = (means: Float64Array, pureSum: number): Engine =>
    engineOf(
      { ...shared, ...responseProducts(means, pureSum) },
      structure,
      rows.variance,
      watch,
      (theta, beta, normal) => {
        const residual = theta[theta.length - 1]!;
        const drawn = Float64Array.from(layout.componentOf, (component) => Math.sqrt(theta[component]!) * normal());
        const response = new Float64Array(rows.count);
        for (let code = 0; code < rows.count; code++) {
          readRow(code);
          let value = Math.sqrt(residual / rows.size[code]!) * normal();
          for (let a = 0; a < columns.length; a++) value += values[a]! * drawn[columns[a]!]!;
          for (let a = 0; a < xColumns.length; a++)
            value += xValues[a]! * (beta[xColumns[a]!]! - rows.shift[xColumns[a]!]!);
          response[code] = value;
        }
        let pure = 0;
        for (let at = 0; at < rows.pureDf[0]!; at++) pure += residual * normal() ** 2;
        return engineWith(response, pure);
      },
    );
  return engineWith(rows.mean, rows.pureSum[0]!);
}

/** Buffers of a factorisation, used again by the next one: a state is good until the engine is asked again. */
export interface Workspace {
  readonly inverses: readonly Float64Array[];
  readonly reach: readonly Float64Array[];
  readonly schur: Float64Array;
  readonly restInverse: Float64Array;
  readonly scratch: Float64Array;
  readonly own: Float64Array;
  readonly scaled: Float64Array;
}

export function workspaceFor(products: CrossProducts): Workspace {
  const { blocks, rest } = products;
  const largest = blocks.reduce((most, block) => Math.max(most, block.size), 0);
  const widest = blocks.reduce((most, block) => Math.max(most, block.size * block.touched.length), 0);
  return {
    inverses: blocks.map((block) => new Float64Array(block.size * block.size)),
    reach: blocks.map((block) => new Float64Array(block.size * block.touched.length)),
    schur: new Float64Array(rest * rest),
    restInverse: new Float64Array(rest * rest),
    scratch: new Float64Array(Math.max(rest * rest, largest * largest)),
    own: new Float64Array(largest * largest),
    scaled: new Float64Array(widest),
  };
}

/** Factorises M at the given parameters; null where it is not positive definite. */
function factorise(
  products: CrossProducts,
  theta: Float64Array,
  workspace: Workspace,
  watch: Watch,
): Factorisation | null {
  const { blocks, rest, restProducts, restComponent, q } = products;
  const { inverses, reach, schur, restInverse, scratch, own, scaled } = workspace;
  const residual = theta[theta.length - 1]!;
  const ofComponent = theta.map((value) => Math.sqrt(value / residual));
  const lambda = new Float64Array(q);
  const restStart = q - rest;
  for (let column = 0; column < rest; column++) lambda[restStart + column] = ofComponent[restComponent[column]!]!;
  for (let i = 0; i < rest; i++) {
    for (let j = 0; j <= i; j++) {
      schur[i * rest + j] =
        lambda[restStart + i]! * restProducts[i * rest + j]! * lambda[restStart + j]! + (i === j ? 1 : 0);
    }
  }
  let logDeterminant = 0;
  for (const [index, block] of blocks.entries()) {
    if ((index & 255) === 0) watch.checkpoint();
    const { size, touched, across, within, start, component } = block;
    const width = touched.length;
    for (let i = 0; i < size; i++) lambda[start + i] = ofComponent[component[i]!]!;
    for (let i = 0; i < size; i++) {
      for (let j = 0; j < size; j++) {
        own[i * size + j] = lambda[start + i]! * within[i * size + j]! * lambda[start + j]! + (i === j ? 1 : 0);
      }
    }
    const determinant = choleskyInPlace(own, size);
    if (Number.isNaN(determinant)) return null;
    logDeterminant += determinant;
    const inverse = inverses[index]!;
    inverseFromFactor(own, size, inverse, scratch);
    for (let i = 0; i < size; i++) {
      for (let j = 0; j < width; j++)
        scaled[i * width + j] = lambda[start + i]! * across[i * width + j]! * lambda[restStart + touched[j]!]!;
    }
    const far = reach[index]!;
    far.fill(0);
    for (let i = 0; i < size; i++) {
      for (let k = 0; k < size; k++) {
        const value = inverse[i * size + k]!;
        if (value === 0) continue;
        for (let j = 0; j < width; j++) far[i * width + j]! += value * scaled[k * width + j]!;
      }
    }
    for (let i = 0; i < size; i++) {
      for (let a = 0; a < width; a++) {
        const value = scaled[i * width + a]!;
        if (value === 0) continue;
        // Columns met are in ascending order: the lower triangle is all that the factor reads.
        const row = touched[a]! * rest;
        const line = i * width;
        for (let b = 0; b <= a; b++) schur[row + touched[b]!]! -= value * far[line + b]!;
      }
    }
  }
  if (rest > 0) {
    watch.checkpoint();
    const determinant = choleskyInPlace(schur, rest);
    if (Number.isNaN(determinant)) return null;
    logDeterminant += determinant;
    inverseFromFactor(schur, rest, restInverse, scratch);
  }
  return { logDeterminant, lambda, inverses, reach, restInverse };
}

/** N = M^-1 times `right` (q x columns), as a new array. */
export function solveRandom(
  products: CrossProducts,
  factorisation: Factorisation,
  right: Float64Array,
  columns: number,
): Float64Array {
  const { blocks, rest, q } = products;
  const { inverses, reach, restInverse } = factorisation;
  const restStart = q - rest;
  const out = new Float64Array(q * columns);
  const restRight = right.slice(restStart * columns);
  for (const [index, block] of blocks.entries()) {
    const { start, size, touched } = block;
    const inverse = inverses[index]!;
    const far = reach[index]!;
    const width = touched.length;
    for (let i = 0; i < size; i++) {
      for (let k = 0; k < size; k++) {
        const value = inverse[i * size + k]!;
        for (let c = 0; c < columns; c++) out[(start + i) * columns + c]! += value * right[(start + k) * columns + c]!;
      }
      for (let a = 0; a < width; a++) {
        const value = far[i * width + a]!;
        if (value === 0) continue;
        for (let c = 0; c < columns; c++)
          restRight[touched[a]! * columns + c]! -= value * right[(start + i) * columns + c]!;
      }
    }
  }
  for (let i = 0; i < rest; i++) {
    for (let k = 0; k < rest; k++) {
      const value = restInverse[i * rest + k]!;
      for (let c = 0; c < columns; c++) out[(restStart + i) * columns + c]! += value * restRight[k * columns + c]!;
    }
  }
  for (const [index, block] of blocks.entries()) {
    const { start, size, touched } = block;
    const far = reach[index]!;
    const width = touched.length;
    for (let i = 0; i < size; i++) {
      for (let a = 0; a < width; a++) {
        const value = far[i * width + a]!;
        if (value === 0) continue;
        for (let c = 0; c < columns; c++)
          out[(start + i) * columns + c]! -= value * out[(restStart + touched[a]!) * columns + c]!;
      }
    }
  }
  return out;
}

/** Sum of the diagonal of N per component. */
function inverseTraces(products: CrossProducts, factorisation: Factorisation): Float64Array {
  const { blocks, rest, restComponent } = products;
  const { inverses, reach, restInverse } = factorisation;
  const traces = new Float64Array(products.effects.length);
  for (const [index, block] of blocks.entries()) {
    const { size, touched, component } = block;
    const far = reach[index]!;
    const width = touched.length;
    for (let i = 0; i < size; i++) {
      let value = inverses[index]![i * size + i]!;
      for (let a = 0; a < width; a++) {
        const left = far[i * width + a]!;
        if (left === 0) continue;
        const row = touched[a]! * rest;
        const line = i * width;
        let inner = 0;
        for (let b = 0; b < a; b++) inner += restInverse[row + touched[b]!]! * far[line + b]!;
        value += left * (2 * inner + restInverse[row + touched[a]!]! * left);
      }
      traces[component[i]!]! += value;
    }
  }
  for (let i = 0; i < rest; i++) traces[restComponent[i]!]! += restInverse[i * rest + i]!;
  return traces;
}

/** Everything at one set of parameters that the deviance, its derivatives and Kenward-Roger's matrices are made of. */
export interface CrossedState {
  readonly factorisation: Factorisation;
  /** N Lambda Z'X, q x p. */
  readonly u: Float64Array;
  /** N Lambda Z'y. */
  readonly ey: Float64Array;
  /** X' V^-1 X and X' V^-1 y, and y' V^-1 y. */
  readonly a: Float64Array;
  readonly b: Float64Array;
  readonly squares: number;
  readonly traces: Float64Array;
}

export function crossedState(
  products: CrossProducts,
  theta: Float64Array,
  workspace: Workspace,
  watch: Watch,
): CrossedState | null {
  const factorisation = factorise(products, theta, workspace, watch);
  if (factorisation === null) return null;
  const { p, q, zx, zy, xx, xy, yy } = products;
  const residual = theta[theta.length - 1]!;
  const { lambda } = factorisation;
  const cx = zx.map((value, at) => value * lambda[Math.floor(at / p)]!);
  const cy = zy.map((value, at) => value * lambda[at]!);
  const u = solveRandom(products, factorisation, cx, p);
  const ey = solveRandom(products, factorisation, cy, 1);
  const a = xx.slice();
  const b = xy.slice();
  let squares = yy;
  for (let k = 0; k < q; k++) {
    for (let i = 0; i < p; i++) {
      const value = cx[k * p + i]!;
      if (value === 0) continue;
      b[i]! -= value * ey[k]!;
      for (let j = 0; j < p; j++) a[i * p + j]! -= value * u[k * p + j]!;
    }
    squares -= cy[k]! * ey[k]!;
  }
  return {
    factorisation,
    u,
    ey,
    a: a.map((value) => value / residual),
    b: b.map((value) => value / residual),
    squares: squares / residual,
    traces: inverseTraces(products, factorisation),
  };
}

function engineOf(
  products: CrossProducts,
  structure: CovarianceStructure,
  startingVariance: number,
  watch: Watch,
  simulate: (theta: Float64Array, beta: Float64Array, normal: () => number) => Engine,
): Engine {
  const parameters = covarianceParameters(structure);
  const { p, q, rows, effects } = products;
  const residualIndex = parameters.length - 1;
  const workspace = workspaceFor(products);
  const componentOf = new Int32Array(q);
  for (const block of products.blocks) componentOf.set(block.component, block.start);
  componentOf.set(products.restComponent, q - products.rest);

  return {
    parameters,
    columns: p,
    rows,
    startingVariance,
    varianceFloor: 1e-8,
    // Where a step is dear the last digits are left: 1e-7 standard errors.
    closeEnough: products.rest > 150 || products.q > 5000 ? 1e-14 : 1e-19,
    watch,
    evaluate(theta, active, criterion, nullBasis): Evaluation | null {
      const state = crossedState(products, theta, workspace, watch);
      if (state === null) return null;
      const { a, b, u, ey, factorisation, traces } = state;
      const solution = solveFixed(a, b, p, nullBasis, products.shift);
      if (solution === null) return null;
      const { beta, phi } = solution;
      let quadratic = state.squares;
      for (let i = 0; i < p; i++) {
        quadratic -= 2 * beta[i]! * b[i]!;
        for (let j = 0; j < p; j++) quadratic += beta[i]! * a[i * p + j]! * beta[j]!;
      }
      const residual = theta[residualIndex]!;
      const restricted = criterion === "REML";
      const deviance =
        factorisation.logDeterminant +
        rows * Math.log(residual) +
        quadratic +
        (restricted ? rows - p : rows) * Math.log(2 * Math.PI) +
        (restricted ? solution.logDeterminant : 0);
      if (!Number.isFinite(deviance)) return null;
      // e = N Lambda Z'(y - X beta), by component.
      const e = new Float64Array(q);
      for (let k = 0; k < q; k++) {
        let value = ey[k]!;
        for (let i = 0; i < p; i++) value -= u[k * p + i]! * beta[i]!;
        e[k] = value;
      }
      const random = active.filter((index) => index !== residualIndex);
      const r = active.length;
      const quadratics = new Float64Array(parameters.length);
      const projections = random.map(() => new Float64Array(p));
      const hats = new Float64Array(parameters.length);
      const inComponent = new Int32Array(parameters.length).fill(-1);
      for (const [at, index] of random.entries()) inComponent[index] = at;
      for (let k = 0; k < q; k++) {
        const at = inComponent[componentOf[k]!]!;
        if (at === -1) continue;
        const scale = 1 / (residual * theta[componentOf[k]!]!);
        quadratics[componentOf[k]!]! += scale * e[k]! ** 2;
        for (let i = 0; i < p; i++) {
          projections[at]![i]! += scale * u[k * p + i]! * e[k]!;
          if (!restricted) continue;
          for (let j = 0; j < p; j++) hats[componentOf[k]!]! += scale * u[k * p + i]! * phi[i * p + j]! * u[k * p + j]!;
        }
      }
      const gradient = new Float64Array(r);
      let traceLeft = rows - (restricted ? p : 0);
      let quadraticLeft = quadratic;
      for (const [at, index] of active.entries()) {
        if (index === residualIndex) continue;
        const trace = (effects[index]! - traces[index]!) / theta[index]! - hats[index]!;
        gradient[at] = trace - quadratics[index]!;
        traceLeft -= theta[index]! * trace;
        quadraticLeft -= theta[index]! * quadratics[index]!;
      }
      // Since V is the weighted sum of its parts, the residual's share is what the others leave.
      quadratics[residualIndex] = quadraticLeft / residual;
      gradient[active.indexOf(residualIndex)] = traceLeft / residual - quadraticLeft / residual;
      const information = averageInformation(products, factorisation, theta, active, residualIndex, {
        e,
        componentOf,
        projections,
        phi,
        quadratics,
      });
      return {
        deviance,
        beta: beta.map((value, index) => value + products.shift[index]!),
        phi,
        gradient,
        information,
        hessian: null,
      };
    },
    pieces(theta, active) {
      const state = crossedState(products, theta, workspace, watch);
      if (state === null) throw new Error("Pieces were asked for at parameters without a covariance.");
      return crossedPieces(products, state, theta, active, componentOf, watch);
    },
    simulated: simulate,
  };
}

/** Half of r'V^-1 V_i P V_j V^-1 r: observed and expected information, averaged. */
function averageInformation(
  products: CrossProducts,
  factorisation: Factorisation,
  theta: Float64Array,
  active: readonly number[],
  residualIndex: number,
  parts: {
    readonly e: Float64Array;
    readonly componentOf: Int32Array;
    readonly projections: readonly Float64Array[];
    readonly phi: Float64Array;
    readonly quadratics: Float64Array;
  },
): Float64Array {
  const { p, q } = products;
  const random = active.filter((index) => index !== residualIndex);
  const residual = theta[residualIndex]!;
  const m = random.length;
  const right = new Float64Array(q * m);
  for (let k = 0; k < q; k++) {
    const at = random.indexOf(parts.componentOf[k]!);
    if (at >= 0) right[k * m + at] = parts.e[k]!;
  }
  const solved = m > 0 ? solveRandom(products, factorisation, right, m) : right;
  const value = new Float64Array((m + 1) * (m + 1));
  const width = m + 1;
  for (let k = 0; k < q; k++) {
    const i = random.indexOf(parts.componentOf[k]!);
    if (i < 0) continue;
    for (let j = 0; j < m; j++) {
      const gap = (i === j ? parts.e[k]! : 0) - solved[k * m + j]!;
      value[i * width + j]! += (parts.e[k]! * gap) / (residual * theta[random[i]!]! * theta[random[j]!]!);
    }
  }
  for (let i = 0; i < m; i++) {
    for (let j = 0; j < m; j++) {
      for (let a = 0; a < p; a++) {
        for (let b = 0; b < p; b++) {
          value[i * width + j]! -= parts.projections[i]![a]! * parts.phi[a * p + b]! * parts.projections[j]![b]!;
        }
      }
    }
  }
  let corner = parts.quadratics[residualIndex]!;
  for (let j = 0; j < m; j++) {
    let left = parts.quadratics[random[j]!]!;
    for (let i = 0; i < m; i++) left -= theta[random[i]!]! * value[i * width + j]!;
    value[m * width + j] = left / residual;
    value[j * width + m] = left / residual;
    corner -= theta[random[j]!]! * (left / residual);
  }
  value[m * width + m] = corner / residual;
  // In the order of `active`.
  const r = active.length;
  const place = active.map((index) => (index === residualIndex ? m : random.indexOf(index)));
  const information = new Float64Array(r * r);
  for (let i = 0; i < r; i++)
    for (let j = 0; j < r; j++) information[i * r + j] = 0.5 * value[place[i]! * width + place[j]!]!;
  return information;
}
