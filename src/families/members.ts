import { type MisfitCode, misfit } from "./misfits.ts";
import type { CorrectionName, FamilyProblem, Misfit } from "./types.ts";

/** Null when the family claims two-sided differences from zero. */
export function twoSidedMisfit(method: CorrectionName, { margin, sides }: FamilyProblem): Misfit | null {
  if (margin !== null) return misfit(margin.type === "equivalence" ? "no-margin" : "no-shift", { method });
  return sides === "two-sided" ? null : misfit("two-sided-only", { method });
}

/** Null when all comparisons share one error term. */
export function commonErrorMisfit(method: CorrectionName, { commonDf, shape }: FamilyProblem): Misfit | null {
  if (commonDf !== null) return null;
  const code: MisfitCode = shape.within ? "within-needs-common-error" : "between-needs-common-error";
  return misfit(code, { method });
}

/** Null when the members are all pairs of one factor, each once, at one place. */
export function allPairsMisfit(method: CorrectionName, { shape, names }: FamilyProblem): Misfit | null {
  const { kind, means, repeated } = shape;
  const fits = kind === "all pairs" && !repeated && means !== null && names.length === (means * (means - 1)) / 2;
  return fits ? null : misfit("not-all-pairs", { method });
}

/** Null when the members are each level against one, each once, at one place. */
export function againstOneMisfit(method: CorrectionName, { shape, names }: FamilyProblem): Misfit | null {
  const { kind, means, repeated } = shape;
  const fits = kind === "against one" && !repeated && (means === null || names.length === means - 1);
  return fits ? null : misfit("not-against-one", { method });
}
