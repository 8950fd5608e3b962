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

/** Degrees of freedom: positive, fractions allowed, Infinity allowed. */
export function requireDegreesOfFreedom(argument: string, value: number): void {
  if (!(value > 0)) throw new DomainError(argument, value, "> 0, Infinity allowed");
}

/** Shapes, scales: positive and finite. */
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
