/** The door of the design room: units, factors, cells, contrasts; the design found against the design declared. */
export { cellCount, cellLabels, coarserCells, levelsOfCell } from "./cells.ts";
export {
  type ContrastExpression,
  contrastWeights,
  factorNamed,
  type LevelReference,
  type Member,
  type MemberAt,
  monicOrthogonalPolynomial,
  resolveLevel,
  type SpelledFamily,
  spellMembers,
} from "./contrasts.ts";
export { type DesignFinding, type FoundDesign, findDesign, type ModelChoice } from "./found.ts";
export { type LeftOut, type Layout, layoutData, matchLevels, type UndeclaredLevel } from "./layout.ts";
export { DesignError } from "./problem.ts";
export type * from "./types.ts";
