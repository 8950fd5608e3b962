/** The door of the numeric room: distributions, joint distributions, random streams, linear algebra, optimisers. */
export { DomainError } from "./domain-error.ts";
export {
  betaLogLowerTail,
  betaLogUpperTail,
  betaLowerTail,
  betaQuantile,
  betaUpperQuantile,
  betaUpperTail,
} from "./beta.ts";
export { fLogUpperTail, fLowerTail, fQuantile, fUpperQuantile, fUpperTail } from "./f.ts";
export {
  chiSquareLogUpperTail,
  chiSquareLowerTail,
  chiSquareQuantile,
  chiSquareUpperQuantile,
  chiSquareUpperTail,
  gammaLowerTail,
  gammaQuantile,
  gammaUpperQuantile,
  gammaUpperTail,
} from "./gamma.ts";
export { logBeta, logGamma } from "./gamma-function.ts";
export { regularizedGammaLower, regularizedGammaUpper } from "./incomplete-gamma.ts";
export {
  errorFunction,
  errorFunctionComplement,
  normalDensity,
  normalLogUpperTail,
  normalLowerTail,
  normalQuantile,
  normalUpperQuantile,
  normalUpperTail,
} from "./normal.ts";
export { tLogUpperTail, tLowerTail, tQuantile, tTwoSidedTail, tUpperQuantile, tUpperTail } from "./t.ts";
export {
  noncentralChiSquareLowerTail,
  noncentralChiSquareQuantile,
  noncentralChiSquareUpperTail,
} from "./noncentral-chi-square.ts";
export { noncentralFLowerTail, noncentralFQuantile, noncentralFUpperTail, noncentralityForF } from "./noncentral-f.ts";
export { noncentralityForT, noncentralTLowerTail, noncentralTQuantile, noncentralTUpperTail } from "./noncentral-t.ts";
export { maximumFRatioUpperQuantile, maximumFRatioUpperTail } from "./maximum-f-ratio.ts";
export { shapiroWilk } from "./shapiro-wilk.ts";
export { RandomStream, randomStream } from "./random-stream.ts";
export {
  choleskyFactor,
  choleskySolve,
  determinant,
  type Matrix,
  type SemidefiniteFactor,
  type SymmetricEigen,
  semidefiniteFactor,
  symmetricEigen,
} from "./dense-linear-algebra.ts";
export { type LeastSquares, qrLeastSquares } from "./least-squares.ts";
export {
  analyzeSparse,
  type SparseFactor,
  type SparsePattern,
  type SparseSymmetric,
  sparseCholesky,
  sparseSolve,
  sparseSymmetric,
} from "./sparse-cholesky.ts";
export { type Minimum, type MinimizeOptions, minimize } from "./minimize.ts";
export { findRoot, type Root } from "./find-root.ts";
export { gaussLegendre, type Integral, type IntegrateOptions, integrate, type QuadratureNodes } from "./integrate.ts";
export {
  studentizedRangeLowerTail,
  studentizedRangeUpperQuantile,
  studentizedRangeUpperTail,
} from "./studentized-range.ts";
export {
  type DunnettQuantileInput,
  type DunnettSides,
  type DunnettTailInput,
  dunnettUpperQuantile,
  dunnettUpperTail,
  type ManyToOne,
} from "./dunnett.ts";
export {
  type JointMethod,
  type JointProbability,
  multivariateTProbability,
  multivariateTUpperTail,
  type RectangleInput,
  type UpperTailInput,
} from "./multivariate-t.ts";
export {
  type EquicoordinateInput,
  type EquicoordinateQuantile,
  equicoordinateQuantile,
} from "./equicoordinate-quantile.ts";
export type { Sides } from "./product-structure.ts";
