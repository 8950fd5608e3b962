/** What analyses assume, checked on the data: findings with the statement that answers each, and residuals for pictures. */
export { boxM, type CovarianceTest } from "./box-m.ts";
export { type AssumptionOptions, assumptionFindings } from "./findings.ts";
export { type ResidualPoints, residualPoints } from "./residual-picture.ts";
export {
  cookLimit,
  normalScores,
  type OutlyingRow,
  outlyingRows,
  type ResidualDiagnostics,
  residualDiagnostics,
  skewness,
} from "./residuals.ts";
export { type SpreadTest, spreadTest } from "./spread.ts";
