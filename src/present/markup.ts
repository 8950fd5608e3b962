/** Escaping for each output form. Every label, level, file name and value passes through one of these. */

/** Characters that would steer a terminal or turn the reading order around. */
// biome-ignore lint/suspicious/noControlCharactersInRegex: control characters are what is taken out
const steering = /[\u0000-\u0008\u000b-\u001f\u007f-\u009f\u200e\u200f\u202a-\u202e\u2066-\u2069]/g;

/** Text without signs that steer; half a character (which no file format takes) becomes a replacement sign. */
export const plainText = (text: string): string => text.replace(steering, "").replace(/\p{Cs}/gu, "\ufffd");

const htmlSigns: Readonly<Record<string, string>> = {
  "&": "&amp;",
  "<": "&lt;",
  ">": "&gt;",
  '"': "&quot;",
  "'": "&#39;",
};
export const escapeHtml = (text: string): string => plainText(text).replace(/[&<>"']/g, (sign) => htmlSigns[sign]!);

const latexSigns: Readonly<Record<string, string>> = {
  "\\": "\\textbackslash{}",
  "{": "\\{",
  "}": "\\}",
  $: "\\$",
  "&": "\\&",
  "#": "\\#",
  _: "\\_",
  "%": "\\%",
  "^": "\\textasciicircum{}",
  "~": "\\textasciitilde{}",
  "\u2212": "$-$",
  "\u221e": "$\\infty$",
  "<": "\\textless{}",
  ">": "\\textgreater{}",
  "\u2013": "--",
  "\u202f": "\\,",
  "\u2265": "$\\geq$",
  "\u2264": "$\\leq$",
  "\u00d7": "$\\times$",
  "\u03b5": "$\\varepsilon$",
  "\u03b7": "$\\eta$",
  "\u03c9": "$\\omega$",
  "\u00b2": "\\textsuperscript{2}",
  "\u2070": "\\textsuperscript{0}",
  "\u00b9": "\\textsuperscript{1}",
  "\u00b3": "\\textsuperscript{3}",
  "\u2074": "\\textsuperscript{4}",
  "\u2075": "\\textsuperscript{5}",
  "\u2076": "\\textsuperscript{6}",
  "\u2077": "\\textsuperscript{7}",
  "\u2078": "\\textsuperscript{8}",
  "\u2079": "\\textsuperscript{9}",
  "\u207b": "\\textsuperscript{--}",
  "\u00a0": "~",
  "\u00b1": "$\\pm$",
  "\u03c7": "$\\chi$",
  "\u2026": "\\ldots{}",
  "\u2022": "\\textbullet{}",
  "\u25a0": "\\rule{1ex}{1ex}",
  "\u25b2": "$\\triangle$",
  "\u25cb": "$\\circ$",
  "\u25c7": "$\\diamond$",
};
export const escapeLatex = (text: string): string =>
  [...plainText(text)]
    .map((sign) => latexSigns[sign] ?? sign)
    .join("")
    .replace(/\n/g, " ");

export const escapeMarkdown = (text: string): string =>
  plainText(text)
    .replace(/[\\`*_{}[\]<>|#$~&]/g, "\\$&")
    .replace(/\s*\n\s*/g, " ")
    .replace(/^(\s*)([-+]|\d+\.)(?=\s)/gm, "$1\\$2");

/** A piece of markup that is already safe. */
export class Markup {
  readonly text: string;
  constructor(text: string) {
    this.text = text;
  }
}

/** Safe HTML from a template: everything filled in is escaped unless it is markup already. */
export function html(
  strings: TemplateStringsArray,
  ...values: readonly (string | number | Markup | readonly Markup[] | null)[]
): Markup {
  let text = strings[0]!;
  for (const [index, value] of values.entries()) {
    if (value instanceof Markup) text += value.text;
    else if (Array.isArray(value)) text += value.map((part: Markup) => part.text).join("");
    else if (value !== null) text += escapeHtml(String(value));
    text += strings[index + 1]!;
  }
  return new Markup(text);
}
