/**
 * The syntax of a statement as data. Parser, completion, hover, error messages, highlighting and the reference page all read it, so
 * that none of them can drift from another.
 */
export type Syntax =
  /** Fixed words and marks in order; with a label the whole is remembered under it. */
  | {
      readonly type: "phrase";
      readonly text: string;
      readonly pieces: readonly Piece[];
      readonly label: string | null;
    }
  | {
      readonly type: "name";
      readonly label: string;
      readonly what: string;
      readonly suggest: Suggestion;
      /** Digits may stand bare, as levels may. */
      readonly digits: boolean;
    }
  | { readonly type: "text"; readonly label: string; readonly what: string; readonly suggest: Suggestion }
  /** `plain` numbers stand in arithmetic: no sign, no fraction of their own. */
  | { readonly type: "number"; readonly label: string; readonly what: string; readonly plain: boolean }
  | { readonly type: "sequence"; readonly parts: readonly Syntax[] }
  | { readonly type: "optional"; readonly part: Syntax }
  | { readonly type: "repeat"; readonly part: Syntax; readonly atLeastOne: boolean }
  /** `what` names the choice as a whole ("a correction"), for messages. */
  | { readonly type: "either"; readonly options: readonly Syntax[]; readonly what: string | null }
  /** Items separated by commas, each remembered as a group under the label. */
  | { readonly type: "list"; readonly label: string; readonly item: Syntax }
  | { readonly type: "group"; readonly label: string; readonly part: Syntax }
  /** Parts in any order, each after a comma or on an indented line of its own. */
  | { readonly type: "clauses"; readonly options: readonly Syntax[] }
  /** A part that has its own line of help. */
  | { readonly type: "part"; readonly help: string; readonly part: Syntax }
  /** A shared, possibly recursive part. */
  | { readonly type: "rule"; readonly rule: string; readonly label: string }
  /** A whole statement, as `amend` takes it. */
  | { readonly type: "statement"; readonly verb: string; readonly label: string }
  /** The line may end here and go on indented. */
  | { readonly type: "break" };

export interface Piece {
  readonly kind: "word" | "mark";
  readonly text: string;
}

/** Which declared names are offered at a place. */
export type Suggestion =
  | "factors"
  | "levels"
  | "contrasts"
  | "families"
  | "columns"
  | "units"
  | "response"
  | "files"
  | "plans"
  | "topics"
  | "none";

const joined = (parts: readonly Syntax[]): Syntax => (parts.length === 1 ? parts[0]! : { type: "sequence", parts });

/** Fixed words, in order: `words("hold error")`, `words("single-step")`. */
export function words(text: string, label: string | null = null): Syntax {
  const pieces = (text.match(/[a-z0-9]+|[<>!]=|[^a-z0-9\s]/g) ?? []).map(
    (piece): Piece => ({ kind: /^[a-z]/.test(piece) ? "word" : "mark", text: piece }),
  );
  return { type: "phrase", text, pieces, label };
}
export const mark = (text: string, label: string | null = null): Syntax => words(text, label);
/** Any name: a word of letters, digits and _, or a quoted one. */
export const name = (label: string, what: string, suggest: Suggestion = "none"): Syntax => ({
  type: "name",
  label,
  what,
  suggest,
  digits: false,
});
/** A name, or digits standing bare, as levels may. */
export const level = (label: string, what = "a level"): Syntax => ({
  type: "name",
  label,
  what,
  suggest: "levels",
  digits: true,
});
export const text = (label: string, what: string, suggest: Suggestion = "none"): Syntax => ({
  type: "text",
  label,
  what,
  suggest,
});
export const number = (label: string, what = "a number"): Syntax => ({ type: "number", label, what, plain: false });
export const plainNumber = (label: string): Syntax => ({ type: "number", label, what: "a number", plain: true });
export const sequence = (...parts: Syntax[]): Syntax => ({ type: "sequence", parts });
export const optional = (...parts: Syntax[]): Syntax => ({ type: "optional", part: joined(parts) });
export const either = (...options: Syntax[]): Syntax => ({ type: "either", options, what: null });
export const choice = (what: string, ...options: Syntax[]): Syntax => ({ type: "either", options, what });
export const list = (label: string, item: Syntax): Syntax => ({ type: "list", label, item });
export const repeat = (...parts: Syntax[]): Syntax => ({ type: "repeat", part: joined(parts), atLeastOne: false });
export const repeatAtLeastOnce = (...parts: Syntax[]): Syntax => ({
  type: "repeat",
  part: joined(parts),
  atLeastOne: true,
});
export const group = (label: string, ...parts: Syntax[]): Syntax => ({ type: "group", label, part: joined(parts) });
export const rule = (ruleName: string, label: string): Syntax => ({ type: "rule", rule: ruleName, label });
export const statement = (verb: string, label: string): Syntax => ({ type: "statement", verb, label });
export const lineBreak: Syntax = { type: "break" };
export const part = (help: string, ...parts: Syntax[]): Syntax => ({ type: "part", help, part: joined(parts) });
export const clauses = (...options: Syntax[]): Syntax => ({ type: "clauses", options });

/** The parts directly inside a piece of syntax. */
export function partsOf(syntax: Syntax): readonly Syntax[] {
  switch (syntax.type) {
    case "sequence":
      return syntax.parts;
    case "either":
    case "clauses":
      return syntax.options;
    case "optional":
    case "repeat":
    case "group":
    case "part":
      return [syntax.part];
    case "list":
      return [syntax.item];
    default:
      return [];
  }
}

/** Words of a syntax in reading order, each once. */
export function wordsOf(syntax: Syntax, found: Set<string> = new Set()): Set<string> {
  if (syntax.type === "phrase") {
    for (const piece of syntax.pieces) if (piece.kind === "word") found.add(piece.text);
  }
  for (const inner of partsOf(syntax)) wordsOf(inner, found);
  return found;
}
