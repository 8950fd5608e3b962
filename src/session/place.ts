import type { Span, Statement } from "../../grammar/index.ts";
import { Interrupted } from "../host/index.ts";
import type { Problem } from "../results/index.ts";

interface Facts {
  readonly code: string;
  readonly message: string;
  readonly advice: string;
  readonly about: string | null;
}

const hasText = (value: object, key: string): boolean =>
  key in value && typeof (value as Record<string, unknown>)[key] === "string";

/** What an error says to the user, or null when it is a mistake of the program's own. */
export function factsOf(error: unknown): Facts | null {
  if (error instanceof Interrupted) {
    return {
      code: "interrupted",
      message: "Stopped. The study is as it was before this statement.",
      advice: "Run it again when you like.",
      about: null,
    };
  }
  if (!(error instanceof Error)) return null;
  if (error.name === "DomainError") {
    return {
      code: "out-of-domain",
      message: `This cannot be computed: ${error.message}.`,
      advice: "Check the data and the declaration that it comes from: check",
      about: null,
    };
  }
  if (error.name === "HostError" && hasText(error, "code")) {
    const { code, message } = error as Error & { code: string };
    const advice =
      code === "disk-full"
        ? "Free some space and run the statement again."
        : code === "missing-file"
          ? "Check the name; paths start at the notebook's folder."
          : code === "file-grew"
            ? "Run the statement again."
            : code === "lost-connection"
              ? "Check the connection and run the statement again."
              : "Check that the folder exists and may be written.";
    return { code, message, advice, about: (error as { path?: string }).path ?? null };
  }
  if (!hasText(error, "code") || !hasText(error, "advice")) return null;
  const { code, message, advice } = error as Error & { code: string; advice: string };
  const about = (error as { about?: unknown }).about;
  return { code, message, advice, about: typeof about === "string" ? about : null };
}

/** The narrowest place in a statement that holds a name, or null. */
function placeOf(node: unknown, text: string): Span | null {
  if (typeof node !== "object" || node === null) return null;
  const entry = node as Record<string, unknown>;
  if ((entry.text === text || entry.name === text) && typeof entry.span === "object" && entry.span !== null)
    return entry.span as Span;
  for (const value of Object.values(entry)) {
    if (typeof value !== "object" || value === null) continue;
    const found = placeOf(value, text);
    if (found !== null) return found;
  }
  return null;
}

export function problemAt(cell: number, span: Span, facts: Omit<Facts, "about">): Problem {
  const { line, column, endLine, endColumn } = span;
  return { cell, line, column, endLine, endColumn, code: facts.code, message: facts.message, advice: facts.advice };
}

/** An error of a statement as a problem with its place; the error itself is thrown on when it is the program's own. */
export function problemOf(error: unknown, statement: Statement, cell: number): Problem {
  const facts = factsOf(error);
  if (facts === null) throw error;
  const named = facts.about === null ? null : placeOf(statement, facts.about);
  // Without a name the verb's line stands for the whole: a mark over many lines would show nothing.
  return problemAt(cell, named ?? firstLine(statement.span), facts);
}

function firstLine(span: Span): Span {
  return span.endLine === span.line
    ? span
    : { ...span, endLine: span.line, endColumn: Math.max(span.column + 1, span.column) };
}
