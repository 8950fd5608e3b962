import type { Watch } from "../host/index.ts";

/** What is left of a contrast outside a span counts as nothing below this share of its length: weights are small fractions, far from it. */
const zeroShare = 1e-9;

/** More sets than this are not enumerated: all pairs of 10 means have 115,975, of 11 means 678,570 (Bell numbers). */
export const mostTrueSets = 120_000;

/** One set of null hypotheses, as bits (32 members to a word). */
export interface TrueSet {
  readonly size: number;
  readonly words: Uint32Array;
}

/**
 * The sets of null hypotheses "contrast = 0" that can be true together while all others are false: those that hold every contrast that
 * lies in the span of their contrasts. Largest first. For all pairs of k means they are the partitions of the means, Bell(k) many.
 *
 * Outside the span of a set, contrasts that point the same way enter together; each such class makes one larger set. Every set has one first
 * basis (the smallest members that span it), so taking only classes whose first member comes after the last basis member meets each set once.
 *
 * @param weights  comparisons x means, row per comparison
 * @returns null when there are more than `mostTrueSets`
 * @source shaffer-1986
 */
export function possibleTrueSets(weights: readonly (readonly number[])[], watch: Watch): readonly TrueSet[] | null {
  const count = weights.length;
  const columns = weights[0]?.length ?? 0;
  const sets: TrueSet[] = [];
  const members: number[] = [];
  // What is left of every contrast outside the span, one buffer for each depth: contrasts x means.
  const buffers: Float64Array[] = [new Float64Array(count * columns)];
  const inside = new Uint8Array(count);
  for (const [i, row] of weights.entries()) {
    const length = Math.hypot(...row);
    if (length === 0) {
      inside[i] = 1;
      members.push(i);
    }
    for (const [k, weight] of row.entries()) buffers[0]![i * columns + k] = length === 0 ? 0 : weight / length;
  }

  const extend = (depth: number, last: number): boolean => {
    if (sets.length >= mostTrueSets) return false;
    if ((sets.length & 255) === 0) watch.checkpoint();
    sets.push(bitsOf(members, count));
    const residuals = buffers[depth]!;
    for (const group of parallelClasses(residuals, inside, columns)) {
      const first = group[0]!;
      if (first <= last) continue;
      buffers[depth + 1] ??= new Float64Array(count * columns);
      projectOut(residuals, buffers[depth + 1]!, first, columns);
      for (const i of group) inside[i] = 1;
      members.push(...group);
      const enough = extend(depth + 1, first);
      members.length -= group.length;
      for (const i of group) inside[i] = 0;
      if (!enough) return false;
    }
    return true;
  };
  return extend(0, -1) ? sets.sort((a, b) => b.size - a.size) : null;
}

function bitsOf(members: readonly number[], count: number): TrueSet {
  const words = new Uint32Array(Math.ceil(count / 32));
  for (const i of members) words[i >> 5]! |= 1 << (i & 31);
  return { size: members.length, words };
}

/** Fixed directions without structure (square roots of primes, fractional parts): contrasts that point the same way look the same along them. */
const generic = [2, 3, 5, 7, 11, 13, 17, 19, 23, 29, 31, 37, 41, 43, 47, 53].map((prime) => Math.sqrt(prime) % 1);

/** Members not inside, grouped by direction, each group ascending. */
function parallelClasses(residuals: Float64Array, inside: Uint8Array, columns: number): number[][] {
  const found: { readonly key: number; readonly row: number }[] = [];
  for (let row = 0; row < inside.length; row++) {
    if (inside[row]) continue;
    let square = 0;
    let along = 0;
    for (let k = 0; k < columns; k++) {
      const value = residuals[row * columns + k]!;
      square += value * value;
      along += value * (generic[k % generic.length]! + Math.floor(k / generic.length));
    }
    found.push({ key: Math.abs(along) / Math.sqrt(square), row });
  }
  found.sort((a, b) => a.key - b.key || a.row - b.row);
  const groups: number[][] = [];
  let start = 0;
  for (let end = 1; end <= found.length; end++) {
    if (end < found.length && found[end]!.key - found[end - 1]!.key <= zeroShare) continue;
    groups.push(
      ...byDirection(
        found.slice(start, end).map(({ row }) => row),
        residuals,
        columns,
      ),
    );
    start = end;
  }
  return groups;
}

/** Splits rows with one key by their true direction; nearly always they are one group. */
function byDirection(rows: readonly number[], residuals: Float64Array, columns: number): number[][] {
  const groups: number[][] = [];
  for (const row of [...rows].sort((a, b) => a - b)) {
    const home = groups.find((group) => isParallel(residuals, group[0]!, row, columns));
    if (home === undefined) groups.push([row]);
    else home.push(row);
  }
  return groups;
}

function isParallel(residuals: Float64Array, a: number, b: number, columns: number): boolean {
  let [aa, bb, ab] = [0, 0, 0];
  for (let k = 0; k < columns; k++) {
    const [x, y] = [residuals[a * columns + k]!, residuals[b * columns + k]!];
    aa += x * x;
    bb += y * y;
    ab += x * y;
  }
  return 1 - (ab * ab) / (aa * bb) <= zeroShare;
}

/** Takes the direction of one row out of all rows. */
function projectOut(from: Float64Array, into: Float64Array, row: number, columns: number): void {
  const base = row * columns;
  let square = 0;
  for (let k = 0; k < columns; k++) square += from[base + k]! ** 2;
  for (let start = 0; start < from.length; start += columns) {
    let dot = 0;
    for (let k = 0; k < columns; k++) dot += from[start + k]! * from[base + k]!;
    const share = dot / square;
    for (let k = 0; k < columns; k++) into[start + k] = from[start + k]! - share * from[base + k]!;
  }
}

/** The most null hypotheses that can be true together when those of `falseRows` are false. */
export function mostTrue(sets: readonly TrueSet[], falseRows: Uint32Array): number {
  for (const { size, words } of sets) {
    let disjoint = true;
    for (let w = 0; w < words.length && disjoint; w++) disjoint = (words[w]! & falseRows[w]!) === 0;
    if (disjoint) return size;
  }
  return 0;
}
