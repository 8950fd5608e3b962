import { silentWatch } from "../../src/host/index.ts";
import { comparisonP, type FamilyProblem } from "../../src/families/index.ts";

/** A problem of which only some fields matter to a test; own p are those of the t statistics unless given. */
export function problemOf(fields: Partial<FamilyProblem> & { readonly p?: readonly number[] }): FamilyProblem {
  const count = fields.p?.length ?? fields.estimates?.length ?? fields.names?.length ?? 0;
  const spread = <T>(value: T) => new Array<T>(count).fill(value);
  const estimates = fields.estimates ?? spread(1);
  const standardErrors = fields.standardErrors ?? spread(1);
  const df = fields.df ?? spread(20);
  const sides = fields.sides ?? "two-sided";
  const margin = fields.margin ?? null;
  const { p: _, ...withoutP } = fields;
  return {
    names: spread("").map((_, i) => `c${i + 1}`),
    correlation: null,
    commonDf: null,
    error: 0.05,
    shape: { kind: "free", means: null, repeated: false, within: false },
    weights: [],
    graph: null,
    resamples: null,
    seed: 1,
    watch: silentWatch,
    p:
      fields.p ??
      estimates.map((estimate, i) =>
        comparisonP({ estimate, standardError: standardErrors[i]!, df: df[i]!, sides, margin }),
      ),
    ...withoutP,
    estimates,
    standardErrors,
    df,
    sides,
    margin,
  };
}

/** Contrast weights of all pairs of k means, first minus second. */
export function allPairs(means: number): number[][] {
  const rows: number[][] = [];
  for (let i = 0; i < means; i++)
    for (let j = i + 1; j < means; j++)
      rows.push(Array.from({ length: means }, (_, k) => (k === i ? 1 : k === j ? -1 : 0)));
  return rows;
}

/** Covariance of contrasts of independent means with the given variances. */
export function contrastCovariance(weights: readonly (readonly number[])[], variances: readonly number[]): number[][] {
  return weights.map((a) => weights.map((b) => a.reduce((sum, w, k) => sum + w * b[k]! * variances[k]!, 0)));
}

export function correlationOf(covariance: readonly (readonly number[])[]): number[][] {
  return covariance.map((row, i) =>
    row.map((value, j) => (i === j ? 1 : value / Math.sqrt(covariance[i]![i]! * covariance[j]![j]!))),
  );
}

/** Small generator for test data (Marsaglia 2003, 32-bit xorshift); not the core's. */
export function testRandom(seed: number): () => number {
  let state = (seed * 2654435761) >>> 0 || 1;
  const next = () => {
    state ^= state << 13;
    state >>>= 0;
    state ^= state >>> 17;
    state ^= state << 5;
    state >>>= 0;
    return state / 4294967296;
  };
  for (let i = 0; i < 20; i++) next();
  return next;
}

/** p values as families have them: many small ones, some ties, some on round numbers. */
export function randomP(random: () => number, count: number): number[] {
  const p: number[] = [];
  for (let i = 0; i < count; i++) {
    const kind = random();
    if (kind < 0.1 && i > 0) p.push(p[Math.floor(random() * i)]!);
    else if (kind < 0.2) p.push(Math.round(random() * 100) / 1000);
    else p.push(random() ** 3);
  }
  return p;
}

/** All non-empty subsets of 0..count-1 as index lists. */
export function subsets(count: number): number[][] {
  return Array.from({ length: 2 ** count - 1 }, (_, k) =>
    Array.from({ length: count }, (_, i) => i).filter((i) => ((k + 1) >> i) & 1),
  );
}

/**
 * Adjusted p by the full closure: the largest local p over all intersections that hold the row.
 * @source Marcus, Peritz & Gabriel (1976)
 */
export function closedAdjustedP(
  p: readonly number[],
  localP: (rows: readonly number[]) => number,
  intersections: readonly (readonly number[])[] = subsets(p.length),
): number[] {
  const adjusted = p.map(() => 0);
  for (const rows of intersections) {
    const local = Math.min(1, localP(rows));
    for (const row of rows) adjusted[row] = Math.max(adjusted[row]!, local);
  }
  return adjusted;
}

/** "1/3", "0.25", "2" as a number. */
export function fraction(text: string): number {
  const [over, under] = text.split("/");
  return under === undefined ? Number(over) : Number(over) / Number(under);
}
