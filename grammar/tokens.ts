import { createToken, type IToken, Lexer, type TokenType } from "chevrotain";
import { rules } from "./rules.ts";
import { statements } from "./statements/index.ts";
import { wordsOf } from "./syntax.ts";

/** Sticky expression as a custom pattern: the lexer rebuilds plain patterns without the `u` flag, so letters beyond ASCII would be lost. */
function unicodePattern(source: string) {
  const expression = new RegExp(source, "uy");
  return {
    exec: (text: string, offset: number) => {
      expression.lastIndex = offset;
      return expression.exec(text);
    },
  };
}

/** Every place where a name is expected takes any of these: bare words, quoted ones, and each word of the language. */
export const AnyName = createToken({ name: "AnyName", pattern: Lexer.NA, label: "a name" });
export const Quoted = createToken({
  name: "Quoted",
  pattern: /"(?:[^"\n]|"")*"/,
  categories: [AnyName],
  label: "a text in quotes",
  line_breaks: false,
});
export const UnclosedQuote = createToken({
  name: "UnclosedQuote",
  pattern: /"[^\n]*/,
  label: "a quote that is not closed",
});
export const BareWord = createToken({
  name: "BareWord",
  ...custom("[\\p{L}_][\\p{L}\\p{M}\\p{N}_]*"),
  categories: [AnyName],
  label: "a name",
});
export const DigitName = createToken({
  name: "DigitName",
  ...custom("\\d+(?:\\.\\d+)?(?:[eE][+-]?\\d+)?[\\p{L}_][\\p{L}\\p{M}\\p{N}_]*"),
  label: "a name that begins with a digit",
});
export const NumberToken = createToken({
  name: "NumberToken",
  pattern: /\d+(?:\.\d+)?(?:[eE][+-]?\d+)?%?/,
  label: "a number",
});
const Blank = createToken({ name: "Blank", pattern: /[\s\u00a0]+/, group: Lexer.SKIPPED, line_breaks: true });
const Comment = createToken({ name: "Comment", pattern: /#[^\n]*/, group: "comments" });
const Strange = createToken({
  name: "Strange",
  pattern: /[^]/,
  label: "a character that has no meaning here",
  line_breaks: true,
});

function custom(source: string) {
  return { pattern: unicodePattern(source), line_breaks: false };
}

const markSources: Readonly<Record<string, RegExp>> = {
  "!=": /!=|≠/,
  "<=": /<=|≤/,
  ">=": />=|≥/,
  "=": /=/,
  "<": /</,
  ">": />/,
  ":": /:/,
  ",": /,/,
  "(": /\(/,
  ")": /\)/,
  "+": /\+/,
  "-": /-|\u2212|\u2013/,
  "*": /\*|×/,
  "/": /\/|÷/,
  "^": /\^/,
};

export const marks: ReadonlyMap<string, TokenType> = new Map(
  Object.entries(markSources).map(([text, pattern]) => [
    text,
    createToken({ name: `mark ${text}`, pattern, label: `"${text}"` }),
  ]),
);

/** Every fixed word of the language, from the descriptions. */
export const languageWords: ReadonlySet<string> = (() => {
  const found = new Set<string>();
  for (const description of Object.values(statements))
    if (description.syntax !== null) wordsOf(description.syntax, found);
  for (const rule of Object.values(rules)) wordsOf(rule.syntax, found);
  return found;
})();

export const wordTokens: ReadonlyMap<string, TokenType> = new Map(
  [...languageWords].map((word) => [
    word,
    createToken({ name: `word ${word}`, pattern: Lexer.NA, categories: [AnyName], label: `"${word}"` }),
  ]),
);

const lexed = [Blank, Comment, Quoted, UnclosedQuote, DigitName, NumberToken, BareWord, ...marks.values(), Strange];
export const vocabulary: TokenType[] = [AnyName, ...lexed, ...wordTokens.values()];

const lexer = new Lexer(lexed, { positionTracking: "onlyOffset", ensureOptimizations: false, skipValidations: true });

export interface Lexed {
  readonly tokens: IToken[];
  readonly comments: IToken[];
}

/** Tokens of a text; words of the language get their own types, which are still names wherever a name is expected. */
export function lex(text: string): Lexed {
  const { tokens, groups } = lexer.tokenize(text);
  for (const token of tokens) {
    if (token.tokenType !== BareWord) continue;
    const word = wordTokens.get(token.image);
    if (word === undefined) continue;
    token.tokenType = word;
    token.tokenTypeIdx = word.tokenTypeIdx!;
  }
  return { tokens, comments: groups.comments ?? [] };
}

/** `(IToken)` end, exclusive. */
export const endOf = (token: IToken): number => token.startOffset + token.image.length;
