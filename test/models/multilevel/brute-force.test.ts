import { readFileSync } from "node:fs";
import { describe, expect, it } from "vitest";
import { silentWatch } from "../../../src/host/index.ts";
import { fitMultilevel } from "../../../src/models/multilevel/fitted-model.ts";
import { multilevelContrasts, multilevelOmnibus } from "../../../src/models/multilevel/index.ts";
import { modelData } from "../within/model-data.ts";

interface Case {
  readonly name: string;
  readonly response: readonly number[];
  readonly factors: Readonly<Record<string, { codes: readonly number[]; levels: number; within: boolean }>>;
  readonly units: Readonly<Record<string, readonly number[]>>;
  readonly covariates: Readonly<Record<string, readonly number[]>>;
  readonly slopes: Readonly<Record<string, readonly string[]>>;
  readonly roles: Readonly<Record<string, "items" | "blocks">>;
  readonly assumptions: { readonly variances?: "unequal"; readonly covariance?: "unstructured" };
  readonly dropped: readonly string[];
  readonly expected: {
    readonly deviance: number;
    readonly parameters: readonly { readonly label: string; readonly value: number }[];
    readonly effects: readonly {
      readonly effect: string;
      readonly f: number;
      readonly df1: number;
      readonly df2: number;
      readonly p: number;
      readonly satterthwaiteF: number;
      readonly satterthwaiteDf: number;
      readonly likelihoodRatio: number;
    }[];
    readonly cells: readonly {
      readonly plus: number;
      readonly minus: number;
      readonly estimate: number;
      readonly standardError: number;
      readonly unadjusted: number;
      readonly df: number;
    }[];
  };
}

// Computed by test/models/multilevel/fixtures/generate.py (dense NumPy and SciPy).
const { cases }: { cases: Case[] } = JSON.parse(
  readFileSync(new URL("./fixtures/brute-force.json", import.meta.url), "utf8"),
);

const tolerance = 1e-6;

function expectClose(actual: number, expected: number, what: string): void {
  expect(Math.abs(actual - expected), `${what}: ${actual} for ${expected}`).toBeLessThanOrEqual(
    tolerance * Math.max(Math.abs(expected), 1e-3),
  );
}

function dataOf(own: Case) {
  return modelData({
    response: own.response,
    center: Math.round(own.response[0]!),
    factors: Object.entries(own.factors).map(([name, factor]) => ({ name, ...factor })),
    units: own.units,
    items: Object.keys(own.roles).filter((name) => own.roles[name] === "items"),
    blocks: Object.keys(own.roles).filter((name) => own.roles[name] === "blocks"),
    slopes: own.slopes,
    covariates: own.covariates,
    variances: own.assumptions.variances ?? "equal",
    covariance: own.assumptions.covariance ?? null,
  });
}

describe("multilevel models against dense brute force", () => {
  it("has at least twelve unbalanced data sets", () => expect(cases.length).toBeGreaterThanOrEqual(12));

  describe.each(cases)("$name", (own) => {
    const data = dataOf(own);
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
