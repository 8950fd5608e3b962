import { chiSquareQuantile, DomainError, noncentralityForF } from "../../numeric/index.ts";

/** Above this F the numerator's own spread is lost beside the noncentrality: the share is then right to 1e-12. */
const vastRatio = 1e8;

/**
 * Interval of partial eta squared by inverting the noncentral F distribution of its test: noncentrality limits L become L / (L + N).
 *
 * @param question.ratio observed F, >= 0
 * @param question.observations N, all observations of the analysis
 * @param question.level 0 < level < 1, two-sided
 * @returns limits in [0, 1); the lower one is 0 where the effect could be nothing at that level
 * @source steiger-2004 (Psychological Methods 9, 164-182)
 */
export function partialEtaSquaredInterval(question: {
  readonly ratio: number;
  readonly df1: number;
  readonly df2: number;
  readonly observations: number;
  readonly level: number;
}): readonly [number, number] {
  const { ratio, df1, df2, observations, level } = question;
  if (!(level > 0 && level < 1)) throw new DomainError("level", level, "0 < level < 1");
  if (!(observations > 0)) throw new DomainError("observations", observations, "> 0");
  const limit = (probability: number) => {
    const noncentrality =
      ratio > vastRatio
        ? (df1 * ratio * chiSquareQuantile(probability, df2)) / df2
        : noncentralityForF({ ratio, df1, df2, probability });
    return noncentrality / (noncentrality + observations);
  };
  return [limit((1 - level) / 2), limit((1 + level) / 2)];
}

/**
 * Partial omega squared, the share of variance with the bias of eta squared taken out; an estimate below zero is 0.
 * With one factor it is omega squared itself.
 * @source hays-1963 (Statistics for Psychologists); olejnik-algina-2003
 */
export function partialOmegaSquared(ratio: number, df1: number, observations: number): number {
  const excess = df1 * (ratio - 1);
  return Math.max(0, excess / (excess + observations));
}
