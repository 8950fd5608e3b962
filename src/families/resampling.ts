import { DomainError } from "../numeric/index.ts";
import { agreed, assembled, type LimitColumns, noLimits } from "./answer.ts";
import { claimOf, limitsOf } from "./claim.ts";
import type { Correction } from "./correction.ts";
import { misfit } from "./misfits.ts";
import { sources } from "./sources.ts";
import { leftStanding, once, type StepDown, steppedAdjustedP } from "./stepwise.ts";
import type { CorrectionName, FamilyProblem } from "./types.ts";

const name: CorrectionName = "resampling";

/** Statistics that differ by less than this share of their size are the same arrangement, computed in another order. */
const tie = 1e-10;

/** Resamples between two looks at the watch. */
const stride = 256;

/** Statistics on the claim's side of every resample: `count` rows of `members`. */
interface Resampled {
  readonly count: number;
  readonly members: number;
  readonly values: Float64Array;
}

function resampled({ resamples, names, sides, watch }: FamilyProblem): Resampled {
  const { count, fill } = resamples!;
  if (!Number.isInteger(count) || count < 1) throw new DomainError("resamples.count", count, "an integer >= 1");
  const members = names.length;
  const values = new Float64Array(count * members);
  const statistics = new Float64Array(members);
  for (let index = 0; index < count; index++) {
    if (index % stride === 0) {
      watch.checkpoint();
      watch.progress(index, count, "rearranging the data");
    }
    fill(index, statistics);
    for (let i = 0; i < members; i++) {
      const value = statistics[i]!;
      if (Number.isNaN(value)) throw new DomainError("resamples.fill", value, "numbers");
      values[index * members + i] = sides === "two-sided" ? Math.abs(value) : sides === "upper" ? value : -value;
    }
  }
  return { count, members, values };
}

const atLeast = (value: number, observed: number) => value >= observed - tie * Math.abs(observed);

/** Share of resamples in which the largest statistic of `rows` reaches `observed`. */
function tailShare({ count, members, values }: Resampled, rows: readonly number[], observed: number): number {
  let reached = 0;
  for (let index = 0; index < count; index++) {
    const start = index * members;
    for (const row of rows)
      if (atLeast(values[start + row]!, observed)) {
        reached++;
        break;
      }
  }
  return reached / count;
}

/**
 * The smallest statistic that the largest of `rows` reaches in at most a share `error` of resamples, among the values that it takes; Infinity
 * where even its largest value is reached too often.
 */
function criticalValue({ count, members, values }: Resampled, rows: readonly number[], error: number): number {
  const largest = new Float64Array(count);
  for (let index = 0; index < count; index++) {
    let most = Number.NEGATIVE_INFINITY;
    for (const row of rows) most = Math.max(most, values[index * members + row]!);
    largest[index] = most;
  }
  largest.sort();
  // At most `allowed` resamples may reach it; ties with the next one count as reaching, so step over them.
  const allowed = Math.floor(error * count * (1 + 1e-12));
  let place = count - allowed;
  while (place < count && atLeast(largest[place - 1] ?? Number.NEGATIVE_INFINITY, largest[place]!)) place++;
  return place < count ? largest[place]! : Number.POSITIVE_INFINITY;
}

/**
 * Step-down largest statistic over the arrangements that the design lets be exchanged. The observed arrangement is one of them, so that
 * the p of a random sample of arrangements is never zero and never too small.
 */
export const resampling: Correction = {
  name,
  holds: "family-wise error",
  dependence: "exchangeable",
  source: ["westfall-young-1993"],
  passing: null,
  help: {
    controls: "The chance of at least one false rejection in the family.",
    assumes:
      "That without a difference the responses could be exchanged: within subjects, or between groups of one spread, as the design says. Nothing about the shape of the distribution.",
    betterThan:
      "With skewed or heavy-tailed responses and small groups, where t methods are only approximate; it uses whatever dependence the data have. step-down is as strong where errors are normal and needs no random numbers. Exact where all arrangements are few enough to be enumerated.",
    source: [sources["westfall-young-1993"]],
  },
  fits({ resamples, margin }) {
    if (margin !== null) return misfit(margin.type === "equivalence" ? "no-margin" : "no-shift", { method: name });
    return resamples === null ? misfit("no-resamples", { method: name }) : null;
  },
  decide(problem) {
    const { error, watch } = problem;
    const data = resampled(problem);
    const { count, members, values } = data;
    const rows = problem.names.map((_, i) => i);
    const observed = Array.from(values.subarray(0, members));
    const order = [...rows].sort((a, b) => observed[b]! - observed[a]! || a - b);
    const p = rows.map((row) => tailShare(data, [row], observed[row]!));

    // One pass from the weakest row up keeps the running largest statistic (Westfall & Young 1993, algorithm 2.8).
    const reached = new Float64Array(members);
    for (let index = 0; index < count; index++) {
      let largest = Number.NEGATIVE_INFINITY;
      for (let step = members - 1; step >= 0; step--) {
        const row = order[step]!;
        largest = Math.max(largest, values[index * members + row]!);
        if (atLeast(largest, observed[row]!)) reached[step]!++;
      }
    }
    const raw = reached.map((times) => times / count);
    const adjustedP = steppedAdjustedP({ order, raw });

    const criticalOf = once((set) => criticalValue(data, set, error));
    const step: StepDown = {
      order,
      raw,
      error,
      ownTailAt: (row, other) => tailShare(data, [row], observed[other]!),
      jointTailAt: (set, other) => tailShare(data, set, observed[other]!),
    };
    const critical = rows.map((row) => {
      watch.checkpoint();
      return criticalOf(leftStanding(step, row));
    });
    // A critical value beyond all values that the row itself takes has no own p: nothing that the row could show would be enough.
    const threshold = critical.map((value, row) => {
      const share = value === Number.POSITIVE_INFINITY ? 0 : tailShare(data, [row], value);
      return share > 0 ? share : null;
    });
    const decisions = agreed(p, adjustedP, threshold, error);
    const monteCarloError = problem.resamples!.exact
      ? undefined
      : Math.max(...adjustedP.map((value) => Math.sqrt((value * (1 - value)) / count)));
    return assembled(problem, {
      p,
      ...decisions,
      limits: limits(problem, critical, observed),
      ...(monteCarloError === undefined ? {} : { monteCarloError }),
      notes: [{ code: "resamples", facts: { count, exact: problem.resamples!.exact } }],
    });
  },
};

/**
 * Limits at each row's critical value, where the resampled statistics are estimates over their standard errors. They agree with the
 * decisions; joint coverage would need exchangeability under a shift, which the rearrangement of data does not give.
 */
function limits(problem: FamilyProblem, critical: readonly number[], observed: readonly number[]): LimitColumns {
  const claim = claimOf(problem);
  const sign = claim.type === "lower" ? -1 : 1;
  const areT = observed.every((value, i) => {
    const statistic = problem.estimates[i]! / problem.standardErrors[i]!;
    const own = claim.type === "two-sided" ? Math.abs(statistic) : sign * statistic;
    return Math.abs(own - value) <= 1e-6 * (1 + Math.abs(own));
  });
  if (!areT) return noLimits(problem, { code: "statistics-not-t", facts: {} });
  const each = critical.map((value, i) => limitsOf(claim, problem.estimates[i]!, problem.standardErrors[i]!, value));
  return {
    lower: each.map((it) => it.lower),
    upper: each.map((it) => it.upper),
    intervals: "individual",
    notes: [{ code: "limits-at-threshold", facts: {} }],
  };
}
