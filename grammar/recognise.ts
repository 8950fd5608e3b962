import type { IToken } from "chevrotain";
import { tokenOf } from "./first.ts";
import { ruleSyntax } from "./rules.ts";
import { catalogue } from "./statements/index.ts";
import type { Syntax } from "./syntax.ts";
import { Break, Comma, isName, marks, NumberToken, Quoted, wordTokens } from "./tokens.ts";

/** Something that could have stood at a place. */
export type Expectation =
  /** The rest of fixed words, from a piece on. */
  | { readonly type: "phrase"; readonly syntax: Extract<Syntax, { type: "phrase" }>; readonly from: number }
  | { readonly type: "name"; readonly syntax: Extract<Syntax, { type: "name" }> }
  | { readonly type: "text"; readonly syntax: Extract<Syntax, { type: "text" }> }
  | { readonly type: "number"; readonly syntax: Extract<Syntax, { type: "number" }> }
  | { readonly type: "comma" }
  /** A clause, after a comma or on a line of its own. */
  | { readonly type: "clause"; readonly options: readonly Syntax[] }
  | { readonly type: "verb"; readonly verb: string };

export interface Expected {
  readonly what: Expectation;
  /** The choice it belongs to ("a correction"), where there is one. */
  readonly choice: string | null;
  /** The nearest line of help around it. */
  readonly help: string | null;
}

export interface Recognised {
  readonly whole: boolean;
  /** Index of the token that fits nothing; the number of tokens when they end too early. */
  readonly furthest: number;
  /** What would have fitted there. */
  readonly expected: readonly Expected[];
  /** True when the statement could have ended there. */
  readonly mayEnd: boolean;
}

/**
 * Follows every reading of the tokens at once, without the parser's bounded look ahead: tells where the last of them ends and what each
 * would have taken next. Error messages and completion come from here. Each piece of syntax is tried at most once at each place.
 *
 * @param tokens what follows the verb
 */
export function recognise(syntax: Syntax, tokens: readonly IToken[]): Recognised {
  const memory = new Map<Syntax, Map<number, readonly number[]>>();
  let furthest = 0;
  let expected: Expected[] = [];
  let choice: { readonly what: string; readonly at: number } | null = null;
  let help: string | null = null;
  const because = wordTokens.get("because")!;

  const miss = (at: number, what: Expectation): void => {
    if (at < furthest) return;
    if (at > furthest) {
      furthest = at;
      expected = [];
    }
    expected.push({ what, choice: choice?.at === at ? choice.what : null, help });
  };
  const after = (at: number): readonly number[] => [at + 1];
  const nowhere: readonly number[] = [];

  const through = (starts: readonly number[], part: Syntax): readonly number[] => {
    if (starts.length === 0) return nowhere;
    if (starts.length === 1) return ends(part, starts[0]!);
    const found = new Set<number>();
    for (const start of starts) for (const end of ends(part, start)) found.add(end);
    return [...found];
  };
  /** Everything that can be reached by taking a step any number of times. */
  const closure = (start: readonly number[], step: (at: number) => readonly number[]): readonly number[] => {
    const found = new Set(start);
    for (const at of found) for (const end of step(at)) found.add(end);
    return [...found];
  };
  const comma = (at: number): readonly number[] => {
    if (tokens[at]?.tokenType === Comma) return after(at);
    miss(at, { type: "comma" });
    return nowhere;
  };

  function ends(part: Syntax, at: number): readonly number[] {
    let known = memory.get(part);
    if (known === undefined) {
      known = new Map();
      memory.set(part, known);
    }
    const before = known.get(at);
    if (before !== undefined) return before;
    known.set(at, nowhere);
    const found = follow(part, at);
    known.set(at, found);
    return found;
  }

  function follow(part: Syntax, at: number): readonly number[] {
    const token = tokens[at];
    switch (part.type) {
      case "phrase": {
        for (const [from, piece] of part.pieces.entries()) {
          if (tokens[at + from]?.tokenType === tokenOf(piece)) continue;
          miss(at + from, { type: "phrase", syntax: part, from });
          return nowhere;
        }
        return [at + part.pieces.length];
      }
      case "name":
        if (token !== undefined && (isName(token) || (part.digits && token.tokenType === NumberToken)))
          return after(at);
        miss(at, { type: "name", syntax: part });
        return nowhere;
      case "text":
        if (token?.tokenType === Quoted) return after(at);
        miss(at, { type: "text", syntax: part });
        return nowhere;
      case "number": {
        const first = !part.plain && token?.tokenType === marks.get("-") ? at + 1 : at;
        if (tokens[first]?.tokenType !== NumberToken) {
          miss(first, { type: "number", syntax: part });
          return nowhere;
        }
        if (part.plain || tokens[first + 1]?.tokenType !== marks.get("/")) return after(first);
        if (tokens[first + 2]?.tokenType === NumberToken) return after(first + 2);
        miss(first + 2, { type: "number", syntax: part });
        return after(first);
      }
      case "sequence":
        return part.parts.reduce((starts: readonly number[], next) => through(starts, next), [at]);
      case "optional":
        return [...new Set([at, ...ends(part.part, at)])];
      case "repeat":
        return part.atLeastOne
          ? closure(ends(part.part, at), (from) => ends(part.part, from))
          : closure([at], (from) => ends(part.part, from));
      case "either": {
        const outer = choice;
        if (part.what !== null) choice = { what: part.what, at };
        const found = new Set(part.options.flatMap((option) => ends(option, at)));
        choice = outer;
        return [...found];
      }
      case "list":
        return closure(within(part.item, at), (from) => comma(from).flatMap((next) => within(part.item, next)));
      case "group":
        return ends(part.part, at);
      case "part": {
        const outer = help;
        help = part.help;
        const found = ends(part.part, at);
        help = outer;
        return found;
      }
      case "clauses":
        return closure([at], (from) => {
          const separator = tokens[from];
          if (separator?.tokenType !== Break && separator?.tokenType !== Comma) {
            miss(from, { type: "clause", options: part.options });
            return nowhere;
          }
          if (tokens[from + 1]?.tokenType === because) return nowhere;
          return part.options.flatMap((option) => within(option, from + 1));
        });
      case "rule":
        return within(ruleSyntax(part.rule), at);
      case "statement": {
        if (token?.tokenType === wordTokens.get(part.verb)) return ends(catalogue.get(part.verb)!.syntax, at + 1);
        miss(at, { type: "verb", verb: part.verb });
        return nowhere;
      }
      case "break":
        return token?.tokenType === Break ? [at, at + 1] : [at];
    }
  }

  /** A choice ends where another piece begins. */
  function within(part: Syntax, at: number): readonly number[] {
    const outer = choice;
    choice = null;
    const found = ends(part, at);
    choice = outer;
    return found;
  }

  const reached = ends(syntax, 0);
  const last = Math.max(-1, ...reached);
  if (reached.includes(tokens.length)) {
    return { whole: true, furthest: tokens.length, expected: furthest === tokens.length ? expected : [], mayEnd: true };
  }
  // A statement that could have ended earlier than its last reading failed: the failure says more.
  const at = Math.max(furthest, last);
  return { whole: false, furthest: at, expected: furthest === at ? expected : [], mayEnd: reached.includes(at) };
}
