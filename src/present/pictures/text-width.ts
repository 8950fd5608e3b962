import { fontWidths } from "./font-widths.ts";

const ranges = fontWidths.map(([first, widths]) => ({ first, last: first + widths.length / 2 - 1, widths }));

/** Advance of one character in font sizes. Scripts that the font lacks are taken as a square, so that nothing is cut. */
function advance(sign: string): number {
  if (/\p{M}|\p{Cf}/u.test(sign)) return 0;
  const code = sign.codePointAt(0)!;
  for (const range of ranges) {
    if (code < range.first) break;
    if (code <= range.last) {
      const at = 2 * (code - range.first);
      return Number.parseInt(range.widths.slice(at, at + 2), 36) / 100;
    }
  }
  return code >= 0x1f000 && code < 0x20000 ? 1.3 : code >= 0x1100 ? 1 : 0.7;
}

/** Width of a text in the pictures' font, in pixels for a font size in pixels; within 1% of the font's own advances. */
export function textWidth(text: string, fontSize: number): number {
  let width = 0;
  for (const sign of text) width += advance(sign);
  return width * fontSize;
}

/** Cuts a word that is wider than the line, between characters that belong together (marks stay with their letter). */
function pieces(word: string, fontSize: number, limit: number): string[] {
  if (textWidth(word, fontSize) <= limit) return [word];
  const parts: string[] = [];
  let part = "";
  for (const { segment } of new Intl.Segmenter("en", { granularity: "grapheme" }).segment(word)) {
    if (part !== "" && textWidth(part + segment, fontSize) > limit) {
      parts.push(part);
      part = "";
    }
    part += segment;
  }
  return [...parts, part];
}

/**
 * Breaks a label into lines that fit: at blanks first, inside a word only where the word alone is too wide.
 *
 * @param limit pixels; at least one character stands on each line whatever the limit
 */
export function wrappedLabel(text: string, fontSize: number, limit: number): string[] {
  const lines: string[] = [];
  let line = "";
  for (const word of text
    .trim()
    .split(/[ \t\r\n]+/)
    .flatMap((part) => pieces(part, fontSize, limit))) {
    const next = line === "" ? word : `${line} ${word}`;
    if (line !== "" && textWidth(next, fontSize) > limit) {
      lines.push(line);
      line = word;
    } else line = next;
  }
  return [...lines, line];
}

/** Width of the widest word: what a label needs at least if no word may be cut. */
export const widestWord = (texts: readonly string[], fontSize: number): number =>
  Math.max(0, ...texts.flatMap((text) => text.split(/[ \t\r\n]+/)).map((word) => textWidth(word, fontSize)));

export const widest = (texts: readonly string[], fontSize: number): number =>
  Math.max(0, ...texts.map((text) => textWidth(text, fontSize)));
