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
  readonly span: (start: number, end: number) => Span;
}

/** @param text the cell, line ends already `\n` */
export function placeMap(text: string): PlaceMap {
  const lineStarts = [0];
  for (let index = 0; index < text.length; index++) if (text.charCodeAt(index) === 10) lineStarts.push(index + 1);
  const place = (offset: number) => {
    const inside = Math.max(0, Math.min(offset, text.length));
    let low = 0;
    let high = lineStarts.length - 1;
    while (low < high) {
      const middle = (low + high + 1) >> 1;
      if (lineStarts[middle]! <= inside) low = middle;
      else high = middle - 1;
    }
    let column = 1;
    for (let index = lineStarts[low]!; index < inside; column++) index += text.codePointAt(index)! > 0xffff ? 2 : 1;
    return { line: low + 1, column };
  };
  return {
    span(start, end) {
      const from = place(start);
      const to = place(Math.max(start, end));
      return {
        start,
        end: Math.max(start, end),
        line: from.line,
        column: from.column,
        endLine: to.line,
        endColumn: to.column,
      };
    },
  };
}
