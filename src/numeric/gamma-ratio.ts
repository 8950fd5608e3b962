import { stirlingError } from "./gamma-function.ts";

/** Gamma((df + 1) / 2) / (Gamma(df / 2) sqrt(df / 2)), without the rounding of large log gammas; tends to 1. */
export function gammaRatioHalf(df: number): number {
  const a = df / 2;
  // (a + 1/2 - 1/2) log(a + 1/2) - a - 1/2 - (a - 1/2) log a + a - log(a) / 2 = a log(1 + 1 / (2 a)) - 1/2
  return Math.exp(a * Math.log1p(0.5 / a) - 0.5 + stirlingError(a + 0.5) - stirlingError(a));
}
