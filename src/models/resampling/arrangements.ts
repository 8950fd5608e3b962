import { DomainError, randomStream } from "../../numeric/index.ts";

/** The ways to rearrange a study that a hypothesis calls equally likely. Index 0 is the study as observed. */
export interface Arrangements<Target> {
  readonly count: number;
  /** True when these are all of them, each once. */
  readonly exact: boolean;
  /** Writes arrangement `index` (0 <= index < count) into `target`. */
  readonly fill: (index: number, target: Target) => void;
}

export interface ArrangementOptions {
  /** Enumerate all when there are at most so many. */
  readonly mostExact: number;
  /** Otherwise draw so many, besides the observed one. */
  readonly resamples: number;
  /** Of the random streams; resample `index` is the same whatever ran before it. */
  readonly seed: number;
}

/** How many ways a multiset can be ordered; Infinity when beyond 2^53. */
function orderings(counts: readonly number[]): number {
  let ways = 1;
  let placed = 0;
  for (const count of counts) {
    for (let step = 1; step <= count; step++) {
      placed++;
      ways = (ways * placed) / step;
      if (ways > Number.MAX_SAFE_INTEGER) return Number.POSITIVE_INFINITY;
    }
  }
  return Math.round(ways);
}

interface Stratum {
  readonly rows: readonly number[];
  /** Distinct labels, ascending, and how many rows have each. */
  readonly labels: readonly number[];
  readonly counts: readonly number[];
  readonly ways: number;
}

function strataOf(labels: Int32Array, strata: Int32Array): Stratum[] {
  const rowsOf = new Map<number, number[]>();
  for (const [row, stratum] of strata.entries()) {
    const rows = rowsOf.get(stratum);
    if (rows === undefined) rowsOf.set(stratum, [row]);
    else rows.push(row);
  }
  return [...rowsOf.values()].map((rows) => {
    const counts = new Map<number, number>();
    for (const row of rows) counts.set(labels[row]!, (counts.get(labels[row]!) ?? 0) + 1);
    const distinct = [...counts.keys()].sort((left, right) => left - right);
    const sizes = distinct.map((label) => counts.get(label)!);
    return { rows, labels: distinct, counts: sizes, ways: orderings(sizes) };
  });
}

/** Place of the labels of a stratum in lexicographic order. */
function rankOf(stratum: Stratum, labels: Int32Array): number {
  const left = [...stratum.counts];
  let ways = stratum.ways;
  let remaining = stratum.rows.length;
  let rank = 0;
  for (const row of stratum.rows) {
    const at = stratum.labels.indexOf(labels[row]!);
    for (let before = 0; before < at; before++) rank += Math.round((ways * left[before]!) / remaining);
    ways = Math.round((ways * left[at]!) / remaining);
    left[at]!--;
    remaining--;
  }
  return rank;
}

function writeRank(stratum: Stratum, rank: number, target: Int32Array): void {
  const left = [...stratum.counts];
  let ways = stratum.ways;
  let remaining = stratum.rows.length;
  let rest = rank;
  for (const row of stratum.rows) {
    for (let at = 0; at < left.length; at++) {
      const share = Math.round((ways * left[at]!) / remaining);
      if (rest >= share) {
        rest -= share;
        continue;
      }
      target[row] = stratum.labels[at]!;
      ways = share;
      left[at]!--;
      remaining--;
      break;
    }
  }
}

/**
 * Labels shuffled among the rows of each stratum.
 * @param labels observed label of each row
 * @param strata stratum of each row; labels never cross strata
 * @param purpose tells apart the random streams of two rearrangements of one study
 */
export function labelArrangements(
  labels: Int32Array,
  strata: Int32Array,
  options: ArrangementOptions,
  purpose = "rearranging",
): Arrangements<Int32Array> {
  if (labels.length !== strata.length) throw new DomainError("strata", strata.length, `${labels.length} entries`);
  const parts = strataOf(labels, strata).filter((stratum) => stratum.ways > 1);
  const total = parts.reduce((ways, stratum) => ways * stratum.ways, 1);
  if (total <= options.mostExact) {
    let observed = 0;
    for (const stratum of parts) observed = observed * stratum.ways + rankOf(stratum, labels);
    return {
      count: total,
      exact: true,
      fill: (index, target) => {
        target.set(labels);
        // The observed arrangement takes place 0; the one that was there takes its place.
        let rest = index === 0 ? observed : index === observed ? 0 : index;
        for (let at = parts.length - 1; at >= 0; at--) {
          writeRank(parts[at]!, rest % parts[at]!.ways, target);
          rest = Math.floor(rest / parts[at]!.ways);
        }
      },
    };
  }
  return {
    count: options.resamples + 1,
    exact: false,
    fill: (index, target) => {
      target.set(labels);
      if (index === 0) return;
      const stream = randomStream(options.seed, purpose, index);
      for (const { rows } of parts) {
        for (let last = rows.length - 1; last > 0; last--) {
          const other = stream.integer(last + 1);
          const held = target[rows[last]!]!;
          target[rows[last]!] = target[rows[other]!]!;
          target[rows[other]!] = held;
        }
      }
    },
  };
}

/** Every subject's scores with their sign kept or turned: fills +1 or -1 per subject. */
export function signArrangements(subjects: number, options: ArrangementOptions): Arrangements<Int32Array> {
  const total = 2 ** subjects;
  const exact = total <= options.mostExact;
  return {
    count: exact ? total : options.resamples + 1,
    exact,
    fill: (index, target) => {
      if (index === 0) {
        target.fill(1);
        return;
      }
      if (exact) {
        for (let subject = 0; subject < subjects; subject++) target[subject] = (index >> subject) & 1 ? -1 : 1;
        return;
      }
      const stream = randomStream(options.seed, "turning signs", index);
      for (let subject = 0; subject < subjects; subject++) target[subject] = stream.integer(2) === 0 ? -1 : 1;
    },
  };
}
