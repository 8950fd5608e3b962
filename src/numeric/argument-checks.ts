/** Guards of the numeric room: each lets a good argument pass and throws a `DomainError` that names a bad one. */
import { DomainError } from "./domain-error.ts";

export function requireNumber(argument: string, value: number): void {
  // NaN is the only number that is not equal to itself; the test costs less than a call.
  // biome-ignore lint/suspicious/noSelfCompare: the fastest test for NaN, in functions called millions of times
  if (value !== value) throw new DomainError(argument, value, "a number");
}

export function requireFinite(argument: string, value: number): void {
  if (!Number.isFinite(value)) throw new DomainError(argument, value, "a finite number");
}

/** Below these the tails lose their digits, and no study has so few. */
const leastDegreesOfFreedom = 0.001;
const leastShape = leastDegreesOfFreedom / 2;
/** Above these a shape is no longer told from its limit. */
const largestFiniteDegreesOfFreedom = 1e16;
const largestShape = largestFiniteDegreesOfFreedom / 2;

/** Degrees of freedom, fractions allowed, Infinity allowed. */
export function requireDegreesOfFreedom(argument: string, value: number): void {
  if (!(value >= leastDegreesOfFreedom)) throw new DomainError(argument, value, ">= 0.001, Infinity allowed");
}

/** Degrees of freedom of a distribution that has no limit at Infinity. */
export function requireFiniteDegreesOfFreedom(argument: string, value: number): void {
  if (!(value >= leastDegreesOfFreedom && value <= largestFiniteDegreesOfFreedom))
    throw new DomainError(argument, value, "0.001 to 1e16");
}

/** Shapes of the gamma and beta distributions. */
export function requireShape(argument: string, value: number): void {
  if (!(value >= leastShape && value <= largestShape)) throw new DomainError(argument, value, "0.0005 to 5e15");
}

/**
 * Degrees of freedom so many that they are taken for infinitely many: at 1e16 that changes a tail of 1e-12 by 1e-13 of
 * itself, and one of 1e-300 by 5e-11.
 */
export function areUnlimited(degreesOfFreedom: number): boolean {
  return degreesOfFreedom > largestFiniteDegreesOfFreedom;
}

/** Scales and other amounts: positive and finite. */
export function requirePositive(argument: string, value: number): void {
  if (!(value > 0 && value < Infinity)) throw new DomainError(argument, value, "> 0 and finite");
}

/** Ratios and other values of a variable that cannot be negative; Infinity allowed. */
export function requireNonNegative(argument: string, value: number): void {
  if (!(value >= 0)) throw new DomainError(argument, value, ">= 0, Infinity allowed");
}

/** Noncentralities and other amounts that cannot be negative and must be finite. */
export function requireNonNegativeFinite(argument: string, value: number): void {
  if (!(value >= 0 && value < Infinity)) throw new DomainError(argument, value, ">= 0 and finite");
}

export function requireProbability(argument: string, value: number): void {
  if (!(value >= 0 && value <= 1)) throw new DomainError(argument, value, "0 <= p <= 1");
}

/** A probability that may be neither 0 nor 1, because the answer would be infinite. */
export function requireOpenProbability(argument: string, value: number): void {
  if (!(value > 0 && value < 1)) throw new DomainError(argument, value, "0 < p < 1");
}

export function requireUnitInterval(argument: string, value: number): void {
  if (!(value >= 0 && value <= 1)) throw new DomainError(argument, value, "0 <= x <= 1");
}
