import type { Problem } from "./ast.ts";
import type { Span } from "./span.ts";

const values = (count: number): string => `${count} ${count === 1 ? "value" : "values"}`;
const meant = (nearest: string | null, otherwise: string): string =>
  nearest === null ? otherwise : `Did you mean "${nearest}"?`;

/** Every message of the grammar, with the facts it needs; the one place where their words stand. */
export const problems = {
  "unknown-statement": (it: { verb: string; nearest: string | null }) => ({
    message: `No statement begins with "${it.verb}".`,
    advice: meant(it.nearest, "A statement begins with its verb at the left margin; help lists them."),
  }),
  "clause-at-margin": (it: { word: string; verbs: readonly string[] }) => ({
    message: `"${it.word}" begins a clause of ${it.verbs.join(" or ")}, not a statement.`,
    advice: "Indent the line under the statement that it belongs to.",
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
  "curly-quote": () => ({
    message: "Curly quotation marks do not hold a text here.",
    advice: 'Use the straight one, on both sides: "text".',
  }),
  "name-begins-with-digit": (it: { name: string }) => ({
    message: `"${it.name}" begins with a digit.`,
    advice: `Put such a name into quotes: "${it.name}".`,
  }),
  "strange-character": (it: { character: string }) => ({
    message: `The character ${it.character} has no meaning here.`,
    advice: "Take it out, or put the name that holds it into quotes.",
  }),
  "nested-too-deeply": () => ({
    message: "This is nested too deeply to be read.",
    advice: "Take it apart: derive a column first, or declare a contrast for each part.",
  }),
  /** `expected` is null where too many things would fit to name them. */
  expected: (it: { expected: string | null; found: string; nearest: string | null; form: string }) => ({
    message: it.expected === null ? `${it.found} does not fit here.` : `Expected ${it.expected}, found ${it.found}.`,
    advice: meant(it.nearest, `The form is: ${it.form}`),
  }),
  unfinished: (it: { expected: string | null; form: string }) => ({
    message:
      it.expected === null ? "The statement is not finished." : `The statement ends where ${it.expected} is expected.`,
    advice: `The form is: ${it.form}`,
  }),
  "nothing-more": (it: { found: string; form: string }) => ({
    message: `The statement is complete before ${it.found}.`,
    advice: `Take the rest out, or begin a new line at the left margin with its verb. The form is: ${it.form}`,
  }),
  "missing-comma": (it: { before: string; found: string }) => ({
    message: `A comma is missing between ${it.before} and ${it.found}.`,
    advice: "Separate the items of a list with commas; a clause after a list stands on an indented line of its own.",
  }),
  "clause-on-own-line": (it: { clause: string }) => ({
    message: `"${it.clause}" stands on the same line as a list.`,
    advice: `After a list a clause needs a line of its own, indented: begin a new line before "${it.clause}".`,
  }),
  "unknown-clause": (it: { verb: string; found: string; nearest: string | null; clauses: string }) => ({
    message: `${it.verb} has no clause that begins with ${it.found}.`,
    advice: meant(it.nearest, `Its clauses begin with: ${it.clauses}.`),
  }),
  "statement-inside": (it: { verb: string }) => ({
    message: `"${it.verb}" begins a statement, but its line is indented under another one.`,
    advice: `Move "${it.verb}" to the left margin.`,
  }),
  "list-missing": (it: { what: string; clause: string }) => ({
    message: `${it.what} is missing before "${it.clause}".`,
    advice: `Put it before the clause; if "${it.clause}" is a name, put it into quotes.`,
  }),
  "reason-expected": (it: { verb: string }) => ({
    message: `${it.verb} needs its reason.`,
    advice: 'End it with: because "the reason"',
  }),
  "reason-empty": (it: { verb: string }) => ({
    message: `The reason of ${it.verb} is empty.`,
    advice: "Say why in a few words; the report prints them.",
  }),
  "name-empty": (it: { what: string }) => ({
    message: `${it.what} is empty.`,
    advice: "Put something between the quotes.",
  }),
  "value-expected": () => ({
    message: "A value is needed here, and this is a condition.",
    advice: "Write arithmetic, or: if CONDITION then VALUE else VALUE.",
  }),
  "condition-expected": () => ({
    message: "A condition is needed here, and this is a value.",
    advice: "Compare it with something: trial = 1, seconds > 90, operator among 3, 7.",
  }),
  "data-row-length": (it: { found: number; expected: number; row: number }) => ({
    message: `Row ${it.row} has ${values(it.found)}; the first row names ${it.expected} ${it.expected === 1 ? "column" : "columns"}.`,
    advice: 'Give each column one value, separated by blanks; a value with blanks is quoted, a missing one is "".',
  }),
  "data-on-own-line": () => ({
    message: "The rows of data begin on the next line.",
    advice: "Put nothing behind data; indent the rows under it, the first naming the columns.",
  }),
  "data-empty": () => ({
    message: "data has no rows.",
    advice: "Indent the rows under it, the first naming the columns.",
  }),
  "data-column-twice": (it: { column: string }) => ({
    message: `The column "${it.column}" is named twice.`,
    advice: "Give every column a name of its own.",
  }),
  "number-range": (it: { what: string; value: string; allowed: string; percent: string | null }) => ({
    message: `${it.what} is ${it.value}; allowed is ${it.allowed}.`,
    advice:
      it.percent !== null
        ? `Did you mean ${it.percent}?`
        : `Give ${it.allowed.startsWith("a ") ? it.allowed : `a number ${it.allowed}`}.`,
  }),
  "number-unusable": (it: { value: string }) => ({
    message: `The number ${it.value} cannot be used.`,
    advice: "Give a finite number; the lower part of a fraction must not be zero.",
  }),
  "levels-per-value": (it: { levels: number; factors: readonly string[] }) => ({
    message: `This number has ${it.levels} ${it.levels === 1 ? "level" : "levels"} before it; the line is about ${it.factors.join(" by ")}.`,
    advice: `Name ${it.factors.length === 1 ? "one level" : `${it.factors.length} levels, in the order ${it.factors.join(", ")},`} before each number, and separate the pairs with commas.`,
  }),
  "two-readings": (it: { found: string }) => ({
    message: `The words before ${it.found} can be read in two ways.`,
    advice: "Put names that are also words of the language into quotes, or a part of the arithmetic into parentheses.",
  }),
  "said-twice": (it: { what: string }) => ({
    message: `"${it.what}" is said twice in one statement.`,
    advice: "Keep one of them.",
  }),
} as const;

export type ProblemCode = keyof typeof problems;
type FactsOf<C extends ProblemCode> = Parameters<(typeof problems)[C]>;

export function problem<C extends ProblemCode>(code: C, span: Span, ...facts: FactsOf<C>): Problem {
  const words = (problems[code] as (it?: unknown) => { message: string; advice: string })(facts[0]);
  return { code, ...words, span };
}
