/** Effect sizes of comparisons. */
export {
  hedgesFactor,
  type StandardisedContrast,
  type Standardiser,
  standardisedContrast,
} from "./standardised-contrast.ts";
