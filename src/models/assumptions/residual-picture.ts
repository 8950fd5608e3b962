import type { ModelData } from "../../design/types.ts";
import { normalScores, residualDiagnostics } from "./residuals.ts";
import { completeScores, subjectResiduals } from "./within-findings.ts";

/** What the picture of residuals shows; the lists have one length, `normalQuantiles` belongs to the sorted residuals. */
export interface ResidualPoints {
  readonly fitted: readonly number[];
  /** In units of the residual standard deviation. */
  readonly residuals: readonly number[];
  readonly normalQuantiles: readonly number[];
  /** How many there are when only some are shown; null when all are. */
  readonly sampledFrom: number | null;
}

/**
 * Fitted values and standardised residuals: of the cell means (and covariates) between subjects; with the subjects' own levels
 * taken out within subjects (complete subjects only).
 * @param most show at most so many, evenly spread over the rows in order of their residuals, both ends kept; default 5000
 * @throws ModelError as `residualDiagnostics` and the layout of subjects do
 */
export function residualPoints(data: ModelData, most = 5000): ResidualPoints {
  const { fitted, residuals } = data.factors.some((factor) => factor.varies === "within")
    ? ofSubjects(data)
    : ofRows(data);
  const order = Array.from(residuals.keys()).sort((left, right) => residuals[left]! - residuals[right]!);
  const scores = normalScores(order.length);
  if (order.length <= most) {
    return {
      fitted: Array.from(fitted),
      residuals: Array.from(residuals),
      normalQuantiles: Array.from(scores),
      sampledFrom: null,
    };
  }
  const places = Array.from({ length: most }, (_, index) => Math.round((index * (order.length - 1)) / (most - 1)));
  return {
    fitted: places.map((place) => fitted[order[place]!]!),
    residuals: places.map((place) => residuals[order[place]!]!),
    normalQuantiles: places.map((place) => scores[place]!),
    sampledFrom: order.length,
  };
}

function ofRows(data: ModelData): { fitted: ArrayLike<number>; residuals: number[] } {
  const diagnostics = residualDiagnostics(data);
  return { fitted: diagnostics.fitted, residuals: Array.from(diagnostics.standardised) };
}

function ofSubjects(data: ModelData): { fitted: ArrayLike<number>; residuals: number[] } {
  const { fitted, residuals, df } = subjectResiduals(completeScores(data));
  const sumOfSquares = residuals.reduce((sum, value) => sum + value * value, 0);
  const sd = df > 0 ? Math.sqrt(sumOfSquares / df) : 0;
  return { fitted, residuals: residuals.map((value) => (sd > 0 ? value / sd : 0)) };
}
