import { readFileSync } from "node:fs";
import { describe, expect, it } from "vitest";
import {
  besideOtherMethods,
  correctionNames,
  corrections,
  fittingCorrections,
  holdFamily,
  sources,
} from "../../src/families/index.ts";
import { allPairs, contrastCovariance, correlationOf, problemOf } from "./problems.ts";

interface HandbookCase {
  readonly id: string;
  readonly data: Record<string, unknown>;
  readonly expected: Record<string, { readonly value: string; readonly tolerance: string }>;
  readonly recomputed: Record<string, string>;
  readonly additional?: Record<string, string>;
}
const handbook: readonly HandbookCase[] = (() => {
  const file = JSON.parse(readFileSync(new URL("../reference/handbook/cases.json", import.meta.url), "utf8"));
  return Array.isArray(file) ? file : file.cases;
})();
const caseOf = (id: string) => handbook.find((one) => one.id === id)!;
/** Within the Handbook's printed digits, and to 12 digits of its own data recomputed. */
function expectPrinted(found: number, one: HandbookCase, name: string) {
  const { value, tolerance } = one.expected[name]!;
  expect(Math.abs(found - Number(value))).toBeLessThanOrEqual(Number(tolerance) * (1 + 1e-9));
  expect(Math.abs(found - Number(one.recomputed[name]))).toBeLessThanOrEqual(1e-11 * Math.abs(found));
}

describe("NIST/SEMATECH e-Handbook", () => {
  it("Scheffe's limits for two contrasts of four means", () => {
    const one = caseOf("scheffe-two-contrasts");
    const groups = Object.values(one.data.groups as Record<string, string[]>).map((row) => row.map(Number));
    const contrasts = (one.data.contrasts as string[][]).map((row) => row.map(Number));
    const means = groups.map((row) => row.reduce((a, b) => a + b, 0) / row.length);
    const df = groups.reduce((sum, row) => sum + row.length - 1, 0);
    const square = groups.reduce((sum, row, g) => sum + row.reduce((s, y) => s + (y - means[g]!) ** 2, 0), 0) / df;
    const covariance = contrastCovariance(
      contrasts,
      groups.map((row) => square / row.length),
    );
    const problem = problemOf({
      estimates: contrasts.map((row) => row.reduce((sum, w, g) => sum + w * means[g]!, 0)),
      standardErrors: covariance.map((row, i) => Math.sqrt(row[i]!)),
      df: [df, df],
      commonDf: df,
      weights: contrasts,
    });
    const answer = holdFamily("scheffe", problem);
    for (const i of [0, 1]) {
      expectPrinted(answer.lower[i]!, one, `lower_${i + 1}`);
      expectPrinted(answer.upper[i]!, one, `upper_${i + 1}`);
      expectPrinted((answer.upper[i]! - answer.lower[i]!) / 2, one, "half_width");
      expect(answer.adjustedP[i]!).toBeCloseTo(Number(one.additional![`scheffe_p_${i + 1}`]), 12);
    }
  });

  it("Tukey's critical value for 5 means and 10 df", () => {
    const one = caseOf("studentized-range-5-10");
    const estimates = Array.from({ length: 10 }, (_, i) => i);
    const answer = holdFamily(
      "tukey",
      problemOf({
        estimates,
        df: estimates.map(() => 10),
        commonDf: 10,
        shape: { kind: "all pairs", means: 5, repeated: false, within: false },
      }),
    );
    expectPrinted(((answer.upper[3]! - answer.lower[3]!) / 2) * Math.SQRT2, one, "q");
  });
});

describe("the list of corrections", () => {
  it("has help that reads as sentences and sources that exist, for every method", () => {
    for (const name of correctionNames) {
      const { help, source, holds } = corrections[name];
      expect(corrections[name].name).toBe(name);
      for (const text of [help.controls, help.assumes, help.betterThan]) {
        expect(text.length, name).toBeGreaterThan(30);
        expect(text, name).toMatch(/^[A-Za-z].*[.]$/);
      }
      if (holds === "false discovery rate") expect(help.controls).toMatch(/does not hold the family's error/);
      expect(source.length > 0 || name === "none", name).toBe(true);
      for (const key of source) expect(sources[key]).toMatch(/\(\d{4}\)/);
      for (const line of help.source) expect(Object.values(sources)).toContain(line);
    }
  });
  it("names every method that help mentions", () => {
    const words = new Set<string>(correctionNames);
    for (const word of [
      "bonferroni",
      "holm",
      "hochberg",
      "hommel",
      "shaffer",
      "tukey",
      "dunnett",
      "single-step",
      "step-down",
    ])
      expect(words.has(word)).toBe(true);
  });
});

const weights = allPairs(3);
const covariance = contrastCovariance(weights, [1 / 6, 1 / 6, 1 / 6]);
const pairs = problemOf({
  estimates: [1.4, 1.9, 0.5],
  standardErrors: covariance.map((row, i) => Math.sqrt(row[i]!)),
  df: [15, 15, 15],
  commonDf: 15,
  weights,
  correlation: correlationOf(covariance),
  shape: { kind: "all pairs", means: 3, repeated: false, within: false },
});

describe("the sensitivity view", () => {
  const rows = besideOtherMethods(pairs, "holm");
  const row = (name: string) => rows.find(({ correction }) => correction === name)!;
  it("marks the declared method and says of each other what it would have decided", () => {
    expect(rows.filter(({ declared }) => declared).map(({ correction }) => correction)).toEqual(["holm"]);
    for (const { correction, adjustedP, rejected, unfit } of rows) {
      if (unfit !== undefined) continue;
      const answer = holdFamily(correction, pairs);
      expect(adjustedP).toEqual(answer.adjustedP);
      expect(rejected).toEqual(answer.rejected);
    }
    expect(row("tukey").unfit).toBeUndefined();
    expect(row("bh").holds).toBe("false discovery rate");
  });
  it("gives unfit methods with their reason, and no order that was not declared", () => {
    expect(row("dunnett").unfit).toMatch(/each level against one/);
    expect(row("resampling").unfit).toMatch(/exchanged/);
    expect(row("fixed sequence").unfit).toMatch(/declared before the data/);
    expect(row("dunnett").adjustedP).toEqual([null, null, null]);
    expect(
      besideOtherMethods(pairs, "fixed sequence").find(({ correction }) => correction === "fixed sequence")!.unfit,
    ).toBeUndefined();
    expect(rows.some(({ correction }) => correction === "dunn")).toBe(false);
  });
  it("agrees with what is said to fit", () => {
    const fitting = fittingCorrections(pairs);
    for (const { correction, unfit } of rows)
      if (correction !== "none" && correction !== "fixed sequence" && correction !== "fallback")
        expect(fitting.includes(correction)).toBe(unfit === undefined);
  });
});

describe("orderings that must hold", () => {
  it("tukey with equal sizes is single-step, and no method is below the own p", () => {
    const tukey = holdFamily("tukey", pairs);
    const one = holdFamily("single-step", pairs);
    for (const i of [0, 1, 2]) {
      expect(Math.abs(tukey.adjustedP[i]! - one.adjustedP[i]!)).toBeLessThan(1e-10);
      expect(tukey.lower[i]!).toBeCloseTo(one.lower[i]!, 9);
    }
    for (const name of fittingCorrections(pairs))
      for (const [i, value] of holdFamily(name, pairs).adjustedP.entries())
        expect(value).toBeGreaterThanOrEqual(pairs.p[i]!);
  });
  it("does not depend on the order of members, nor on the unit of the response", () => {
    const turn = [2, 0, 1];
    const turned = problemOf({
      ...pairs,
      p: turn.map((i) => pairs.p[i]!),
      names: turn.map((i) => pairs.names[i]!),
      estimates: turn.map((i) => 1000 * pairs.estimates[i]!),
      standardErrors: turn.map((i) => 1000 * pairs.standardErrors[i]!),
      weights: turn.map((i) => pairs.weights[i]!),
      correlation: turn.map((i) => turn.map((j) => pairs.correlation![i]![j]!)),
    });
    for (const name of fittingCorrections(pairs)) {
      if (name === "fixed sequence" || name === "fallback") continue;
      const [before, after] = [holdFamily(name, pairs), holdFamily(name, turned)];
      for (const [k, i] of turn.entries()) {
        expect(Math.abs(after.adjustedP[k]! - before.adjustedP[i]!), name).toBeLessThan(1e-9);
        expect(after.rejected[k]).toBe(before.rejected[i]);
        expect(after.lower[k]! / 1000, name).toBeCloseTo(before.lower[i]!, 8);
      }
    }
  });
  it("rejects a standard error of zero with a difference, and not without one", () => {
    const problem = problemOf({ estimates: [1, 0], standardErrors: [0, 0], df: [5, 5] });
    expect(problem.p).toEqual([0, 1]);
    expect(holdFamily("holm", problem).rejected).toEqual([true, false]);
  });
});
