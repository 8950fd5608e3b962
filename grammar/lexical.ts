import type { IToken, TokenType } from "chevrotain";
import type { Problem } from "./ast.ts";
import { problem } from "./problems.ts";
import type { PlaceMap } from "./span.ts";
import {
  BareWord,
  Comma,
  CurlyQuoted,
  DigitName,
  endOf,
  isName,
  marks,
  NumberToken,
  Quoted,
  retype,
  Strange,
  UnclosedQuote,
  wordTokens,
} from "./tokens.ts";

const shown = (characters: string): string =>
  [...characters]
    .slice(0, 5)
    .map((each) =>
      /[\p{L}\p{N}\p{P}\p{S}]/u.test(each)
        ? `"${each}"`
        : `U+${each.codePointAt(0)!.toString(16).toUpperCase().padStart(4, "0")}`,
    )
    .join(" ");

/** Reports what cannot be a token, and puts the likeliest token in its place so that the rest of the statement can still be read. */
export function repaired(tokens: readonly IToken[], places: PlaceMap): { tokens: IToken[]; problems: Problem[] } {
  const found: Problem[] = [];
  const kept: IToken[] = [];
  for (let index = 0; index < tokens.length; index++) {
    const token = tokens[index]!;
    const span = places.span(token.startOffset, endOf(token));
    switch (token.tokenType) {
      case UnclosedQuote:
        found.push(problem("unclosed-quote", span));
        retype(token, Quoted);
        break;
      case CurlyQuoted:
        found.push(problem("curly-quote", span));
        retype(token, Quoted);
        break;
      case DigitName:
        found.push(problem("name-begins-with-digit", span, { name: token.image }));
        retype(token, BareWord);
        break;
      case Strange: {
        let last = token;
        let text = token.image;
        while (tokens[index + 1]?.tokenType === Strange && tokens[index + 1]!.startOffset === endOf(last)) {
          last = tokens[++index]!;
          text += last.image;
        }
        found.push(
          problem("strange-character", places.span(token.startOffset, endOf(last)), { character: shown(text) }),
        );
        continue;
      }
    }
    kept.push(token);
  }
  return { tokens: kept, problems: found };
}

/** Levels of nesting and steps of arithmetic that everyone who walks a statement can bear without exhausting the stack. */
const deepest = 60;
const longestArithmetic = 1000;

const typesOf = (words: readonly string[], signs: readonly string[]): ReadonlySet<TokenType> =>
  new Set([...words.map((each) => wordTokens.get(each)!), ...signs.map((each) => marks.get(each)!)]);
const binary = typesOf(["and", "or"], ["+", "-", "*", "/", "^", "=", "!=", "<", "<=", ">", ">="]);
const nesting = typesOf(["not", "of"], ["^"]);

/** The token with which a statement becomes too deep or too long to be read safely, or null. */
export function tooDeep(tokens: readonly IToken[]): IToken | null {
  let open = 0;
  let choices = 0;
  // Prefixes and powers nest to the right, until a looser sign ends them.
  let run = 0;
  let steps = 0;
  let afterOperand = false;
  for (const token of tokens) {
    const type = token.tokenType;
    if (type === marks.get("(")) open++;
    else if (type === marks.get(")")) open = Math.max(0, open - 1);
    else if (type === wordTokens.get("if")) choices++;
    if (nesting.has(type) || (type === marks.get("-") && !afterOperand)) run++;
    else if (binary.has(type) || type === Comma) run = 0;
    if (binary.has(type)) steps++;
    if (open + choices + run > deepest || steps > longestArithmetic) return token;
    afterOperand = isName(token) || type === NumberToken || type === marks.get(")");
  }
  return null;
}
