/** Exact rational arithmetic on decimal texts, written apart from the code under test: the oracle of this room's tests. */
export interface Fraction {
  readonly n: bigint;
  readonly d: bigint;
}

export const fraction = (n: bigint, d: bigint): Fraction => (d < 0n ? { n: -n, d: -d } : { n, d });
export const minus = (a: Fraction, b: Fraction): Fraction => fraction(a.n * b.d - b.n * a.d, a.d * b.d);
export const plus = (a: Fraction, b: Fraction): Fraction => fraction(a.n * b.d + b.n * a.d, a.d * b.d);
export const times = (a: Fraction, b: Fraction): Fraction => fraction(a.n * b.n, a.d * b.d);
export const over = (a: Fraction, b: Fraction): Fraction => fraction(a.n * b.d, a.d * b.n);
export const magnitude = (a: Fraction): Fraction => (a.n < 0n ? fraction(-a.n, a.d) : a);
export const less = (a: Fraction, b: Fraction): boolean => a.n * b.d < b.n * a.d;

export function ofText(text: string): Fraction {
  const found = /^([+-]?)(\d*)\.?(\d*)(?:[eE]([+-]?\d+))?$/.exec(text.trim().replace("\u2212", "-"))!;
  const [, sign, whole, part, exponent] = found;
  const power = Number(exponent ?? "0") - part!.length;
  const digits = BigInt(`${sign === "-" ? "-" : ""}${whole}${part}` || "0");
  return power >= 0 ? fraction(digits * 10n ** BigInt(power), 1n) : fraction(digits, 10n ** BigInt(-power));
}

const view = new DataView(new ArrayBuffer(8));

/** A double taken apart by its bits. */
export function ofDouble(value: number): Fraction {
  view.setFloat64(0, value);
  const bits = view.getBigUint64(0);
  const exponent = Number((bits >> 52n) & 0x7ffn);
  const mantissa = (bits & 0xfffffffffffffn) | (exponent === 0 ? 0n : 1n << 52n);
  const power = Math.max(exponent, 1) - 1075;
  const signed = bits >> 63n === 1n ? -mantissa : mantissa;
  return power >= 0 ? fraction(signed << BigInt(power), 1n) : fraction(signed, 1n << BigInt(-power));
}

function neighbour(value: number, step: 1n | -1n): number {
  if (value === 0) return step === 1n ? Number.MIN_VALUE : -Number.MIN_VALUE;
  view.setFloat64(0, value);
  view.setBigInt64(0, view.getBigInt64(0) + (value > 0 ? step : -step));
  return view.getFloat64(0);
}

/** Whether no other double is nearer to the exact value. */
export function isNearest(value: number, exact: Fraction): boolean {
  const own = magnitude(minus(ofDouble(value), exact));
  return ([1n, -1n] as const).every((step) => !less(magnitude(minus(ofDouble(neighbour(value, step)), exact)), own));
}

/** Digits in common: minus the decimal logarithm of the relative error; 17 where equal. */
export function logRelativeError(value: number | Fraction, exact: Fraction): number {
  const off = magnitude(minus(typeof value === "number" ? ofDouble(value) : value, exact));
  if (off.n === 0n) return 17;
  const { n, d } = over(off, magnitude(exact));
  // n / d with 40 digits after the point.
  const scaled = (n * 10n ** 40n) / d;
  return scaled === 0n ? 17 : 40 - Math.log10(Number(scaled));
}
