import { tUpperQuantile } from "../../numeric/index.ts";

/**
 * A comparison of logarithms given back as a ratio of (geometric) means, with its interval.
 *
 * @param question.estimate difference of logarithms
 * @param question.df of the standard error, > 0
 * @param question.level 0 < level < 1
 */
export function ratioContrast(question: {
  readonly estimate: number;
  readonly standardError: number;
  readonly df: number;
  readonly level: number;
}): { readonly name: "ratio"; readonly value: number; readonly lower: number; readonly upper: number } {
  const { estimate, standardError, df, level } = question;
  const half = tUpperQuantile((1 - level) / 2, df) * standardError;
  return {
    name: "ratio",
    value: Math.exp(estimate),
    lower: Math.exp(estimate - half),
    upper: Math.exp(estimate + half),
  };
}
