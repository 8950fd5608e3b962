import type { ILookaheadStrategy, IToken } from "chevrotain";
import { firstOf, mayBegin, mayBeginClause, tokenOf } from "./first.ts";
import { ruleSyntax } from "./rules.ts";
import { catalogue } from "./statements/index.ts";
import type { Syntax } from "./syntax.ts";
import { Break, Comma, isName, marks, NumberToken, Quoted, wordTokens } from "./tokens.ts";

/** How many tokens a decision may look at. */
const furthestLook = 4;

type Look = (offset: number) => IToken;

/**
 * Whether the next tokens could be the beginning of a piece of syntax, as far as a decision looks. Every word may be a name, so the paths
 * that the parser generator would list beforehand are too many; here the tokens at hand are followed instead.
 *
 * @param look the token at an offset, 1 the next one
 */
export function couldBegin(syntax: Syntax, look: Look): boolean {
  const first = firstOf(syntax);
  if (!first.empty && !mayBegin(syntax, look(1))) return false;
  return reach(syntax, 0, look).length > 0;
}

const nowhere: readonly number[] = [];

/** Where the piece may end that begins behind `at` tokens; as far as is looked counts as an end. */
function reach(syntax: Syntax, at: number, look: Look): readonly number[] {
  if (at >= furthestLook) return [furthestLook];
  const token = look(at + 1);
  switch (syntax.type) {
    case "phrase":
      for (const [index, piece] of syntax.pieces.entries()) {
        if (at + index >= furthestLook) return [furthestLook];
        if (look(at + index + 1).tokenType !== tokenOf(piece)) return nowhere;
      }
      return [at + syntax.pieces.length];
    case "name":
      return isName(token) || (syntax.digits && token.tokenType === NumberToken) ? [at + 1] : nowhere;
    case "text":
      return token.tokenType === Quoted ? [at + 1] : nowhere;
    case "number": {
      const start = !syntax.plain && token.tokenType === marks.get("-") ? at + 1 : at;
      if (start >= furthestLook) return [furthestLook];
      if (look(start + 1).tokenType !== NumberToken) return nowhere;
      return !syntax.plain && look(start + 2).tokenType === marks.get("/") ? [start + 3] : [start + 1];
    }
    case "sequence": {
      let ends: readonly number[] = [at];
      for (const part of syntax.parts) {
        ends = onward(ends, (from) => reach(part, from, look));
        if (ends.length === 0) return nowhere;
      }
      return ends;
    }
    case "optional":
      return union([at], reach(syntax.part, at, look));
    case "repeat":
      return closure(syntax.atLeastOne ? reach(syntax.part, at, look) : [at], (from) => reach(syntax.part, from, look));
    case "either": {
      const ends = new Set<number>();
      for (const option of syntax.options) {
        if (mayBegin(option, token) || firstOf(option).empty) for (const end of reach(option, at, look)) ends.add(end);
      }
      return [...ends];
    }
    case "list":
      return closure(reach(syntax.item, at, look), (from) =>
        from < furthestLook && look(from + 1).tokenType === Comma ? reach(syntax.item, from + 1, look) : nowhere,
      );
    case "group":
    case "part":
      return reach(syntax.part, at, look);
    case "rule":
      return reach(ruleSyntax(syntax.rule), at, look);
    case "statement":
      return token.tokenType === wordTokens.get(syntax.verb)
        ? reach(catalogue.get(syntax.verb)!.syntax, at + 1, look)
        : nowhere;
    case "clauses":
      return closure([at], (from) => {
        if (from >= furthestLook) return nowhere;
        const separator = look(from + 1).tokenType;
        if (separator !== Break && separator !== Comma) return nowhere;
        if (from + 1 >= furthestLook) return [furthestLook];
        if (!mayBeginClause(syntax.options, look(from + 2))) return nowhere;
        return syntax.options.flatMap((option) => reach(option, from + 1, look));
      });
    case "break":
      return token.tokenType === Break ? [at, at + 1] : [at];
  }
}

const union = (one: readonly number[], other: readonly number[]): readonly number[] => [...new Set([...one, ...other])];

function onward(starts: readonly number[], step: (from: number) => readonly number[]): readonly number[] {
  if (starts.length === 1) return step(starts[0]!);
  const ends = new Set<number>();
  for (const start of starts) for (const end of step(start)) ends.add(end);
  return [...ends];
}

function closure(start: readonly number[], step: (from: number) => readonly number[]): readonly number[] {
  const found = new Set(start);
  for (const at of found) if (at < furthestLook) for (const end of step(at)) found.add(end);
  return [...found];
}

/** Every decision of the parser stands in a gate made from the description; there is nothing to compute beforehand. */
export const gatesDecide: ILookaheadStrategy = {
  validate: () => [],
  buildLookaheadForAlternation: () =>
    function (this: unknown, alternatives) {
      const chosen = (alternatives ?? []).findIndex(({ GATE }) => GATE === undefined || GATE.call(this));
      return chosen < 0 ? undefined : chosen;
    },
  buildLookaheadForOptional: () => () => true,
};
