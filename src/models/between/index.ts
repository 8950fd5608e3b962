/** Between-subjects designs: omnibus tests, comparisons and descriptions from the cells' counts, means and sums of squares. */
export { type AdjustedMean, adjustedMeans } from "./adjusted-means.ts";
export type { BetweenAnalysis, GroupNaming } from "./analysis.ts";
export { cellStatistics, type ErrorTerm, mergedCells, pooledError } from "./cell-statistics.ts";
export { type BetweenContrastQuestion, betweenContrasts } from "./contrasts.ts";
export { type CellDescription, type CellQuartiles, cellQuartiles, describeCells, sampleQuantile } from "./describe.ts";
export { type Adjustment, factorialAnalysis, type FactorialQuestion } from "./factorial.ts";
export { homogeneousSlopes, type SlopesTest } from "./homogeneous-slopes.ts";
export { oneWayAnalysis } from "./one-way.ts";
export { brownForsytheAnalysis, welchAnalysis } from "./welch.ts";
export { welchFactorialAnalysis } from "./welch-factorial.ts";
