import { DomainError } from "./domain-error.ts";

export interface Root {
  readonly x: number;
  /** Value of the function there. */
  readonly value: number;
  readonly iterations: number;
}

/**
 * A zero of a continuous function between two points where its signs differ.
 *
 * @param low one end
 * @param high the other end
 * @param tolerance absolute uncertainty of x that is allowed, besides its rounding; 0 asks for the last digit
 * @throws DomainError when the signs at the ends are the same, or the function is not a number there
 * @source Brent (1973), Algorithms for Minimization without Derivatives, chapter 4
 */
export function findRoot(f: (x: number) => number, low: number, high: number, tolerance = 0): Root {
  let a = low;
  let b = high;
  let fa = f(a);
  let fb = f(b);
  if (fa === 0) return { x: a, value: 0, iterations: 0 };
  if (fb === 0) return { x: b, value: 0, iterations: 0 };
  if (!(fa < 0 !== fb < 0) || Number.isNaN(fa) || Number.isNaN(fb)) {
    throw new DomainError(
      "low, high",
      `${low}, ${high}`,
      `ends where the function has different signs (it is ${fa} and ${fb})`,
    );
  }
  let c = a;
  let fc = fa;
  let step = b - a;
  let before = step;
  for (let iterations = 1; iterations <= 500; iterations++) {
    if (Math.abs(fc) < Math.abs(fb)) {
      a = b;
      b = c;
      c = a;
      fa = fb;
      fb = fc;
      fc = fa;
    }
    const allowed = 2 * Number.EPSILON * Math.abs(b) + tolerance / 2;
    const middle = (c - b) / 2;
    if (Math.abs(middle) <= allowed || fb === 0) return { x: b, value: fb, iterations };
    if (Math.abs(before) >= allowed && Math.abs(fa) > Math.abs(fb)) {
      const s = fb / fa;
      let p: number;
      let q: number;
      if (a === c) {
        p = 2 * middle * s;
        q = 1 - s;
      } else {
        const r = fb / fc;
        const t = fa / fc;
        p = s * (2 * middle * t * (t - r) - (b - a) * (r - 1));
        q = (t - 1) * (r - 1) * (s - 1);
      }
      if (p > 0) q = -q;
      else p = -p;
      if (2 * p < Math.min(3 * middle * q - Math.abs(allowed * q), Math.abs(before * q))) {
        before = step;
        step = p / q;
      } else {
        step = middle;
        before = middle;
      }
    } else {
      step = middle;
      before = middle;
    }
    a = b;
    fa = fb;
    b += Math.abs(step) > allowed ? step : middle > 0 ? allowed : -allowed;
    fb = f(b);
    if (Number.isNaN(fb)) throw new DomainError("f", fb, `a number at ${b}`);
    if (fb > 0 === fc > 0) {
      c = a;
      fc = fa;
      step = b - a;
      before = step;
    }
  }
  return { x: b, value: fb, iterations: 500 };
}
