import type { ModelData } from "../../design/types.ts";
import { tUpperQuantile } from "../../numeric/index.ts";
import { cellStatistics } from "./cell-statistics.ts";
import { commonSlopes, compressedRows } from "./compressed-model.ts";
import { exactProductSum, exactSum } from "./compensated-sum.ts";
import { requireErrorDf, requireTwoGroups, requireVariance } from "./refusals.ts";

/** Mean of a cell as it would be with every covariate at its centre; null for a cell without observations. */
export interface AdjustedMean {
  readonly cell: number;
  readonly n: number;
  readonly mean: number | null;
  readonly standardError: number | null;
  readonly lower: number | null;
  readonly upper: number | null;
}

/**
 * Cell means adjusted to the covariates' means over all rows, and the common slopes.
 *
 * @param level of the intervals, 0 < level < 1; pooled error
 * @throws ModelError "too-few-groups", "no-error-df", "zero-variance", "covariate-constant"
 * @source fisher-1932 (Statistical Methods for Research Workers, 4th ed.); cochran-1957 (Biometrics 13, 261-281)
 */
export function adjustedMeans(
  data: ModelData,
  level: number,
): {
  readonly means: readonly AdjustedMean[];
  readonly slopes: readonly { readonly covariate: string; readonly slope: number }[];
} {
  const statistics = cellStatistics(data);
  requireTwoGroups(statistics);
  const model = compressedRows(data, statistics);
  requireErrorDf(model.error.df);
  requireVariance(statistics, model.error);
  const slopes = commonSlopes(model);
  const { meanSquare, df } = model.error;
  const quantile = tUpperQuantile((1 - level) / 2, df);
  const centres = data.covariates.map((covariate) => exactSum(covariate.values) / data.rows);
  const means = Array.from(statistics.n, (n, cell): AdjustedMean => {
    const position = model.cells.indexOf(cell);
    if (position < 0) return { cell, n, mean: null, standardError: null, lower: null, upper: null };
    const away = model.covariateMeans.map((mean, index) => mean[position]! - centres[index]!);
    const mean = data.response.center + (statistics.mean[cell]! - exactProductSum(slopes, away));
    // Variance of the adjustment: the distances in units of the within-cell directions.
    const scaled: number[] = [];
    for (const [index, distance] of away.entries()) {
      const column = model.triangle[index]!;
      const rest = scaled.reduce((sum, value, before) => sum - value * column[before]!, distance);
      scaled.push(rest / column[index]!);
    }
    const standardError = Math.sqrt(meanSquare * (1 / n + exactProductSum(scaled, scaled)));
    return {
      cell,
      n,
      mean,
      standardError,
      lower: mean - quantile * standardError,
      upper: mean + quantile * standardError,
    };
  });
  return { means, slopes: data.covariates.map(({ name }, index) => ({ covariate: name, slope: slopes[index]! })) };
}
