/** Many against one: the largest of statistics that share a comparison partner and a standard error. */
import { requireDegreesOfFreedom, requireNumber, requireOpenProbability } from "./argument-checks.ts";
import { DomainError } from "./domain-error.ts";
import { increasingRoot } from "./monotone-root.ts";
import { productTail } from "./product-structure.ts";
import { meanOverScale, piecewiseTail, type ScaledTail } from "./scale-mixture.ts";
import { tUpperQuantile } from "./t.ts";

/** One of three ways to say how the statistics are correlated. */
export type ManyToOne =
  | {
      /** Correlation of statistics i and j is loadings[i] loadings[j], each strictly between -1 and 1. */
      readonly loadings: readonly number[];
    }
  | {
      /** Size of the group compared with, and of each group compared. */
      readonly sizes: { readonly control: number; readonly treatments: readonly number[] };
    }
  | {
      /** Common correlation, 0 <= correlation < 1 (0.5 for equal sizes), of so many comparisons. */
      readonly correlation: number;
      readonly comparisons: number;
    };

export type DunnettSides = "two-sided" | "upper" | "lower";

export type DunnettTailInput = ManyToOne & {
  readonly value: number;
  readonly df: number;
  readonly sides?: DunnettSides;
};
export type DunnettQuantileInput = ManyToOne & {
  readonly p: number;
  readonly df: number;
  readonly sides?: DunnettSides;
};

function loadingsOf(input: ManyToOne): readonly number[] {
  if ("loadings" in input) {
    for (const loading of input.loadings)
      if (!(Math.abs(loading) < 1)) throw new DomainError("loadings", loading, "-1 < loading < 1");
    if (input.loadings.length === 0) throw new DomainError("loadings", "none", "at least one");
    return input.loadings;
  }
  if ("sizes" in input) {
    const { control, treatments } = input.sizes;
    for (const size of [control, ...treatments])
      if (!(size > 0 && size < Infinity)) throw new DomainError("sizes", size, "> 0");
    if (treatments.length === 0) throw new DomainError("sizes", "no treatments", "at least one");
    return treatments.map((size) => Math.sqrt(size / (size + control)));
  }
  const { correlation, comparisons } = input;
  if (!(correlation >= 0 && correlation < 1)) throw new DomainError("correlation", correlation, "0 <= correlation < 1");
  if (!(Number.isInteger(comparisons) && comparisons >= 1 && comparisons <= 100000))
    throw new DomainError("comparisons", comparisons, "a whole number, at least 1");
  return new Array<number>(comparisons).fill(Math.sqrt(correlation));
}

function requireSides(sides: DunnettSides): void {
  if (!["two-sided", "upper", "lower"].includes(sides))
    throw new DomainError("sides", sides, "two-sided, upper or lower");
}

/**
 * Probability that at least one of several comparisons with one and the same group reaches a value, when no means differ: adjusted p of
 * many-to-one comparisons. "two-sided": some |statistic| >= value; "upper": some statistic >= value; "lower": some statistic <= value.
 *
 * @param input.value the statistic (estimate over standard error), any sign
 * @param input.df of the common standard error, > 0, fractions and Infinity allowed
 * @param input.sides "two-sided" when not given
 * @returns probability in [0, 1], relative error below 1e-10 on all rows of the reference tables, see README
 * @throws DomainError naming the argument
 * @source Dunnett (1955), with unequal sizes as in Dunnett (1964)
 */
export function dunnettUpperTail(input: DunnettTailInput): number {
  const { df, sides = "two-sided" } = input;
  requireNumber("value", input.value);
  requireDegreesOfFreedom("df", df);
  requireSides(sides);
  const loadings = loadingsOf(input);
  // the lower sides mirror the upper ones: all statistics change their sign together
  const value = sides === "lower" ? -input.value : input.value;
  if (value === Infinity) return 0;
  if (value === -Infinity || (sides === "two-sided" && value <= 0)) return 1;
  return Math.min(1, meanOverScale(productTail(loadings, sides === "two-sided" ? sides : "upper"), value, df));
}

/**
 * The value that the largest statistic reaches with probability p when no means differ: critical value of many-to-one comparisons.
 *
 * @param input.p 0 < p < 1
 * @returns the value ("lower": the one that the smallest statistic falls to, usually negative)
 * @throws DomainError naming the argument
 */
export function dunnettUpperQuantile(input: DunnettQuantileInput): number {
  const { p, df, sides = "two-sided" } = input;
  requireOpenProbability("p", p);
  requireDegreesOfFreedom("df", df);
  requireSides(sides);
  const loadings = loadingsOf(input);
  const tailSides = sides === "two-sided" ? sides : "upper";
  const tail = piecewiseTail(productTail(loadings, tailSides), 0.25, 37.5);
  const value = commonLimit(tail, loadings.length, tailSides === "two-sided", p, df);
  return sides === "lower" ? -value : value;
}

/** The limit at which a tail of `count` statistics, averaged over the deviation, is p. */
export function commonLimit(tail: ScaledTail, count: number, twoSided: boolean, p: number, df: number): number {
  // Bonferroni's value is above, that of a single statistic below: searched in log p against the limit
  const single = tUpperQuantile(twoSided ? p / 2 : p, df);
  const target = Math.log(p);
  const bonferroni = tUpperQuantile(twoSided ? p / (2 * count) : p / count, df);
  if (count === 1) return single;
  if (single > 0) {
    return Math.exp(
      increasingRoot(
        (logLimit) => target - Math.log(meanOverScale(tail, Math.exp(logLimit), df)),
        Math.log((single + bonferroni) / 2),
        0.05,
      ),
    );
  }
  return increasingRoot(
    (limit) => target - Math.log(meanOverScale(tail, limit, df)),
    (single + bonferroni) / 2,
    0.1,
    twoSided ? 0 : -Infinity,
  );
}
