/** One statement's lines: from its verb at the left margin to the last indented line under it. */
export interface Chunk {
  readonly start: number;
  /** End of its last line, without the line end; exclusive. */
  readonly end: number;
  /** False for lines that are indented under nothing. */
  readonly atMargin: boolean;
}

interface Line {
  readonly start: number;
  readonly end: number;
  readonly kind: "blank" | "comment" | "indented" | "margin";
}

const lineEnds = /\r\n|\n|\r/g;

export function linesOf(text: string): readonly Line[] {
  const lines: Line[] = [];
  let start = text.charCodeAt(0) === 0xfeff ? 1 : 0;
  const add = (end: number): void => {
    const line = text.slice(start, end);
    const body = line.trim();
    const kind = body === "" ? "blank" : body.startsWith("#") ? "comment" : /^\s/.test(line) ? "indented" : "margin";
    lines.push({ start, end, kind });
  };
  for (const match of text.matchAll(lineEnds)) {
    add(match.index);
    start = match.index + match[0].length;
  }
  add(text.length);
  return lines;
}

/**
 * Cuts a cell into statements at the left margin, before anything is parsed, so that no mistake can swallow a neighbour. Blank lines and
 * comments neither begin nor end a statement.
 */
export function cut(text: string): readonly Chunk[] {
  const chunks: { start: number; end: number; atMargin: boolean }[] = [];
  for (const line of linesOf(text)) {
    if (line.kind === "blank" || line.kind === "comment") continue;
    const open = chunks.at(-1);
    if (line.kind === "indented" && open !== undefined) open.end = line.end;
    else chunks.push({ start: line.start, end: line.end, atMargin: line.kind === "margin" });
  }
  return chunks;
}
