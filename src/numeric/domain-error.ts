/**
 * An argument outside the domain of a function of the core. The session turns it into a problem with a place in the
 * cell; it never reaches a person as it is.
 */
export class DomainError extends Error {
  readonly argument: string;
  readonly value: unknown;
  readonly allowed: string;
  /**
   * @param argument name of the offending argument
   * @param value what it was
   * @param allowed the allowed range, in words: "> 0", "0 <= p <= 1"
   */
  constructor(argument: string, value: unknown, allowed: string) {
    super(`${argument} is ${String(value)}; allowed: ${allowed}`);
    this.name = "DomainError";
    this.argument = argument;
    this.value = value;
    this.allowed = allowed;
  }
}
