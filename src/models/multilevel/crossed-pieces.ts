import type { Watch } from "../../host/index.ts";
import { invertPositive } from "./block-algebra.ts";
import { type CrossedState, type CrossProducts, solveRandom } from "./crossed-units.ts";
import { addProjectionTerms } from "./direct-blocks.ts";
import type { Pieces } from "./engine.ts";

/** Squared Frobenius norms of the blocks of I - N, per pair of components: traces of V^-1 V_i V^-1 V_j up to variances. */
function componentNorms(products: CrossProducts, state: CrossedState, watch: Watch): Float64Array {
  const { blocks, rest, restComponent } = products;
  const { inverses, reach, restInverse } = state.factorisation;
  const count = products.effects.length;
  const norms = new Float64Array(count * count);
  const inBlocks = new Uint8Array(count);
  for (const block of blocks) for (const component of block.component) inBlocks[component] = 1;
  // K_i: sum over blocks of F' F with the rows of component i only.
  const gathered = Array.from({ length: count }, (_, component) =>
    inBlocks[component] === 1 && rest > 0 ? new Float64Array(rest * rest) : null,
  );
  for (const [index, block] of blocks.entries()) {
    if ((index & 63) === 0) watch.checkpoint();
    const { size, touched, component } = block;
    const far = reach[index]!;
    const width = touched.length;
    // F S^-1, size x touched.
    const half = new Float64Array(size * width);
    for (let i = 0; i < size; i++) {
      for (let a = 0; a < width; a++) {
        const value = far[i * width + a]!;
        if (value === 0) continue;
        const row = touched[a]! * rest;
        for (let b = 0; b < width; b++) half[i * width + b]! += value * restInverse[row + touched[b]!]!;
      }
    }
    for (let i = 0; i < size; i++) {
      const sum = gathered[component[i]!];
      if (sum !== null && sum !== undefined) {
        for (let a = 0; a < width; a++) {
          const value = far[i * width + a]!;
          if (value === 0) continue;
          const row = touched[a]! * rest;
          for (let b = 0; b < width; b++) sum[row + touched[b]!]! += value * far[i * width + b]!;
        }
      }
      for (let j = 0; j < size; j++) {
        let through = 0;
        for (let a = 0; a < width; a++) through += half[i * width + a]! * far[j * width + a]!;
        const own = (i === j ? 1 : 0) - inverses[index]![i * size + j]! - through;
        // The part through the rest is counted below for all pairs of blocks; a block with itself has its own part too.
        norms[component[i]! * count + component[j]!]! += own * own - through * through;
      }
    }
  }
  if (rest === 0) return norms;
  // J_i = S^-1 K_i.
  const spread = gathered.map((sum) => {
    if (sum === null) return null;
    watch.checkpoint();
    const out = new Float64Array(rest * rest);
    for (let i = 0; i < rest; i++) {
      for (let k = 0; k < rest; k++) {
        const value = restInverse[i * rest + k]!;
        for (let j = 0; j < rest; j++) out[i * rest + j]! += value * sum[k * rest + j]!;
      }
    }
    return out;
  });
  for (let i = 0; i < count; i++) {
    const left = spread[i];
    if (left === null || left === undefined) continue;
    for (let j = 0; j < count; j++) {
      const right = spread[j];
      if (right !== null && right !== undefined) {
        let trace = 0;
        for (let a = 0; a < rest; a++)
          for (let b = 0; b < rest; b++) trace += left[a * rest + b]! * right[b * rest + a]!;
        norms[i * count + j]! += trace;
      }
    }
    for (let a = 0; a < rest; a++) {
      let value = 0;
      for (let b = 0; b < rest; b++) value += left[a * rest + b]! * restInverse[b * rest + a]!;
      norms[i * count + restComponent[a]!]! += value;
      norms[restComponent[a]! * count + i]! += value;
    }
  }
  for (let a = 0; a < rest; a++) {
    for (let b = 0; b < rest; b++) {
      const value = (a === b ? 1 : 0) - restInverse[a * rest + b]!;
      norms[restComponent[a]! * count + restComponent[b]!]! += value * value;
    }
  }
  return norms;
}

/**
 * Kenward-Roger's matrices and the expected information for crossed units, without forming anything the size of the rows. What
 * belongs to the residual variance follows from V being the weighted sum of its parts.
 */
export function crossedPieces(
  products: CrossProducts,
  state: CrossedState,
  theta: Float64Array,
  active: readonly number[],
  componentOf: Int32Array,
  watch: Watch,
): Pieces {
  const { p, q, rows, effects } = products;
  const { u, a, traces, factorisation } = state;
  const residualIndex = theta.length - 1;
  const residual = theta[residualIndex]!;
  const random = active.filter((index) => index !== residualIndex);
  const m = random.length;
  const inverted = invertPositive(a, p, 0);
  if (inverted === null) throw new Error("The fixed effects of a fitted model cannot be singular.");
  const phi = inverted.inverse;

  const minusP = random.map(() => new Float64Array(p * p));
  const q2 = random.map(() => random.map(() => new Float64Array(p * p)));
  const place = Int32Array.from(componentOf, (component) => random.indexOf(component));
  for (let j = 0; j < m; j++) {
    watch.checkpoint();
    const right = new Float64Array(q * p);
    for (let k = 0; k < q; k++) {
      if (place[k] === j) for (let i = 0; i < p; i++) right[k * p + i] = u[k * p + i]!;
    }
    const solved = solveRandom(products, factorisation, right, p);
    for (let k = 0; k < q; k++) {
      const i = place[k]!;
      if (i < 0) continue;
      const scale = 1 / (residual * theta[random[i]!]! * theta[random[j]!]!);
      const target = q2[i]![j]!;
      for (let s = 0; s < p; s++) {
        const left = scale * u[k * p + s]!;
        if (left === 0) continue;
        for (let t = 0; t < p; t++) target[s * p + t]! += left * (right[k * p + t]! - solved[k * p + t]!);
      }
      if (i !== j) continue;
      for (let s = 0; s < p; s++) {
        const left = u[k * p + s]! / (residual * theta[random[i]!]!);
        for (let t = 0; t < p; t++) minusP[i]![s * p + t]! += left * u[k * p + t]!;
      }
    }
  }
  const symmetric = (matrix: Float64Array) =>
    matrix.map((value, at) => 0.5 * (value + matrix[(at % p) * p + Math.floor(at / p)]!));
  const qs = q2.map((row) => row.map(symmetric));
  /** (total - sum of theta_i parts_i) / residual. */
  const left = (total: Float64Array, parts: readonly Float64Array[]) =>
    total.map(
      (value, at) => (value - parts.reduce((sum, part, i) => sum + theta[random[i]!]! * part[at]!, 0)) / residual,
    );
  const minusP0 = left(a, minusP);
  const q0 = random.map((_, j) =>
    left(
      minusP[j]!,
      random.map((__, i) => qs[i]![j]!),
    ),
  );
  const q00 = left(minusP0, q0);

  const norms = componentNorms(products, state, watch);
  const count = effects.length;
  const width = m + 1;
  const squares = new Float64Array(width * width);
  for (let i = 0; i < m; i++) {
    for (let j = 0; j < m; j++) {
      squares[i * width + j] = norms[random[i]! * count + random[j]!]! / (theta[random[i]!]! * theta[random[j]!]!);
    }
  }
  const single = random.map((index) => (effects[index]! - traces[index]!) / theta[index]!);
  const single0 = (rows - single.reduce((sum, value, i) => sum + theta[random[i]!]! * value, 0)) / residual;
  let corner = single0;
  for (let j = 0; j < m; j++) {
    let value = single[j]!;
    for (let i = 0; i < m; i++) value -= theta[random[i]!]! * squares[i * width + j]!;
    squares[m * width + j] = value / residual;
    squares[j * width + m] = value / residual;
    corner -= theta[random[j]!]! * (value / residual);
  }
  squares[m * width + m] = corner / residual;

  const at = active.map((index) => (index === residualIndex ? m : random.indexOf(index)));
  const r = active.length;
  const pOf = (i: number) => (i === m ? minusP0 : minusP[i]!).map((value) => -value);
  const qOf = (i: number, j: number) => (i === m ? (j === m ? q00 : q0[j]!) : j === m ? q0[i]! : qs[i]![j]!);
  const information = new Float64Array(r * r);
  const derivatives = at.map(pOf);
  const pairs = at.map((i, row) => at.slice(0, row + 1).map((j) => qOf(i, j)));
  for (let i = 0; i < r; i++) {
    for (let j = 0; j <= i; j++) {
      let trace = 0;
      const pair = pairs[i]![j]!;
      for (let s = 0; s < p; s++) for (let t = 0; t < p; t++) trace += phi[s * p + t]! * pair[t * p + s]!;
      information[i * r + j] = 0.5 * squares[at[i]! * width + at[j]!]! - trace;
    }
  }
  addProjectionTerms(derivatives, phi, p, information);
  for (let i = 0; i < r; i++) for (let j = 0; j < i; j++) information[j * r + i] = information[i * r + j]!;
  return { phi, p: derivatives, q: pairs, information };
}
