/** A decimal as written: the integer `digits` times ten to the power of `-places`. */
export interface Decimal {
  readonly digits: bigint;
  readonly places: number;
}

const numberPattern = /^[+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?$/;

/** Whether a text is a number: sign, digits, a point, an exponent; nothing else. */
export function isNumberText(text: string): boolean {
  return numberPattern.test(text);
}

/** More decimal places or digits than this are beyond what a measurement means; such a value is taken as its nearest double. */
export const mostDigits = 38;

/** The exact decimal of a number text; null when it has more than 38 digits or its exponent is out of all proportion. */
export function exactDecimal(text: string): Decimal | null {
  const [mantissa, exponentText] = text.toLowerCase().split("e");
  const exponent = exponentText === undefined ? 0 : Number(exponentText);
  const negative = mantissa!.startsWith("-");
  const [whole, fraction = ""] = mantissa!.replace(/^[+-]/, "").split(".");
  let digitText = (whole! + fraction).replace(/^0+(?=\d)/, "");
  if (digitText === "0") return { digits: 0n, places: Math.min(mostDigits, Math.max(0, fraction.length - exponent)) };
  let places = fraction.length - exponent;
  if (places < 0) {
    if (digitText.length - places > mostDigits) return null;
    digitText += "0".repeat(-places);
    places = 0;
  }
  if (digitText.length > mostDigits || places > mostDigits) return null;
  const digits = BigInt(digitText);
  return { digits: negative ? -digits : digits, places };
}

/** A decimal as plain text: sign, digits, point. */
export function decimalText({ digits, places }: Decimal): string {
  const plain = (digits < 0n ? -digits : digits).toString().padStart(places + 1, "0");
  const sign = digits < 0n ? "-" : "";
  return places === 0 ? sign + plain : `${sign}${plain.slice(0, -places)}.${plain.slice(-places)}`;
}

function bitLength(magnitude: bigint): number {
  const text = magnitude.toString(16);
  return text.length * 4 - Math.clz32(Number.parseInt(text[0]!, 16)) + 28;
}

/**
 * A quotient of two integers, correctly rounded to the nearest double.
 * @param denominator not zero
 */
export function ratioToNumber(numerator: bigint, denominator: bigint): number {
  if (numerator === 0n) return 0;
  const negative = numerator < 0n !== denominator < 0n;
  const n = numerator < 0n ? -numerator : numerator;
  const d = denominator < 0n ? -denominator : denominator;
  // Both exact in binary: the division of the machine rounds once, rightly.
  if (n <= 9007199254740991n && d <= 9007199254740991n) return ((negative ? -1 : 1) * Number(n)) / Number(d);
  // 66 bits of quotient and a sticky bit: more than enough to round once, rightly.
  const shift = 66 - (bitLength(n) - bitLength(d));
  const scaled = shift >= 0 ? n << BigInt(shift) : n;
  const divisor = shift >= 0 ? d : d << BigInt(-shift);
  let quotient = scaled / divisor;
  if (quotient * divisor !== scaled) quotient |= 1n;
  let value = Number(quotient);
  for (let rest = -shift; rest !== 0; ) {
    const step = Math.max(-1000, Math.min(1000, rest));
    value *= 2 ** step;
    rest -= step;
  }
  return negative ? -value : value;
}

/** A double as an exact fraction: integer over a power of two. */
export function fractionOf(value: number): { readonly numerator: bigint; readonly denominator: bigint } {
  let scaled = value;
  let power = 0;
  while (!Number.isInteger(scaled)) {
    scaled *= 2;
    power++;
  }
  return { numerator: BigInt(scaled), denominator: 1n << BigInt(power) };
}

/** The exact decimal minus a double, correctly rounded to the nearest double. */
export function decimalMinus(decimal: Decimal, center: number): number {
  const { numerator, denominator } = fractionOf(center);
  const scale = 10n ** BigInt(decimal.places);
  return ratioToNumber(decimal.digits * denominator - numerator * scale, scale * denominator);
}
