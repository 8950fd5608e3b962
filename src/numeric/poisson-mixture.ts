/**
 * Tails of noncentral chi-square and F: mixtures of central tails with Poisson weights.
 *
 * Only positive numbers are added: the lower tails L of the members are built downward in the index (L[j] = L[j+1] +
 * difference[j]), the upper tails U upward (U[j+1] = U[j] + difference[j]). So both tails keep their digits, and only
 * the terms that count are visited, around the largest one.
 */
import { logGammaKernel } from "./incomplete-gamma.ts";

/** A family of central distributions, member j = 0, 1, 2, ... stochastically increasing in j. */
export interface MixtureMembers {
  /** log of the lower tail of member j at the point. */
  logLower(j: number): number;
  /** log of the upper tail of member j at the point. */
  logUpper(j: number): number;
  /** log of the lower tail of member j less that of member j + 1. */
  logDifference(j: number): number;
  /** difference[j + 1] / difference[j]. */
  differenceRatio(j: number): number;
}

/** Terms below exp(-41) of the largest are not visited: their sum stays below 1e-16 of the whole. */
const negligible = 41;

/** log of what no sum of terms, however many, can lift above the smallest double. */
const underflow = -800;

/** Indices stay exact whole numbers up to here. */
const largestIndex = 2 ** 50;

function logPoisson(j: number, mean: number): number {
  return j === 0 ? -mean : logGammaKernel(j, mean) - Math.log(j);
}

/** Index of the largest of the log-concave terms in [low, high]. */
function largestTerm(logTerm: (j: number) => number, low: number, high: number): number {
  let left = low;
  let right = high;
  while (left < right) {
    const middle = Math.floor((left + right) / 2);
    if (logTerm(middle + 1) > logTerm(middle)) left = middle + 1;
    else right = middle;
  }
  return left;
}

/**
 * Last index on the way from `from` in steps of sign `direction` whose log term is not below `limit`, at most `end`.
 * The neighbours beyond it are left out, so that no weight or difference that underflows is ever divided by.
 */
function reach(logTerm: (j: number) => number, from: number, direction: 1 | -1, limit: number, end: number): number {
  let inside = from;
  let stride = 4;
  let outside = from;
  for (;;) {
    outside = from + direction * stride;
    if (direction === 1 ? outside >= end : outside <= end) {
      outside = end;
      if (logTerm(outside) >= limit) return outside;
      break;
    }
    if (logTerm(outside) < limit) break;
    inside = outside;
    stride *= 2;
  }
  while (Math.abs(outside - inside) > 1) {
    const middle = Math.round((inside + outside) / 2);
    if (logTerm(middle) < limit) outside = middle;
    else inside = middle;
  }
  return inside;
}

/** Up to this mean all terms are summed; searching for those that count would take longer. */
const smallMean = 300;

/** Logs of first terms above this leave room to sum in plain numbers. */
const plainLimit = -600;

/**
 * Sum over j of weight times lower tail, the weight being mean^r e^-mean / Gamma(r + 1) at r = j + shift: Poisson weights
 * for shift 0, those of the odd terms of the noncentral t for shift 1/2. Null where there are too many terms or too small ones.
 */
export function plainLowerSum(members: MixtureMembers, mean: number, shift: number): number | null {
  if (mean > smallMean) return null;
  // member tails decrease in j, so what lies beyond is a smaller share than of the weights: below 1e-17
  const last = Math.ceil(mean + 9 * Math.sqrt(mean) + 18);
  const logLast = logPoisson(last + shift, mean) + members.logLower(last);
  return logLast > plainLimit ? sumDownward(members, mean, shift, last, 0, 0) : null;
}

/** The same with upper tails. See `plainLowerSum`. */
export function plainUpperSum(members: MixtureMembers, mean: number, shift: number): number | null {
  if (mean > smallMean) return null;
  const logFirst = logPoisson(shift, mean) + members.logUpper(0);
  return logFirst > plainLimit ? sumUpward(members, mean, shift, 0, 0) : null;
}

/** Lower tail of the mixture with Poisson mean `mean` > 0. */
export function mixtureLowerTail(members: MixtureMembers, mean: number): number {
  const logTerm = (j: number) => logPoisson(j, mean) + members.logLower(j);
  const plain = plainLowerSum(members, mean, 0);
  if (plain !== null) return plain;
  // member tails decrease in j, so the largest term cannot lie above the mode of the weights
  const mode = largestTerm(logTerm, 0, Math.ceil(mean));
  const unit = logTerm(mode);
  if (unit < underflow) return 0;
  const top = reach(logTerm, mode, 1, unit - negligible, Infinity);
  return sumDownward(members, mean, 0, top, mode, unit);
}

/** Sum of the terms of the lower tail from index `top` down; formed in units of exp(unit). */
function sumDownward(
  members: MixtureMembers,
  mean: number,
  shift: number,
  top: number,
  mode: number,
  unit: number,
): number {
  const logWeight = logPoisson(top + shift, mean) - unit;
  let j = top;
  let term = Math.exp(logWeight + members.logLower(top));
  let weightedDifference = Math.exp(logWeight + members.logDifference(top));
  let sum = term;
  while (j > 0) {
    const weightRatio = (j + shift) / mean;
    weightedDifference *= weightRatio / members.differenceRatio(j - 1);
    term = weightRatio * term + weightedDifference;
    sum += term;
    j -= 1;
    if (j < mode && term < 1e-18 * sum) break;
  }
  return unit === 0 ? sum : Math.exp(unit + Math.log(sum));
}

/** Upper tail of the mixture with Poisson mean `mean` > 0. */
export function mixtureUpperTail(members: MixtureMembers, mean: number): number {
  const logTerm = (j: number) => logPoisson(j, mean) + members.logUpper(j);
  // member tails increase in j, so the largest term cannot lie below the mode of the weights
  const plain = plainUpperSum(members, mean, 0);
  if (plain !== null) return plain;
  const first = Math.floor(mean);
  let bound = first + 8;
  while (bound < largestIndex && logTerm(bound + 1) > logTerm(bound)) bound = first + 2 * (bound - first);
  const mode = largestTerm(logTerm, Math.max(0, first - 1), bound);
  const unit = logTerm(mode);
  if (unit < underflow) return 0;
  return sumUpward(members, mean, 0, reach(logTerm, mode, -1, unit - negligible, 0), unit);
}

/** Sum of the terms of the upper tail from index `bottom` up; formed in units of exp(unit). */
function sumUpward(members: MixtureMembers, mean: number, shift: number, bottom: number, unit: number): number {
  const logWeight = logPoisson(bottom + shift, mean) - unit;
  let j = bottom;
  let term = Math.exp(logWeight + members.logUpper(bottom));
  let weightedDifference = Math.exp(logWeight + members.logDifference(bottom));
  let sum = term;
  for (;;) {
    const weightRatio = mean / (j + 1 + shift);
    term = weightRatio * (term + weightedDifference);
    weightedDifference *= weightRatio * members.differenceRatio(j);
    sum += term;
    j += 1;
    // the terms rise to one peak and then fall: none is this small before it
    if (term < 1e-18 * sum) break;
  }
  return unit === 0 ? sum : Math.exp(unit + Math.log(sum));
}
