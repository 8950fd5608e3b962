import type { CellStatistics } from "../design/types.ts";

/**
 * Estimates of a set of contrasts, with everything a correction needs. Index i is contrast i throughout.
 * Estimates are in the response's analysis scale (log on log scale).
 */
export interface ContrastEstimates {
  readonly errorTerm:
    | "pooled"
    | "unequal variances"
    | "contrast scores"
    | "multilevel"
    | "covariance"
    | "ranks"
    | "sphericity"
    | "residual";
  readonly estimates: readonly number[];
  readonly standardErrors: readonly number[];
  /** Per contrast; Infinity allowed. */
  readonly df: readonly number[];
  /** Correlation of the estimates, contrasts x contrasts, row per contrast. */
  readonly correlation: readonly (readonly number[])[];
  /**
   * df of the one variance estimate that all contrasts share, when they do (pooled error): the joint distribution is then an exact
   * multivariate t. Null when each has its own; joint methods then use a stated approximation.
   */
  readonly commonDf: number | null;
  /** Subjects (or observations) behind each contrast, for messages and effect sizes. */
  readonly n: readonly number[];
  /** Effect size of each contrast, or null where the standardiser is not defined. */
  readonly effectSizes: readonly ({
    readonly name: string;
    readonly value: number;
    readonly lower: number;
    readonly upper: number;
  } | null)[];
  readonly notes: readonly {
    readonly code: string;
    readonly facts: Readonly<Record<string, string | number | boolean | null | readonly (string | number)[]>>;
  }[];
}

export type { CellStatistics };
