/** The door of the families room: corrections, how a family is held, what fits, families after families, and the sensitivity view. */
export { checkProblem } from "./answer.ts";
export { comparisonP, equivalenceP, type SingleComparison } from "./claim.ts";
export type { Correction, CorrectionHelp } from "./correction.ts";
export { correctionNames, corrections } from "./corrections.ts";
export { fittingCorrections, holdFamily, misfitOf } from "./hold.ts";
export { FamilyProblemError, type MisfitCode, misfits, misfitWords } from "./misfits.ts";
export { type FamilyNoteCode, familyNotes } from "./notes.ts";
export { type SourceKey, sources } from "./sources.ts";
export type { CorrectionName, FamilyAnswer, FamilyProblem, Misfit } from "./types.ts";
export { type BesideRow, besideOtherMethods } from "./beside.ts";
export { afterMisfit, type GatedAnswer, type GatedFamily, gatekeep, type Passing, passing } from "./gatekeeping.ts";
export { type Decider, familyDecider, jointLevel, type StudyEvidence } from "./decider.ts";
