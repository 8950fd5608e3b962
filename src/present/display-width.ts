const segments = new Intl.Segmenter("en", { granularity: "grapheme" });

function isWide(code: number): boolean {
  return (
    (code >= 0x1100 && code <= 0x115f) ||
    (code >= 0x2e80 && code <= 0xa4cf) ||
    (code >= 0xac00 && code <= 0xd7a3) ||
    (code >= 0xf900 && code <= 0xfaff) ||
    (code >= 0xfe30 && code <= 0xfe6f) ||
    (code >= 0xff00 && code <= 0xff60) ||
    (code >= 0xffe0 && code <= 0xffe6) ||
    (code >= 0x1f300 && code <= 0x1faff) ||
    (code >= 0x20000 && code <= 0x3fffd)
  );
}

/** Signs that take one column each and join with nothing: most texts hold no others, and need no segmenting. */
const plain = /^[\u0020-\u00ac\u00ae-\u02ff\u0370-\u03ff\u2010-\u2029\u202f\u2030-\u205e\u2190-\u25ff]*$/;

/**
 * Columns that a text takes in a terminal: wide East Asian signs and emoji take two, marks and joiners none; an emoji put together of
 * several signs counts once (Unicode Standard Annexes 11 and 29).
 */
export function displayWidth(text: string): number {
  if (plain.test(text)) return text.length;
  let width = 0;
  for (const { segment } of segments.segment(text)) {
    let widest = 0;
    for (const sign of segment) {
      if (/\p{M}|\p{Cf}/u.test(sign)) continue;
      widest = Math.max(widest, isWide(sign.codePointAt(0)!) ? 2 : 1);
    }
    width += widest;
  }
  return width;
}

export const padded = (text: string, width: number, align: "left" | "right"): string => {
  const gap = " ".repeat(Math.max(0, width - displayWidth(text)));
  return align === "left" ? text + gap : gap + text;
};

/** Lines of at most `width` columns, broken at blanks; what stands between no-break spaces stays on one line. */
export function linesOf(text: string, width: number): string[] {
  return text.split("\n").flatMap((paragraph) => {
    const lines: string[] = [];
    let line = "";
    for (const word of paragraph.split(" ")) {
      const next = line === "" ? word : `${line} ${word}`;
      if (line !== "" && displayWidth(next) > width) {
        lines.push(line);
        line = word;
      } else line = next;
    }
    return [...lines, line];
  });
}

/** A text in lines, the first one after `first`, the others after `indent`; no-break spaces become plain ones once the lines stand. */
export const wrapped = (text: string, width: number, indent = "", first = indent): string =>
  linesOf(text, width - displayWidth(indent))
    .map((line, index) => `${index === 0 ? first : indent}${line}`)
    .join("\n")
    .replaceAll("\u00a0", " ");
