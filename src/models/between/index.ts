/** Between-subjects designs: omnibus tests, comparisons and descriptions from the cells' counts, means and sums of squares. */
export type { BetweenAnalysis, GroupNaming } from "./analysis.ts";
export { cellStatistics, type ErrorTerm, mergedCells, pooledError } from "./cell-statistics.ts";
export { oneWayAnalysis } from "./one-way.ts";
export { brownForsytheAnalysis, welchAnalysis } from "./welch.ts";
