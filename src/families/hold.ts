import { checkProblem } from "./answer.ts";
import { correctionNames, corrections } from "./corrections.ts";
import { FamilyProblemError, memberMisfit } from "./misfits.ts";
import type { CorrectionName, FamilyAnswer, FamilyProblem, Misfit } from "./types.ts";

/**
 * The methods that hold the family's error, or the false discovery rate, for these members. Methods that need declarations which the
 * family does not have (`graph` without weights) are left out; so is `none`, which always fits and holds nothing.
 */
export function fittingCorrections(problem: FamilyProblem): readonly CorrectionName[] {
  if (memberMisfit(problem) !== null) return [];
  return fittingAmong(
    correctionNames.filter((name) => name !== "none"),
    problem,
  );
}

const fittingAmong = (names: readonly CorrectionName[], problem: FamilyProblem) =>
  names.filter((name) => corrections[name].fits(problem) === null);

/** Why a method does not fit a family, with the methods that do; null when it fits. */
export function misfitOf(name: CorrectionName, problem: FamilyProblem): Misfit | null {
  const about = memberMisfit(problem);
  if (about !== null) return about;
  const unfit = corrections[name].fits(problem);
  if (unfit === null) return null;
  // Whoever asked for family error is not offered false discovery instead.
  const offered = correctionNames.filter(
    (other) =>
      other !== name &&
      other !== "none" &&
      (corrections[name].holds === "false discovery rate" || corrections[other].holds === "family-wise error"),
  );
  return { ...unfit, fitting: fittingAmong(offered, problem) };
}

/**
 * Holds the error over a family: adjusted p, threshold, decision and limits of every comparison.
 * @throws FamilyProblemError when the method does not fit the members, with code, words and the methods that fit
 * @throws DomainError when a number lies outside its domain
 */
export function holdFamily(name: CorrectionName, problem: FamilyProblem): FamilyAnswer {
  const unfit = misfitOf(name, problem);
  if (unfit !== null) throw new FamilyProblemError(unfit);
  checkProblem(problem);
  return corrections[name].decide(problem);
}
