import { describe, expect, it } from "vitest";
import { silentWatch } from "../../../src/host/index.ts";
import { fitMultilevel } from "../../../src/models/multilevel/fitted-model.ts";
import { multilevelContrasts, multilevelOmnibus } from "../../../src/models/multilevel/index.ts";
import { caseData, cases } from "./fixtures/cases.ts";

const tolerance = 1e-6;

function expectClose(actual: number, expected: number, what: string): void {
  expect(Math.abs(actual - expected), `${what}: ${actual} for ${expected}`).toBeLessThanOrEqual(
    tolerance * Math.max(Math.abs(expected), 1e-3),
  );
}

describe("multilevel models against dense brute force", () => {
  it("has at least twelve unbalanced data sets", () => expect(cases.length).toBeGreaterThanOrEqual(12));

  describe.each(cases)("$name", (own) => {
    const data = caseData(own);
    it("finds the same variances and restricted likelihood", () => {
      const result = multilevelOmnibus(data, { intervalLevel: null, likelihoodRatio: false });
      expectClose(result.deviance, own.expected.deviance, "deviance");
      for (const { label, value } of own.expected.parameters) {
        const [unit, term] = label.split("|") as [string, string];
        const [name, other] = term.split("~") as [string, string | undefined];
        const component = result.components.find(
          (entry) => entry.unit === unit && entry.term.replace(/^.*: /, "") === name,
        );
        expect(component, label).toBeDefined();
        if (other === undefined) {
          expectClose(component!.variance, value, label);
          continue;
        }
        const beside = result.components.find((entry) => entry.unit === unit && entry.term === other)!;
        const correlation = component!.correlations!.find((entry) => entry.with === other)!.value;
        expectClose(correlation * component!.sd * beside.sd, value, label);
      }
      const zero = result.components.filter((entry) => entry.boundary).map((entry) => `${entry.unit}|${entry.term}`);
      expect(zero).toEqual(own.dropped);
      const named = result.notes.filter((note) => note.code === "component-at-zero");
      expect(named.map((note) => `${note.facts.unit}|${note.facts.term}`)).toEqual(own.dropped);
    });

    it("finds the same Kenward-Roger F, df and p", () => {
      const result = multilevelOmnibus(data, { intervalLevel: null, likelihoodRatio: false });
      for (const expected of own.expected.effects) {
        const effect = result.effects.find((entry) => entry.effect === expected.effect)!;
        expect(effect.form).toBe("Kenward-Roger");
        expect(effect.df1).toBe(expected.df1);
        expectClose(effect.value!, expected.f, `F of ${expected.effect}`);
        expectClose(effect.df2!, expected.df2, `df of ${expected.effect}`);
        expectClose(effect.p!, expected.p, `p of ${expected.effect}`);
      }
    });

    it("finds the same Satterthwaite df and likelihood ratios", () => {
      const result = multilevelOmnibus(data, { intervalLevel: null, df: "satterthwaite" });
      for (const expected of own.expected.effects) {
        const effect = result.effects.find((entry) => entry.effect === expected.effect)!;
        expectClose(effect.value!, expected.satterthwaiteF, `F of ${expected.effect}`);
        expectClose(effect.df2!, expected.satterthwaiteDf, `df of ${expected.effect}`);
        // The dense search leaves about 1e-8 in each of two deviances.
        expect(Math.abs(effect.likelihoodRatio!.statistic - expected.likelihoodRatio)).toBeLessThan(
          1e-6 * Math.max(1, expected.likelihoodRatio),
        );
      }
    });

    it("finds the same comparisons, standard errors and df", () => {
      const contrasts = own.expected.cells.map(({ plus, minus }) => {
        const weights = new Float64Array(data.cellCount);
        weights[plus] = 1;
        weights[minus] = -1;
        return { name: `${plus} - ${minus}`, weights };
      });
      const adjusted = multilevelContrasts(data, contrasts);
      const plain = multilevelContrasts(data, contrasts, { df: "satterthwaite" });
      for (const [index, expected] of own.expected.cells.entries()) {
        expectClose(adjusted.estimates[index]!, expected.estimate, "estimate");
        expectClose(adjusted.standardErrors[index]!, expected.standardError, "standard error");
        expectClose(plain.standardErrors[index]!, expected.unadjusted, "unadjusted standard error");
        expectClose(adjusted.df[index]!, expected.df, "df");
        expectClose(plain.df[index]!, expected.df, "df of one comparison, the same by both methods");
      }
    });

    it("comes to a verified optimum in few steps", () => {
      expect(fitMultilevel(data, silentWatch).fit.iterations).toBeLessThan(60);
    });
  });
});
