import { readFileSync } from "node:fs";
import { describe, expect, it } from "vitest";
import { type CorrectionName, holdFamily } from "../../src/families/index.ts";
import { possibleTrueSets } from "../../src/families/logical-relations.ts";
import { shafferAdjustedP } from "../../src/families/shaffer.ts";
import { silentWatch } from "../../src/host/index.ts";
import { allPairs, closedAdjustedP, fraction, problemOf } from "./problems.ts";

interface Row {
  readonly method: string;
  readonly parameters: Record<string, unknown>;
  readonly value: string | readonly string[];
  readonly source: string;
}
const table = (name: string): readonly Row[] =>
  JSON.parse(readFileSync(new URL(`../reference/tables/${name}.json`, import.meta.url), "utf8"));
const numbers = (values: unknown) => (values as readonly string[]).map(Number);

/** The table's values are exact rationals or 20 digits; what is left is the rounding of a few products. */
const relativeTolerance = 1e-13;
function expectClose(found: readonly number[], wanted: readonly number[], tolerance = relativeTolerance) {
  expect(found.length).toBe(wanted.length);
  for (const [i, value] of wanted.entries())
    expect(Math.abs(found[i]! - value), `row ${i}: ${found[i]} for ${value}`).toBeLessThanOrEqual(
      tolerance * Math.abs(value),
    );
}

const byMethod: Readonly<Record<string, CorrectionName>> = {
  "Bonferroni, adjusted p-values": "bonferroni",
  "Hochberg, adjusted p-values": "hochberg",
  "Hommel, adjusted p-values": "hommel",
  "Holm, adjusted p-values": "holm",
  "Benjamini-Hochberg, adjusted p-values": "bh",
  "Benjamini-Yekutieli, adjusted p-values": "by",
  "Sidak single step, adjusted p-values": "sidak",
};

describe("p-value-adjustment table", () => {
  const rows = table("p-value-adjustment");
  const simesP = (p: readonly number[]) =>
    Math.min(...[...p].sort((a, b) => a - b).map((value, i) => (p.length * value) / (i + 1)));

  it.each(rows.filter(({ method }) => method in byMethod))("$method of $parameters.vector ($source)", (row) => {
    const p = numbers(row.parameters.p);
    expectClose(holdFamily(byMethod[row.method]!, problemOf({ p })).adjustedP, numbers(row.value));
  });

  it("leaves no row of the table out", () => {
    const known = /Sidak step down|Simes, global|number rejected/;
    expect(rows.filter(({ method }) => !(method in byMethod) && !known.test(method))).toEqual([]);
  });

  it.each(rows.filter(({ method }) => method.includes("number rejected")))("$method: $value ($source)", (row) => {
    const name = row.method.startsWith("Bonferroni") ? "bonferroni" : "hochberg";
    const { rejected } = holdFamily(name, problemOf({ p: numbers(row.parameters.p) }));
    expect(rejected.filter(Boolean).length).toBe(Number(row.value));
  });

  // The table's Simes p is the p of the whole intersection, which Hommel's closure holds for its largest row.
  it.each(rows.filter(({ method }) => method.startsWith("Simes")))(
    "Simes p of $parameters.vector bounds Hommel's from below",
    (row) => {
      const p = numbers(row.parameters.p);
      const wanted = Number(row.value);
      expectClose([simesP(p)], [wanted]);
      expect(Math.min(...holdFamily("hommel", problemOf({ p })).adjustedP)).toBeGreaterThanOrEqual(
        wanted * (1 - 1e-13),
      );
    },
  );
});

describe("logical-families table", () => {
  const rows = table("logical-families");
  const pairsProblem = (row: Row) => {
    const pairs = row.parameters.pairs as [number, number][];
    const means = row.parameters.means as number;
    const weights = pairs.map(([a, b]) =>
      Array.from({ length: means }, (_, k) => (k === a - 1 ? 1 : k === b - 1 ? -1 : 0)),
    );
    return problemOf({ p: numbers(row.parameters.p), weights });
  };
  const members = ({ words }: { readonly words: Uint32Array }, count: number) =>
    Array.from({ length: count }, (_, i) => i).filter((i) => (words[i >> 5]! >> (i & 31)) & 1);
  const trueSets = (weights: readonly (readonly number[])[]) => possibleTrueSets(weights, silentWatch)!;

  it.each(rows.filter(({ method }) => method.startsWith("possible numbers")))(
    "numbers of true hypotheses among all pairs of $parameters.means means ($source)",
    (row) => {
      const sizes = new Set(trueSets(allPairs(row.parameters.means as number)).map(({ size }) => size));
      expect([...sizes].sort((a, b) => a - b)).toEqual(numbers(row.value));
    },
  );

  // S2 lies between the static steps S1 and the exhaustive closure of Bergmann & Hommel (1988).
  it.each(rows.filter(({ method }) => method.startsWith("Shaffer static")))(
    "S2 is never above S1: $parameters.p",
    (row) => {
      const { adjustedP } = holdFamily("shaffer", pairsProblem(row));
      for (const [i, value] of numbers(row.value).entries())
        expect(adjustedP[i]!).toBeLessThanOrEqual(value * (1 + 1e-13));
    },
  );
  it.each(rows.filter(({ method }) => method.startsWith("Bergmann")))(
    "S2 is never below the closure: $parameters.p",
    (row) => {
      const problem = pairsProblem(row);
      const wanted = numbers(row.value);
      const sets = trueSets(problem.weights)
        .filter(({ size }) => size > 0)
        .map((set) => members(set, problem.p.length));
      // The same sets, closed with Bonferroni's test, give the table's values to the last digit.
      expectClose(
        closedAdjustedP(problem.p, (set) => set.length * Math.min(...set.map((i) => problem.p[i]!)), sets),
        wanted,
      );
      const adjustedP = shafferAdjustedP(problem.p, trueSets(problem.weights));
      for (const [i, value] of wanted.entries()) expect(adjustedP[i]!).toBeGreaterThanOrEqual(value * (1 - 1e-13));
    },
  );
  it.each(rows.filter(({ method }) => method.startsWith("closed testing")))(
    "sets closed with the Simes test: $parameters.p",
    (row) => {
      const problem = pairsProblem(row);
      const sets = trueSets(problem.weights)
        .filter(({ size }) => size > 0)
        .map((set) => members(set, problem.p.length));
      const simes = (set: readonly number[]) =>
        Math.min(
          ...set
            .map((i) => problem.p[i]!)
            .sort((a, b) => a - b)
            .map((value, k) => (set.length * value) / (k + 1)),
        );
      expectClose(closedAdjustedP(problem.p, simes, sets), numbers(row.value));
    },
  );
});

describe("graphical-procedures table", () => {
  it.each(table("graphical-procedures"))("$parameters.graph, p $parameters.p", (row) => {
    const weights = (row.parameters.weights as string[]).map(fraction);
    const passes = (row.parameters.transitions as string[][]).map((line) => line.map(fraction));
    const p = numbers(row.parameters.p);
    expectClose(holdFamily("graph", problemOf({ p, graph: { weights, passes } })).adjustedP, numbers(row.value));
    const special = { fixed: "fixed sequence", fallback: "fallback", Holm: "holm" } as const;
    const name = special[(row.parameters.graph as string).split(" ")[0] as keyof typeof special];
    if (name !== undefined)
      expectClose(holdFamily(name, problemOf({ p, graph: { weights, passes } })).adjustedP, numbers(row.value));
  });
});

describe("adjusted-critical-values table", () => {
  const rows = table("adjusted-critical-values");
  const dfOf = (row: Row) => (row.parameters.df === "inf" ? Number.POSITIVE_INFINITY : Number(row.parameters.df));
  /** Half-width of the first row's limits at standard error 1 is the critical value. */
  const critical = (name: CorrectionName, count: number, df: number, error: number, means: number | null = null) => {
    const estimates = Array.from({ length: count }, (_, i) => i + 0.5);
    const weights = means === null ? [] : [Array.from({ length: means }, (_, k) => (k === 0 ? 1 : k === 1 ? -1 : 0))];
    const answer = holdFamily(
      name,
      problemOf({
        estimates,
        df: estimates.map(() => df),
        commonDf: df,
        error,
        weights,
        shape: { kind: "free", means, repeated: false, within: false },
      }),
    );
    expect(answer.intervals).toBe("simultaneous");
    return (answer.upper[0]! - answer.lower[0]!) / 2;
  };
  it.each(rows)("$method: $parameters", (row) => {
    const { comparisons, means, alpha } = row.parameters;
    const found = row.method.startsWith("Scheffe")
      ? critical("scheffe", 1, dfOf(row), Number(alpha), means as number)
      : critical(
          row.method.startsWith("Sidak") ? "sidak" : "bonferroni",
          comparisons as number,
          dfOf(row),
          Number(alpha),
        );
    // The numeric room promises quantiles to about 1e-12.
    expectClose([found], [Number(row.value)], 2e-12);
  });
});
