import { describe, expect, it } from "vitest";
import { holdFamily } from "../../src/families/index.ts";
import { problemOf, testRandom } from "./problems.ts";

const mean = (values: readonly number[]) => values.reduce((a, b) => a + b, 0) / values.length;
/** One-sample t of contrast scores. */
function tOf(scores: readonly number[]): number {
  const centre = mean(scores);
  const square = scores.reduce((sum, value) => sum + (value - centre) ** 2, 0) / (scores.length - 1);
  return centre / Math.sqrt(square / scores.length);
}

/** Every pattern of signs over the subjects, the observed one first: exact under symmetry, one comparison. */
function signFlips(scores: readonly (readonly number[])[]) {
  const subjects = scores[0]!.length;
  return {
    count: 2 ** subjects,
    exact: true,
    fill: (index: number, into: Float64Array) => {
      for (const [c, line] of scores.entries())
        into[c] = tOf(line.map((value, s) => ((index >> s) & 1 ? -value : value)));
    },
  };
}

describe("step-down by resampling (Westfall & Young 1993)", () => {
  it("of one comparison is the share of sign patterns that reach it, counted by hand", () => {
    // 1, 2, 3, 4 all positive: only the pattern itself and its mirror reach |t|, so p = 2 / 16.
    const answer = holdFamily("resampling", problemOf({ p: [0.5], resamples: signFlips([[1, 2, 3, 4]]) }));
    expect(answer.p).toEqual([2 / 16]);
    expect(answer.adjustedP).toEqual([2 / 16]);
    expect(answer.monteCarloError).toBeUndefined();
    expect(answer.notes).toContainEqual({ code: "resamples", facts: { count: 16, exact: true } });
    const upper = holdFamily(
      "resampling",
      problemOf({ p: [0.5], sides: "upper", resamples: signFlips([[1, 2, 3, 4]]) }),
    );
    expect(upper.p).toEqual([1 / 16]);
  });

  it("is never below its own p, and keeps the order of the statistics", () => {
    const random = testRandom(61);
    for (let k = 0; k < 100; k++) {
      const scores = Array.from({ length: 4 }, () => Array.from({ length: 6 }, () => random() + random() - 0.8));
      const { p, adjustedP } = holdFamily("resampling", problemOf({ p: [1, 1, 1, 1], resamples: signFlips(scores) }));
      for (const [i, value] of adjustedP.entries()) expect(value).toBeGreaterThanOrEqual(p[i]!);
    }
  });

  it("has the threshold of its definition: the own p of the weakest statistic that would have been rejected", () => {
    const random = testRandom(62);
    for (let k = 0; k < 60; k++) {
      const size = 60;
      const draws = Array.from({ length: size }, () =>
        [0, 1, 2].map(() => Math.round(8 * (random() + random() - 1)) / 2),
      );
      draws[0] = draws[0]!.map((value) => value + 3 * random());
      const error = 0.15;
      const holdAt = (first: readonly number[]) =>
        holdFamily(
          "resampling",
          problemOf({
            p: [1, 1, 1],
            error,
            resamples: {
              count: size,
              exact: false,
              fill: (index, into) => into.set(index === 0 ? first : draws[index]!),
            },
          }),
        );
      const base = holdAt(draws[0]!);
      const observed = draws[0]!.map(Math.abs);
      for (const row of [0, 1, 2]) {
        // Step-down decision for a row at a moved statistic, with the resamples, the observed arrangement among them, as they are.
        const rejectedAt = (value: number) => {
          const moved = observed.map((it, i) => (i === row ? value : it));
          const order = [0, 1, 2].sort((a, b) => moved[b]! - moved[a]! || (a === row ? 1 : b === row ? -1 : 0));
          for (let step = 0; step < 3; step++) {
            const rest = order.slice(step);
            const reached = draws.filter(
              (line) => Math.max(...rest.map((i) => Math.abs(line[i]!))) >= moved[order[step]!]!,
            );
            if (reached.length / size > error) return false;
            if (order[step] === row) return true;
          }
          return false;
        };
        const candidates = draws.map((line) => Math.abs(line[row]!)).filter(rejectedAt);
        const shareAt = (value: number) => draws.filter((line) => Math.abs(line[row]!) >= value).length / size;
        if (candidates.length === 0) {
          // No value that the row itself takes would do, but a larger one might: no own p above zero is small enough.
          expect(base.threshold[row] ?? 0, `case ${k}, row ${row}`).toBe(0);
        } else {
          expect(base.threshold[row], `case ${k}, row ${row}`).toBe(shareAt(Math.min(...candidates)));
        }
        expect(base.rejected[row]).toBe(rejectedAt(observed[row]!));
      }
    }
  });

  it("draws limits that agree with its decisions where the statistics are estimates over standard errors", () => {
    const random = testRandom(63);
    for (let k = 0; k < 60; k++) {
      const scores = Array.from({ length: 3 }, () => Array.from({ length: 7 }, () => random() + random() - 0.6));
      const estimates = scores.map(mean);
      const standardErrors = scores.map((line, i) => estimates[i]! / tOf(line));
      const sides = (["two-sided", "upper", "lower"] as const)[k % 3]!;
      const answer = holdFamily(
        "resampling",
        problemOf({ estimates, standardErrors, df: [6, 6, 6], sides, resamples: signFlips(scores) }),
      );
      expect(answer.intervals).toBe("individual");
      for (const [i, rejected] of answer.rejected.entries()) {
        const low = answer.lower[i] ?? Number.NEGATIVE_INFINITY;
        const high = answer.upper[i] ?? Number.POSITIVE_INFINITY;
        // The critical value is itself one that is rejected, so a limit on zero leaves zero out.
        const out =
          sides === "upper" ? low >= -1e-12 : sides === "lower" ? high <= 1e-12 : low >= -1e-12 || high <= 1e-12;
        expect(out, `case ${k}, row ${i}`).toBe(rejected);
      }
    }
  });
});
