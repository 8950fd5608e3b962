/** Within-subject and mixed designs on complete subjects: repeated measures, contrast scores, within-subject intervals. */
export { type WithinContrastOptions, withinContrasts } from "./contrast-scores.ts";
export { generalizedEtaSquared } from "./effect-shares.ts";
export { type MultivariateTest, multivariateTests } from "./multivariate.ts";
export { effectBasis, orthonormalContrasts, subsets } from "./orthonormal.ts";
export { type RepeatedMeasures, type RepeatedMeasuresOptions, repeatedMeasuresAnalysis } from "./repeated-measures.ts";
export { greenhouseGeisserEpsilon, huynhFeldtEpsilon, type MauchlyTest, mauchlyTest } from "./sphericity.ts";
export { type SubjectCells, subjectCells } from "./subject-cells.ts";
export { type WithinInterval, withinIntervals } from "./within-intervals.ts";
