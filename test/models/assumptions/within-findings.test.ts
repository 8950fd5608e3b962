import { describe, expect, it } from "vitest";
import { assumptionFindings, repeatedMeasuresAnalysis, residualPoints, spreadTest } from "../../../src/models/index.ts";
import { expectClose } from "../between/close.ts";
import { modelData } from "../within/model-data.ts";

/** 14 subjects, two groups, three conditions; numbers without meaning from a fixed rule. */
function mixed(options: { readonly lift?: number; readonly covariance?: "sphericity" } = {}) {
  const rows = Array.from({ length: 42 }, (_, row) => ({ subject: Math.floor(row / 3), cell: row % 3 }));
  return modelData({
    response: rows.map(
      ({ subject, cell }) =>
        20 +
        ((subject * 29 + 7) % 17) / 3 +
        ((subject * 13 + cell * 31) % 11) / 4 +
        cell +
        (subject === 4 ? (options.lift ?? 0) : 0),
    ),
    factors: [
      { name: "group", within: false, codes: rows.map(({ subject }) => (subject < 6 ? 0 : 1)) },
      { name: "condition", within: true, codes: rows.map(({ cell }) => cell) },
    ],
    units: { subject: rows.map(({ subject }) => subject) },
    ...(options.covariance === undefined ? {} : { covariance: options.covariance }),
  });
}

describe("findings of a mixed design", () => {
  it("cover spread of subjects' means, covariances, normality, outlying subjects and sphericity", () => {
    const data = mixed();
    const findings = assumptionFindings(data, { response: "seconds" });
    expect(findings.map((finding) => finding.assumption)).toEqual([
      "spread",
      "spread",
      "equal covariances",
      "normality",
      "outliers",
      "sphericity",
    ]);
    const sphericity = findings.at(-1)!;
    const wanted = repeatedMeasuresAnalysis(data).sphericity[0]!;
    expectClose(sphericity.statistic, wanted.w, 1e-10);
    expectClose(sphericity.p, wanted.p, 1e-9);
    const means = [0, 1].map((group) =>
      Array.from({ length: 14 }, (_, subject) => subject)
        .filter((subject) => (subject < 6 ? 0 : 1) === group)
        .map((subject) => [0, 1, 2].reduce((sum, cell) => sum + data.response.offsets[subject * 3 + cell]! / 3, 0)),
    );
    expectClose(findings[0]!.statistic, spreadTest(means, "median")!.value, 1e-9);
  });
  it("name the subject that stands out", () => {
    const findings = assumptionFindings(mixed({ lift: 60 }), { response: "seconds" });
    const outliers = findings.find((finding) => finding.assumption === "outliers")!;
    expect(outliers).toMatchObject({
      finding: "concern",
      facts: { subjects: ["subject 5"] },
      statement: "omnibus by resampling",
    });
  });
  it("residuals have each subject's and each cell's level taken out, and standard deviation 1", () => {
    const points = residualPoints(mixed());
    expect(points.residuals.length).toBe(42);
    for (let subject = 0; subject < 14; subject++) {
      expect(Math.abs([0, 1, 2].reduce((sum, cell) => sum + points.residuals[subject * 3 + cell]!, 0))).toBeLessThan(
        1e-10,
      );
    }
    // (14 subjects - 2 groups) x (3 - 1) df
    expectClose(
      points.residuals.reduce((sum, value) => sum + value * value, 0),
      24,
      1e-10,
    );
  });
});
