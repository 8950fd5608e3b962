/** Multilevel models: any number of nested or crossed units, missing cells, tests with few units. */
export type { Bootstrap } from "./parametric-bootstrap.ts";
export { type MultilevelContrastOptions, multilevelContrasts } from "./contrasts.ts";
export {
  type CovarianceStructure,
  covarianceStructure,
  type RandomTerm,
  type ResidualStructure,
} from "./covariance-structure.ts";
export { type MultilevelOmnibus, type MultilevelOptions, multilevelOmnibus } from "./omnibus.ts";
