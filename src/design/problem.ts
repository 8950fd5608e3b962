/** A mistake in the declarations or in how the data fit them. The session adds the place in the cell. */
export class DesignError extends Error {
  readonly code: string;
  readonly advice: string;
  /** The name that the mistake hangs on, so that the session can mark it; null when the whole statement is meant. */
  readonly about: string | null;
  constructor(code: string, message: string, advice: string, about: string | null = null) {
    super(message);
    this.name = "DesignError";
    this.code = code;
    this.advice = advice;
    this.about = about;
  }
}

/** `a, b and c`, each in quotes. */
export function listed(names: readonly string[], most = 6): string {
  const shown = names.slice(0, most).map((name) => `"${name}"`);
  const rest = names.length - shown.length;
  if (rest > 0) return `${shown.join(", ")} and ${rest} more`;
  if (shown.length <= 1) return shown.join("");
  return `${shown.slice(0, -1).join(", ")} and ${shown.at(-1)}`;
}
