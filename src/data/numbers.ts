import { type Decimal, exactDecimal, fractionOf, isNumberText, ratioToNumber } from "./decimal.ts";
import { DataProblem } from "./problem.ts";
import type { NumberColumn, TextCodes } from "./types.ts";

/** A numeric column keeps its texts for use as factor or unit up to so many distinct ones. */
export const mostTexts = 20_000;
/** A constant part this many times larger than the variation is taken out exactly, whatever it is. */
const largeConstant = 1e3;

/** Powers of ten that a double holds exactly. */
export const exactPowers: readonly number[] = Array.from({ length: 23 }, (_, power) => Number(`1e${power}`));

/**
 * Decimals of at most 15 digits: `units[index] / 10^places[index]`, both exact. Where `places` is -1 the value needs
 * more and stands only in its text.
 */
export interface SmallDecimals {
  readonly units: Float64Array;
  readonly places: Int8Array;
}

/** What `parseSmall` found in a range of bytes. */
export const parsed = { small: 0, large: 1, notNumber: 2 } as const;
export type Parsed = (typeof parsed)[keyof typeof parsed];

/**
 * Reads a number from ASCII bytes without making a text of it.
 * @param point byte of the decimal sign, 46 or 44
 * @param into units and places at `index` are set when the answer is `parsed.small`
 */
export function parseSmall(
  bytes: Uint8Array,
  start: number,
  end: number,
  point: number,
  into: SmallDecimals,
  index: number,
): Parsed {
  let position = start;
  let negative = false;
  let code = bytes[position]!;
  if (code === 45 || code === 43) {
    negative = code === 45;
    position++;
  } else if (code === 0xe2 && bytes[position + 1] === 0x88 && bytes[position + 2] === 0x92 && end - start > 3) {
    // U+2212, the typographic minus.
    negative = true;
    position += 3;
  }
  let units = 0;
  let significant = 0;
  let digits = 0;
  let places = -1;
  for (; position < end; position++) {
    code = bytes[position]!;
    const digit = code - 48;
    if (digit >= 0 && digit <= 9) {
      digits++;
      if (significant > 0 || digit > 0) significant++;
      if (significant <= 15) units = units * 10 + digit;
      if (places >= 0) places++;
    } else if (code === point && places < 0) places = 0;
    else break;
  }
  if (digits === 0) return parsed.notNumber;
  if (places < 0) places = 0;
  if (position < end) {
    if (code !== 101 && code !== 69) return parsed.notNumber;
    position++;
    let down = false;
    code = bytes[position]!;
    if (position < end && (code === 45 || code === 43)) {
      down = code === 45;
      position++;
    }
    const first = position;
    let exponent = 0;
    for (; position < end; position++) {
      const digit = bytes[position]! - 48;
      if (digit < 0 || digit > 9) return parsed.notNumber;
      if (exponent < 10_000) exponent = exponent * 10 + digit;
    }
    if (position === first) return parsed.notNumber;
    places += down ? exponent : -exponent;
    if (places < 0 && places >= -15 && significant <= 15) {
      units *= exactPowers[-places]!;
      places = 0;
    }
  }
  if (significant > 15 || places < 0 || places > 22 || units > Number.MAX_SAFE_INTEGER) return parsed.large;
  into.units[index] = negative && units !== 0 ? -units : units;
  into.places[index] = places;
  return parsed.small;
}

interface Centred {
  readonly center: number;
  readonly values: Float64Array;
  readonly decimals: number;
}

/** Centres decimals of at most 15 digits by arithmetic on safe integers; null when some value needs more. */
function centredSmall({ units: given, places }: SmallDecimals): Centred | null {
  let most = 0;
  for (const own of places) {
    if (own < 0) return null;
    if (own > most) most = own;
  }
  const units = new Float64Array(given.length);
  let low = Number.POSITIVE_INFINITY;
  let high = Number.NEGATIVE_INFINITY;
  for (let index = 0; index < units.length; index++) {
    const value = given[index]! * exactPowers[most - places[index]!]!;
    if (!(Math.abs(value) <= Number.MAX_SAFE_INTEGER)) return null;
    if (value < low) low = value;
    if (value > high) high = value;
    units[index] = value;
  }
  const scale = exactPowers[most]!;
  const center = units.length === 0 ? 0 : Math.round((low / 2 + high / 2) / scale);
  const shift = center * scale;
  if (!Number.isSafeInteger(shift) || !Number.isSafeInteger(low - shift) || !Number.isSafeInteger(high - shift))
    return null;
  // Where the whole number in the middle leaves a constant part that dwarfs the variation, the exact route takes it out.
  if (high > low && Math.max(Math.abs(low - shift), Math.abs(high - shift)) > largeConstant * (high - low)) return null;
  for (let index = 0; index < units.length; index++) units[index] = (units[index]! - shift) / scale;
  return { center, values: units, decimals: most };
}

function centredExactly(parts: readonly Decimal[]): Centred {
  const places = parts.reduce((most, part) => Math.max(most, part.places), 0);
  const scale = 10n ** BigInt(places);
  const powers = Array.from({ length: places + 1 }, (_, power) => 10n ** BigInt(power));
  const units = parts.map((part) => part.digits * powers[places - part.places]!);
  let low = units[0]!;
  let high = units[0]!;
  for (const value of units) {
    if (value < low) low = value;
    else if (value > high) high = value;
  }
  const whole = Math.round(ratioToNumber(low + high, 2n * scale));
  const farthest = (center: number) =>
    Math.max(Math.abs(ratioToNumber(low, scale) - center), Math.abs(ratioToNumber(high, scale) - center));
  const range = ratioToNumber(high - low, scale);
  const center =
    Number.isSafeInteger(whole) && farthest(whole) <= largeConstant * range
      ? whole
      : ratioToNumber(low + high, 2n * scale);
  const { numerator, denominator } = fractionOf(center);
  const shift = numerator * scale;
  const divisor = scale * denominator;
  return {
    center,
    values: Float64Array.from(units, (value) =>
      ratioToNumber((denominator === 1n ? value : value * denominator) - shift, divisor),
    ),
    decimals: places,
  };
}

/**
 * Centres the distinct decimals of a column.
 * @param small as far as they fit
 * @param textOf the number text of an index, with a decimal point and a plain minus
 * @returns values minus centre per index; decimals null where some value has more than 38 digits, so that doubles were taken
 */
export function centredDecimals(
  small: SmallDecimals,
  textOf: (index: number) => string,
): { readonly center: number; readonly values: Float64Array; readonly decimals: number | null } {
  const easy = centredSmall(small);
  if (easy !== null) return easy;
  const parts: Decimal[] = [];
  for (let index = 0; index < small.units.length; index++) {
    const places = small.places[index]!;
    const part = places >= 0 ? { digits: BigInt(small.units[index]!), places } : exactDecimal(textOf(index));
    if (part === null) {
      const values = Float64Array.from(small.units, (_, other) => Number(textOf(other)));
      return { center: 0, values, decimals: null };
    }
    parts.push(part);
  }
  return centredExactly(parts);
}

const encoder = new TextEncoder();

/** `1234,5` with the decimal comma becomes `1234.5`; the typographic minus becomes the plain one. */
export function plainNumber(text: string, decimal: "." | ","): string {
  const plain = text.charCodeAt(0) === 0x2212 ? `-${text.slice(1)}` : text;
  if (decimal === ".") return plain;
  return plain.includes(".") ? "not a number" : plain.replace(",", ".");
}

/**
 * A numeric column from its texts, exactly: the constant part is taken out in decimal arithmetic before anything becomes binary.
 * @param texts codes and categories; every category is a number text with a decimal point
 * @throws DataProblem "number-too-large" where a value is beyond what a double holds
 */
export function numberColumn(name: string, texts: TextCodes): NumberColumn {
  const { codes, categories } = texts;
  const small = { units: new Float64Array(categories.length), places: new Int8Array(categories.length).fill(-1) };
  const buffer = new Uint8Array(64);
  for (const [index, category] of categories.entries()) {
    if (category.length > 60) continue;
    parseSmall(buffer, 0, encoder.encodeInto(category, buffer).written, 46, small, index);
  }
  const { center, values, decimals } = centredDecimals(small, (index) => plainNumber(categories[index]!, "."));
  refuseInfinite(name, values, (index) => categories[index]!);
  return {
    kind: "number",
    name,
    center,
    offsets: spread(codes, values),
    texts: categories.length <= mostTexts ? texts : null,
    decimals,
  };
}

/** Value per row from value per category; missing is NaN. */
export function spread(codes: Int32Array, values: Float64Array): Float64Array {
  const offsets = new Float64Array(codes.length);
  for (let row = 0; row < codes.length; row++) offsets[row] = codes[row]! < 0 ? Number.NaN : values[codes[row]!]!;
  return offsets;
}

/** @throws DataProblem "number-too-large" */
export function refuseInfinite(
  name: string,
  values: Float64Array,
  textOf: (index: number) => string,
  rowOf?: (index: number) => number,
): void {
  const index = values.findIndex((value) => !Number.isFinite(value));
  if (index < 0) return;
  const place = rowOf === undefined ? {} : { row: rowOf(index) };
  throw new DataProblem("number-too-large", { column: name, value: textOf(index), ...place });
}

/** A numeric column of computed doubles; NaN is missing. */
export function computedColumn(name: string, values: Float64Array): NumberColumn {
  return { kind: "number", name, center: 0, offsets: values, texts: null, decimals: null };
}

export const allNumbers = (categories: readonly string[]): boolean => categories.every(isNumberText);

/**
 * Reads a column's values as the doubles nearest to its decimals; NaN where missing. Adding centre and offset alone would
 * leave the last digits of a small value beside a large centre wrong.
 */
export function nearestValues(column: NumberColumn): (row: number) => number {
  const { center, offsets, texts, decimals } = column;
  if (texts !== null) {
    const values = Float64Array.from(texts.categories, (text) => Number(plainNumber(text, ".")));
    return (row) => (Number.isNaN(offsets[row]!) ? Number.NaN : values[texts.codes[row]!]!);
  }
  const scale = decimals !== null && decimals <= 22 ? exactPowers[decimals]! : 0;
  if (scale === 0 || Math.abs(center) * scale > 2 ** 51) return (row) => center + offsets[row]!;
  return (row) => {
    const units = Math.round((center + offsets[row]!) * scale);
    return Math.abs(units) <= 2 ** 51 ? units / scale : center + offsets[row]!;
  };
}
