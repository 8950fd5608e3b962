import { DomainError } from "../../numeric/index.ts";

/**
 * Ranks from 1, equal values sharing the mean of their ranks.
 * @param values finite numbers, any order; not changed
 */
export function midRanks(values: ArrayLike<number>): Float64Array {
  const order = Int32Array.from({ length: values.length }, (_, index) => index).sort(
    (left, right) => values[left]! - values[right]!,
  );
  const ranks = new Float64Array(values.length);
  for (let start = 0; start < order.length; ) {
    const value = values[order[start]!]!;
    if (!Number.isFinite(value)) throw new DomainError("values", value, "finite numbers");
    let end = start + 1;
    while (end < order.length && values[order[end]!] === value) end++;
    for (let index = start; index < end; index++) ranks[order[index]!] = (start + 1 + end) / 2;
    start = end;
  }
  return ranks;
}
