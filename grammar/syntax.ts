/**
 * The syntax of a statement as data. Parser, completion, error messages, highlighting and the reference page all read it, so that
 * none of them can drift from another.
 */
export type Syntax =
  | { readonly type: "word"; readonly word: string; readonly label: string | null }
  | { readonly type: "mark"; readonly mark: string; readonly label: string | null }
  | {
      readonly type: "name";
      readonly label: string;
      readonly what: string;
      readonly suggest: Suggestion;
      readonly numbers: boolean;
    }
  | { readonly type: "text"; readonly label: string; readonly what: string; readonly suggest: Suggestion }
  | { readonly type: "number"; readonly label: string; readonly what: string }
  | { readonly type: "sequence"; readonly parts: readonly Syntax[] }
  | { readonly type: "optional"; readonly part: Syntax }
  | { readonly type: "either"; readonly options: readonly Syntax[] }
  | { readonly type: "list"; readonly label: string; readonly item: Syntax }
  | { readonly type: "repeat"; readonly part: Syntax }
  | { readonly type: "group"; readonly label: string; readonly part: Syntax }
  | { readonly type: "rule"; readonly rule: string; readonly label: string };

/** Which declared names are offered at a place. */
export type Suggestion =
  | "factors"
  | "levels"
  | "contrasts"
  | "families"
  | "columns"
  | "units"
  | "files"
  | "plans"
  | "topics"
  | "response"
  | "none";

/** Fixed words, in order: `word("hold")`, `word("single-step")`. With a label, the words are remembered under it. */
export function words(text: string, label: string | null = null): Syntax {
  const pieces = text.match(/[a-z0-9]+|[^a-z0-9\s]/g) ?? [];
  const parts = pieces.map((piece, index): Syntax => {
    const last = index === pieces.length - 1 ? label : null;
    return /^[a-z]/.test(piece)
      ? { type: "word", word: piece, label: last }
      : { type: "mark", mark: piece, label: last };
  });
  return parts.length === 1 ? parts[0]! : { type: "sequence", parts };
}
export const mark = (text: string, label: string | null = null): Syntax => ({ type: "mark", mark: text, label });
/** Any name: a word of letters, digits and _, or a quoted one. */
export const name = (label: string, what: string, suggest: Suggestion = "none"): Syntax => ({
  type: "name",
  label,
  what,
  suggest,
  numbers: false,
});
/** A name, or digits standing bare, as levels may. */
export const level = (label: string, what = "a level"): Syntax => ({
  type: "name",
  label,
  what,
  suggest: "levels",
  numbers: true,
});
export const text = (label: string, what: string, suggest: Suggestion = "none"): Syntax => ({
  type: "text",
  label,
  what,
  suggest,
});
export const number = (label: string, what = "a number"): Syntax => ({ type: "number", label, what });
export const sequence = (...parts: Syntax[]): Syntax => ({ type: "sequence", parts });
export const optional = (...parts: Syntax[]): Syntax => ({
  type: "optional",
  part: parts.length === 1 ? parts[0]! : sequence(...parts),
});
export const either = (...options: Syntax[]): Syntax => ({ type: "either", options });
/** Items separated by commas, each remembered as a group under the label. */
export const list = (label: string, item: Syntax): Syntax => ({ type: "list", label, item });
export const repeat = (...parts: Syntax[]): Syntax => ({
  type: "repeat",
  part: parts.length === 1 ? parts[0]! : sequence(...parts),
});
export const group = (label: string, ...parts: Syntax[]): Syntax => ({
  type: "group",
  label,
  part: parts.length === 1 ? parts[0]! : sequence(...parts),
});
export const rule = (ruleName: string, label: string): Syntax => ({ type: "rule", rule: ruleName, label });
/** Clauses in any order, each on its own line or after a comma. */
export const clauses = (...options: Syntax[]): Syntax =>
  repeat(optional(mark(",")), options.length === 1 ? options[0]! : either(...options));

/** Words of a syntax in reading order, each once. */
export function wordsOf(syntax: Syntax, found: Set<string> = new Set()): Set<string> {
  switch (syntax.type) {
    case "word":
      found.add(syntax.word);
      break;
    case "sequence":
      for (const part of syntax.parts) wordsOf(part, found);
      break;
    case "either":
      for (const option of syntax.options) wordsOf(option, found);
      break;
    case "optional":
    case "repeat":
    case "group":
      wordsOf(syntax.part, found);
      break;
    case "list":
      wordsOf(syntax.item, found);
      break;
    default:
      break;
  }
  return found;
}

/** The printed form of a syntax, for help and the reference page: NAMES in capitals, [optional], (one | other), repeated ... */
export function printedForm(syntax: Syntax): string {
  switch (syntax.type) {
    case "word":
      return syntax.word;
    case "mark":
      return syntax.mark;
    case "name":
      return syntax.what
        .replace(/^(an?|the|one) /, "")
        .toUpperCase()
        .replace(/ /g, "_");
    case "text":
      return `"${syntax.what.replace(/^(an?|the) /, "").replace(/ in quotes$/, "")}"`;
    case "number":
      return syntax.what
        .replace(/^(an?|the) /, "")
        .toUpperCase()
        .replace(/ /g, "_");
    case "sequence":
      return syntax.parts
        .map(printedForm)
        .join(" ")
        .replace(/ ([:,)])/g, "$1")
        .replace(/(\w) - (\w)/g, "$1-$2")
        .replace(/\( /g, "(");
    case "optional":
      return `[${printedForm(syntax.part)}]`;
    case "either":
      return `(${syntax.options.map(printedForm).join(" | ")})`;
    case "list":
      return `${printedForm(syntax.item)}, ...`;
    case "repeat":
      return `[${printedForm(syntax.part)} ...]`;
    case "group":
      return printedForm(syntax.part);
    case "rule":
      return syntax.rule.toUpperCase();
  }
}
