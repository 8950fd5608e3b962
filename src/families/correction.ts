import type { PassingGraph } from "./passing-graph.ts";
import type { SourceKey } from "./sources.ts";
import type { CorrectionName, FamilyAnswer, FamilyProblem, Misfit } from "./types.ts";

/** What `help METHOD` tells, as data; the sentences are complete and stand on their own. */
export interface CorrectionHelp {
  /** What the method holds, and over what. */
  readonly controls: string;
  /** What must be true of the data and the members. */
  readonly assumes: string;
  /** When it decides more than which other method, and when it does not. */
  readonly betterThan: string;
  /** Where it is published, as the report cites it. */
  readonly source: readonly string[];
}

/** One way to hold an error over a family. One file for each. */
export interface Correction {
  readonly name: CorrectionName;
  readonly holds: "family-wise error" | "false discovery rate" | "nothing";
  /** Under which dependence of the comparisons the error is held. */
  readonly dependence: "any" | "independent or positive" | "joint distribution" | "exchangeable" | "not needed";
  /** Keys into `sources`. */
  readonly source: readonly SourceKey[];
  readonly help: CorrectionHelp;
  /** The shares of the error and where they pass on, for the methods that are Bonferroni tests closed by a graph; otherwise null. */
  readonly passing: ((problem: FamilyProblem) => PassingGraph) | null;
  /** Null when the method fits members, sides, margin and error term; otherwise why not, and which methods do. */
  fits(problem: FamilyProblem): Misfit | null;
  /** Decides the family. Call `fits` first (`holdFamily` does). Throws `DomainError` on numbers outside their domain. */
  decide(problem: FamilyProblem): FamilyAnswer;
}
