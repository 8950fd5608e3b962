import { fUpperTail } from "../../src/numeric/index.ts";

/**
 * Joint tail of a multivariate t by directions: with correlation A A' of rank r the largest statistic is the length of an r-dimensional t vector times
 * h(u), the largest row of A along its direction u, and the length is free of the direction: P = mean over u of P(F(r, df) >= (c / h(u))^2 / r).
 * Midpoint rules over the circle (r = 2) or the sphere (r = 3), second order in the step, deterministic. A route of its own, for tests only.
 * @param steps  directions around the circle; on the sphere half as many bands
 */
export function tailByDirections(
  correlation: readonly (readonly number[])[],
  df: number,
  sides: "two-sided" | "upper",
  limit: number,
  steps: number,
): number {
  const factor = pivotedCholesky(correlation);
  const rank = factor[0]!.length;
  const tailAlong = (direction: readonly number[]) => {
    let largest = 0;
    for (const row of factor) {
      let along = 0;
      for (let k = 0; k < rank; k++) along += row[k]! * direction[k]!;
      largest = Math.max(largest, sides === "two-sided" ? Math.abs(along) : along);
    }
    return largest <= 0 ? 0 : fUpperTail((limit / largest) ** 2 / rank, rank, df);
  };
  if (rank === 1) return sides === "two-sided" ? tailAlong([1]) : (tailAlong([1]) + tailAlong([-1])) / 2;
  let sum = 0;
  if (rank === 2) {
    for (let i = 0; i < steps; i++) {
      const angle = (2 * Math.PI * (i + 0.5)) / steps;
      sum += tailAlong([Math.cos(angle), Math.sin(angle)]);
    }
    return sum / steps;
  }
  if (rank !== 3) throw new RangeError(`rank ${rank}: the oracle knows 1 to 3`);
  const bands = steps / 2;
  for (let b = 0; b < bands; b++) {
    // Heights are uniform on a sphere (Archimedes).
    const height = -1 + (2 * (b + 0.5)) / bands;
    const radius = Math.sqrt(1 - height * height);
    for (let i = 0; i < steps; i++) {
      const angle = (2 * Math.PI * (i + 0.5)) / steps;
      sum += tailAlong([radius * Math.cos(angle), radius * Math.sin(angle), height]);
    }
  }
  return sum / (bands * steps);
}

/** A with A A' = correlation, as many columns as its rank. */
function pivotedCholesky(correlation: readonly (readonly number[])[]): number[][] {
  const count = correlation.length;
  const left = correlation.map((row) => [...row]);
  const factor: number[][] = correlation.map(() => []);
  for (;;) {
    let pivot = 0;
    for (let i = 0; i < count; i++) if (left[i]![i]! > left[pivot]![pivot]!) pivot = i;
    const size = left[pivot]![pivot]!;
    if (size < 1e-9) return factor;
    const column = left.map((row) => row[pivot]! / Math.sqrt(size));
    for (let i = 0; i < count; i++) {
      factor[i]!.push(column[i]!);
      for (let j = 0; j < count; j++) left[i]![j]! -= column[i]! * column[j]!;
    }
  }
}
