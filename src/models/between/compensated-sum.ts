/**
 * Running sum with the rounding error of every addition carried along, so that the result is as if summed in twice the precision.
 * @source neumaier-1974 (Z. Angew. Math. Mech. 54, 39-51)
 */
export interface CompensatedSum {
  sum: number;
  lost: number;
}

export function newSum(): CompensatedSum {
  return { sum: 0, lost: 0 };
}

/** Adds a finite value. */
export function addTo(total: CompensatedSum, value: number): void {
  const next = total.sum + value;
  total.lost += Math.abs(total.sum) >= Math.abs(value) ? total.sum - next + value : value - next + total.sum;
  total.sum = next;
}

export function totalOf(total: CompensatedSum): number {
  return total.sum + total.lost;
}

/** Compensated sum of a whole list. */
export function exactSum(values: Iterable<number>): number {
  const total = newSum();
  for (const value of values) addTo(total, value);
  return totalOf(total);
}

/** Compensated sum of products of two lists of one length. */
export function exactProductSum(left: ArrayLike<number>, right: ArrayLike<number>): number {
  const total = newSum();
  for (let index = 0; index < left.length; index++) addTo(total, left[index]! * right[index]!);
  return totalOf(total);
}
