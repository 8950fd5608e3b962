import { checkProblem } from "./answer.ts";
import { correctionNames, corrections } from "./corrections.ts";
import { misfitOf } from "./hold.ts";
import { FamilyProblemError, memberMisfit, misfitWords } from "./misfits.ts";
import type { CorrectionName, FamilyProblem } from "./types.ts";

/** What one method says of a family, in the shape of the result's `beside`. */
export interface BesideRow {
  readonly correction: CorrectionName;
  readonly declared: boolean;
  readonly holds: "family-wise error" | "false discovery rate" | "nothing";
  readonly adjustedP: readonly (number | null)[];
  readonly rejected: readonly (boolean | null)[];
  /** Why the method does not fit, in the reader's words; absent where it fits. */
  readonly unfit?: string;
}

const ordered: readonly CorrectionName[] = ["fixed sequence", "fallback", "graph"];
const ofRanks: readonly CorrectionName[] = ["dunn", "conover", "nemenyi"];

/**
 * The sensitivity view: what every method would have said of the family, the declared one marked. Methods that do not fit stand with their
 * reason. Methods with an order or with shares count only where the family declared them: an order chosen now is no order.
 * @param declared  the family's own method
 * @throws FamilyProblemError when the members themselves are wrong (none, or one twice)
 */
export function besideOtherMethods(problem: FamilyProblem, declared: CorrectionName): readonly BesideRow[] {
  const about = memberMisfit(problem);
  if (about !== null) throw new FamilyProblemError(about);
  checkProblem(problem);
  const shown = correctionNames.filter((name) => problem.ranks === true || !ofRanks.includes(name));
  return shown.map((correction) => {
    const isDeclared = correction === declared;
    const { holds } = corrections[correction];
    problem.watch.checkpoint();
    const unfit = misfitOf(correction, problem);
    const reason =
      unfit !== null
        ? misfitWords(unfit).message
        : ordered.includes(correction) && !ordered.includes(declared)
          ? `${correction} needs an order or shares declared before the data, and this family declares none.`
          : null;
    if (reason !== null) {
      const nothing = problem.names.map(() => null);
      return { correction, declared: isDeclared, holds, adjustedP: nothing, rejected: nothing, unfit: reason };
    }
    const { adjustedP, rejected } = corrections[correction].decide(problem);
    return { correction, declared: isDeclared, holds, adjustedP, rejected };
  });
}
