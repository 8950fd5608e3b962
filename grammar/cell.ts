import type { Comment, ParsedCell, Problem, Statement } from "./ast.ts";
import { withBreaks } from "./breaks.ts";
import { type Chunk, cut, linesOf } from "./cut.ts";
import { clauseOptions, firstOf } from "./first.ts";
import { readRows } from "./data-rows.ts";
import { repaired, tooDeep } from "./lexical.ts";
import { mistakesOf, tokenText } from "./mistakes.ts";
import { nearest } from "./nearest.ts";
import { parseTokens, type Taken } from "./parser.ts";
import { problem } from "./problems.ts";
import { BuildProblem, type Read } from "./reader.ts";
import { type PlaceMap, placeMap } from "./span.ts";
import { catalogue } from "./statements/index.ts";
import { endOf, isName, lex, Quoted } from "./tokens.ts";

/** One statement of a cell, whole or not. */
export interface ParsedChunk {
  readonly chunk: Chunk;
  readonly verb: string | null;
  readonly statement: Statement | null;
  readonly problems: readonly Problem[];
  readonly comments: readonly Comment[];
  readonly taken: readonly Taken[];
}

/**
 * Reads a cell: every statement that is whole, and every mistake of all the others. Never throws, whatever the text.
 *
 * @param text the cell as it was typed; line ends may be of any kind, a byte order mark is passed over
 */
export function parseCell(text: string): ParsedCell {
  const places = placeMap(text);
  const chunks = cut(text).map((chunk) => parseChunk(text, chunk, places));
  return {
    statements: chunks.flatMap((chunk) => (chunk.statement === null ? [] : [chunk.statement])),
    problems: chunks.flatMap((chunk) => chunk.problems),
    comments: [...outsideComments(text, chunks, places), ...chunks.flatMap((chunk) => chunk.comments)].sort(
      (one, other) => one.span.start - other.span.start,
    ),
  };
}

/** Comments on lines of their own between statements. */
function outsideComments(text: string, chunks: readonly ParsedChunk[], places: PlaceMap): readonly Comment[] {
  const found: Comment[] = [];
  let index = 0;
  for (const line of linesOf(text)) {
    while (index < chunks.length && chunks[index]!.chunk.end < line.start) index++;
    const inside = index < chunks.length && chunks[index]!.chunk.start <= line.start;
    if (line.kind !== "comment" || inside) continue;
    const start = text.indexOf("#", line.start);
    const body = text.slice(start, line.end).trimEnd();
    found.push({ text: body, span: places.span(start, start + body.length) });
  }
  return found;
}

export function parseChunk(text: string, chunk: Chunk, places: PlaceMap): ParsedChunk {
  const body = text.slice(chunk.start, chunk.end);
  const lexed = lex(body, chunk.start);
  const comments = lexed.comments.map((comment): Comment => {
    const written = comment.image.trimEnd();
    return { text: written, span: places.span(comment.startOffset, comment.startOffset + written.length) };
  });
  const failed = (problems: readonly Problem[], verb: string | null = null): ParsedChunk => ({
    chunk,
    verb,
    statement: null,
    problems,
    comments,
    taken: [],
  });

  if (!chunk.atMargin) {
    const indent = body.length - body.trimStart().length;
    return failed([problem("indented-start", places.span(chunk.start, chunk.start + indent))]);
  }
  const first = lexed.tokens[0]!;
  const verb = first.image;
  const description = catalogue.get(verb);
  if (description === undefined || first.tokenType === Quoted) {
    const span = places.span(first.startOffset, endOf(first));
    if (isName(first) && first.tokenType !== Quoted) {
      const verbs = [...catalogue.keys()].filter((each) =>
        clauseOptions(each, []).some((option) => firstOf(option).words.has(first.tokenType)),
      );
      if (verbs.length > 0)
        return failed([problem("clause-at-margin", span, { word: verb, verbs: verbs.slice(0, 3) })]);
      return failed([problem("unknown-statement", span, { verb, nearest: nearest(verb, catalogue.keys()) })]);
    }
    return failed([problem("verb-expected", span, { found: tokenText(first) })]);
  }
  if (description.rows === true) {
    const rows = readRows(text, chunk, places);
    const { statement, problems } = build(verb, rows.read, rows.problems);
    return {
      chunk,
      verb,
      statement,
      problems,
      comments: rows.comments,
      taken: [{ token: first, syntax: description.syntax, help: null }],
    };
  }

  const { tokens, problems } = repaired(lexed.tokens, places);
  const deep = tooDeep(tokens);
  if (deep !== null) {
    return failed([...problems, problem("nested-too-deeply", places.span(deep.startOffset, endOf(deep)))], verb);
  }
  const broken = withBreaks(verb, tokens, places);
  const parsed = parseTokens(verb, broken, places);
  if (parsed.read === null) {
    const mistakes = mistakesOf({ verb, tokens: broken, places });
    const unexplained = mistakes.length === 0 && problems.length === 0;
    const all = unexplained ? [twoReadings(parsed.wrong[0] ?? first, places)] : [...problems, ...mistakes];
    return {
      ...failed(
        all.toSorted((one, other) => one.span.start - other.span.start),
        verb,
      ),
      taken: parsed.taken,
    };
  }
  const { statement, problems: all } = build(verb, parsed.read, problems);
  return { chunk, verb, statement, problems: all, comments, taken: parsed.taken };
}

/** The parser decides by the next few words; where it decided against the only reading that works, quotes help. */
function twoReadings(token: { startOffset: number; image: string }, places: PlaceMap): Problem {
  const start = Number.isNaN(token.startOffset) ? 0 : token.startOffset;
  const found = token.image === "" ? "the end" : `"${token.image}"`;
  return problem("two-readings", places.span(start, start + token.image.length), { found });
}

function build(
  verb: string,
  read: Read,
  problems: readonly Problem[],
): { statement: Statement | null; problems: readonly Problem[] } {
  if (problems.length > 0) return { statement: null, problems };
  try {
    return { statement: catalogue.get(verb)!.build(read), problems };
  } catch (mistake) {
    if (mistake instanceof BuildProblem) return { statement: null, problems: [mistake.problem] };
    throw mistake;
  }
}
