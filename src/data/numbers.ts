import { exactDecimal, fractionOf, isNumberText, ratioToNumber } from "./decimal.ts";
import type { NumberColumn, TextCodes } from "./types.ts";

/** A numeric column keeps its texts for use as factor or unit up to so many distinct ones. */
const mostTexts = 20_000;
/** A constant part this many times larger than the variation is taken out exactly, whatever it is. */
const largeConstant = 1e3;

/** Powers of ten that a double holds exactly. */
const exactPowers = Array.from({ length: 23 }, (_, power) => Number(`1e${power}`));

/** `m / 10^places` of a safe integer text, without BigInt; null where that is not exact. */
function smallDecimal(text: string): { readonly units: number; readonly places: number } | null {
  let units = 0;
  let places = -1;
  let index = 0;
  const first = text.charCodeAt(0);
  const negative = first === 45;
  if (first === 45 || first === 43) index = 1;
  for (let count = 0; index < text.length; index++) {
    const code = text.charCodeAt(index);
    if (code === 46) {
      if (places >= 0) return null;
      places = 0;
    } else if (code >= 48 && code <= 57) {
      if (++count > 15) return null;
      units = units * 10 + (code - 48);
      if (places >= 0) places++;
    } else return null;
  }
  return { units: negative ? -units : units, places: Math.max(places, 0) };
}

/** Exact intake by safe integers; null when some value needs more. */
function smallColumn(categories: readonly string[]): { readonly units: Float64Array; readonly places: number } | null {
  let places = 0;
  const parts = new Array<{ units: number; places: number }>(categories.length);
  for (let index = 0; index < categories.length; index++) {
    const part = smallDecimal(categories[index]!);
    if (part === null) return null;
    parts[index] = part;
    if (part.places > places) places = part.places;
  }
  if (places > 15) return null;
  const units = new Float64Array(categories.length);
  for (let index = 0; index < units.length; index++) {
    const { units: own, places: had } = parts[index]!;
    units[index] = own * exactPowers[places - had]!;
    if (Math.abs(units[index]!) > Number.MAX_SAFE_INTEGER) return null;
  }
  return { units, places };
}

interface Centred {
  readonly center: number;
  readonly values: Float64Array;
  readonly decimals: number;
}

function centredSmall(categories: readonly string[]): Centred | null {
  const small = smallColumn(categories);
  if (small === null || categories.length === 0) return null;
  const scale = exactPowers[small.places]!;
  let low = Number.POSITIVE_INFINITY;
  let high = Number.NEGATIVE_INFINITY;
  for (const value of small.units) {
    if (value < low) low = value;
    if (value > high) high = value;
  }
  const center = Math.round((low / 2 + high / 2) / scale);
  const shift = center * scale;
  if (!Number.isSafeInteger(shift)) return null;
  // Where the whole number in the middle leaves a constant part that dwarfs the variation, the exact route takes it out.
  if (high > low && Math.max(Math.abs(low - shift), Math.abs(high - shift)) > largeConstant * (high - low)) return null;
  return { center, values: small.units.map((value) => (value - shift) / scale), decimals: small.places };
}

function centredExactly(categories: readonly string[]): Centred | null {
  const parts = categories.map(exactDecimal);
  if (parts.some((part) => part === null)) return null;
  const places = parts.reduce((most, part) => Math.max(most, part!.places), 0);
  const scale = 10n ** BigInt(places);
  const units = parts.map((part) => part!.digits * 10n ** BigInt(places - part!.places));
  if (units.length === 0) return { center: 0, values: new Float64Array(), decimals: places };
  const low = units.reduce((least, value) => (value < least ? value : least));
  const high = units.reduce((most, value) => (value > most ? value : most));
  const whole = Math.round(ratioToNumber(low + high, 2n * scale));
  const farthest = (center: number) =>
    Math.max(Math.abs(ratioToNumber(low, scale) - center), Math.abs(ratioToNumber(high, scale) - center));
  const range = ratioToNumber(high - low, scale);
  const center =
    Number.isSafeInteger(whole) && farthest(whole) <= largeConstant * range
      ? whole
      : ratioToNumber(low + high, 2n * scale);
  const { numerator, denominator } = fractionOf(center);
  const values = Float64Array.from(units, (value) =>
    ratioToNumber(value * denominator - numerator * scale, scale * denominator),
  );
  return { center, values, decimals: places };
}

/**
 * A numeric column from its texts, exactly: the constant part is taken out in decimal arithmetic before anything becomes binary.
 * @param texts codes and categories; every category is a number text
 */
export function numberColumn(name: string, texts: TextCodes): NumberColumn {
  const { codes, categories } = texts;
  const used = categories.length === 0 ? null : (centredSmall(categories) ?? centredExactly(categories));
  const { center, values, decimals } = used ?? {
    center: 0,
    values: Float64Array.from(categories, Number),
    decimals: null,
  };
  return {
    kind: "number",
    name,
    center,
    offsets: Float64Array.from(codes, (code) => (code < 0 ? Number.NaN : values[code]!)),
    texts: categories.length <= mostTexts ? texts : null,
    decimals,
  };
}

/** A numeric column of computed doubles; NaN is missing. Centred on a double near the middle, exactly where that is possible. */
export function computedColumn(name: string, values: Float64Array): NumberColumn {
  return { kind: "number", name, center: 0, offsets: values, texts: null, decimals: null };
}

export const allNumbers = (categories: readonly string[]): boolean => categories.every(isNumberText);
