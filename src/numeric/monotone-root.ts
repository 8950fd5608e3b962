/** Root of an increasing function of one variable, for quantiles and for limits of intervals. */

/**
 * The next point of an iteration that knows on which side of its points the root lies: the proposal where it stays between
 * the nearest points on either side, else the middle between them, else a stride outward.
 */
export function guardedStep(proposal: number, current: number, low: number, high: number): number {
  if (proposal > low && proposal < high) return proposal;
  if (low > -Infinity && high < Infinity) return low + (high - low) / 2;
  const stride = Math.max(1, Math.abs(current));
  return low > -Infinity ? current + stride : current - stride;
}

/**
 * The x at which an increasing function is zero: brackets outward from a start, then inverse quadratic interpolation
 * where it is safe and halving where it is not.
 *
 * @param f increasing; may be +-Infinity at the ends
 * @param start first guess
 * @param step first distance to search outward, > 0; doubled until the root is enclosed
 * @param low smallest allowed x (where f is taken to be <= 0)
 * @param high largest allowed x (where f is taken to be >= 0)
 * @returns x, to about its last digits; `low` or `high` when the root lies beyond
 * @source Chandrupatla (1997), Advances in Engineering Software 28, 145-149
 */
export function increasingRoot(
  f: (x: number) => number,
  start: number,
  step: number,
  low = -Infinity,
  high = Infinity,
): number {
  let left = Math.min(Math.max(start, low), high);
  let right = left;
  let fLeft = f(left);
  let fRight = fLeft;
  if (fLeft === 0) return left;
  let width = step;
  if (fLeft < 0) {
    do {
      if (right >= high) return high;
      left = right;
      fLeft = fRight;
      right = Math.min(high, right + width);
      fRight = f(right);
      width *= 2;
    } while (fRight < 0);
  } else {
    do {
      if (left <= low) return low;
      right = left;
      fRight = fLeft;
      left = Math.max(low, left - width);
      fLeft = f(left);
      width *= 2;
    } while (fLeft > 0);
  }
  let newest = right;
  let fNewest = fRight;
  let opposite = left;
  let fOpposite = fLeft;
  let fraction = fNewest / (fNewest - fOpposite);
  if (!(fraction > 0 && fraction < 1)) fraction = 0.5;
  for (let iteration = 0; iteration < 200; iteration++) {
    const x = newest + fraction * (opposite - newest);
    const value = f(x);
    let older: number;
    let fOlder: number;
    if (value > 0 === fNewest > 0) {
      older = newest;
      fOlder = fNewest;
    } else {
      older = opposite;
      fOlder = fOpposite;
      opposite = newest;
      fOpposite = fNewest;
    }
    newest = x;
    fNewest = value;
    const best = Math.abs(fNewest) < Math.abs(fOpposite) ? newest : opposite;
    const smallestFraction = (4e-16 * Math.abs(best) + Number.MIN_VALUE) / Math.abs(opposite - newest);
    if (smallestFraction > 0.5 || value === 0) return value === 0 ? newest : best;
    const xi = (newest - opposite) / (older - opposite);
    const phi = (fNewest - fOpposite) / (fOlder - fOpposite);
    fraction =
      phi * phi < xi && (1 - phi) * (1 - phi) < 1 - xi
        ? (fNewest / (fOpposite - fNewest)) * (fOlder / (fOpposite - fOlder)) +
          ((older - newest) / (opposite - newest)) * (fNewest / (fOlder - fNewest)) * (fOpposite / (fOlder - fOpposite))
        : 0.5;
    fraction = Math.min(1 - smallestFraction, Math.max(smallestFraction, fraction));
  }
  return newest;
}
