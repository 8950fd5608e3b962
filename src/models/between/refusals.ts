import type { CellStatistics } from "../../design/types.ts";
import { ModelError } from "../model-error.ts";
import { type ErrorTerm, filledCells, roundingFloor } from "./cell-statistics.ts";

/** @throws ModelError "too-few-groups" */
export function requireTwoGroups(statistics: CellStatistics): void {
  const filled = filledCells(statistics).length;
  if (filled >= 2) return;
  throw new ModelError(
    "too-few-groups",
    filled === 0 ? "There are no observations to analyse." : "Only one group has observations.",
    "Comparing means needs at least two groups with data: see `show data` and the exclusions.",
  );
}

/** @throws ModelError "no-error-df" */
export function requireErrorDf(df: number): void {
  if (df > 0) return;
  throw new ModelError(
    "no-error-df",
    "No group has more observations than the model has to estimate from it: how much subjects of a group differ cannot be seen.",
    "At least one group needs two observations or more (and one more for each covariate).",
  );
}

/** @throws ModelError "zero-variance" */
export function requireVariance(statistics: CellStatistics, error: ErrorTerm): void {
  if (error.sumOfSquares > roundingFloor(statistics)) return;
  throw new ModelError(
    "zero-variance",
    "Within every group all observations are the same: there is no variance to test against.",
    "Check that the response was read from the right column and is not one value per group.",
  );
}

/**
 * Every group's own variance is known and not zero.
 * @throws ModelError "group-of-one", "group-without-variance"
 */
export function requireOwnVariances(
  statistics: CellStatistics,
  cells: readonly number[],
  nameOf: (cell: number) => string,
): void {
  for (const cell of cells) {
    if (statistics.n[cell]! < 2) {
      throw new ModelError(
        "group-of-one",
        `${nameOf(cell)} has only one observation; its own variance is unknown.`,
        "Under unequal variances every group needs two observations: assume equal variances, or leave the group out.",
      );
    }
    if (statistics.sumOfSquares[cell]! <= statistics.n[cell]! * (1e-14 * Math.abs(statistics.mean[cell]!)) ** 2) {
      throw new ModelError(
        "group-without-variance",
        `All observations of ${nameOf(cell)} are the same: its own variance is zero.`,
        "Under unequal variances every group needs a spread of its own: assume equal variances, or use omnibus by ranks.",
      );
    }
  }
}
