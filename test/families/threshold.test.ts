import { describe, expect, it } from "vitest";
import { type CorrectionName, type FamilyProblem, holdFamily } from "../../src/families/index.ts";
import { allPairs, problemOf, randomP, testRandom } from "./problems.ts";

/** The definition itself: the largest p of its own with which the row would have been rejected, the others as they are, by bisection. */
function thresholdByDefinition(name: CorrectionName, problem: FamilyProblem, row: number): number | null {
  const rejectedAt = (value: number) =>
    holdFamily(name, { ...problem, p: problem.p.map((p, i) => (i === row ? value : p)) }).rejected[row]!;
  if (!rejectedAt(1e-300)) return null;
  let [low, high] = [1e-300, 1];
  for (let k = 0; k < 60; k++) {
    const middle = (low + high) / 2;
    if (rejectedAt(middle)) low = middle;
    else high = middle;
  }
  return low;
}

function declared(name: CorrectionName, random: () => number, count: number): Partial<FamilyProblem> {
  const weights: number[] = Array.from({ length: count }, () => Math.floor(random() * 4));
  if (!weights.some((weight) => weight > 0)) weights[0] = 1;
  const sum = weights.reduce((a, b) => a + b, 0);
  const passes: number[][] = weights.map((_, i) =>
    weights.map((__, j) => (i === j ? 0 : Math.floor(random() * 3) / (2 * count))),
  );
  if (name === "graph" || name === "fallback") return { graph: { weights: weights.map((w) => w / sum), passes } };
  return {};
}

const methods: readonly CorrectionName[] = [
  "none",
  "bonferroni",
  "sidak",
  "holm",
  "hochberg",
  "hommel",
  "fixed sequence",
  "fallback",
  "graph",
  "bh",
  "by",
];

describe("a threshold is the largest p of its own with which the row would have been rejected", () => {
  it.each(methods)("%s, on 100 random families of 1 to 6", (name) => {
    const random = testRandom(31);
    for (let k = 0; k < 100; k++) {
      const count = 1 + Math.floor(random() * 6);
      const problem = problemOf({
        p: randomP(random, count),
        error: [0.05, 0.1, 0.01, 0.2][k % 4]!,
        ...declared(name, random, count),
      });
      const { threshold, rejected } = holdFamily(name, problem);
      for (const [row, limit] of threshold.entries()) {
        const wanted = thresholdByDefinition(name, problem, row);
        const label = `${name}, case ${k}, row ${row}: ${limit} for ${wanted}, p ${problem.p}`;
        if (wanted === null) expect(limit, label).toBeNull();
        else expect(Math.abs(limit! - wanted), label).toBeLessThanOrEqual(1e-9 * wanted);
        expect(limit !== null && problem.p[row]! <= limit, label).toBe(rejected[row]);
      }
    }
  });

  it("shaffer, on 40 random families of all pairs of 3 or 4 means", () => {
    const random = testRandom(32);
    for (let k = 0; k < 40; k++) {
      const weights = allPairs(3 + (k % 2));
      const problem = problemOf({ p: randomP(random, weights.length), weights });
      const { threshold } = holdFamily("shaffer", problem);
      for (const [row, limit] of threshold.entries()) {
        const wanted = thresholdByDefinition("shaffer", problem, row)!;
        expect(Math.abs(limit! - wanted), `case ${k}, row ${row}`).toBeLessThanOrEqual(1e-9 * wanted);
      }
    }
  });

  it("says the same as the adjusted p on 5,000 families with ties on the levels themselves", () => {
    const random = testRandom(33);
    for (let k = 0; k < 5000; k++) {
      const count = 2 + Math.floor(random() * 5);
      const name = methods[k % methods.length]!;
      // p exactly on levels of the methods: error * i / j.
      const p = Array.from(
        { length: count },
        () => (0.05 * (1 + Math.floor(random() * count))) / (1 + Math.floor(random() * count)),
      );
      const problem = problemOf({ p, ...declared(name, random, count) });
      const { adjustedP, threshold, rejected } = holdFamily(name, problem);
      for (const row of p.keys()) {
        expect(adjustedP[row]! <= 0.05).toBe(rejected[row]);
        expect(threshold[row] !== null && p[row]! <= threshold[row]!).toBe(rejected[row]);
      }
    }
  });
});
