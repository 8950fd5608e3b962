import type { Comment, Statement } from "./ast.ts";
import { parseChunk, type ParsedChunk } from "./cell.ts";
import { cut, linesOf } from "./cut.ts";
import { placeMap } from "./span.ts";
import { catalogue } from "./statements/index.ts";
import { lex } from "./tokens.ts";

const indent = "  ";

const linesOfStatement = (statement: Statement): readonly string[] => catalogue.get(statement.kind)!.print(statement);

/** A statement in its settled form; parsing it again gives the same statement. */
export function formatStatement(statement: Statement): string {
  return linesOfStatement(statement).join(`\n${indent}`);
}

/**
 * A cell in its settled form: each whole statement as `formatStatement` has it, comments kept, at most one blank line in a row.
 * Statements with mistakes stay as they were typed.
 */
export function formatCell(text: string): string {
  const places = placeMap(text);
  const chunks = cut(text).map((chunk) => parseChunk(text, chunk, places));
  const out: string[] = [];
  let blank = false;
  let next = 0;
  for (const line of linesOf(text)) {
    const current = chunks[next];
    if (current !== undefined && line.start > current.chunk.end) next++;
    const chunk = chunks[next];
    const inside = chunk !== undefined && line.start >= chunk.chunk.start && line.start <= chunk.chunk.end;
    if (inside && line.start !== chunk.chunk.start) continue;
    if (line.kind === "blank") {
      blank = out.length > 0;
      continue;
    }
    if (blank) out.push("");
    blank = false;
    if (inside) out.push(...formattedChunk(text, chunk));
    else out.push(text.slice(line.start, line.end).trim());
  }
  return out.length === 0 ? "" : `${out.join("\n")}\n`;
}

function formattedChunk(text: string, chunk: ParsedChunk): readonly string[] {
  const written = text.slice(chunk.chunk.start, chunk.chunk.end);
  if (chunk.statement === null) return written.split(/\r\n|\n|\r/);
  const lines = linesOfStatement(chunk.statement).map((line, index) => (index === 0 ? line : `${indent}${line}`));
  return withComments(text, lines, chunk.comments);
}

/** Each comment goes to the line that begins as its own line did; one whose line is gone goes above the statement. */
function withComments(text: string, lines: readonly string[], comments: readonly Comment[]): readonly string[] {
  if (comments.length === 0) return lines;
  const heads = lines.map(headOf);
  const before = new Map<number, string[]>();
  const behind = new Map<number, string>();
  const above: string[] = [];
  for (const comment of comments) {
    const lineStart =
      Math.max(text.lastIndexOf("\n", comment.span.start - 1), text.lastIndexOf("\r", comment.span.start - 1)) + 1;
    const code = text.slice(lineStart, comment.span.start);
    const alone = code.trim() === "";
    const at = heads.indexOf(headOf(alone ? followingCode(text, comment.span.end) : code));
    if (at >= 0 && alone && at > 0) before.set(at, [...(before.get(at) ?? []), `${indent}${comment.text}`]);
    else if (at >= 0 && !alone && !behind.has(at)) behind.set(at, comment.text);
    else above.push(comment.text);
  }
  return [
    ...above,
    ...lines.flatMap((line, index) => [
      ...(before.get(index) ?? []),
      behind.has(index) ? `${line} ${behind.get(index)}` : line,
    ]),
  ];
}

/** What a line begins with: enough to find it again. */
const headOf = (line: string): string =>
  lex(line, 0)
    .tokens.slice(0, 3)
    .map((token) => token.image)
    .join(" ");

/** The next line behind an offset that holds more than a comment. */
function followingCode(text: string, offset: number): string {
  const found = linesOf(text.slice(offset)).find((line) => line.kind === "indented");
  return found === undefined ? "" : text.slice(offset + found.start, offset + found.end);
}
