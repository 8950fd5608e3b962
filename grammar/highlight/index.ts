import { linesOf } from "../cut.ts";
import { methodWords } from "../rules.ts";
import { catalogue } from "../statements/index.ts";
import {
  BareWord,
  CurlyQuoted,
  DigitName,
  endOf,
  languageWords,
  lex,
  NumberToken,
  Quoted,
  Strange,
  UnclosedQuote,
} from "../tokens.ts";

export type HighlightKind = "verb" | "method" | "word" | "name" | "number" | "string" | "comment" | "mark" | "wrong";

export interface HighlightToken {
  readonly start: number;
  readonly end: number;
  readonly kind: HighlightKind;
}

/** Corrections of one word; the longer ones are plain words joined. */
const methods: ReadonlySet<string> = new Set(methodWords.flatMap((method) => method.split(/[- ]/)));

/** The tokens of a text with their kinds, by the real lexer: what every highlighter of the language must agree with. */
export function classifyTokens(text: string): readonly HighlightToken[] {
  const found: HighlightToken[] = [];
  const margins = new Set(
    linesOf(text)
      .filter((line) => line.kind === "margin")
      .map((line) => line.start),
  );
  const { tokens, comments } = lex(text, 0);
  for (const token of tokens) {
    const start = token.startOffset;
    found.push({ start, end: endOf(token), kind: kindOf(token.image, token.tokenType.name, margins.has(start)) });
  }
  for (const comment of comments) found.push({ start: comment.startOffset, end: endOf(comment), kind: "comment" });
  return found.sort((one, other) => one.start - other.start);
}

function kindOf(image: string, type: string, atMargin: boolean): HighlightKind {
  switch (type) {
    case Quoted.name:
      return "string";
    case NumberToken.name:
      return "number";
    case UnclosedQuote.name:
    case CurlyQuoted.name:
    case DigitName.name:
    case Strange.name:
      return "wrong";
    case BareWord.name:
      return "name";
  }
  if (type.startsWith("mark ")) return "mark";
  if (atMargin && catalogue.has(image)) return "verb";
  return methods.has(image) ? "method" : "word";
}

/** How editors name the kinds. */
const editorNames: Readonly<Record<HighlightKind, string>> = {
  verb: "keyword",
  method: "builtin",
  word: "atom",
  name: "variable",
  number: "number",
  string: "string",
  comment: "comment",
  mark: "operator",
  wrong: "error",
};

const listing = (words: Iterable<string>): string => JSON.stringify([...words].sort());

/** One line of an editor's stream, token by token; the same text serves both generations of the editor. */
const streamSource = (): string => `
  var verbs = new Set(${listing(catalogue.keys())});
  var methods = new Set(${listing(methods)});
  var words = new Set(${listing(languageWords)});
  var names = ${JSON.stringify(editorNames)};
  function token(stream) {
    var atMargin = stream.sol();
    if (stream.match(/^[\\s\\ufeff]+/)) return null;
    if (stream.match(/^#.*/)) return names.comment;
    if (stream.match(/^"(?:[^"]|"")*"/)) return names.string;
    if (stream.match(/^".*/)) return names.wrong;
    if (stream.match(/^[\\u201c\\u201d\\u201e\\u00ab][^\\u201c\\u201d\\u201e\\u00bb"]*[\\u201c\\u201d\\u00bb"]?/)) return names.wrong;
    if (stream.match(/^\\d+(?:\\.\\d+)?(?:[eE][+-]?\\d+)?(?![eE][+-]?\\d)[\\p{L}\\p{M}_][\\p{L}\\p{M}\\p{N}_]*/u)) return names.wrong;
    if (stream.match(/^(?:\\d+(?:\\.\\d+)?|\\.\\d+)(?:[eE][+-]?\\d+)?%?/)) return names.number;
    var word = stream.match(/^[\\p{L}_][\\p{L}\\p{M}\\p{N}_]*/u);
    if (word) {
      if (atMargin && verbs.has(word[0])) return names.verb;
      if (methods.has(word[0])) return names.method;
      return words.has(word[0]) ? names.word : names.name;
    }
    if (stream.match(/^(?:!=|<=|>=|[≠≤≥=<>:,()+\\-\\u2212\\u2013*×\\/÷^])/)) return names.mark;
    stream.match(/^[^]/u);
    return names.wrong;
  }`;

/** A mode for version 5 of the editor, as the text of a plain script; it defines the mode "meanwise" and its MIME type. */
export function codeMirror5Mode(): string {
  return `// Generated from the statement catalogue; do not edit.
(function (define) {
  if (typeof module === "object" && module.exports) module.exports = define;
  else if (typeof CodeMirror !== "undefined") define(CodeMirror);
})(function (CodeMirror) {${streamSource()}
  CodeMirror.defineMode("meanwise", function () {
    return { token: token, lineComment: "#" };
  });
  CodeMirror.defineMIME("text/x-meanwise", "meanwise");
});
`;
}

/** A stream language for version 6 of the editor, as the text of a module; pass what it exports to \`StreamLanguage.define\`. */
export function codeMirror6Mode(): string {
  return `// Generated from the statement catalogue; do not edit.
export const meanwise = (function () {${streamSource()}
  return { name: "meanwise", token: token, languageData: { commentTokens: { line: "#" } } };
})();
`;
}
