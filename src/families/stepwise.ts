import { reaches } from "./answer.ts";

/** What a step-down method by joint tails knows once its main pass is done. */
export interface StepDown {
  /** Rows, the strongest statistic first. */
  readonly order: readonly number[];
  /** For each place: the joint tail of all rows from that place on, at the statistic of that place. */
  readonly raw: ArrayLike<number>;
  readonly error: number;
  /** Tail of one row alone at the statistic of another. */
  ownTailAt(row: number, other: number): number;
  /** Joint tail of rows at the statistic of one of them. */
  jointTailAt(rows: readonly number[], other: number): number;
}

/** Never below an earlier place: the adjusted p of the raw ones, by row. */
export function steppedAdjustedP({ order, raw }: Pick<StepDown, "order" | "raw">): number[] {
  const adjustedP = new Array<number>(order.length);
  let largest = 0;
  for (const [place, row] of order.entries()) {
    largest = Math.max(largest, Math.min(1, raw[place]!));
    adjustedP[row] = largest;
  }
  return adjustedP;
}

/**
 * The rows among which one row is judged when the others have been rejected as far as they go while it stands: itself and what is left.
 * Ahead of the row's own place it is among those compared anyway; behind it, it is one more, and adds between nothing and its own tail, which
 * settles most steps without another joint tail.
 */
export function leftStanding(step: StepDown, row: number): number[] {
  const { order, raw, error } = step;
  const place = order.indexOf(row);
  let next = 0;
  for (; next < order.length; next++) {
    if (next === place) continue;
    const other = order[next]!;
    if (!reaches(raw[next]!, error)) break;
    if (next < place || reaches(raw[next]! + step.ownTailAt(row, other), error)) continue;
    if (!reaches(step.jointTailAt([row, ...order.slice(next)], other), error)) break;
  }
  return [row, ...order.slice(next).filter((other) => other !== row)].sort((a, b) => a - b);
}

/** One value per set of rows, however many rows share it. */
export function once<T>(work: (rows: readonly number[]) => T): (rows: readonly number[]) => T {
  const known = new Map<string, T>();
  return (rows) => {
    const key = rows.join(" ");
    if (!known.has(key)) known.set(key, work(rows));
    return known.get(key)!;
  };
}
