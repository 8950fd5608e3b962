import type { IToken } from "chevrotain";
import type { Problem } from "./ast.ts";
import { clauseOptions, firstOf, mayBeginClause } from "./first.ts";
import { nearest } from "./nearest.ts";
import { printedForm } from "./printed-form.ts";
import { problem } from "./problems.ts";
import { type Expected, recognise } from "./recognise.ts";
import { ruleSyntax } from "./rules.ts";
import type { PlaceMap, Span } from "./span.ts";
import { catalogue } from "./statements/index.ts";
import type { Syntax } from "./syntax.ts";
import { Break, endOf, isName, marks, NumberToken, Quoted } from "./tokens.ts";

/** A token in the reader's words. */
export function tokenText(token: IToken): string {
  const text = token.image.length > 40 ? `${token.image.slice(0, 39)}…` : token.image;
  if (token.tokenType === Quoted) return `the text ${text}`;
  if (token.tokenType === NumberToken) return `the number ${text}`;
  return `"${text}"`;
}

const signs = new Set(["+", "-", "*", "/", "^"]);
const comparisons = new Set(["=", "!=", "<", "<=", ">", ">="]);

const restOf = (expected: Expected): string | null => {
  const { what } = expected;
  if (what.type !== "phrase") return null;
  if (what.from === 0) return what.syntax.text;
  return what.syntax.pieces
    .slice(what.from)
    .map((piece) => piece.text)
    .join(" ");
};

/** What could stand at a place, in prose; past three alternatives only the kinds of things are named, not every word. */
function inProse(expected: readonly Expected[]): string | null {
  const kinds = new Set<string>();
  const words = new Set<string>();
  for (const each of expected) {
    if (each.choice !== null) kinds.add(each.choice);
    else if (each.what.type === "phrase") {
      const rest = restOf(each)!;
      if (signs.has(rest)) words.add("a sign such as + or -");
      else if (comparisons.has(rest)) words.add("a comparison such as =");
      else words.add(`"${rest}"`);
    } else if (each.what.type === "verb") words.add(`"${each.what.verb}"`);
    else if (each.what.type === "comma") words.add("a comma");
    else if (each.what.type === "clause") words.add("a clause on a line of its own");
    else kinds.add(each.what.syntax.what);
  }
  const all = [...kinds, ...words];
  const few = all.length <= 3 ? all : kinds.size > 0 ? [...kinds].slice(0, 3) : null;
  if (few === null || few.length === 0) return null;
  return few.length <= 1 ? few.join("") : `${few.slice(0, -1).join(", ")} or ${few.at(-1)}`;
}

/** The fixed words that could stand at a place. */
const wordsExpected = (expected: readonly Expected[]): readonly string[] =>
  expected.flatMap(({ what }) => {
    if (what.type === "verb") return [what.verb];
    if (what.type !== "phrase") return [];
    const piece = what.syntax.pieces[what.from];
    return piece?.kind === "word" ? [piece.text] : [];
  });

const clauseWords = (options: readonly Syntax[]): readonly string[] =>
  options.flatMap((option) => [...firstOf(option).words]).map((type) => type.name.replace(/^(word|mark) /, ""));

interface Statement {
  readonly verb: string;
  readonly tokens: readonly IToken[];
  readonly places: PlaceMap;
}

/**
 * What is wrong with a statement that could not be parsed: the first mistake, and in later clauses the first mistake of each, since every
 * clause can be read alone.
 * @param tokens the statement, its verb first, with the breaks before its clauses
 */
export function mistakesOf(statement: Statement): readonly Problem[] {
  const { verb, tokens } = statement;
  const rest = tokens.slice(1);
  const whole = recognise(catalogue.get(verb)!.syntax, rest);
  if (whole.whole) return [];
  const found = [mistake(statement, rest, whole.furthest, whole.expected, whole.mayEnd)];
  const options = clauseOptions(verb, tokens);
  if (options.length === 0 || verb === "amend") return found;
  const clause: Syntax = {
    type: "sequence",
    parts: [
      { type: "either", options, what: null },
      { type: "clauses", options },
    ],
  };
  for (const [index, token] of rest.entries()) {
    if (token.tokenType !== Break || index <= whole.furthest) continue;
    const next = rest.findIndex((each, at) => at > index && each.tokenType === Break);
    const part = rest.slice(index + 1, next < 0 ? rest.length : next);
    const read = recognise(clause, part);
    if (!read.whole) found.push(mistake(statement, part, read.furthest, read.expected, read.mayEnd));
  }
  return found;
}

function mistake(
  { verb, tokens, places }: Statement,
  part: readonly IToken[],
  at: number,
  expected: readonly Expected[],
  mayEnd: boolean,
): Problem {
  const form = `${verb} ${printedForm(catalogue.get(verb)!.syntax, ruleSyntax)}`.trim();
  const spanOf = (token: IToken): Span => places.span(token.startOffset, endOf(token));
  const found = part[at]?.tokenType === Break ? part[at + 1] : part[at];
  const allBefore = tokens.filter((token) => token.tokenType !== Break);
  const before =
    found === undefined
      ? (part.filter((token) => token.tokenType !== Break).at(-1) ?? tokens[0]!)
      : allBefore[allBefore.indexOf(found) - 1]!;
  const reason = wordsExpected(expected).includes("because");

  if (found === undefined) {
    const end = places.span(endOf(before), endOf(before));
    if (reason) return problem("reason-expected", end, { verb });
    return problem("unfinished", end, { expected: inProse(expected), form });
  }

  const span = spanOf(found);
  const beginsLine = places.lineOf(found.startOffset) !== places.lineOf(endOf(before) - 1);
  const options = clauseOptions(verb, tokens);
  const bare = isName(found) && found.tokenType !== Quoted;
  const meant = bare ? nearest(found.image, wordsExpected(expected)) : null;
  const comma = expected.some(({ what }) => what.type === "comma");
  const clause = expected.some(({ what }) => what.type === "clause");
  const item = isName(found) || found.tokenType === NumberToken;
  const byWord = (option: Syntax) => firstOf(option).words.has(found.tokenType);
  const text = tokenText(found);

  if (meant !== null)
    return problem("expected", span, { expected: inProse(expected), found: text, nearest: meant, form });
  // A clause that was begun before the list it belongs under.
  const beforeIsClause = options.some((option) => firstOf(option).words.has(before.tokenType));
  const twoBefore = allBefore[allBefore.indexOf(before) - 1];
  if (beforeIsClause && twoBefore?.tokenType === marks.get(":") && (comma || clause)) {
    return problem("list-missing", spanOf(before), { what: "The list", clause: before.image });
  }
  if (beginsLine && bare && catalogue.has(found.image) && !options.some(byWord)) {
    return problem("statement-inside", span, { verb: found.image });
  }
  if (clause && beginsLine && bare) {
    const words = clauseWords(options);
    const near = nearest(found.image, words);
    if (near !== null || !comma) {
      return problem("unknown-clause", span, { verb, found: text, nearest: near, clauses: words.join(", ") });
    }
  }
  if (comma && clause && !beginsLine && options.some(byWord)) {
    return problem("clause-on-own-line", span, { clause: found.image });
  }
  if ((comma && item) || (clause && !beginsLine && mayBeginClause(options, found) && item)) {
    return problem("missing-comma", span, { before: tokenText(before), found: text });
  }
  if (reason) return problem("reason-expected", span, { verb });
  if (
    expected.length === 0 ||
    (mayEnd && !expected.some(({ what }) => what.type !== "comma" && what.type !== "clause"))
  ) {
    return problem("nothing-more", span, { found: text, form });
  }
  return problem("expected", span, { expected: inProse(expected), found: text, nearest: null, form });
}
