import type { Span } from "./span.ts";

/** A mistake in the words of a cell, with its place. */
export interface GrammarProblem {
  readonly code: string;
  readonly message: string;
  readonly advice: string;
  readonly span: Span;
}

/** Every message of the grammar, with the facts it needs; the one place where their words stand. */
export const problems = {
  "unknown-statement": (it: { verb: string; nearest: string | null }) => ({
    message: `No statement begins with "${it.verb}".`,
    advice:
      it.nearest === null
        ? "A statement begins with its verb at the left margin; help lists them."
        : `Did you mean "${it.nearest}"?`,
  }),
  "verb-expected": (it: { found: string }) => ({
    message: `A statement begins with a verb, not with ${it.found}.`,
    advice: "Begin with a verb, such as factor, read or compare; help lists them.",
  }),
  "indented-start": () => ({
    message: "This line is indented, but no statement stands above it to continue.",
    advice: "Begin the statement at the left margin.",
  }),
  "unclosed-quote": () => ({
    message: "The quote that opens here is not closed.",
    advice: 'Close it with " on the same line; a quote inside is written "".',
  }),
  "name-begins-with-digit": (it: { name: string }) => ({
    message: `"${it.name}" begins with a digit.`,
    advice: `Put such a name into quotes: "${it.name}".`,
  }),
  "strange-character": (it: { character: string }) => ({
    message: `The character ${it.character} has no meaning here.`,
    advice: "Take it out, or put the name that holds it into quotes.",
  }),
  expected: (it: { expected: string; found: string | null; nearest: string | null; form: string }) => ({
    message:
      it.found === null
        ? `The statement ends where ${it.expected} is expected.`
        : `Expected ${it.expected}, found ${it.found}.`,
    advice: it.nearest === null ? `The form is: ${it.form}` : `Did you mean "${it.nearest}"?`,
  }),
  "nothing-more": (it: { found: string; nearest: string | null; form: string }) => ({
    message: `The statement is complete before ${it.found}.`,
    advice: it.nearest === null ? `The form is: ${it.form}` : `Did you mean "${it.nearest}"?`,
  }),
  "reason-expected": () => ({
    message: "A change to a sealed plan needs its reason.",
    advice: 'End it with: because "the reason"',
  }),
  "amend-what": () => ({
    message: "amend changes a declaration.",
    advice:
      'Write the declaration as it should be, or drop: amend family primary: ... because "..."; amend drop contrast gloved because "..."',
  }),
  "data-row-length": (it: { found: number; expected: number; row: number }) => ({
    message: `Row ${it.row} has ${it.found} ${it.found === 1 ? "value" : "values"}; the first row names ${it.expected} ${it.expected === 1 ? "column" : "columns"}.`,
    advice: 'Give each column one value, separated by blanks; a value with blanks is quoted, a missing one is "".',
  }),
  "data-empty": () => ({
    message: "data has no rows.",
    advice: "Indent the rows under it, the first naming the columns.",
  }),
  "number-range": (it: { what: string; value: string; allowed: string }) => ({
    message: `${it.what} is ${it.value}; allowed is ${it.allowed}.`,
    advice: `Give a number that is ${it.allowed}.`,
  }),
  "said-twice": (it: { what: string }) => ({
    message: `"${it.what}" is said twice in one statement.`,
    advice: "Keep one of them.",
  }),
  "clause-missing": (it: { what: string; example: string }) => ({
    message: `The statement lacks ${it.what}.`,
    advice: `Add it on a line of its own: ${it.example}`,
  }),
} as const;

export type ProblemCode = keyof typeof problems;
type FactsOf<C extends ProblemCode> = Parameters<(typeof problems)[C]> extends [infer F] ? F : undefined;

export function problem<C extends ProblemCode>(
  code: C,
  span: Span,
  ...facts: FactsOf<C> extends undefined ? [] : [FactsOf<C>]
): GrammarProblem {
  const words = (problems[code] as (it?: unknown) => { message: string; advice: string })(facts[0]);
  return { code, span, ...words };
}
