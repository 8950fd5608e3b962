import { ModelError } from "../model-error.ts";
import { choleskyInPlace, solveFromFactor } from "./block-algebra.ts";
import type { Criterion, Engine, Evaluation } from "./engine.ts";
import type { ParameterMap } from "./parameter-map.ts";

export interface Fit {
  readonly theta: Float64Array;
  readonly phi: Float64Array;
  readonly evaluation: Evaluation;
  /** Coordinates that ended on their lower bound, with the deviance rising away from it. */
  readonly onBound: readonly number[];
  readonly iterations: number;
}

const mostIterations = 300;
const earlySteps = 3;
/** The most that rounding may leave of it before the search counts as failed. */
const acceptable = 1e-11;
/** The same after many idle steps: a ten-thousandth of a standard error. */
const barelyAcceptable = 1e-8;
const mostIdle = 40;

interface Direction {
  readonly step: Float64Array;
  /** Downhill whatever the bounds do: minus the gradient in the scale of the information's diagonal. */
  readonly steepest: Float64Array;
  /** Predicted fall of the deviance, times two: squared distance in standard errors. */
  readonly decrement: number;
  readonly held: readonly number[];
}

/** J' matrix J for the active parameters, size x size. */
function carried(matrix: Float64Array, jacobian: Float64Array, size: number, active: readonly number[]): Float64Array {
  const r = active.length;
  const half = new Float64Array(r * size);
  const out = new Float64Array(size * size);
  for (let k = 0; k < r; k++) {
    for (let l = 0; l < r; l++) {
      const value = matrix[k * r + l]!;
      for (let i = 0; i < size; i++) half[k * size + i]! += value * jacobian[active[l]! * size + i]!;
    }
  }
  for (let k = 0; k < r; k++) {
    for (let i = 0; i < size; i++) {
      const value = jacobian[active[k]! * size + i]!;
      if (value === 0) continue;
      for (let j = 0; j < size; j++) out[i * size + j]! += value * half[k * size + j]!;
    }
  }
  return out;
}

/**
 * Step of the coordinates that may move; coordinates on their bound whose deviance rises inwards are held. The distance left is
 * always measured by the information; the step is Newton's where the second derivatives are known and positive definite and the
 * optimum is near, a scoring step otherwise.
 */
function direction(
  evaluation: Evaluation,
  map: ParameterMap,
  phi: Float64Array,
  active: readonly number[],
  near: boolean,
  early: boolean,
): Direction {
  const jacobian = map.jacobian(phi);
  const { size } = map;
  const gradient = new Float64Array(size);
  for (const [k, index] of active.entries()) {
    for (let i = 0; i < size; i++) gradient[i]! += jacobian[index * size + i]! * evaluation.gradient[k]!;
  }
  const slopes = new Float64Array(jacobian.length / size);
  for (const [k, index] of active.entries()) slopes[index] = evaluation.gradient[k]!;
  const plain = carried(evaluation.information, jacobian, size, active).map((value) => 2 * value);
  // Where a covariance matrix loses a dimension its Cholesky coordinates flatten out; their own curvature then tells how far
  // the optimum is, and the information alone would send the step to infinity.
  const information = plain.slice();
  map.addCurvature(slopes, information);
  const held: number[] = [];
  const free: number[] = [];
  for (let i = 0; i < size; i++) {
    if (phi[i]! <= map.lower[i]! && gradient[i]! >= 0) held.push(i);
    else free.push(i);
  }
  const step = new Float64Array(size);
  if (free.length === 0) return { step, steepest: step, decrement: 0, held };
  let bent = solveFree(information, gradient, free, size, false);
  if (bent === null) {
    // Downhill curvature: its size, with the sign that keeps the step downhill.
    for (let i = 0; i < size; i++)
      information[i * size + i] = plain[i * size + i]! + Math.abs(information[i * size + i]! - plain[i * size + i]!);
    for (let i = 0; i < size; i++) {
      for (let j = 0; j < size; j++) if (i !== j) information[i * size + j] = plain[i * size + j]!;
    }
    bent = solveFree(information, gradient, free, size, false);
  }
  const scored = bent ?? solveFree(plain, gradient, free, size);
  let decrement = 0;
  for (const [a, i] of free.entries()) decrement -= scored[a]! * gradient[i]!;
  let used: Float64Array = scored;
  let curvature: Float64Array = bent === null ? plain : information;
  if (near && evaluation.hessian !== null) {
    const hessian = carried(evaluation.hessian, jacobian, size, active);
    map.addCurvature(slopes, hessian);
    const newton = solveFree(hessian, gradient, free, size, false);
    if (newton !== null) {
      used = newton;
      curvature = hessian;
    }
  }
  for (const [a, i] of free.entries()) step[i] = used[a]!;
  stopAtBounds(curvature, gradient, free, lowest(map, phi, early), phi, step);
  const steepest = new Float64Array(size);
  for (const i of free) steepest[i] = -gradient[i]! / Math.max(plain[i * size + i]!, Number.MIN_VALUE);
  return { step, steepest, decrement, held };
}

/** In the first steps a variance falls to a tenth at most: from its bound it would only come back slowly. */
function lowest(map: ParameterMap, phi: Float64Array, early: boolean): Float64Array {
  if (!early) return map.lower;
  return map.lower.map((bound, i) => (bound === Number.NEGATIVE_INFINITY ? bound : Math.max(bound, 0.1 * phi[i]!)));
}

/** Where the step would leave the bounds it ends on them, and the other coordinates answer to that. */
function stopAtBounds(
  curvature: Float64Array,
  gradient: Float64Array,
  free: readonly number[],
  lower: Float64Array,
  phi: Float64Array,
  step: Float64Array,
): void {
  const size = phi.length;
  const stopped = new Set<number>();
  for (;;) {
    const crossing = free.filter((i) => !stopped.has(i) && phi[i]! + step[i]! < lower[i]!);
    if (crossing.length === 0) return;
    for (const i of crossing) {
      stopped.add(i);
      step[i] = lower[i]! - phi[i]!;
    }
    const rest = free.filter((i) => !stopped.has(i));
    if (rest.length === 0) return;
    const adjusted = gradient.slice();
    for (const i of rest) for (const j of stopped) adjusted[i]! += curvature[i * size + j]! * step[j]!;
    const solved = solveFree(curvature, adjusted, rest, size);
    for (const [a, i] of rest.entries()) step[i] = solved[a]!;
  }
}

/** -matrix^-1 gradient in the free coordinates; damped as far as needed, or null where it would have to be. */
function solveFree(matrix: Float64Array, gradient: Float64Array, free: readonly number[], size: number): Float64Array;
function solveFree(
  matrix: Float64Array,
  gradient: Float64Array,
  free: readonly number[],
  size: number,
  damp: false,
): Float64Array | null;
function solveFree(
  matrix: Float64Array,
  gradient: Float64Array,
  free: readonly number[],
  size: number,
  damp = true,
): Float64Array | null {
  const n = free.length;
  const scale = free.map((i) => Math.sqrt(Math.max(matrix[i * size + i]!, Number.MIN_VALUE)));
  for (let damping = 0; damping < 1e8; damping = damping === 0 ? 1e-10 : damping * 100) {
    const scaled = new Float64Array(n * n);
    for (let a = 0; a < n; a++) {
      for (let b = 0; b < n; b++) scaled[a * n + b] = matrix[free[a]! * size + free[b]!]! / (scale[a]! * scale[b]!);
      scaled[a * n + a]! += damping;
    }
    if (Number.isNaN(choleskyInPlace(scaled, n, 1e-13))) {
      if (damp) continue;
      return null;
    }
    const solved = Float64Array.from(free, (i, a) => -gradient[i]! / scale[a]!);
    solveFromFactor(scaled, n, solved);
    return solved.map((value, a) => value / scale[a]!);
  }
  return new Float64Array(n);
}

/**
 * Maximises the (restricted) likelihood by scoring: Newton steps with the information in place of the Hessian, bounds by an
 * active set, steps halved until the deviance falls. Convergence is verified, not assumed: the scaled gradient must vanish in
 * every coordinate that is free, and the deviance must rise inwards at every bound.
 *
 * @throws ModelError "no-convergence"
 * @source expected information: jennrich-sampson-1976 (Technometrics 18, 11-17); average information: gilmour-thompson-cullis-1995
 * (Biometrics 51, 1440-1450)
 */
export function fitCovariance(
  engine: Engine,
  map: ParameterMap,
  active: readonly number[],
  criterion: Criterion,
  nullBasis: Float64Array | null,
  start: Float64Array = map.start,
  closeEnough: number = engine.closeEnough,
): Fit {
  let phi: Float64Array = map.inside(start).map((value, index) => Math.max(value, map.lower[index]!));
  let evaluation = engine.evaluate(map.theta(phi), active, criterion, nullBasis);
  if (evaluation === null) {
    phi = map.start.slice();
    evaluation = engine.evaluate(map.theta(phi), active, criterion, nullBasis);
  }
  if (evaluation === null) throw notConverged(engine, 0);
  let best = Number.POSITIVE_INFINITY;
  let idle = 0;
  let before = Number.POSITIVE_INFINITY;
  let near = false;
  for (let iteration = 1; iteration <= mostIterations; iteration++) {
    engine.watch.checkpoint();
    const { step, steepest, decrement, held } = direction(evaluation, map, phi, active, near, iteration <= earlySteps);
    near = decrement < 0.1;
    // Rounding has the last word when the distance has stopped shrinking.
    const gained = before - evaluation.deviance;
    before = evaluation.deviance;
    idle = decrement > 0.9 * best && gained < 1e-3 * decrement ? idle + 1 : 0;
    const rounded = (idle >= 4 && decrement < acceptable) || (idle >= 15 && decrement < barelyAcceptable);
    if (decrement < closeEnough || rounded) {
      return { theta: map.theta(phi), phi, evaluation, onBound: held, iterations: iteration };
    }
    if (idle >= mostIdle) throw notConverged(engine, iteration);
    best = Math.min(best, decrement);
    // Close to the optimum the deviance no longer tells steps apart; what it may lose there is rounding.
    const slack = decrement < 1e-6 ? 1e-9 * (1 + Math.abs(evaluation.deviance)) : 0;
    const search = (along: Float64Array, shortest: number): { phi: Float64Array; evaluation: Evaluation } | null => {
      for (let share = 1; share > shortest; share /= 2) {
        const trial = phi.map((value, index) => Math.max(map.lower[index]!, value + share * along[index]!));
        const at = engine.evaluate(map.theta(trial), active, criterion, nullBasis);
        if (at !== null && at.deviance <= current.deviance + slack) return { phi: trial, evaluation: at };
      }
      return null;
    };
    const current = evaluation;
    const next = search(step, 1e-4) ?? search(steepest, 1e-12);
    if (next === null) {
      if (decrement < acceptable) {
        return { theta: map.theta(phi), phi, evaluation, onBound: held, iterations: iteration };
      }
      throw notConverged(engine, iteration);
    }
    phi = next.phi;
    evaluation = next.evaluation;
  }
  throw notConverged(engine, mostIterations);
}

function notConverged(engine: Engine, iterations: number): ModelError {
  return new ModelError(
    "no-convergence",
    `The multilevel model found no best-fitting variances in ${iterations} steps: no result is given.`,
    engine.parameters.length > 3
      ? "The random part may be too rich for these data: assume compound symmetry, or average repeated trials."
      : "Check the data for extreme values and for units with hardly any rows.",
  );
}
