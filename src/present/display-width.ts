/** Columns that a text takes in a terminal: wide East Asian signs and emoji take two, combining marks none. */
export function displayWidth(text: string): number {
  let width = 0;
  for (const sign of text) {
    if (/\p{M}|\u200d|\ufe0f/u.test(sign)) continue;
    const code = sign.codePointAt(0)!;
    const wide =
      (code >= 0x1100 && code <= 0x115f) ||
      (code >= 0x2e80 && code <= 0xa4cf) ||
      (code >= 0xac00 && code <= 0xd7a3) ||
      (code >= 0xf900 && code <= 0xfaff) ||
      (code >= 0xfe30 && code <= 0xfe6f) ||
      (code >= 0xff00 && code <= 0xff60) ||
      (code >= 0xffe0 && code <= 0xffe6) ||
      (code >= 0x1f300 && code <= 0x1faff) ||
      (code >= 0x20000 && code <= 0x3fffd);
    width += wide ? 2 : 1;
  }
  return width;
}

export const padded = (text: string, width: number, align: "left" | "right"): string => {
  const gap = " ".repeat(Math.max(0, width - displayWidth(text)));
  return align === "left" ? text + gap : gap + text;
};

/** Breaks a text at blanks into lines of at most `width` columns. */
export function wrapped(text: string, width: number, indent = ""): string {
  return text
    .split("\n")
    .map((paragraph) => {
      const lines: string[] = [];
      let line = "";
      for (const word of paragraph.split(" ")) {
        const next = line === "" ? word : `${line} ${word}`;
        if (line !== "" && displayWidth(indent + next) > width) {
          lines.push(line);
          line = word;
        } else line = next;
      }
      lines.push(line);
      return lines.map((part, index) => (index === 0 ? part : indent + part)).join("\n");
    })
    .join("\n");
}
