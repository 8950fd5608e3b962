import type { Watch } from "../host/index.ts";

/** A weight below this share of its row's length counts as zero: contrast weights are small fractions, far from it. */
const zeroShare = 1e-9;

/** More sets than this are not enumerated: all pairs of 10 means have 115,975, of 11 means 678,570 (Bell numbers). */
export const mostTrueSets = 200_000;

/**
 * The sets of null hypotheses "contrast = 0" that can be true together while all others are false: those that hold every contrast that
 * lies in the span of their contrasts. Largest first, each as a list of bit words (32 members to a word).
 * For all pairs of k means they are the partitions of the means, Bell(k) many.
 *
 * Every such set has one first basis (the smallest indices that span it), so extending a set only by members beyond its last basis member,
 * and only where the new span takes in nothing smaller, meets each set once.
 *
 * @param weights  comparisons x means, row per comparison
 * @returns null when there are more than `mostTrueSets`
 * @source shaffer-1986
 */
export function possibleTrueSets(
  weights: readonly (readonly number[])[],
  watch: Watch,
): readonly { readonly size: number; readonly words: Uint32Array }[] | null {
  const count = weights.length;
  const wordCount = Math.ceil(count / 32);
  const sets: { size: number; words: Uint32Array }[] = [];
  const unit = weights.map((row) => {
    const length = Math.hypot(...row);
    return Float64Array.from(row, (weight) => (length === 0 ? 0 : weight / length));
  });
  let overflow = false;
  let steps = 0;

  // residuals: what is left of every contrast outside the span of the set; zero exactly for its members.
  const extend = (residuals: readonly Float64Array[], inside: readonly boolean[], last: number) => {
    if (sets.length >= mostTrueSets) {
      overflow = true;
      return;
    }
    if ((++steps & 1023) === 0) watch.checkpoint();
    const words = new Uint32Array(wordCount);
    let size = 0;
    for (let i = 0; i < count; i++)
      if (inside[i]) {
        words[i >> 5]! |= 1 << (i & 31);
        size++;
      }
    sets.push({ size, words });
    for (let added = last + 1; added < count && !overflow; added++) {
      if (inside[added]) continue;
      const direction = residuals[added]!;
      const length = Math.hypot(...direction);
      const nextInside = [...inside];
      const next: Float64Array[] = new Array(count);
      let first = true;
      for (let i = 0; i < count && first; i++) {
        const old = residuals[i]!;
        if (inside[i]) {
          next[i] = old;
          continue;
        }
        let dot = 0;
        for (let k = 0; k < old.length; k++) dot += old[k]! * direction[k]!;
        const share = dot / (length * length);
        const left = old.map((value, k) => value - share * direction[k]!);
        next[i] = left;
        if (Math.hypot(...left) <= zeroShare) {
          if (i < added) first = false;
          nextInside[i] = true;
        }
      }
      if (first) extend(next, nextInside, added);
    }
  };
  extend(
    unit,
    unit.map((row) => row.every((value) => value === 0)),
    -1,
  );
  return overflow ? null : sets.sort((a, b) => b.size - a.size);
}

/** The most null hypotheses that can be true together when those of `falseRows` are false. */
export function mostTrue(
  sets: readonly { readonly size: number; readonly words: Uint32Array }[],
  falseRows: Uint32Array,
): number {
  for (const { size, words } of sets) {
    let disjoint = true;
    for (let w = 0; w < words.length && disjoint; w++) disjoint = (words[w]! & falseRows[w]!) === 0;
    if (disjoint) return size;
  }
  return 0;
}
