/** A user's mistake, as a value with everything but its place; the runner adds the place. */
export class SessionProblem extends Error {
  readonly code: string;
  readonly advice: string;
  /** Text of the name that the mistake hangs on; the narrowest place with that name is marked. Null marks the whole statement. */
  readonly about: string | null;
  constructor(code: string, message: string, advice: string, about: string | null = null) {
    super(message);
    this.name = "SessionProblem";
    this.code = code;
    this.advice = advice;
    this.about = about;
  }
}
