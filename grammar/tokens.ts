import { createToken, type IToken, Lexer, type TokenType } from "chevrotain";
import { rules } from "./rules.ts";
import { catalogue } from "./statements/index.ts";
import { wordsOf } from "./syntax.ts";

/** Sticky expression as a custom pattern: the lexer rebuilds plain patterns without the `u` flag, so letters beyond ASCII would be lost. */
function unicode(source: string) {
  const expression = new RegExp(source, "uy");
  return {
    line_breaks: false,
    pattern: {
      exec: (text: string, offset: number) => {
        expression.lastIndex = offset;
        return expression.exec(text);
      },
    },
  };
}

/** Every place where a name is expected takes any of these: bare words, quoted ones, and each word of the language. */
export const AnyName = createToken({ name: "AnyName", pattern: Lexer.NA });
export const Quoted = createToken({
  name: "Quoted",
  pattern: /"(?:[^"\n\r]|"")*"/,
  categories: [AnyName],
  line_breaks: false,
});
export const UnclosedQuote = createToken({ name: "UnclosedQuote", pattern: /"[^\n\r]*/, line_breaks: false });
export const CurlyQuoted = createToken({
  name: "CurlyQuoted",
  pattern: /[\u201c\u201d\u201e\u00ab][^\u201c\u201d\u201e\u00bb"\n\r]*[\u201c\u201d\u00bb"]?/,
  line_breaks: false,
});
export const BareWord = createToken({
  name: "BareWord",
  ...unicode("[\\p{L}_][\\p{L}\\p{M}\\p{N}_]*"),
  categories: [AnyName],
});
export const DigitName = createToken({
  name: "DigitName",
  ...unicode("\\d+(?:\\.\\d+)?(?:[eE][+-]?\\d+)?(?![eE][+-]?\\d)[\\p{L}\\p{M}_][\\p{L}\\p{M}\\p{N}_]*"),
});
export const NumberToken = createToken({
  name: "NumberToken",
  pattern: /(?:\d+(?:\.\d+)?|\.\d+)(?:[eE][+-]?\d+)?%?/,
  line_breaks: false,
});
/** Not in the text: put before a clause that stands on a line of its own. */
export const Break = createToken({ name: "Break", pattern: Lexer.NA });
const Blank = createToken({ name: "Blank", pattern: /\s+/, group: Lexer.SKIPPED, line_breaks: true });
const CommentToken = createToken({
  name: "Comment",
  pattern: /#[^\n\r]*/,
  group: "comments",
  line_breaks: false,
});
export const Strange = createToken({ name: "Strange", ...unicode("[^]"), line_breaks: true });

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
    createToken({ name: `mark ${text}`, pattern, line_breaks: false }),
  ]),
);
export const Comma = marks.get(",")!;

/** Every fixed word of the language, from the descriptions. */
export const languageWords: ReadonlySet<string> = (() => {
  const found = new Set<string>(catalogue.keys());
  for (const description of catalogue.values()) wordsOf(description.syntax, found);
  for (const rule of Object.values(rules)) wordsOf(rule.syntax, found);
  return found;
})();

export const wordTokens: ReadonlyMap<string, TokenType> = new Map(
  [...languageWords].map((word) => [
    word,
    createToken({ name: `word ${word}`, pattern: Lexer.NA, categories: [AnyName] }),
  ]),
);

const lexed = [
  Blank,
  CommentToken,
  Quoted,
  UnclosedQuote,
  CurlyQuoted,
  DigitName,
  NumberToken,
  BareWord,
  ...marks.values(),
  Strange,
];
export const vocabulary: TokenType[] = [AnyName, Break, ...lexed, ...wordTokens.values()];

const lexer = new Lexer(lexed, { positionTracking: "onlyOffset", skipValidations: true });

export interface Lexed {
  readonly tokens: IToken[];
  readonly comments: IToken[];
}

/**
 * Tokens of a piece of text; words of the language get their own types, which are still names wherever a name is expected.
 * @param offset where the piece stands in the whole; the tokens' places count from there
 */
export function lex(text: string, offset: number): Lexed {
  const { tokens, groups } = lexer.tokenize(text);
  const comments = groups.comments ?? [];
  for (const token of tokens) {
    token.startOffset += offset;
    if (token.tokenType !== BareWord) continue;
    const word = wordTokens.get(token.image);
    if (word !== undefined) retype(token, word);
  }
  for (const comment of comments) comment.startOffset += offset;
  return { tokens, comments };
}

export function retype(token: IToken, type: TokenType): void {
  token.tokenType = type;
  token.tokenTypeIdx = type.tokenTypeIdx!;
}

/** End of a token, exclusive. */
export const endOf = (token: IToken): number => token.startOffset + token.image.length;

export const isName = (token: IToken): boolean =>
  token.tokenType === Quoted || token.tokenType === BareWord || token.tokenType.CATEGORIES?.includes(AnyName) === true;

/** A token of a given type with no text of its own. */
export const emptyToken = (type: TokenType, offset: number): IToken => ({
  image: "",
  startOffset: offset,
  tokenType: type,
  tokenTypeIdx: type.tokenTypeIdx!,
});
