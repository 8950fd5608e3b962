/** A place in a cell. Offsets are UTF-16 units, end exclusive; lines and columns count from 1, columns in code points. */
export interface Span {
  readonly start: number;
  readonly end: number;
  readonly line: number;
  readonly column: number;
  readonly endLine: number;
  readonly endColumn: number;
}

/** Turns offsets into places; built once per cell. */
export interface PlaceMap {
  /** Line of an offset, from 0. */
  readonly lineOf: (offset: number) => number;
  readonly span: (start: number, end: number) => Span;
}

/** Lines end with `\n`, `\r\n` or a lone `\r`. */
export function lineStartsOf(text: string): readonly number[] {
  const starts = [0];
  for (let index = 0; index < text.length; index++) {
    const unit = text.charCodeAt(index);
    if (unit === 10 || (unit === 13 && text.charCodeAt(index + 1) !== 10)) starts.push(index + 1);
  }
  return starts;
}

/** @param text the cell as it was given; a byte order mark at its start is no column */
export function placeMap(text: string): PlaceMap {
  const lineStarts = lineStartsOf(text);
  const first = text.charCodeAt(0) === 0xfeff ? 1 : 0;
  const astral = /[\ud800-\udbff]/.test(text);
  // Places are asked for in rising order, so counting goes on from the last one.
  let last = { line: 0, offset: first, column: 1 };

  const lineOf = (offset: number): number => {
    let low = 0;
    let high = lineStarts.length - 1;
    while (low < high) {
      const middle = (low + high + 1) >> 1;
      if (lineStarts[middle]! <= offset) low = middle;
      else high = middle - 1;
    }
    return low;
  };
  const place = (offset: number) => {
    const line = lineOf(offset);
    const start = line === 0 ? first : lineStarts[line]!;
    if (!astral) return { line: line + 1, column: Math.max(1, offset - start + 1) };
    let { offset: index, column } = last.line === line && last.offset <= offset ? last : { offset: start, column: 1 };
    for (; index < offset; column++) index += text.codePointAt(index)! > 0xffff ? 2 : 1;
    last = { line, offset: index, column };
    return { line: line + 1, column };
  };
  return {
    lineOf,
    span(start, end) {
      const from = Math.max(0, Math.min(start, text.length));
      const to = Math.max(from, Math.min(end, text.length));
      const begin = place(from);
      const finish = place(to);
      return {
        start: from,
        end: to,
        line: begin.line,
        column: begin.column,
        endLine: finish.line,
        endColumn: finish.column,
      };
    },
  };
}

/** From the beginning of the first to the end of the last. */
export const joinSpans = (first: Span, last: Span): Span => ({
  start: first.start,
  end: last.end,
  line: first.line,
  column: first.column,
  endLine: last.endLine,
  endColumn: last.endColumn,
});
