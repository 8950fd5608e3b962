import { chiSquareQuantile, DomainError, logGamma, noncentralityForT } from "../../numeric/index.ts";

/** What a comparison is divided by: `set standardiser ...` in the language. */
export type Standardiser = "pooled spread" | "average spread" | "control spread" | "difference spread";

export interface StandardisedContrast {
  /** Always "g": d with Hedges's factor. */
  readonly name: string;
  readonly standardiser: Standardiser;
  readonly value: number;
  readonly lower: number;
  readonly upper: number;
}

/** gamma(z + 1/2) / (gamma(z) sqrt(z)) in powers of 1 / z: DLMF 5.11.13, checked against 40-digit arithmetic. */
const gammaRatioSeries = [
  1,
  -1 / 8,
  1 / 128,
  5 / 1024,
  -21 / 32_768,
  -399 / 262_144,
  869 / 4_194_304,
  39_325 / 33_554_432,
] as const;

/**
 * Hedges's factor: what takes the bias out of a standardised difference whose standardiser has the given degrees of freedom.
 * @param df > 1
 * @returns gamma(df/2) / (sqrt(df/2) gamma((df-1)/2)), between 0 and 1
 * @source hedges-1981 (J. Educ. Stat. 6, 107-128), exact form
 */
export function hedgesFactor(df: number): number {
  if (!(df > 1)) throw new DomainError("df", df, "> 1");
  if (df === Number.POSITIVE_INFINITY) return 1;
  // Differences of large log gammas lose digits; the series in 1 / z is below 1e-15 off from here on.
  if (df > 100) {
    const z = (df - 1) / 2;
    const series = gammaRatioSeries.reduceRight((sum, coefficient) => sum / z + coefficient, 0);
    return Math.sqrt((df - 1) / df) * series;
  }
  return Math.exp(logGamma(df / 2) - logGamma((df - 1) / 2)) / Math.sqrt(df / 2);
}

/** Beyond this t the estimate's own spread is lost beside the standard error's: right to 1e-12 of the limit. */
const vastT = 1e7;

function noncentralityAt(t: number, df: number, probability: number): number {
  if (Math.abs(t) <= vastT) return noncentralityForT({ t, df, probability });
  const quantile = chiSquareQuantile(t > 0 ? probability : 1 - probability, df);
  return t * Math.sqrt(quantile / df);
}

/**
 * A comparison in units of a spread, with Hedges's factor, and the interval from inverting the noncentral t distribution of its
 * test; both limits carry the factor. Where the standard error is not a fixed multiple of the standardiser (within-subject
 * comparisons by the average spread) the ratio of the two is taken as known, which is Algina and Keselman's approximation.
 *
 * @param question.estimate of the comparison
 * @param question.standardError > 0
 * @param question.df of the standard error, > 0
 * @param question.sd the standardiser, > 0
 * @param question.sdDf degrees of freedom of the standardiser; where it is 1 or less the factor does not exist and null is returned
 * @param question.level 0 < level < 1
 * @source steiger-fouladi-1997; algina-keselman-2003 (Educ. Psychol. Meas. 63, 537-553)
 */
export function standardisedContrast(question: {
  readonly estimate: number;
  readonly standardError: number;
  readonly df: number;
  readonly sd: number;
  readonly sdDf: number;
  readonly standardiser: Standardiser;
  readonly level: number;
}): StandardisedContrast | null {
  const { estimate, standardError, df, sd, sdDf, standardiser, level } = question;
  if (!(standardError > 0)) throw new DomainError("standardError", standardError, "> 0");
  if (!(sd > 0)) throw new DomainError("sd", sd, "> 0");
  if (!(level > 0 && level < 1)) throw new DomainError("level", level, "0 < level < 1");
  if (!(sdDf > 1)) return null;
  const factor = hedgesFactor(sdDf);
  const unit = (factor * standardError) / sd;
  const t = estimate / standardError;
  const limit = (probability: number) => unit * noncentralityAt(t, df, probability);
  return {
    name: "g",
    standardiser,
    value: (factor * estimate) / sd,
    lower: limit((1 - level) / 2),
    upper: limit((1 + level) / 2),
  };
}
