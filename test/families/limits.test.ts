import { describe, expect, it } from "vitest";
import {
  type CorrectionName,
  comparisonP,
  equivalenceP,
  type FamilyProblem,
  holdFamily,
} from "../../src/families/index.ts";
import { problemOf, testRandom } from "./problems.ts";

type Sided = Pick<FamilyProblem, "sides" | "margin">;
const claims: readonly (Sided & { readonly title: string })[] = [
  { title: "two-sided", sides: "two-sided", margin: null },
  { title: "upper", sides: "upper", margin: null },
  { title: "lower", sides: "lower", margin: null },
  { title: "equivalence", sides: "two-sided", margin: { type: "equivalence", value: 3.5, better: null } },
  {
    title: "not worse, higher is better",
    sides: "two-sided",
    margin: { type: "not worse", value: 1.5, better: "higher" },
  },
  {
    title: "not worse, lower is better",
    sides: "two-sided",
    margin: { type: "not worse", value: 1.5, better: "lower" },
  },
];

/** Whether an interval leaves out the null hypothesis. A limit on the bound itself belongs to the claim: the bound is not reached. */
function leavesOutNull(claim: Sided, lower: number | null, upper: number | null): boolean {
  const low = lower ?? Number.NEGATIVE_INFINITY;
  const high = upper ?? Number.POSITIVE_INFINITY;
  const { margin } = claim;
  if (margin?.type === "equivalence") return low >= -margin.value && high <= margin.value;
  if (margin !== null) return margin.better === "higher" ? low >= -margin.value : high <= margin.value;
  if (claim.sides === "upper") return low >= 0;
  if (claim.sides === "lower") return high <= 0;
  return low > 0 || high < 0;
}

const graph = {
  weights: [0.5, 0.5, 0, 0],
  passes: [
    [0, 0.5, 0.5, 0],
    [0.5, 0, 0, 0.5],
    [0, 1, 0, 0],
    [1, 0, 0, 0],
  ],
};
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

describe.each(claims)("limits of $title claims", (claim) => {
  it.each(methods.filter((name) => name !== "sidak" || claim.title === "two-sided"))(
    "agree with every decision of %s (400 random families)",
    (name) => {
      const random = testRandom(51);
      for (let k = 0; k < 400; k++) {
        const estimates = Array.from({ length: 4 }, () => 8 * (random() + random() - 1));
        const standardErrors = estimates.map(() => 0.3 + random());
        const df = estimates.map(() => [3, 12.5, 40, Number.POSITIVE_INFINITY][Math.floor(random() * 4)]!);
        const shares = name === "graph" ? graph : null;
        const problem = problemOf({ estimates, standardErrors, df, graph: shares, ...claim });
        const answer = holdFamily(name, problem);
        expect(answer.intervals).not.toBe("none");
        for (const [i, rejected] of answer.rejected.entries())
          expect(
            leavesOutNull(claim, answer.lower[i]!, answer.upper[i]!),
            `${name}, case ${k}, row ${i}: ${answer.lower[i]} to ${answer.upper[i]}, p ${problem.p}`,
          ).toBe(rejected);
      }
    },
  );

  it("leave the end open that nothing is claimed about", () => {
    const { lower, upper } = holdFamily("bonferroni", problemOf({ estimates: [1, 2], ...claim }));
    const upwards = claim.sides === "upper" || claim.margin?.better === "higher";
    const downwards = claim.sides === "lower" || claim.margin?.better === "lower";
    expect(lower.map((value) => value === null)).toEqual([downwards, downwards]);
    expect(upper.map((value) => value === null)).toEqual([upwards, upwards]);
  });
});

describe("joint limits where theory gives them", () => {
  const kindOf = (name: CorrectionName, claim: Sided) =>
    holdFamily(name, problemOf({ estimates: [1, 2, 3, 4], graph: name === "graph" ? graph : null, ...claim }))
      .intervals;
  it.each(["holm", "fixed sequence", "fallback", "graph"] as const)(
    "%s: joint for directed claims only (Strassburger & Bretz 2008)",
    (name) => {
      for (const claim of claims)
        expect(kindOf(name, claim)).toBe(claim.title === "two-sided" ? "individual" : "simultaneous");
    },
  );
  it("hochberg, hommel, bh, by: none are known", () => {
    for (const name of ["hochberg", "hommel", "bh", "by"] as const)
      for (const claim of claims) expect(kindOf(name, claim)).toBe("individual");
  });
  it("none where own p are not those of the t statistics", () =>
    expect(holdFamily("holm", problemOf({ estimates: [1, 2], p: [0.5, 0.9] })).intervals).toBe("none"));
});

describe("own p", () => {
  it("of one comparison (values: t tables, 20 df; common practice)", () => {
    const one = { estimate: 2.085963447265837, standardError: 1, df: 20, margin: null };
    expect(comparisonP({ ...one, sides: "two-sided" })).toBeCloseTo(0.05, 12);
    expect(comparisonP({ ...one, sides: "upper" })).toBeCloseTo(0.025, 12);
    expect(comparisonP({ ...one, sides: "lower" })).toBeCloseTo(0.975, 12);
  });
  it("under a margin is the larger of two one-sided tests (Schuirmann 1987)", () => {
    const one = { estimate: 0.7, standardError: 0.5, df: 15 };
    const { lowerP, upperP } = equivalenceP({ ...one, margin: 2 });
    expect(lowerP).toBeCloseTo(comparisonP({ ...one, estimate: 2.7, sides: "upper", margin: null }), 15);
    expect(upperP).toBeCloseTo(comparisonP({ ...one, estimate: -1.3, sides: "lower", margin: null }), 15);
    const margin = { type: "equivalence", value: 2, better: null } as const;
    expect(comparisonP({ ...one, sides: "two-sided", margin })).toBe(Math.max(lowerP, upperP));
  });
  it("needs numbers in their domain", () => {
    const one = { estimate: 1, standardError: 1, df: 5, sides: "two-sided", margin: null } as const;
    expect(() => comparisonP({ ...one, df: 0 })).toThrow(/df is 0/);
    expect(() => comparisonP({ ...one, standardError: -1 })).toThrow(/standardError is -1/);
    expect(() => comparisonP({ ...one, estimate: Number.NaN })).toThrow(/estimate is NaN/);
    expect(() => comparisonP({ ...one, margin: { type: "equivalence", value: 0, better: null } })).toThrow(/margin/);
  });
});
