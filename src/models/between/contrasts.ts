import type { CellStatistics, Contrast, ModelData } from "../../design/types.ts";
import { DomainError, tUpperQuantile } from "../../numeric/index.ts";
import type { Note } from "../../results/index.ts";
import { type Standardiser, standardisedContrast } from "../effect-size/index.ts";
import { ModelError } from "../model-error.ts";
import type { ContrastEstimates } from "../types.ts";
import { cellName } from "./analysis.ts";
import { cellStatistics, pooledError } from "./cell-statistics.ts";
import { exactSum } from "./compensated-sum.ts";
import { compressedCells, compressedRows, type CompressedModel, estimateDirection } from "./compressed-model.ts";
import { dotProduct } from "./orthonormal-span.ts";
import { requireErrorDf, requireOwnVariances, requireTwoGroups, requireVariance } from "./refusals.ts";

export interface BetweenContrastQuestion {
  /** The cells' statistics, or the rows themselves (needed with covariates: then adjusted means are compared). */
  readonly data: CellStatistics | ModelData;
  readonly contrasts: readonly Contrast[];
  /** Default: what the rows' design assumes, else "equal". */
  readonly variances?: "equal" | "unequal";
  /** Default "pooled spread", or "average spread" under unequal variances. */
  readonly standardiser?: Standardiser;
  /** Cells of the control condition, for the standardiser "control spread". */
  readonly controlCells?: readonly number[];
  /** Confidence level of the effect sizes' intervals, default 0.95; null leaves effect sizes out (simulations). */
  readonly level?: number | null;
  /** "log": the response is a logarithm, effect sizes are ratios. Default "linear". */
  readonly scale?: "linear" | "log";
  /** Name of each cell, for errors. */
  readonly cellNames?: readonly string[];
}

interface Spread {
  readonly sd: number;
  readonly df: number;
  readonly standardiser: Standardiser;
}

const isRows = (data: CellStatistics | ModelData): data is ModelData => "cells" in data;

/** Cells on which a contrast stands. */
const usedCells = (contrast: Contrast) =>
  Array.from(contrast.weights.keys()).filter((cell) => contrast.weights[cell] !== 0);

/**
 * Comparisons of cell means between subjects. With equal variances the error is pooled over all cells (all comparisons share
 * its df, so that their joint distribution is an exact multivariate t); with unequal variances each comparison has its own
 * standard error and Welch-Satterthwaite df. With covariates the means are adjusted to the covariates' centres,
 * and effect sizes are in units of the spread within cells before that adjustment (Olejnik & Algina 2000).
 *
 * @returns estimates in the order of `contrasts`
 * @throws ModelError "too-few-groups", "empty-cell", "no-error-df", "zero-variance", "group-of-one", "group-without-variance",
 * "covariate-constant", "unequal-variances-with-covariates"; DomainError for weights of the wrong length
 * @source pooled: common practice (Scheffe 1959, The Analysis of Variance); welch-1947 (Biometrika 34, 28-35), satterthwaite-1946
 * (Biometrics Bull. 2, 110-114); effect sizes: hedges-1981, steiger-fouladi-1997, bonett-2008 (Psychological Methods 13, 99-109)
 */
export function betweenContrasts(question: BetweenContrastQuestion): ContrastEstimates {
  const { data } = question;
  const statistics = isRows(data) ? cellStatistics(data) : data;
  requireTwoGroups(statistics);
  refuseEmptyCells(statistics, question);
  const variances = question.variances ?? (isRows(data) ? data.assumptions.variances : "equal");
  if (isRows(data) && data.covariates.length > 0) {
    if (variances === "unequal") {
      throw new ModelError(
        "unequal-variances-with-covariates",
        "Comparisons of adjusted means rest on one error variance for all groups.",
        "Write assume equal variances, or leave the covariate out.",
      );
    }
    return pooledContrasts(question, statistics, compressedRows(data, statistics), "covariance");
  }
  if (variances === "unequal") return unequalContrasts(question, statistics);
  return pooledContrasts(question, statistics, compressedCells(statistics), "pooled");
}

function refuseEmptyCells(statistics: CellStatistics, question: BetweenContrastQuestion): void {
  for (const contrast of question.contrasts) {
    if (contrast.weights.length !== statistics.n.length) {
      throw new DomainError("weights", contrast.weights.length, `one weight for each of ${statistics.n.length} cells`);
    }
    const empty = usedCells(contrast).filter((cell) => statistics.n[cell] === 0);
    if (empty.length === 0) continue;
    throw new ModelError(
      "empty-cell",
      `"${contrast.name}" needs ${cellName(question, empty[0]!)}, which has no observations.`,
      "Compare levels that have data in every cell, or add at LEVEL so that the comparison stays within cells with data.",
    );
  }
}

function pooledContrasts(
  question: BetweenContrastQuestion,
  statistics: CellStatistics,
  model: CompressedModel,
  errorTerm: "pooled" | "covariance",
): ContrastEstimates {
  requireErrorDf(model.error.df);
  requireVariance(statistics, model.error);
  const { contrasts } = question;
  const directions = contrasts.map((contrast) => estimateDirection(model, (cell) => contrast.weights[cell]!));
  const lengths = directions.map((direction) => Math.sqrt(dotProduct(direction, direction)));
  const sd = Math.sqrt(model.error.meanSquare);
  // With covariates too the spread is that of the response itself: adjusting must not make the same difference look larger.
  const spread = pooledError(statistics);
  const spreadOf = (contrast: Contrast): Spread | null => {
    const standardiser = question.standardiser ?? "pooled spread";
    return standardiser === "pooled spread"
      ? { sd: Math.sqrt(spread.meanSquare), df: spread.df, standardiser }
      : ownSpread(statistics, contrast, standardiser, question.controlCells ?? []);
  };
  return {
    errorTerm,
    ...assembled(question, statistics, {
      estimates: directions.map((direction) => dotProduct(direction, model.response)),
      standardErrors: lengths.map((length) => length * sd),
      df: contrasts.map(() => model.error.df),
      spreadOf,
    }),
    correlation: directions.map((left, row) =>
      directions.map((right, column) =>
        row === column ? 1 : dotProduct(left, right) / (lengths[row]! * lengths[column]!),
      ),
    ),
    commonDf: model.error.df,
  };
}

function unequalContrasts(question: BetweenContrastQuestion, statistics: CellStatistics): ContrastEstimates {
  const { contrasts } = question;
  requireOwnVariances(statistics, [...new Set(contrasts.flatMap(usedCells))], (cell) => cellName(question, cell));
  const ofMean = (cell: number) => statistics.sumOfSquares[cell]! / (statistics.n[cell]! - 1) / statistics.n[cell]!;
  const covariance = (left: Contrast, right: Contrast) =>
    exactSum(
      usedCells(left).map((cell) =>
        right.weights[cell] === 0 ? 0 : left.weights[cell]! * right.weights[cell]! * ofMean(cell),
      ),
    );
  const variances = contrasts.map((contrast) => covariance(contrast, contrast));
  return {
    errorTerm: "unequal variances",
    ...assembled(question, statistics, {
      estimates: contrasts.map((contrast) =>
        exactSum(usedCells(contrast).map((cell) => contrast.weights[cell]! * statistics.mean[cell]!)),
      ),
      standardErrors: variances.map(Math.sqrt),
      df: contrasts.map((contrast, index) => {
        const parts = usedCells(contrast).map(
          (cell) => (contrast.weights[cell]! ** 2 * ofMean(cell)) ** 2 / (statistics.n[cell]! - 1),
        );
        return variances[index]! ** 2 / exactSum(parts);
      }),
      spreadOf: (contrast) =>
        ownSpread(statistics, contrast, question.standardiser ?? "average spread", question.controlCells ?? []),
    }),
    correlation: contrasts.map((left, row) =>
      contrasts.map((right, column) =>
        row === column ? 1 : covariance(left, right) / Math.sqrt(variances[row]! * variances[column]!),
      ),
    ),
    commonDf: null,
  };
}

/** Standardisers that rest on chosen cells; null where it is not defined between subjects or has no df. */
function ownSpread(
  statistics: CellStatistics,
  contrast: Contrast,
  standardiser: Standardiser,
  controlCells: readonly number[],
): Spread | null {
  const cells = (standardiser === "control spread" ? controlCells : usedCells(contrast)).filter(
    (cell) => statistics.n[cell]! > 1,
  );
  if (standardiser === "difference spread" || cells.length === 0) return null;
  const dfOf = (cell: number) => statistics.n[cell]! - 1;
  const dfSum = exactSum(cells.map(dfOf));
  if (standardiser !== "average spread") {
    const sumOfSquares = exactSum(cells.map((cell) => statistics.sumOfSquares[cell]!));
    return sumOfSquares > 0 ? { sd: Math.sqrt(sumOfSquares / dfSum), df: dfSum, standardiser } : null;
  }
  const variances = cells.map((cell) => statistics.sumOfSquares[cell]! / dfOf(cell));
  const sum = exactSum(variances);
  if (!(sum > 0)) return null;
  const df = sum ** 2 / exactSum(variances.map((variance, index) => variance ** 2 / dfOf(cells[index]!)));
  return { sd: Math.sqrt(sum / cells.length), df, standardiser };
}

/** What equal and unequal variances have in common: sizes, effect sizes, notes. */
function assembled(
  question: BetweenContrastQuestion,
  statistics: CellStatistics,
  tests: {
    readonly estimates: readonly number[];
    readonly standardErrors: readonly number[];
    readonly df: readonly number[];
    readonly spreadOf: (contrast: Contrast) => Spread | null;
  },
): Pick<ContrastEstimates, "estimates" | "standardErrors" | "df" | "n" | "effectSizes" | "notes"> {
  const { estimates, standardErrors, df } = tests;
  const level = question.level === undefined ? 0.95 : question.level;
  const notes: Note[] = [];
  const effectSizes = question.contrasts.map((contrast, index) => {
    const estimate = estimates[index]!;
    const standardError = standardErrors[index]!;
    if (level === null) return null;
    if (question.scale === "log") return ratioOf(estimate, standardError, df[index]!, level);
    const spread = tests.spreadOf(contrast);
    if (spread === null) return null;
    const { sd, standardiser } = spread;
    return standardisedContrast({ estimate, standardError, df: df[index]!, sd, sdDf: spread.df, standardiser, level });
  });
  const without = question.contrasts
    .filter((_, index) => level !== null && effectSizes[index] === null)
    .map((contrast) => contrast.name);
  if (without.length > 0) {
    const standardiser = question.standardiser ?? "pooled spread";
    notes.push({ code: "standardiser-not-defined", facts: { standardiser, comparisons: without } });
  }
  return {
    estimates,
    standardErrors,
    df,
    n: question.contrasts.map((contrast) => exactSum(usedCells(contrast).map((cell) => statistics.n[cell]!))),
    effectSizes,
    notes,
  };
}

/** A difference of logarithms as a ratio, with its interval. */
function ratioOf(estimate: number, standardError: number, df: number, level: number) {
  const half = tUpperQuantile((1 - level) / 2, df) * standardError;
  return {
    name: "ratio",
    value: Math.exp(estimate),
    lower: Math.exp(estimate - half),
    upper: Math.exp(estimate + half),
  };
}
