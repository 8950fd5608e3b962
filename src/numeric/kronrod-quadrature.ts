/** Adaptive quadrature with the 21-point Kronrod extension of Gauss-Legendre, for smooth one-dimensional integrands. */

// Kronrod (1964); printed by test/numeric/fixtures/generate-kronrod.py. Nodes on [0, 1), the last is the midpoint.
const nodes = [
  0.9956571630258081, 0.9739065285171717, 0.9301574913557082, 0.8650633666889845, 0.7808177265864169,
  0.6794095682990244, 0.5627571346686047, 0.4333953941292472, 0.2943928627014602, 0.14887433898163122, 0.0,
];
const kronrodWeights = [
  0.011694638867371874, 0.032558162307964725, 0.054755896574351995, 0.07503967481091996, 0.0931254545836976,
  0.10938715880229764, 0.12349197626206584, 0.13470921731147334, 0.14277593857706009, 0.14773910490133849,
  0.1494455540029169,
];
const gaussWeights = [
  0.0, 0.06667134430868814, 0.0, 0.1494513491505806, 0.0, 0.21908636251598204, 0.0, 0.26926671930999635, 0.0,
  0.29552422471475287, 0.0,
];

interface Panel {
  readonly low: number;
  readonly high: number;
  readonly depth: number;
  readonly sum: number;
  /** Kronrod sum less Gauss sum. */
  readonly difference: number;
}

/** Panels start near the scale of the integrand; deeper halving would only chase rounding. */
const deepestHalving = 14;

function panelOf(integrand: (x: number) => number, low: number, high: number, depth: number): Panel {
  const middle = (low + high) / 2;
  const half = (high - low) / 2;
  const centre = integrand(middle);
  let kronrod = kronrodWeights[10]! * centre;
  let gauss = 0;
  for (let i = 0; i < 10; i++) {
    const offset = half * nodes[i]!;
    const pair = integrand(middle - offset) + integrand(middle + offset);
    kronrod += kronrodWeights[i]! * pair;
    gauss += gaussWeights[i]! * pair;
  }
  return { low, high, depth, sum: kronrod * half, difference: Math.abs((kronrod - gauss) * half) };
}

/**
 * Integral of a smooth, non-negative function over consecutive panels, each halved until it is resolved.
 *
 * A panel is accepted when its Gauss and Kronrod sums differ by less than `tolerance` of the whole. The error of the
 * Kronrod sum, which is what counts, is then far smaller (about the square of that difference for analytic integrands).
 *
 * @param integrand finite on the closed range
 * @param breakpoints ascending; the first and the last are the limits of integration
 * @param tolerance relative difference of the two sums at which a panel is accepted
 * @returns the integral
 * @source Kronrod (1964); Piessens, de Doncker, Ueberhuber & Kahaner (1983)
 */
export function integrateAdaptively(
  integrand: (x: number) => number,
  breakpoints: readonly number[],
  tolerance: number,
): number {
  const pending: Panel[] = [];
  let whole = 0;
  for (let i = 0; i + 1 < breakpoints.length; i++) {
    const low = breakpoints[i]!;
    const high = breakpoints[i + 1]!;
    if (!(high > low)) continue;
    const panel = panelOf(integrand, low, high, 0);
    pending.push(panel);
    whole += panel.sum;
  }
  // a NaN would be halved for ever, and an infinite integral is a mistake of the caller
  if (!(whole < Infinity)) throw new Error("the integrand is not finite");
  let accepted = 0;
  for (let panel = pending.pop(); panel !== undefined; panel = pending.pop()) {
    if (panel.difference <= tolerance * whole || panel.depth >= deepestHalving) {
      accepted += panel.sum;
      continue;
    }
    const middle = (panel.low + panel.high) / 2;
    const left = panelOf(integrand, panel.low, middle, panel.depth + 1);
    const right = panelOf(integrand, middle, panel.high, panel.depth + 1);
    whole += left.sum + right.sum - panel.sum;
    pending.push(left, right);
  }
  return accepted;
}

/**
 * Where to cut the range of an integrand that has one peak: from the peak outward at doubling distances, until its log has
 * fallen below `floor`. A panel then never spans much more than its distance to the peak, so that none can be overlooked.
 *
 * @param logIntegrand log of the integrand; falls away from the peak on both sides
 * @param peak place of the peak, roughly
 * @param width about the distance over which the integrand changes there, > 0
 * @param floor log below which the rest is negligible
 * @returns breakpoints, ascending
 */
export function breakpointsAround(
  logIntegrand: (u: number) => number,
  peak: number,
  width: number,
  floor: number,
): number[] {
  const breakpoints = [peak];
  for (const direction of [-1, 1]) {
    let stride = 3 * width * direction;
    let inside = peak;
    let outside = peak + stride;
    while (logIntegrand(outside) > floor) {
      breakpoints.push(outside);
      inside = outside;
      stride *= 2;
      outside += stride;
    }
    for (let i = 0; i < 4; i++) {
      const middle = (inside + outside) / 2;
      if (logIntegrand(middle) > floor) inside = middle;
      else outside = middle;
    }
    breakpoints.push(outside);
  }
  return breakpoints.sort((one, other) => one - other);
}
