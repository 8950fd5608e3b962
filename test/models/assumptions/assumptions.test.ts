import { readFileSync } from "node:fs";
import { describe, expect, it } from "vitest";
import {
  assumptionFindings,
  boxM,
  normalScores,
  outlyingRows,
  residualDiagnostics,
  residualPoints,
  skewness,
  spreadTest,
} from "../../../src/models/index.ts";
import { normalQuantile, tTwoSidedTail } from "../../../src/numeric/index.ts";
import { factorData, groupData } from "../between/between-data.ts";
import { expectClose } from "../between/close.ts";
import { betweenFixtures } from "../between/fixtures.ts";

const dataOf = (groups: readonly (readonly number[])[]) =>
  groupData(
    groups.flatMap((values, group) => values.map(() => `g${group}`)),
    groups.flat(),
  );
const groupCases = betweenFixtures.groups.map(
  (it) => [it.groups.map((values) => values.length).join(", "), it] as const,
);

describe("spread, normality and skewness against SciPy (levene, shapiro, bartlett, skew)", () => {
  it.each(groupCases)("group sizes %s", (_, wanted) => {
    const median = spreadTest(wanted.groups, "median")!;
    const mean = spreadTest(wanted.groups, "mean")!;
    expectClose(median.value, wanted.medianSpread.f, 1e-11, "Brown-Forsythe");
    expectClose(median.p, wanted.medianSpread.p, 1e-9, "its p");
    expectClose(mean.value, wanted.levene.f, 1e-11, "Levene");
    expectClose(mean.p, wanted.levene.p, 1e-9, "its p");
    const diagnostics = residualDiagnostics(dataOf(wanted.groups));
    expectClose(skewness(diagnostics.residuals), wanted.skew, 1e-9, "skewness");
    const normality = assumptionFindings(dataOf(wanted.groups), { response: "y" }).find(
      (finding) => finding.assumption === "normality",
    )!;
    // SciPy's Shapiro-Wilk is the same algorithm (AS R94) in single precision.
    expectClose(normality.statistic, wanted.shapiro.w, 1e-5, "W");
    expectClose(normality.p, wanted.shapiro.p, 1e-3, "p of W");
    const squares = wanted.groups.map((values) => {
      const centre = values.reduce((sum, value) => sum + value, 0) / values.length;
      return [values.reduce((sum, value) => sum + (value - centre) ** 2, 0)];
    });
    // Bartlett divides by 1 + c where Box multiplies by 1 - c.
    const test = boxM(
      squares,
      wanted.groups.map((values) => values.length - 1),
      1,
    )!;
    expectClose(test.m / (2 - test.chiSquare / test.m), wanted.bartlett.statistic, 1e-10, "Bartlett");
  });
  it("Bartlett's statistic of the e-Handbook's gear data (1.3.5.7)", () => {
    const { cases } = JSON.parse(
      readFileSync(new URL("../../reference/handbook/cases.json", import.meta.url), "utf8"),
    ) as { cases: { id: string; data: { groups: Record<string, string[]> }; recomputed: Record<string, string> }[] };
    const example = cases.find((candidate) => candidate.id === "equal-variances-likelihood-gear")!;
    const groups = Object.values(example.data.groups).map((texts) => texts.map(Number));
    const squares = groups.map((values) => {
      const centre = values.reduce((sum, value) => sum + value, 0) / values.length;
      return [values.reduce((sum, value) => sum + (value - centre) ** 2, 0)];
    });
    const test = boxM(
      squares,
      groups.map((values) => values.length - 1),
      1,
    )!;
    expectClose(test.m / (2 - test.chiSquare / test.m), Number(example.recomputed.statistic), 1e-9);
  });
  const simulated = JSON.parse(readFileSync(new URL("fixtures/box-m.json", import.meta.url), "utf8")) as {
    cases: { df: number[]; variables: number; products: number[][]; m: number; p: number; simulated: number }[];
  };
  it.each(simulated.cases.map((it) => [`${it.variables} variables`, it] as const))(
    "Box's M and its p against 400,000 simulated studies: %s",
    (_, wanted) => {
      const test = boxM(wanted.products, wanted.df, wanted.variables)!;
      expectClose(test.m, wanted.m, 1e-9, "M");
      // Four Monte Carlo errors, and what an approximation may leave at these sizes.
      const tolerance = 4 * Math.sqrt((wanted.p * (1 - wanted.p)) / wanted.simulated) + 0.003;
      expect(Math.abs(test.p - wanted.p)).toBeLessThan(tolerance);
      expect(Math.abs(test.chiSquareP - wanted.p)).toBeLessThan(tolerance + 0.005);
    },
  );
});

describe("residuals, leverage and influence against the hat matrix (NumPy)", () => {
  const cases = betweenFixtures.factorial.map(
    (it) => [`${it.levels.join(" x ")}, ${it.covariates.length} covariates`, it] as const,
  );
  it.each(cases)("%s", (_, wanted) => {
    const letters = ["a", "b", "c"];
    const columns = Object.fromEntries(wanted.codes.map((codes, index) => [letters[index]!, codes.map(String)]));
    const covariates = Object.fromEntries(wanted.covariates.map((values, index) => [`x${index}`, values]));
    const diagnostics = residualDiagnostics(factorData(columns, wanted.y, { covariates }));
    expect(diagnostics.errorDf).toBe(wanted.error.df);
    for (let row = 0; row < wanted.y.length; row++) {
      expect(Math.abs(diagnostics.leverage[row]! - wanted.leverage[row]!)).toBeLessThan(1e-10);
      const studentised = wanted.studentised[row];
      if (studentised === null || studentised === undefined) expect(diagnostics.studentised[row]).toBe(0);
      else expect(Math.abs(diagnostics.studentised[row]! - studentised)).toBeLessThan(1e-8);
      const cook = wanted.cook[row];
      if (cook !== null && cook !== undefined) expect(Math.abs(diagnostics.cook[row]! - cook)).toBeLessThan(1e-9);
      expect(Math.abs(diagnostics.fitted[row]! + diagnostics.residuals[row]! - wanted.y[row]!)).toBeLessThan(1e-10);
    }
  });
  it("a studentised residual is the t of a shift of that row alone (least squares with an own parameter)", () => {
    const groups = [
      [4.1, 5.2, 3.9, 14],
      [6.3, 5.8, 7.1],
    ];
    const diagnostics = residualDiagnostics(dataOf(groups));
    const [outlier] = outlyingRows(diagnostics, 0.05);
    // Without the row: group mean 4.4, error from the other five rows with 4 df... the shift is 14 - 4.4.
    const others =
      [4.1, 5.2, 3.9].reduce((sum, v) => sum + (v - 4.4) ** 2, 0) +
      [6.3, 5.8, 7.1].reduce((sum, v) => sum + (v - 6.4) ** 2, 0);
    const t = (14 - 4.4) / Math.sqrt((others / 4) * (1 + 1 / 3));
    expect(outlier!.row).toBe(3);
    expectClose(outlier!.studentised, t, 1e-10);
    expectClose(outlier!.adjustedP, 7 * tTwoSidedTail(t, 4), 1e-10);
  });
});

describe("findings name the statement that answers them", () => {
  const findings = (groups: readonly (readonly number[])[], response = "seconds") =>
    assumptionFindings(dataOf(groups), { response });
  it("unequal spread", () => {
    const spread = findings([
      [10, 10.1, 9.9, 10.05, 9.95, 10],
      [5, 15, 1, 19, 8, 12],
      [9, 10, 11, 10.5, 9.5, 10],
    ])[0]!;
    expect(spread).toMatchObject({ assumption: "spread", method: "Brown-Forsythe", finding: "concern" });
    expect(spread.statement).toBe("assume unequal variances");
  });
  it("unequal spread that the design assumes needs no statement", () => {
    const data = dataOf([
      [10, 10.1, 9.9, 10.05, 9.95, 10],
      [5, 15, 1, 19, 8, 12],
    ]);
    const assumed = { ...data, assumptions: { ...data.assumptions, variances: "unequal" as const } };
    const [spread] = assumptionFindings(assumed, { response: "seconds" });
    expect([spread!.finding, spread!.statement, spread!.facts.assumed]).toEqual(["concern", null, "unequal"]);
  });
  it("a long upper tail of positive values that logarithms put right", () => {
    const scores = Array.from({ length: 12 }, (_, index) => normalQuantile((index + 0.5) / 12));
    const groups = [1, 2, 3].map((level) => scores.map((z) => Math.exp(level / 4 + 1.2 * z)));
    const normality = findings(groups).find((finding) => finding.assumption === "normality")!;
    expect(normality.finding).toBe("concern");
    expect(normality.statement).toBe("response seconds, on log scale");
    const negative = findings(groups.map((values) => values.map((value) => value - 5)));
    expect(negative.find((finding) => finding.assumption === "normality")!.statement).toBe("omnibus by ranks");
  });
  it("one row far out, by its number", () => {
    const outliers = findings([
      [1, 2, 3, 2, 1, 2, 40],
      [2, 3, 1, 2, 3, 2, 1],
    ]).find((finding) => finding.assumption === "outliers")!;
    expect(outliers).toMatchObject({ finding: "concern", facts: { rows: [6] } });
  });
  it("quiet data raise no concern", () => {
    const scores = Array.from({ length: 15 }, (_, index) => 10 * normalQuantile((index + 0.5) / 15));
    for (const finding of findings([scores, scores.map((z) => z + 4), scores.map((z) => z + 9)])) {
      expect([finding.assumption, finding.finding, finding.statement]).toEqual([
        finding.assumption,
        "no concern",
        null,
      ]);
    }
  });
  it("what cannot be told is said so, never a number that is not one", () => {
    for (const groups of [
      [[1], [2], [3]],
      [
        [5, 5, 5],
        [5, 5],
      ],
      [[1, 2], [3]],
      [
        [0.1, 0.1],
        [0.3, 0.3],
      ],
    ]) {
      for (const finding of findings(groups)) {
        for (const value of [finding.statistic, finding.df1, finding.df2, finding.p]) {
          expect(value === null || Number.isFinite(value)).toBe(true);
        }
      }
    }
    expect(findings([[1], [2], [3]])[0]!.finding).toBe("cannot tell");
  });
});

describe("the picture of residuals", () => {
  it("normal scores are Blom's (table value recalled: the largest of five is 1.18)", () => {
    const scores = normalScores(5);
    expect(scores[4]!.toFixed(2)).toBe("1.18");
    expect(scores[2]!).toBeCloseTo(0, 14);
  });
  it("standardised residuals have the residual standard deviation 1, and a large set is thinned evenly with both ends", () => {
    const data = dataOf([
      Array.from({ length: 400 }, (_, i) => (i * 37) % 101),
      Array.from({ length: 300 }, (_, i) => (i * 53) % 97),
    ]);
    const points = residualPoints(data);
    const sum = points.residuals.reduce((total, value) => total + value * value, 0);
    expectClose(sum, 700 - 2, 1e-10);
    const thinned = residualPoints(data, 50);
    expect([thinned.residuals.length, thinned.sampledFrom]).toEqual([50, 700]);
    expect(thinned.residuals[0]).toBe(Math.min(...points.residuals));
    expect(thinned.residuals[49]).toBe(Math.max(...points.residuals));
  });
});
