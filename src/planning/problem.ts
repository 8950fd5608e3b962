/** Planning that cannot be done as asked: what is wrong, and what to do. */
export class PlanningError extends Error {
  readonly code: string;
  readonly advice: string;
  readonly about: string | null;
  constructor(code: string, message: string, advice: string, about: string | null = null) {
    super(message);
    this.name = "PlanningError";
    this.code = code;
    this.advice = advice;
    this.about = about;
  }
}
export type PlanningCode = string;
