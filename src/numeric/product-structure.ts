/** Joint tails of statistics whose correlations are products, loading_i loading_j: many groups against one, equicorrelated contrasts. */
import { normalDensity, normalUpperTail } from "./normal.ts";
import type { ScaledTail } from "./scale-mixture.ts";

export type Sides = "two-sided" | "upper";

/** Statistics that share a loading. */
interface Alike {
  readonly loading: number;
  /** sqrt(1 - loading^2) */
  readonly own: number;
  readonly count: number;
}

/**
 * Tail of the largest of jointly normal statistics with unit variance and correlations loading_i loading_j, at known deviation: the integral over
 * the common part z of density(z) (1 - product of conditional lower tails), the parenthesis from the sum of log(1 - conditional tail).
 *
 * Trapezoidal rule; the sharpest conditional tail in z is normal with deviation own / loading, which sets the step.
 *
 * @param loadings -1 < loading < 1
 * @source Dunnett (1955); Dunnett & Sobel (1955)
 */
export function productTail(loadings: readonly number[], sides: Sides): ScaledTail {
  const groups = alike(loadings, sides);
  let sharpest = 1;
  let total = 0;
  for (const { own, count } of groups) {
    sharpest = Math.min(sharpest, own);
    total += count;
  }
  const spread = Math.sqrt(1 + 0.5 * Math.log(total));
  const step = (0.45 * sharpest) / spread;
  const bothSides = sides === "two-sided";
  // two-sided tails are even in z
  const even = bothSides;
  const conditional = (z: number, w: number): number => {
    let logNone = 0;
    for (const { loading, own, count } of groups) {
      const shift = loading * z;
      let exceeds = normalUpperTail((w - shift) / own);
      if (bothSides) exceeds += normalUpperTail((w + shift) / own);
      if (exceeds >= 1) return 1;
      logNone += count * Math.log1p(-exceeds);
    }
    return -Math.expm1(logNone);
  };
  const at = (w: number): number => {
    if (bothSides && w <= 0) return 1;
    // the integrand's peak lies between 0 and the place where the common part alone reaches w
    const reach = Math.abs(w) + 1;
    let sum = conditional(0, w) * normalDensity(0);
    for (const direction of even ? [1] : [1, -1]) {
      for (let k = 1; ; k++) {
        const z = direction * k * step;
        const density = normalDensity(z);
        const term = density * conditional(z, w);
        sum += even ? 2 * term : term;
        if ((density < 1e-18 * sum || (term < 1e-18 * sum && k * step > reach)) && k * step > 1) break;
        if (density === 0) break;
      }
    }
    return Math.min(1, step * sum);
  };
  return {
    decay: 0.5,
    largestStep: (2 * Math.PI * Math.min(Math.PI / 4, Math.PI / 2 / (1 + 2 * Math.log(total)))) / 36,
    scaled: (w) => {
      if (w > 37.5) return 0;
      return at(w) * Math.exp(0.5 * w * w);
    },
  };
}

function alike(loadings: readonly number[], sides: Sides): readonly Alike[] {
  const counts = new Map<number, number>();
  for (const loading of loadings) {
    // two-sided tails do not see the sign
    const key = sides === "two-sided" ? Math.abs(loading) : loading;
    counts.set(key, (counts.get(key) ?? 0) + 1);
  }
  return [...counts].map(([loading, count]) => ({ loading, own: Math.sqrt((1 - loading) * (1 + loading)), count }));
}

/**
 * Loadings with loading_i loading_j = correlation_ij for all i != j, or null when there are none inside (-1, 1).
 * One or two statistics always have them (unless they are the same).
 */
export function productLoadings(correlation: readonly (readonly number[])[]): readonly number[] | null {
  const size = correlation.length;
  const limit = 1 - 1e-7;
  const tolerance = 1e-13;
  if (size === 1) return [0];
  if (size === 2) {
    const r = correlation[0]![1]!;
    if (Math.abs(r) >= limit) return null;
    const root = Math.sqrt(Math.abs(r));
    return [root, r < 0 ? -root : root];
  }
  const loadings = new Array<number>(size).fill(0);
  // statistics uncorrelated with all others have loading 0; the others must be correlated among each other
  const linked = correlation
    .map((_row, i) => i)
    .filter((i) => correlation[i]!.some((value, j) => j !== i && Math.abs(value) > tolerance));
  if (linked.length === 1) return null;
  if (linked.length === 2) {
    const [a, b] = linked as [number, number];
    const two = productLoadings([
      [1, correlation[a]![b]!],
      [correlation[a]![b]!, 1],
    ]);
    if (two === null) return null;
    loadings[a] = two[0]!;
    loadings[b] = two[1]!;
    return loadings;
  }
  if (linked.length > 2) {
    // the three largest products fix the first loading with the least rounding
    const first = linked[0]!;
    let best = 0;
    let square = 0;
    for (const j of linked) {
      for (const k of linked) {
        if (j === first || k === first || j >= k) continue;
        const between = correlation[j]![k]!;
        if (Math.abs(between) > best) {
          best = Math.abs(between);
          square = (correlation[first]![j]! * correlation[first]![k]!) / between;
        }
      }
    }
    if (!(square > 0 && square < limit)) return null;
    loadings[first] = Math.sqrt(square);
    for (const j of linked) if (j !== first) loadings[j] = correlation[first]![j]! / loadings[first]!;
  }
  for (let i = 0; i < size; i++) {
    if (!(Math.abs(loadings[i]!) < limit)) return null;
    for (let j = 0; j < i; j++)
      if (Math.abs(loadings[i]! * loadings[j]! - correlation[i]![j]!) > tolerance) return null;
  }
  return loadings;
}
