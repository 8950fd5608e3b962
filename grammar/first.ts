import type { IToken, TokenType } from "chevrotain";
import { ruleSyntax } from "./rules.ts";
import { catalogue } from "./statements/index.ts";
import { partsOf, type Syntax } from "./syntax.ts";
import { isName, marks, NumberToken, Quoted, wordTokens } from "./tokens.ts";

/** What a piece of syntax may begin with. */
export interface First {
  readonly words: ReadonlySet<TokenType>;
  readonly name: boolean;
  readonly digits: boolean;
  readonly text: boolean;
  /** True when the piece may also be empty. */
  readonly empty: boolean;
}

const nothing: First = { words: new Set(), name: false, digits: false, text: false, empty: false };
const emptiness: First = { ...nothing, empty: true };
const known = new WeakMap<Syntax, First>();

const either = (firsts: readonly First[]): First => ({
  words: new Set(firsts.flatMap((first) => [...first.words])),
  name: firsts.some((first) => first.name),
  digits: firsts.some((first) => first.digits),
  text: firsts.some((first) => first.text),
  empty: firsts.some((first) => first.empty),
});

export const tokenOf = (piece: { readonly kind: "word" | "mark"; readonly text: string }): TokenType =>
  (piece.kind === "word" ? wordTokens : marks).get(piece.text)!;

/** No rule begins with itself, so this ends. */
export function firstOf(syntax: Syntax): First {
  const before = known.get(syntax);
  if (before !== undefined) return before;
  const found = computeFirst(syntax);
  known.set(syntax, found);
  return found;
}

function computeFirst(syntax: Syntax): First {
  switch (syntax.type) {
    case "phrase":
      return { ...nothing, words: new Set([tokenOf(syntax.pieces[0]!)]) };
    case "name":
      return { ...nothing, name: true, digits: syntax.digits };
    case "text":
      return { ...nothing, text: true };
    case "number":
      return { ...nothing, words: syntax.plain ? new Set() : new Set([marks.get("-")!]), digits: true };
    case "sequence": {
      const reached: First[] = [];
      for (const part of syntax.parts) {
        const first = firstOf(part);
        reached.push({ ...first, empty: false });
        if (!first.empty) return either(reached);
      }
      return either([...reached, emptiness]);
    }
    case "optional":
      return either([firstOf(syntax.part), emptiness]);
    case "repeat":
      return syntax.atLeastOne ? firstOf(syntax.part) : either([firstOf(syntax.part), emptiness]);
    case "either":
      return either(syntax.options.map(firstOf));
    case "list":
      return firstOf(syntax.item);
    case "group":
    case "part":
      return firstOf(syntax.part);
    case "rule":
      return firstOf(ruleSyntax(syntax.rule));
    case "statement":
      return { ...nothing, words: new Set([wordTokens.get(syntax.verb)!]) };
    case "clauses":
    case "break":
      return emptiness;
  }
}

export function mayBegin(syntax: Syntax, token: IToken): boolean {
  const first = firstOf(syntax);
  return (
    first.words.has(token.tokenType) ||
    (first.name && isName(token)) ||
    (first.digits && token.tokenType === NumberToken) ||
    (first.text && token.tokenType === Quoted)
  );
}

const because = wordTokens.get("because")!;
/** Whether a clause may begin with a token. The word `because` ends the clauses of a declaration that is amended, never begins one. */
export function mayBeginClause(options: readonly Syntax[], token: IToken): boolean {
  return token.tokenType !== because && options.some((option) => mayBegin(option, token));
}

/** The clauses that a statement may have, those of an inner statement included. */
export function clauseOptions(verb: string, tokens: readonly IToken[]): readonly Syntax[] {
  const found: Syntax[] = [];
  const visit = (syntax: Syntax): void => {
    if (syntax.type === "clauses") found.push(...syntax.options);
    if (syntax.type === "statement" && tokens[1]?.image === syntax.verb) visit(catalogue.get(syntax.verb)!.syntax);
    for (const inner of partsOf(syntax)) visit(inner);
  };
  visit(catalogue.get(verb)!.syntax);
  return found;
}
