/** Data on which a model cannot answer, with what to do about it. The session adds the place in the cell. */
export class ModelError extends Error {
  readonly code: string;
  readonly advice: string;
  constructor(code: string, message: string, advice: string) {
    super(message);
    this.name = "ModelError";
    this.code = code;
    this.advice = advice;
  }
}
