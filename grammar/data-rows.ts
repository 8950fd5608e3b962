import type { Comment, Name, Problem } from "./ast.ts";
import type { Chunk } from "./cut.ts";
import { unquoted } from "./parser.ts";
import { problem } from "./problems.ts";
import { type Field, type Read, readerOf } from "./reader.ts";
import { joinSpans, type PlaceMap } from "./span.ts";

const piece = /"(?:[^"]|"")*"|".*|#.*|[^\s"]+/gs;

/** Reads the rows of `data`: values separated by blanks, in quotes where they hold blanks themselves. */
export function readRows(
  text: string,
  chunk: Chunk,
  places: PlaceMap,
): { read: Read; problems: readonly Problem[]; comments: readonly Comment[] } {
  const problems: Problem[] = [];
  const comments: Comment[] = [];
  const rows: Field[] = [];
  let last = places.span(chunk.start, chunk.start + "data".length);
  let start = chunk.start;
  const body = text.slice(chunk.start, chunk.end);
  for (const [index, line] of body.split(/\r\n|\n|\r/).entries()) {
    const values: Name[] = [];
    const from = index === 0 ? "data".length : 0;
    for (const match of line.slice(from).matchAll(piece)) {
      const image = match[0];
      const offset = start + from + match.index;
      const span = places.span(offset, offset + image.length);
      if (image.startsWith("#")) {
        comments.push({ text: image.trimEnd(), span });
        continue;
      }
      const isQuoted = image.startsWith('"');
      if (isQuoted && !closed(image)) {
        problems.push(problem("unclosed-quote", span));
      }
      values.push({ text: isQuoted ? unquoted(image) : image, span, quoted: isQuoted });
    }
    start += line.length + (text.startsWith("\r\n", start + line.length) ? 2 : 1);
    if (values.length === 0) continue;
    const span = joinSpans(values[0]!.span, values.at(-1)!.span);
    last = span;
    if (index === 0) {
      problems.push(problem("data-on-own-line", span));
      continue;
    }
    const fields = new Map<string, readonly Field[]>([
      ["values", values.map((value): Field => ({ kind: "name", value }))],
    ]);
    rows.push({ kind: "group", value: readerOf(fields, span) });
  }
  const span = joinSpans(places.span(chunk.start, chunk.start), last);
  return { read: readerOf(new Map([["rows", rows]]), span), problems, comments };
}

const closed = (image: string): boolean => /^"(?:[^"]|"")*"$/.test(image);
