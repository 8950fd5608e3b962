import type { Watch } from "../../host/index.ts";
import type { CovarianceParameter } from "./covariance-structure.ts";

export type Criterion = "REML" | "ML";

/** What the likelihood is at given covariance parameters. Matrices flat row-major; p fixed effects, r active parameters. */
export interface Evaluation {
  /** -2 log (restricted) likelihood, constants included. */
  readonly deviance: number;
  /** Estimates of the fixed effects, length p, minus nothing: in the unit of the response's offsets. */
  readonly beta: Float64Array;
  /** (X' V^-1 X)^-1, or within the constrained space; p x p. */
  readonly phi: Float64Array;
  /** Derivative of the deviance by each active parameter. */
  readonly gradient: Float64Array;
  /** Information for the deviance's scoring steps, r x r: expected for blocks, average for crossed units. */
  readonly information: Float64Array;
  /** Second derivatives of the deviance, r x r, where they cost no more; null otherwise. */
  readonly hessian: Float64Array | null;
}

/** What Kenward-Roger and Satterthwaite need at the estimates, active parameters only. */
export interface Pieces {
  readonly phi: Float64Array;
  /** -X' V^-1 V_i V^-1 X, p x p each. */
  readonly p: readonly Float64Array[];
  /** X' V^-1 V_i V^-1 V_j V^-1 X made symmetric, at [i][j] for j <= i. */
  readonly q: readonly (readonly Float64Array[])[];
  /** Expected information of the restricted likelihood, r x r. */
  readonly information: Float64Array;
}

/**
 * A covariance structure with its data, linear in the parameters: V = sum of theta_i V_i. All work is on cross-products; the
 * rows were read once.
 */
export interface Engine {
  readonly parameters: readonly CovarianceParameter[];
  /** Fixed effects. */
  readonly columns: number;
  readonly rows: number;
  /** Residual variance around the cell means, for starting values. */
  readonly startingVariance: number;
  /** Share of it below which a component's variance is taken as zero; 0 where zero itself can be evaluated. */
  readonly varianceFloor: number;
  /** Squared distance to the optimum, in standard errors, at which the search is over. */
  readonly closeEnough: number;
  /**
   * @param theta all parameters, inactive ones 0
   * @param active indices of the parameters that are there
   * @param nullBasis p x p0 basis of the constrained fixed effects, or null
   * @returns null where the covariance, or the fixed effects' precision, is singular to working precision
   */
  evaluate(
    theta: Float64Array,
    active: readonly number[],
    criterion: Criterion,
    nullBasis: Float64Array | null,
  ): Evaluation | null;
  pieces(theta: Float64Array, active: readonly number[]): Pieces;
  /** The same structure with responses drawn from the model with these parameters (for the parametric bootstrap). */
  simulated(theta: Float64Array, beta: Float64Array, normal: () => number): Engine;
  readonly watch: Watch;
}
