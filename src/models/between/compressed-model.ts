import type { CellStatistics, CodedCovariate, ModelData } from "../../design/types.ts";
import { ModelError } from "../model-error.ts";
import { type ErrorTerm, filledCells, observationsOf, pooledError } from "./cell-statistics.ts";
import { exactSum } from "./compensated-sum.ts";
import { dotProduct, extend, newSpan, type OrthonormalSpan } from "./orthonormal-span.ts";

/**
 * The rows of a between-subjects study turned by an orthogonal rotation into filled cells + covariates + error: entry i of the
 * first part is sqrt(n) times the mean of a filled cell, the second part is what the covariates explain within cells, and what
 * is left is one number, the error sum of squares. Every linear model in factors and covariates has the same fit on it as on
 * the rows, so nothing needs the rows again.
 */
export interface CompressedModel {
  /** Cell of each entry of the first part. */
  readonly cells: readonly number[];
  readonly rootN: Float64Array;
  readonly covariates: readonly string[];
  /** Means of the covariates by filled cell: covariates x filled cells. */
  readonly covariateMeans: readonly Float64Array[];
  /** Upper triangular: column j holds what covariate j has along each within-cell direction. */
  readonly triangle: readonly Float64Array[];
  /** The response, length filled cells + covariates. */
  readonly response: Float64Array;
  readonly error: ErrorTerm;
  readonly observations: number;
}

/** The same without covariates, from sufficient statistics alone. */
export function compressedCells(statistics: CellStatistics): CompressedModel {
  const cells = filledCells(statistics);
  const rootN = Float64Array.from(cells, (cell) => Math.sqrt(statistics.n[cell]!));
  // The grand mean is taken out first: it carries nothing and would cost digits.
  const observations = observationsOf(statistics);
  const grand = exactSum(cells.map((cell) => statistics.n[cell]! * statistics.mean[cell]!)) / observations;
  return {
    cells,
    rootN,
    covariates: [],
    covariateMeans: [],
    triangle: [],
    response: rootN.map((root, index) => root * (statistics.mean[cells[index]!]! - grand)),
    error: pooledError(statistics),
    observations,
  };
}

/** What a covariate has around its cells' means, per row, and those means. */
export function withinCells(data: ModelData, statistics: CellStatistics, values: Float64Array) {
  const means = new Float64Array(data.cellCount);
  for (let row = 0; row < data.rows; row++) means[data.cells[row]!]! += values[row]!;
  for (let cell = 0; cell < data.cellCount; cell++) {
    if (statistics.n[cell]! > 0) means[cell]! /= statistics.n[cell]!;
  }
  const deviations = Float64Array.from(values, (value, row) => value - means[data.cells[row]!]!);
  return { means, deviations };
}

/** Directions of the covariates within cells, by QR of their deviations from the cells' means. */
export interface CovariateDirections {
  readonly span: OrthonormalSpan;
  readonly means: readonly Float64Array[];
  readonly deviations: readonly Float64Array[];
}

/** @throws ModelError "covariate-constant" where a covariate does not vary within any cell beyond those before it */
export function covariateDirections(
  data: ModelData,
  statistics: CellStatistics,
  covariates: readonly CodedCovariate[],
): CovariateDirections {
  const span = newSpan();
  const means: Float64Array[] = [];
  const deviations: Float64Array[] = [];
  for (const covariate of covariates) {
    const parts = withinCells(data, statistics, covariate.values);
    const spread = Math.sqrt(dotProduct(parts.deviations, parts.deviations));
    const size = Math.sqrt(dotProduct(covariate.values, covariate.values)) + Math.abs(covariate.center);
    if (spread <= 1e-12 * size || extend(span, parts.deviations) === null) {
      throw new ModelError(
        "covariate-constant",
        `Within the groups the covariate "${covariate.name}" does not vary${means.length > 0 ? " beyond the covariates before it" : ""}: its effect cannot be told from the groups'.`,
        "Leave this covariate out, or measure it on every subject.",
      );
    }
    means.push(parts.means);
    deviations.push(parts.deviations);
  }
  return { span, means, deviations };
}

/**
 * Rows with covariates: one pass of QR over the covariates' deviations within cells.
 * @throws ModelError "covariate-constant"
 */
export function compressedRows(data: ModelData, statistics: CellStatistics): CompressedModel {
  const base = compressedCells(statistics);
  const { span, means, deviations } = covariateDirections(data, statistics, data.covariates);
  const response = withinCells(data, statistics, data.response.offsets).deviations;
  const explained = span.columns.map((direction) => dotProduct(direction, response));
  const rest = Float64Array.from(response);
  for (const [index, direction] of span.columns.entries()) {
    for (let row = 0; row < rest.length; row++) rest[row]! -= explained[index]! * direction[row]!;
  }
  const sumOfSquares = exactSum(rest.map((value) => value * value));
  const df = base.error.df - data.covariates.length;
  return {
    ...base,
    covariates: data.covariates.map((covariate) => covariate.name),
    covariateMeans: means.map((mean) => Float64Array.from(base.cells, (cell) => mean[cell]!)),
    triangle: deviations.map((column) => Float64Array.from(span.columns, (direction) => dotProduct(direction, column))),
    response: Float64Array.from([...base.response, ...explained]),
    error: { df, sumOfSquares, meanSquare: df > 0 ? sumOfSquares / df : 0 },
  };
}

/** Cell weights of a term (over all cells) as a column of the rotated model. */
export function cellColumn(model: CompressedModel, values: (cell: number) => number): Float64Array {
  const column = new Float64Array(model.response.length);
  for (const [index, cell] of model.cells.entries()) column[index] = model.rootN[index]! * values(cell);
  return column;
}

/** A covariate as a column of the rotated model. */
export function covariateColumn(model: CompressedModel, covariate: number): Float64Array {
  const cells = model.cells.length;
  const column = new Float64Array(model.response.length);
  for (let index = 0; index < cells; index++) {
    column[index] = model.rootN[index]! * model.covariateMeans[covariate]![index]!;
  }
  for (let index = 0; index < model.triangle.length; index++)
    column[cells + index] = model.triangle[covariate]![index]!;
  return column;
}

/**
 * The direction of the rotated model along which a weighted sum of (adjusted) cell means lies: the response times this is the
 * estimate, and its squared length times the error variance the estimate's variance.
 * @param weights over all cells, 0 on those without data
 */
export function estimateDirection(model: CompressedModel, weights: (cell: number) => number): Float64Array {
  const cells = model.cells.length;
  const direction = new Float64Array(model.response.length);
  for (const [index, cell] of model.cells.entries()) direction[index] = weights(cell) / model.rootN[index]!;
  // Solves triangle' w = - weighted covariate means, from the first covariate on.
  for (let covariate = 0; covariate < model.triangle.length; covariate++) {
    const means = model.covariateMeans[covariate]!;
    let value = -model.cells.reduce((sum, cell, index) => sum + weights(cell) * means[index]!, 0);
    const column = model.triangle[covariate]!;
    for (let before = 0; before < covariate; before++) value -= column[before]! * direction[cells + before]!;
    direction[cells + covariate] = value / column[covariate]!;
  }
  return direction;
}

/** Slopes of the covariates, common to all cells. */
export function commonSlopes(model: CompressedModel): number[] {
  const cells = model.cells.length;
  const count = model.triangle.length;
  const slopes = new Array<number>(count).fill(0);
  for (let row = count - 1; row >= 0; row--) {
    let value = model.response[cells + row]!;
    for (let column = row + 1; column < count; column++) value -= model.triangle[column]![row]! * slopes[column]!;
    slopes[row] = value / model.triangle[row]![row]!;
  }
  return slopes;
}
