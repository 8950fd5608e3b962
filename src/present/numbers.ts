/** Numbers as papers print them. Rounding happens here and nowhere else; the results themselves stay unrounded. */

/** The sign a paper sets: U+2212. */
const minus = "\u2212";

export const signed = (text: string): string => text.replace(/^-/, minus);

const superscripts = "\u2070\u00b9\u00b2\u00b3\u2074\u2075\u2076\u2077\u2078\u2079";

/** "1.50 \u00d7 10\u00b9\u2070": a number in powers of ten, with so many decimals before the power. */
function inPowersOfTen(value: number, decimals: number): string {
  const [front, power] = value.toExponential(decimals).split("e") as [string, string];
  const raised = [...power.replace("+", "")]
    .map((digit) => (digit === "-" ? "\u207b" : superscripts[Number(digit)]!))
    .join("");
  return `${signed(front)} \u00d7 10${raised}`;
}

/** Decimal places that show a standard error with two digits; between 0 and 10. */
export function placesFor(standardError: number | null | undefined): number | null {
  if (standardError === null || standardError === undefined || !(standardError > 0) || !Number.isFinite(standardError))
    return null;
  return Math.max(0, Math.min(10, 1 - Math.floor(Math.log10(standardError))));
}

/** A number with so many decimal places; very large and very small ones in powers of ten. */
export function fixed(value: number | null | undefined, places: number): string {
  if (value === null || value === undefined) return "\u2013";
  const size = Math.abs(value);
  if (size >= 1e9 || (size !== 0 && size < 10 ** -places / 2 && places >= 6))
    return inPowersOfTen(value, Math.min(places, 4));
  const text = value.toFixed(places);
  // A rounded zero carries no sign.
  return signed(/^-0(?:\.0*)?$/.test(text) ? text.slice(1) : text);
}

/** A number with so many significant digits, without needless zeros for whole numbers. */
export function significant(value: number | null | undefined, digits = 4): string {
  if (value === null || value === undefined) return "\u2013";
  if (Number.isInteger(value) && Math.abs(value) < 1e9) return signed(String(value));
  if (value !== 0 && (Math.abs(value) >= 1e9 || Math.abs(value) < 1e-5)) return inPowersOfTen(value, digits - 1);
  const places = value === 0 ? 0 : Math.max(0, digits - 1 - Math.floor(Math.log10(Math.abs(value))));
  return fixed(value, Math.min(places, 12));
}

/** A number of the data as it stands there: all its digits, none added. */
export const plainNumber = (value: number): string => signed(String(Number(value.toPrecision(15))));

/** Three decimals, a fourth where three would read as just 0.050; below that, said so. p is never printed as 0. */
export function pText(p: number | null | undefined): string {
  if (p === null || p === undefined) return "\u2013";
  if (p < 0.001) return "< 0.001";
  if (p > 0.9995) return "> 0.999";
  const text = p.toFixed(3);
  return text === "0.050" ? p.toFixed(4).replace(/0$/, "") : text;
}

/** `p = 0.034` or `p < 0.001`, for sentences. */
export function pClause(p: number, name = "p"): string {
  const text = pText(p);
  return text.startsWith("<") || text.startsWith(">") ? `${name} ${text}` : `${name} = ${text}`;
}

/** Degrees of freedom: whole ones plain, fractional ones with two decimals. */
export function dfText(df: number | null | undefined): string {
  if (df === null || df === undefined) return "\u221e";
  return Math.abs(df - Math.round(df)) < 1e-6 ? String(Math.round(df)) : df.toFixed(df < 1000 ? 2 : 0);
}

/** `95%`, `97.5%`. */
export function percentText(share: number, places?: number): string {
  const value = share * 100;
  if (places !== undefined) return `${signed(value.toFixed(places))}%`;
  return `${signed(String(Number(value.toPrecision(6))))}%`;
}

/** `[1.2, 3.4]`, with an open end where there is no bound. */
export function intervalText(lower: number | null, upper: number | null, places: number): string {
  if (lower === null && upper === null) return "\u2013";
  const low = lower === null ? `(${minus}\u221e` : `[${fixed(lower, places)}`;
  const high = upper === null ? "\u221e)" : `${fixed(upper, places)}]`;
  return `${low}, ${high}`;
}

export const countText = (count: number): string =>
  count >= 10_000 ? count.toLocaleString("en-US").replace(/,/g, "\u202f") : String(count);

/** The English plural of a word, as far as spelling rules go. */
export const plural = (word: string): string =>
  /(?:s|x|z|ch|sh)$/.test(word) ? `${word}es` : /[^aeiou]y$/.test(word) ? `${word.slice(0, -1)}ies` : `${word}s`;

/** "1 subject", "2 subjects", "2 observations". */
export const counted = (count: number, one: string, many = plural(one)): string =>
  `${countText(count)} ${count === 1 ? one : many}`;

/** "a", "a and b", "a, b and c". */
export function listed(parts: readonly string[]): string {
  return parts.length <= 1 ? parts.join("") : `${parts.slice(0, -1).join(", ")} and ${parts.at(-1)}`;
}
