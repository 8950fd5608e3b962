import { DomainError, tTwoSidedTail, tUpperQuantile, tUpperTail } from "../numeric/index.ts";
import type { FamilyProblem } from "./types.ts";

/**
 * What a family claims of each comparison, as a region that its null hypothesis leaves out:
 * "two-sided" (not zero), "upper" (above `bound`), "lower" (below `bound`), "equivalence" (between -bound and bound).
 */
export interface Claim {
  readonly type: "two-sided" | "upper" | "lower" | "equivalence";
  readonly bound: number;
}

export interface Limits {
  readonly lower: number | null;
  readonly upper: number | null;
}

type Sided = Pick<FamilyProblem, "sides" | "margin">;

/**
 * The claim that sides and margin declare. A margin decides alone: `not worse by d` with higher is better claims more than -d, with
 * lower is better less than d.
 * @throws DomainError margin not above zero, or "not worse" without the direction that is better
 */
export function claimOf({ sides, margin }: Sided): Claim {
  if (margin === null) return { type: sides, bound: 0 };
  if (!(margin.value > 0) || margin.value === Number.POSITIVE_INFINITY)
    throw new DomainError("margin.value", margin.value, "> 0");
  if (margin.type === "equivalence") return { type: "equivalence", bound: margin.value };
  if (margin.better === null) throw new DomainError("margin.better", null, '"lower" or "higher"');
  return margin.better === "higher" ? { type: "upper", bound: -margin.value } : { type: "lower", bound: margin.value };
}

/** How far the estimate lies on the claim's side, in standard errors: larger is stronger evidence for the claim. */
export function statisticOf(claim: Claim, estimate: number, standardError: number): number {
  const distance = {
    "two-sided": Math.abs(estimate),
    upper: estimate - claim.bound,
    lower: claim.bound - estimate,
    equivalence: claim.bound - Math.abs(estimate),
  }[claim.type];
  // With no error at all the claim holds or it does not; on the bound itself nothing speaks for it.
  if (standardError === 0 && distance === 0) return claim.type === "two-sided" ? 0 : Number.NEGATIVE_INFINITY;
  return distance / standardError;
}

/** Own p of a statistic of `statisticOf`. */
export function ownTail(claim: Claim, statistic: number, df: number): number {
  return claim.type === "two-sided" ? tTwoSidedTail(statistic, df) : tUpperTail(statistic, df);
}

/** The statistic whose own p is `level`; 0 < level < 1. */
export function criticalStatistic(claim: Claim, level: number, df: number): number {
  return tUpperQuantile(claim.type === "two-sided" ? level / 2 : level, df);
}

/**
 * The interval that leaves out the null hypothesis exactly when the statistic is above `critical`, with coverage 1 - the own p of
 * `critical`. For equivalence that is the interval of Hsu, Hwang, Liu & Ruberg (1994): the two one-sided bounds, drawn out to zero.
 * @source schuirmann-1987, hsu-1994
 */
export function limitsOf(claim: Claim, estimate: number, standardError: number, critical: number): Limits {
  if (critical === Number.POSITIVE_INFINITY) return { lower: null, upper: null };
  const reach = critical * standardError;
  switch (claim.type) {
    case "two-sided":
      return { lower: estimate - reach, upper: estimate + reach };
    case "upper":
      return { lower: estimate - reach, upper: null };
    case "lower":
      return { lower: null, upper: estimate + reach };
    case "equivalence":
      return { lower: Math.min(0, estimate - reach), upper: Math.max(0, estimate + reach) };
  }
}

/** One comparison, as `comparisonP` takes it. */
export interface SingleComparison extends Sided {
  readonly estimate: number;
  readonly standardError: number;
  readonly df: number;
}

function checkComparison({ estimate, standardError, df }: SingleComparison): void {
  if (!Number.isFinite(estimate)) throw new DomainError("estimate", estimate, "a finite number");
  if (!(standardError >= 0) || standardError === Number.POSITIVE_INFINITY)
    throw new DomainError("standardError", standardError, "a finite number >= 0");
  if (!(df > 0)) throw new DomainError("df", df, "> 0, Infinity for the normal limit");
}

/**
 * Own (unadjusted) p of one comparison by the t distribution: two-sided, one-sided, the larger of two one-sided tests under an
 * equivalence margin (Schuirmann 1987), or one-sided against the margin for "not worse".
 * @param standardError  in the unit of the estimate, >= 0
 * @param df             > 0; Infinity gives the normal limit
 * @throws DomainError naming the argument
 * @source schuirmann-1987
 */
export function comparisonP(it: SingleComparison): number {
  checkComparison(it);
  const claim = claimOf(it);
  return ownTail(claim, statisticOf(claim, it.estimate, it.standardError), it.df);
}

/**
 * The two one-sided tests behind an equivalence claim: `lowerP` speaks for "more than -margin", `upperP` for "less than margin".
 * Their larger one is the comparison's own p.
 * @source schuirmann-1987
 */
export function equivalenceP(it: Omit<SingleComparison, "sides" | "margin"> & { readonly margin: number }): {
  readonly lowerP: number;
  readonly upperP: number;
} {
  const one = (better: "higher" | "lower") =>
    comparisonP({ ...it, sides: "two-sided", margin: { type: "not worse", value: it.margin, better } });
  return { lowerP: one("higher"), upperP: one("lower") };
}
