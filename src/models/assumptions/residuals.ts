import type { ModelData } from "../../design/types.ts";
import { fUpperQuantile, normalQuantile, tTwoSidedTail } from "../../numeric/index.ts";
import { cellStatistics, pooledError, roundingFloor } from "../between/cell-statistics.ts";
import { covariateDirections, withinCells } from "../between/compressed-model.ts";
import { exactSum } from "../between/compensated-sum.ts";
import { dotProduct } from "../between/orthonormal-span.ts";

/** Residuals of the between-subjects model (cell means, and common slopes of covariates), row by row. */
export interface ResidualDiagnostics {
  /** In the response's analysis scale and unit. */
  readonly fitted: Float64Array;
  readonly residuals: Float64Array;
  /** Residuals over the residual standard deviation; 0 where there is none. */
  readonly standardised: Float64Array;
  /** Externally studentised: each over its own standard error from the other rows; NaN never, 0 where the row fits itself. */
  readonly studentised: Float64Array;
  readonly leverage: Float64Array;
  readonly cook: Float64Array;
  /** Rank of the model. */
  readonly parameters: number;
  readonly errorDf: number;
  readonly errorSumOfSquares: number;
  /** False where all residuals are zero but for rounding, or no df are left. */
  readonly varies: boolean;
}

/** A row with a leverage this near 1 is fitted by a parameter of its own. */
const ownParameter = 1 - 1e-9;

/**
 * Residuals, leverage and influence of every row in the model with all cell means and one slope per covariate.
 * @throws ModelError "covariate-constant"
 * @source cook-1977 (Technometrics 19, 15-18); studentised residuals: beckman-trussell-1974 (J. Am. Stat. Assoc. 69, 199-201)
 */
export function residualDiagnostics(data: ModelData): ResidualDiagnostics {
  const statistics = cellStatistics(data);
  const { span } = covariateDirections(data, statistics, data.covariates);
  const residuals = withinCells(data, statistics, data.response.offsets).deviations;
  for (const direction of span.columns) {
    const along = dotProduct(direction, residuals);
    for (let row = 0; row < residuals.length; row++) residuals[row]! -= along * direction[row]!;
  }
  const leverage = Float64Array.from(data.cells, (cell, row) =>
    span.columns.reduce((sum, direction) => sum + direction[row]! ** 2, 1 / statistics.n[cell]!),
  );
  const errorDf = pooledError(statistics).df - span.columns.length;
  const parameters = data.rows - errorDf;
  const errorSumOfSquares = exactSum(residuals.map((value) => value * value));
  const varies = errorDf > 0 && errorSumOfSquares > roundingFloor(statistics);
  const sd = varies ? Math.sqrt(errorSumOfSquares / errorDf) : 0;
  const studentised = new Float64Array(data.rows);
  const cook = new Float64Array(data.rows);
  for (let row = 0; varies && row < data.rows; row++) {
    const own = leverage[row]!;
    if (own >= ownParameter) continue;
    const squared = residuals[row]! ** 2;
    cook[row] = ((squared / (parameters * sd * sd)) * own) / (1 - own) ** 2;
    if (errorDf < 2) continue;
    const others = Math.max(0, errorSumOfSquares - squared / (1 - own)) / (errorDf - 1);
    if (squared === 0) continue;
    studentised[row] =
      others > 0 ? residuals[row]! / Math.sqrt(others * (1 - own)) : Math.sign(residuals[row]!) * 1e300;
  }
  return {
    fitted: residuals.map((value, row) => data.response.center + (data.response.offsets[row]! - value)),
    residuals,
    standardised: sd > 0 ? residuals.map((value) => value / sd) : new Float64Array(data.rows),
    studentised,
    leverage,
    cook,
    parameters,
    errorDf,
    errorSumOfSquares,
    varies,
  };
}

/** A row whose studentised residual is more than chance in so many rows explains. */
export interface OutlyingRow {
  readonly row: number;
  readonly studentised: number;
  readonly p: number;
  /** Bonferroni over all rows that have a studentised residual. */
  readonly adjustedP: number;
}

/**
 * The rows from the largest studentised residual down whose p, corrected for the number of rows, is below `error`; the largest
 * one alone where none is.
 * @source beckman-cook-1983 (Technometrics 25, 119-149); the correction: bonferroni
 */
export function outlyingRows(diagnostics: ResidualDiagnostics, error: number): OutlyingRow[] {
  const { studentised, leverage, errorDf, varies } = diagnostics;
  if (!varies || errorDf < 2) return [];
  const tested = Array.from(studentised.keys()).filter((row) => leverage[row]! < ownParameter);
  const order = tested.sort((left, right) => Math.abs(studentised[right]!) - Math.abs(studentised[left]!));
  const found: OutlyingRow[] = [];
  for (const row of order) {
    const p = tTwoSidedTail(studentised[row]!, errorDf - 1);
    const adjustedP = Math.min(1, p * tested.length);
    if (adjustedP >= error && found.length > 0) break;
    found.push({ row, studentised: studentised[row]!, p, adjustedP });
    if (adjustedP >= error) break;
  }
  return found;
}

/**
 * The distance above which one row moves the fitted means out of the region that covers them half of the time.
 * @source cook-1977: the median of F with the model's and the error's df
 */
export function cookLimit(diagnostics: ResidualDiagnostics): number {
  return fUpperQuantile(0.5, diagnostics.parameters, diagnostics.errorDf);
}

/**
 * Where sorted normal values of that number are expected, in standard deviations.
 * @param count >= 1
 * @source blom-1958 (Statistical Estimates and Transformed Beta-Variables): quantiles at (i - 3/8) / (n + 1/4)
 */
export function normalScores(count: number): Float64Array {
  return Float64Array.from({ length: count }, (_, index) => normalQuantile((index + 0.625) / (count + 0.25)));
}

/**
 * Skewness of values around their mean, corrected for the number of values; null for fewer than three or equal values.
 * @source fisher-1930; joanes-gill-1998 (The Statistician 47, 183-189), G1
 */
export function skewness(values: ArrayLike<number>): number | null {
  const n = values.length;
  if (n < 3) return null;
  const mean = exactSum(Array.from(values)) / n;
  let second = 0;
  let third = 0;
  for (let index = 0; index < n; index++) {
    const deviation = values[index]! - mean;
    second += deviation ** 2;
    third += deviation ** 3;
  }
  if (!(second > 0)) return null;
  return ((third / n / (second / n) ** 1.5) * Math.sqrt(n * (n - 1))) / (n - 2);
}
