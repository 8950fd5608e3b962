/** Indices in ascending order of value; equal values keep member order, so that an answer never depends on the sort. */
export function ascendingOrder(values: ArrayLike<number>): number[] {
  return Array.from({ length: values.length }, (_, i) => i).sort((a, b) => values[a]! - values[b]! || a - b);
}

/** The same order without one index: the other rows, as they stand when only row `left` may move. */
export function withoutIndex(order: readonly number[], left: number): number[] {
  return order.filter((index) => index !== left);
}

/** The next smaller double below a positive number. */
export function nextBelow(value: number): number {
  const bits = new DataView(new ArrayBuffer(8));
  bits.setFloat64(0, value);
  bits.setBigUint64(0, bits.getBigUint64(0) - 1n);
  return bits.getFloat64(0);
}
