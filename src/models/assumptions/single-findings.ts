import type { ModelData } from "../../design/types.ts";
import { shapiroWilk } from "../../numeric/index.ts";
import type { AssumptionFinding } from "../../results/index.ts";
import { skewness } from "./residuals.ts";
import { spreadTest } from "./spread.ts";

export interface FindingContext {
  readonly response: string;
  readonly error: number;
  /** `response X, on log scale` where the values allow it and it helps, by the values' sign alone. */
  readonly logScalePossible: boolean;
  /** True where the design assumes unequal variances already: then unequal spread needs no answer. */
  readonly unequalAssumed: boolean;
}

/** Shapiro-Wilk takes no more values than this. */
const mostForShapiro = 5000;

export function concernOf(p: number | null, error: number): AssumptionFinding["finding"] {
  if (p === null) return "cannot tell";
  return p < error ? "concern" : "no concern";
}

/** Both spread tests of some groups of values. */
export function spreadFindings(
  groups: readonly (readonly number[])[],
  of: string,
  context: FindingContext,
): AssumptionFinding[] {
  const single = groups.filter((values) => values.length === 1).length;
  const sizes = groups.filter((values) => values.length > 1).map((values) => values.length);
  const spreads = groups
    .filter((values) => values.length > 1)
    .map((values) => {
      const mean = values.reduce((sum, value) => sum + value, 0) / values.length;
      return Math.sqrt(values.reduce((sum, value) => sum + (value - mean) ** 2, 0) / (values.length - 1));
    });
  const smallest = spreads.length > 0 ? Math.min(...spreads) : null;
  const largest = spreads.length > 0 ? Math.max(...spreads) : null;
  return (["median", "mean"] as const).map((centre) => {
    const test = spreadTest(groups, centre);
    const finding = concernOf(test?.p ?? null, context.error);
    return {
      assumption: "spread",
      method: centre === "median" ? "Brown-Forsythe" : "Levene",
      of,
      statistic: test?.value ?? null,
      df1: test?.df1 ?? null,
      df2: test?.df2 ?? null,
      p: test?.p ?? null,
      finding,
      facts: {
        groups: sizes.length,
        assumed: context.unequalAssumed ? "unequal" : "equal",
        groupsOfOne: single,
        smallestSd: smallest,
        largestSd: largest,
        smallestGroup: sizes.length > 0 ? Math.min(...sizes) : null,
        largestGroup: sizes.length > 0 ? Math.max(...sizes) : null,
      },
      statement: finding === "concern" && !context.unequalAssumed ? "assume unequal variances" : null,
    };
  });
}

/** Shapiro-Wilk on residuals, with their skewness; the advice that fits the shape. */
export function normalityFinding(
  residuals: ArrayLike<number>,
  of: string,
  context: FindingContext,
  advice: { readonly ranks: boolean; readonly logHelps: boolean },
): AssumptionFinding {
  const values = Array.from(residuals);
  const skew = skewness(values);
  const testable = values.length >= 3 && values.length <= mostForShapiro && skew !== null;
  const test = testable ? shapiroWilk(values) : null;
  const finding = concernOf(test?.p ?? null, context.error);
  const towardsLog = context.logScalePossible && advice.logHelps && skew !== null && skew > 0;
  const statement = towardsLog
    ? `response ${context.response}, on log scale`
    : advice.ranks
      ? "omnibus by ranks"
      : "draw residuals";
  return {
    assumption: "normality",
    method: "Shapiro-Wilk",
    of,
    statistic: test?.w ?? null,
    df1: null,
    df2: null,
    p: test?.p ?? null,
    finding,
    facts: { values: values.length, skewness: skew, most: mostForShapiro },
    statement: finding === "concern" ? statement : null,
  };
}

/** The same rows with the logarithm of the response; all values must be above zero. */
export function logarithmsOf(data: ModelData): ModelData {
  const offsets = data.response.offsets.map((offset) => Math.log(data.response.center + offset));
  return { ...data, response: { center: 0, offsets } };
}

/** Whether some residuals are nearer to normal than others, both in skewness and in Shapiro-Wilk's W. */
export function isNearerToNormal(some: ArrayLike<number>, others: ArrayLike<number>): boolean {
  const [after, before] = [skewness(some), skewness(others)];
  if (before === null || after === null || Math.max(some.length, others.length) > mostForShapiro) return false;
  return Math.abs(after) < Math.abs(before) && shapiroWilk(Array.from(some)).w > shapiroWilk(Array.from(others)).w;
}
