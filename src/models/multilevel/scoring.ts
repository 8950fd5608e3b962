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
/** Half the squared distance to the optimum in standard errors at which the search is over. */
const closeEnough = 1e-19;
/** The most that rounding may leave of it before the search counts as failed. */
const acceptable = 1e-9;

interface Direction {
  readonly step: Float64Array;
  /** Predicted fall of the deviance, times two: squared distance in standard errors. */
  readonly decrement: number;
  readonly held: readonly number[];
}

/** Scoring direction in the coordinates that may move; coordinates on their bound whose deviance rises inwards are held. */
function direction(evaluation: Evaluation, map: ParameterMap, phi: Float64Array, active: readonly number[]): Direction {
  const jacobian = map.jacobian(phi);
  const { size } = map;
  const r = active.length;
  const gradient = new Float64Array(size);
  const information = new Float64Array(size * size);
  const half = new Float64Array(r * size);
  for (let k = 0; k < r; k++) {
    for (let i = 0; i < size; i++) {
      gradient[i]! += jacobian[active[k]! * size + i]! * evaluation.gradient[k]!;
      for (let l = 0; l < r; l++)
        half[k * size + i]! += evaluation.information[k * r + l]! * jacobian[active[l]! * size + i]!;
    }
  }
  for (let k = 0; k < r; k++) {
    for (let i = 0; i < size; i++) {
      const value = jacobian[active[k]! * size + i]!;
      if (value === 0) continue;
      for (let j = 0; j < size; j++) information[i * size + j]! += 2 * value * half[k * size + j]!;
    }
  }
  const held: number[] = [];
  const free: number[] = [];
  for (let i = 0; i < size; i++) {
    if (phi[i]! <= map.lower[i]! && gradient[i]! >= 0) held.push(i);
    else free.push(i);
  }
  const step = new Float64Array(size);
  if (free.length === 0) return { step, decrement: 0, held };
  const n = free.length;
  for (let damping = 0; ; damping = damping === 0 ? 1e-10 : damping * 100) {
    const matrix = new Float64Array(n * n);
    const scale = free.map((i) => Math.sqrt(Math.max(information[i * size + i]!, Number.MIN_VALUE)));
    for (let a = 0; a < n; a++) {
      for (let b = 0; b < n; b++)
        matrix[a * n + b] = information[free[a]! * size + free[b]!]! / (scale[a]! * scale[b]!);
      matrix[a * n + a]! += damping;
    }
    if (Number.isNaN(choleskyInPlace(matrix, n, 1e-13)) && damping < 1e6) continue;
    const solved = Float64Array.from(free, (i, a) => -gradient[i]! / scale[a]!);
    solveFromFactor(matrix, n, solved);
    let decrement = 0;
    for (let a = 0; a < n; a++) {
      step[free[a]!] = solved[a]! / scale[a]!;
      decrement -= step[free[a]!]! * gradient[free[a]!]!;
    }
    return { step, decrement, held };
  }
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
): Fit {
  let phi: Float64Array = start.map((value, index) => Math.max(value, map.lower[index]!));
  let evaluation = engine.evaluate(map.theta(phi), active, criterion, nullBasis);
  if (evaluation === null) {
    phi = map.start.slice();
    evaluation = engine.evaluate(map.theta(phi), active, criterion, nullBasis);
  }
  if (evaluation === null) throw notConverged(engine, 0);
  let best = Number.POSITIVE_INFINITY;
  for (let iteration = 1; iteration <= mostIterations; iteration++) {
    engine.watch.checkpoint();
    const { step, decrement, held } = direction(evaluation, map, phi, active);
    const stalled = decrement >= 0.25 * best && decrement < acceptable;
    if (decrement < closeEnough || stalled) {
      return { theta: map.theta(phi), phi, evaluation, onBound: held, iterations: iteration };
    }
    best = Math.min(best, decrement);
    let next: { phi: Float64Array; evaluation: Evaluation } | null = null;
    // Close to the optimum the deviance no longer tells steps apart; what it may lose there is rounding.
    const slack = decrement < 1e-6 ? 1e-9 * (1 + Math.abs(evaluation.deviance)) : 0;
    for (let share = 1; share > 1e-12; share /= 2) {
      const trial = phi.map((value, index) => Math.max(map.lower[index]!, value + share * step[index]!));
      const at = engine.evaluate(map.theta(trial), active, criterion, nullBasis);
      if (at !== null && at.deviance <= evaluation.deviance + slack) {
        next = { phi: trial, evaluation: at };
        break;
      }
    }
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
