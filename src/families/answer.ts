import { DomainError } from "../numeric/index.ts";
import { type Claim, claimOf, criticalStatistic, type Limits, limitsOf, ownTail, statisticOf } from "./claim.ts";
import type { FamilyNoteCode } from "./notes.ts";
import { nextBelow } from "./ordering.ts";
import type { FamilyAnswer, FamilyProblem } from "./types.ts";

/** A note whose code is on the list. */
export type FamilyNote = FamilyAnswer["notes"][number] & { readonly code: FamilyNoteCode };
type Threshold = number | null;

/** Checks lengths and ranges once, so that no method has to. */
export function checkProblem(problem: FamilyProblem): void {
  const count = problem.names.length;
  const { error } = problem;
  if (!(error > 0 && error < 1)) throw new DomainError("error", error, "0 < error < 1");
  for (const name of ["estimates", "standardErrors", "df", "p"] as const) {
    const values = problem[name];
    if (values.length !== count) throw new DomainError(`${name}.length`, values.length, `${count}, one for each name`);
    for (const value of values) if (Number.isNaN(value)) throw new DomainError(name, value, "numbers");
  }
  for (const p of problem.p) if (!(p >= 0 && p <= 1)) throw new DomainError("p", p, "0 <= p <= 1");
  for (const se of problem.standardErrors) if (!(se >= 0)) throw new DomainError("standardErrors", se, ">= 0");
  for (const df of problem.df) if (!(df > 0)) throw new DomainError("df", df, "> 0");
  if (problem.correlation !== null && problem.correlation.length !== count)
    throw new DomainError("correlation.length", problem.correlation.length, `${count}`);
}

/** Relative distance below which two numbers that should be equal are taken as equal: far above rounding, far below any meaning. */
const rounding = 1e-12;

/** Whether an adjusted p reaches the error, with exact ties decided as exact arithmetic would. */
export function reaches(adjustedP: number, error: number): boolean {
  return adjustedP <= error * (1 + rounding);
}

export interface Decisions {
  readonly adjustedP: readonly number[];
  readonly rejected: readonly boolean[];
  readonly threshold: readonly Threshold[];
}

/**
 * Adjusted p, rejections and thresholds that say exactly the same. Adjusted p and threshold reach one decision by two computations, which
 * may part by rounding when a p lies on its threshold; the adjusted p decides then, and the threshold moves by as little as it can.
 * @param slack  relative distance up to which p counts as lying on its threshold; beyond it the two disagree, which is a bug
 */
export function agreed(
  p: readonly number[],
  adjustedP: readonly number[],
  threshold: readonly Threshold[],
  error: number,
  slack = 1e-9,
): Decisions {
  const snapped = adjustedP.map((value) => (value > error && reaches(value, error) ? error : value));
  const rejected = snapped.map((value) => value <= error);
  const moved = threshold.map((limit, i) => {
    const own = p[i]!;
    const isRejected = rejected[i]!;
    if ((limit !== null && own <= limit) === isRejected) return limit;
    if (limit === null || Math.abs(own - limit) > slack * Math.max(own, limit))
      throw new Error(`Threshold ${limit} and adjusted p ${adjustedP[i]} of row ${i} with p ${own} disagree.`);
    return isRejected ? own : nextBelow(own);
  });
  return { adjustedP: snapped, rejected, threshold: moved };
}

/** Own p by the t distribution from estimates, standard errors and df: for the methods that work on these, not on given p. */
export function ownPByT(problem: FamilyProblem): number[] {
  const claim = claimOf(problem);
  return problem.estimates.map((estimate, i) =>
    ownTail(claim, statisticOf(claim, estimate, problem.standardErrors[i]!), problem.df[i]!),
  );
}

/** Whether the problem's own p are those of its t statistics, so that limits in standard errors say the same as p. */
function ownPAreT(problem: FamilyProblem): boolean {
  return ownPByT(problem).every((own, i) => Math.abs(problem.p[i]! - own) <= 1e-6 * own + 1e-12);
}

const unbounded: Limits = { lower: null, upper: null };

function columns(limits: readonly Limits[]) {
  return { lower: limits.map((it) => it.lower), upper: limits.map((it) => it.upper) };
}

export type LimitColumns = Pick<FamilyAnswer, "lower" | "upper" | "intervals"> & {
  readonly notes: readonly FamilyNote[];
};

const noT: FamilyNote = { code: "own-p-not-from-t", facts: {} };

/** No limits, and the note that says why. */
export function noLimits(problem: FamilyProblem, ...notes: FamilyNote[]): LimitColumns {
  return { ...columns(problem.names.map(() => unbounded)), intervals: "none", notes };
}

/** Limits at a critical statistic for each row, which hold together: for the single-step methods. */
export function jointLimits(problem: FamilyProblem, critical: readonly number[]): LimitColumns {
  const claim = claimOf(problem);
  if (!ownPAreT(problem)) return noLimits(problem, noT);
  const limits = problem.estimates.map((estimate, i) =>
    limitsOf(claim, estimate, problem.standardErrors[i]!, critical[i]!),
  );
  return { ...columns(limits), intervals: "simultaneous", notes: [] };
}

/** The critical statistics that belong to own p levels, row by row. */
export function criticalAt(problem: FamilyProblem, levels: readonly Threshold[]): number[] {
  const claim = claimOf(problem);
  return levels.map((level, i) =>
    level === null || level <= 0 ? Number.POSITIVE_INFINITY : criticalStatistic(claim, level, problem.df[i]!),
  );
}

/**
 * Limits of each comparison at the level of its own threshold. They leave out the null hypothesis exactly where it is rejected, and
 * as no threshold is above the error each alone covers with at least 1 - error, whatever the other rows did; together they need not.
 * For methods to which theory gives no joint intervals.
 */
export function limitsAtThreshold(problem: FamilyProblem, threshold: readonly Threshold[]): LimitColumns {
  const claim = claimOf(problem);
  if (!ownPAreT(problem)) return noLimits(problem, noT);
  const critical = criticalAt(problem, threshold);
  const limits = problem.estimates.map((estimate, i) =>
    limitsOf(claim, estimate, problem.standardErrors[i]!, critical[i]!),
  );
  return { ...columns(limits), intervals: "individual", notes: [{ code: "limits-at-threshold", facts: {} }] };
}

/**
 * Joint limits of a stepwise method that tests {theta} by the statistics of the claims that are false at theta (Strassburger &
 * Bretz 2008, also for margins): while something is not rejected, a rejected comparison is only known to lie in its claim, and the
 * others are bounded at the critical values of the last step; when everything is rejected, the claims are cut with the limits at
 * the critical values of the whole family. Directed claims only: a two-sided null hypothesis is one point, and what is left of the line says nothing.
 * @param all       whether everything that shares the error was rejected
 * @param lastStep  critical statistics of the comparisons not rejected (Infinity: unbounded); of the rejected ones not looked at
 * @param whole     critical statistics of all comparisons together, used when all are rejected
 * @source strassburger-bretz-2008; hsu-1994 for the form under an equivalence margin
 */
export function stepLimits(
  problem: FamilyProblem,
  rejected: readonly boolean[],
  all: boolean,
  lastStep: readonly number[],
  whole: readonly number[],
): LimitColumns {
  const claim = claimOf(problem);
  if (claim.type === "two-sided") throw new DomainError("sides", "two-sided", "a directed claim");
  if (!ownPAreT(problem)) return noLimits(problem, noT);
  const region = claimRegion(claim);
  const limits = problem.estimates.map((estimate, i) => {
    if (rejected[i] && !all) return region;
    const critical = all ? whole[i]! : lastStep[i]!;
    if (critical === Number.POSITIVE_INFINITY) return all ? region : unbounded;
    const reach = critical * problem.standardErrors[i]!;
    const [low, high] = [estimate - reach, estimate + reach];
    switch (claim.type) {
      case "upper":
        return { lower: all ? Math.max(claim.bound, low) : low, upper: null };
      case "lower":
        return { lower: null, upper: all ? Math.min(claim.bound, high) : high };
      default:
        return all
          ? { lower: Math.max(-claim.bound, Math.min(0, low)), upper: Math.min(claim.bound, Math.max(0, high)) }
          : { lower: Math.min(-claim.bound, low), upper: Math.max(claim.bound, high) };
    }
  });
  return { ...columns(limits), intervals: "simultaneous", notes: [{ code: "limits-of-steps", facts: { all } }] };
}

function claimRegion(claim: Claim): Limits {
  if (claim.type === "upper") return { lower: claim.bound, upper: null };
  if (claim.type === "lower") return { lower: null, upper: claim.bound };
  return { lower: -claim.bound, upper: claim.bound };
}

/** Puts an answer together; a family of one is said to be one. */
export function assembled(
  problem: FamilyProblem,
  parts: {
    readonly p?: readonly number[];
    readonly adjustedP: readonly number[];
    readonly rejected: readonly boolean[];
    readonly threshold: readonly Threshold[];
    readonly limits: LimitColumns;
    readonly monteCarloError?: number;
    readonly notes?: readonly FamilyNote[];
  },
): FamilyAnswer {
  const { limits, monteCarloError } = parts;
  const single: FamilyNote[] = problem.names.length === 1 ? [{ code: "family-of-one", facts: {} }] : [];
  return {
    p: parts.p ?? problem.p,
    adjustedP: parts.adjustedP,
    threshold: parts.threshold,
    rejected: parts.rejected,
    lower: limits.lower,
    upper: limits.upper,
    intervals: limits.intervals,
    ...(monteCarloError === undefined ? {} : { monteCarloError }),
    notes: [...single, ...(parts.notes ?? []), ...limits.notes],
  };
}
