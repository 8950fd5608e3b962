/** Effect sizes of comparisons and of omnibus effects. */
export { partialEtaSquaredInterval, partialOmegaSquared } from "./explained-share.ts";
export { ratioContrast } from "./ratio.ts";
export {
  hedgesFactor,
  type StandardisedContrast,
  type Standardiser,
  standardisedContrast,
} from "./standardised-contrast.ts";
