import { chiSquareUpperTail, fUpperTail } from "../../numeric/index.ts";
import type { EffectMethod, LikelihoodRatio, OmnibusEffect } from "../../results/index.ts";
import { partialEtaSquaredInterval, partialOmegaSquared } from "../effect-size/index.ts";
import type { ErrorTerm } from "./cell-statistics.ts";

/**
 * Likelihood-ratio test of the model with an effect against the same model without it, both by maximum likelihood.
 * @source wilks-1938 (Ann. Math. Stat. 9, 60-62); for normal errors N log(1 + effect / error)
 */
export function likelihoodRatioOf(
  sumOfSquares: number,
  df: number,
  errorSum: number,
  observations: number,
): LikelihoodRatio {
  const statistic = observations * Math.log1p(sumOfSquares / errorSum);
  return { statistic, df, p: chiSquareUpperTail(statistic, df) };
}

/** The whole entry of one effect: F, its p and its effect sizes. The error has df and variance above zero. */
export function testedEffect(question: {
  readonly effect: string;
  readonly method: EffectMethod;
  readonly df: number;
  readonly sumOfSquares: number;
  readonly error: ErrorTerm;
  readonly observations: number;
  /** Of the interval of partial eta squared; null leaves it out. */
  readonly level: number | null;
  readonly generalizedEtaSquared: number;
}): OmnibusEffect {
  const { effect, method, df, sumOfSquares, error, observations, level, generalizedEtaSquared } = question;
  const meanSquare = sumOfSquares / df;
  const value = meanSquare / error.meanSquare;
  return {
    effect,
    method,
    statistic: "F",
    value,
    df1: df,
    df2: error.df,
    p: fUpperTail(value, df, error.df),
    sumOfSquares,
    meanSquare,
    errorSumOfSquares: error.sumOfSquares,
    errorMeanSquare: error.meanSquare,
    partialEtaSquared: sumOfSquares / (sumOfSquares + error.sumOfSquares),
    ...(level === null
      ? {}
      : {
          partialEtaSquaredInterval: partialEtaSquaredInterval({
            ratio: value,
            df1: df,
            df2: error.df,
            observations,
            level,
          }),
        }),
    generalizedEtaSquared,
    omegaSquared: partialOmegaSquared(value, df, observations),
    likelihoodRatio: likelihoodRatioOf(sumOfSquares, df, error.sumOfSquares, observations),
  };
}
