/** Tests and intervals by rearranging or redrawing the study itself. */
export {
  type ArrangementOptions,
  type Arrangements,
  labelArrangements,
  signArrangements,
} from "./arrangements.ts";
export { type BootstrapOptions, bcaInterval, bootstrapContrasts } from "./bootstrap.ts";
export { type ContrastResamples, contrastResamples } from "./contrast-resamples.ts";
export { type PermutationAnalysis, permutationOmnibus, type ResamplingOptions } from "./permutation-omnibus.ts";
