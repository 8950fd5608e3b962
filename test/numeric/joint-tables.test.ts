/** Every row of the reference tables of joint distributions (computed for the project, 113 bits; see test/reference/README.md). */
import { describe, expect, it } from "vitest";
import * as numeric from "../../src/numeric/index.ts";
import { expectClose, referenceTable, reportWorstCases } from "./worst-case.ts";

reportWorstCases();

interface Parameters {
  readonly df: number | "inf";
  readonly means: number;
  readonly q: string;
  readonly alpha: string;
  readonly c?: string;
  readonly comparisons: number;
  readonly correlation: string;
  readonly sides: string;
  readonly n_control?: number;
  readonly n_treatments: readonly number[];
  readonly sizes: readonly number[];
  readonly contrasts: readonly (readonly number[])[];
}

function rowsOf(table: string) {
  return referenceTable(table).map((row) => {
    const parameters = row.parameters as unknown as Parameters;
    const df = parameters.df === "inf" ? Number.POSITIVE_INFINITY : Number(parameters.df);
    const sides = parameters.sides === "one-sided" ? ("upper" as const) : ("two-sided" as const);
    return { ...row, parameters, df, sides, at: JSON.stringify(parameters) };
  });
}

/** Correlation of the estimates of contrasts of independent means. */
function contrastCorrelation(sizes: readonly number[], contrasts: readonly (readonly number[])[]): number[][] {
  const covariance = contrasts.map((a) =>
    contrasts.map((b) => a.reduce((sum, weight, i) => sum + (weight * b[i]!) / sizes[i]!, 0)),
  );
  return covariance.map((row, i) =>
    row.map((value, j) => (i === j ? 1 : value / Math.sqrt(covariance[i]![i]! * covariance[j]![j]!))),
  );
}

describe("joint distributions agree with test/reference/tables", () => {
  it("studentized range tails, to 1e-10 (computed, 18 digits)", () => {
    for (const { method, parameters, df, value, at } of rowsOf("studentized-range-tails")) {
      const tail = method.includes("upper") ? numeric.studentizedRangeUpperTail : numeric.studentizedRangeLowerTail;
      expectClose(method, tail(Number(parameters.q), parameters.means, df), value, 1e-10, at);
    }
  });

  it("studentized range quantiles, to 1e-10 (computed, 18 digits)", () => {
    for (const { method, parameters, df, value, at } of rowsOf("studentized-range-quantiles")) {
      const found = numeric.studentizedRangeUpperQuantile(Number(parameters.alpha), parameters.means, df);
      expectClose(method, found, value, 1e-10, at);
    }
  });

  it.each(["dunnett-quantiles", "dunnett-unequal-sizes", "equicorrelated-t"])(
    "%s, to 1e-10 (computed, 18 digits)",
    (table) => {
      for (const { method, parameters, df, sides, value, at } of rowsOf(table)) {
        const structure =
          parameters.n_control === undefined
            ? { correlation: Number(parameters.correlation), comparisons: parameters.comparisons }
            : { sizes: { control: parameters.n_control, treatments: parameters.n_treatments } };
        const found =
          parameters.c === undefined
            ? numeric.dunnettUpperQuantile({ ...structure, p: Number(parameters.alpha), df, sides })
            : numeric.dunnettUpperTail({ ...structure, value: Number(parameters.c), df, sides });
        expectClose(`${table}: ${method}`, found, value, 1e-10, at);
      }
    },
  );

  it("contrast sets, by the route that each structure takes, to 1e-10 (computed, 18 digits; 11 for four groups)", () => {
    for (const { parameters, df, sides, value, at } of rowsOf("contrast-sets")) {
      const correlation = contrastCorrelation(parameters.sizes, parameters.contrasts);
      const limit = Number(parameters.c);
      const tail = numeric.multivariateTUpperTail({ limit, correlation, df, sides });
      expectClose(`contrast sets: ${tail.method}`, tail.probability, value, 1e-10, at);
      if (parameters.sizes.length === 3) {
        const inside = numeric.multivariateTProbability({
          lower: correlation.map(() => (sides === "upper" ? Number.NEGATIVE_INFINITY : -limit)),
          upper: correlation.map(() => limit),
          correlation,
          df,
        });
        expect(Math.abs(1 - inside.probability - Number(value)), at).toBeLessThan(1e-12);
      }
    }
  });
});
