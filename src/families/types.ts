import type { Watch } from "../host/index.ts";

/** The declared method with its own declarations. */
export type CorrectionName =
  | "none"
  | "bonferroni"
  | "sidak"
  | "holm"
  | "hochberg"
  | "hommel"
  | "shaffer"
  | "tukey"
  | "games-howell"
  | "dunnett"
  | "scheffe"
  | "single-step"
  | "step-down"
  | "resampling"
  | "fixed sequence"
  | "fallback"
  | "graph"
  | "bh"
  | "by"
  | "dunn"
  | "conover"
  | "nemenyi";

/** Everything a correction may look at. It does not know where the estimates came from. */
export interface FamilyProblem {
  /** Names of the comparisons, in member order. */
  readonly names: readonly string[];
  readonly estimates: readonly number[];
  readonly standardErrors: readonly number[];
  readonly df: readonly number[];
  /** Own (unadjusted) p of each comparison, for the declared sides or the two one-sided tests of a margin. */
  readonly p: readonly number[];
  readonly correlation: readonly (readonly number[])[] | null;
  readonly commonDf: number | null;
  readonly sides: "two-sided" | "upper" | "lower";
  readonly margin: {
    readonly type: "equivalence" | "not worse";
    readonly value: number;
    readonly better: "lower" | "higher" | null;
  } | null;
  /** Error held, as a fraction. */
  readonly error: number;
  readonly shape: {
    readonly kind: "all pairs" | "against one" | "against mean" | "neighbours" | "trend" | "free";
    readonly means: number | null;
    readonly repeated: boolean;
    readonly within: boolean;
  };
  /** Contrast weights over means, comparisons x means: for logical constraints and Scheffe's rank. */
  readonly weights: readonly (readonly number[])[];
  /** Initial weights and passing shares, where the method has them. */
  readonly graph: { readonly weights: readonly number[]; readonly passes: readonly (readonly number[])[] } | null;
  /**
   * Resampling: fills `statistics` (length of names) with the signed test statistics of resample `index`; index 0 is the observed
   * arrangement. `count` resamples in all; `exact` when they are the whole enumeration.
   */
  readonly resamples: {
    readonly count: number;
    readonly exact: boolean;
    readonly fill: (index: number, statistics: Float64Array) => void;
  } | null;
  readonly seed: number;
  readonly watch: Watch;
  /** True when the estimates are differences of mean ranks (Dunn, Conover, Nemenyi); absent or false otherwise. */
  readonly ranks?: boolean;
}

export interface FamilyAnswer {
  /**
   * Own p of each comparison, on the scale that `threshold` is on: the problem's own, except where the method brings its own p
   * (resampling: the share of resamples that reach the statistic; Nemenyi: the normal tail).
   */
  readonly p: readonly number[];
  readonly adjustedP: readonly number[];
  /** Largest own p with which the row would have been rejected, all other p as they are; null where no such number exists. */
  readonly threshold: readonly (number | null)[];
  readonly rejected: readonly boolean[];
  /**
   * Limits that agree with the decisions; null = unbounded (or none). `intervals` says what they hold: "simultaneous": all cover
   * together with probability 1 - error; "individual": each alone covers with at least 1 - error (a note says at which level);
   * "none": there are none. Under an equivalence margin the level is 1 - error too (Hsu, Hwang, Liu & Ruberg 1994).
   */
  readonly lower: readonly (number | null)[];
  readonly upper: readonly (number | null)[];
  readonly intervals: "simultaneous" | "individual" | "none";
  readonly monteCarloError?: number;
  readonly notes: readonly {
    readonly code: string;
    readonly facts: Readonly<Record<string, string | number | boolean | null | readonly (string | number)[]>>;
  }[];
}

/** A method that does not fit the members or the error term: which methods do. */
export interface Misfit {
  readonly code: string;
  readonly facts: Readonly<Record<string, string | number | readonly string[]>>;
  readonly fitting: readonly CorrectionName[];
}
