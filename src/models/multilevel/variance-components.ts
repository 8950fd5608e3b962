import { chiSquareQuantile } from "../../numeric/index.ts";
import type { Note, OmnibusResult, VarianceComponent } from "../../results/index.ts";
import { ModelError } from "../model-error.ts";
import type { FittedModel } from "./fitted-model.ts";
import type { ParameterMap } from "./parameter-map.ts";
import { residualFloor } from "./parameter-map.ts";
import { fitCovariance } from "./scoring.ts";

/** A one-dimensional family of models: at each value of the profiled quantity, the coordinates that stay free. */
type ProfileMap = (value: number) => ParameterMap;

/** Models whose parameters are all plain variances; profiles are taken for these. */
function onlyVariances(model: FittedModel): boolean {
  return model.structure.terms.every((term) => !term.correlated || term.columns.length === 1);
}

function plainMap(
  model: FittedModel,
  free: readonly number[],
  fill: (theta: Float64Array) => void,
  derivative: (jacobian: Float64Array, size: number) => void,
): ParameterMap {
  const { engine, fit } = model;
  const size = free.length;
  const lower = Float64Array.from(
    free,
    (index) =>
      engine.startingVariance * (engine.parameters[index]!.kind === "residual" ? residualFloor : engine.varianceFloor),
  );
  return {
    size,
    lower,
    start: Float64Array.from(free, (index, at) =>
      Math.max(fit.theta[index]!, 0.01 * engine.startingVariance, lower[at]!),
    ),
    theta(phi) {
      const theta = new Float64Array(engine.parameters.length);
      for (const [at, index] of free.entries()) theta[index] = phi[at]!;
      fill(theta);
      return theta;
    },
    jacobian() {
      const jacobian = new Float64Array(engine.parameters.length * size);
      for (const [at, index] of free.entries()) jacobian[index * size + at] = 1;
      derivative(jacobian, size);
      return jacobian;
    },
    inside: (phi) => phi,
    addCurvature() {},
  };
}

/** Holds one variance. */
const heldVariance =
  (model: FittedModel, held: number): ProfileMap =>
  (value) =>
    plainMap(
      model,
      model.all.filter((index) => index !== held),
      (theta) => {
        theta[held] = Math.max(value, model.engine.varianceFloor * model.engine.startingVariance);
      },
      () => {},
    );

/** Holds the share of one variance in the sum of all. */
const heldShare =
  (model: FittedModel, held: number): ProfileMap =>
  (share) => {
    const odds = share / (1 - share);
    const others = model.all.filter((index) => index !== held);
    return plainMap(
      model,
      others,
      (theta) => {
        theta[held] = Math.max(
          odds * others.reduce((sum, index) => sum + theta[index]!, 0),
          model.engine.varianceFloor * model.engine.startingVariance,
        );
      },
      (jacobian, size) => {
        for (let at = 0; at < size; at++) jacobian[held * size + at] = odds;
      },
    );
  };

/** Only the deviance is used of a profile fit, and it is flat at its minimum. */
const deviancePrecision = 1e-10;

/** Profile deviance at one value, minimum over everything else. */
function profileDeviance(
  model: FittedModel,
  map: ParameterMap,
  warm: Float64Array | null,
): { deviance: number; phi: Float64Array } {
  const fit = fitCovariance(model.engine, map, model.all, "REML", null, warm ?? map.start, deviancePrecision);
  return { deviance: fit.evaluation.deviance, phi: fit.phi };
}

/**
 * Where the profile deviance has risen by `rise`, from `inside` (at the minimum) towards `outside`; null where it does not rise
 * that far before `outside`. False position on the signed root of the rise, which is nearly straight.
 */
function crossing(
  model: FittedModel,
  maps: ProfileMap,
  minimum: number,
  rise: number,
  inside: number,
  outside: number,
): number | null {
  const target = Math.sqrt(rise);
  let warm: Float64Array | null = null;
  const height = (value: number) => {
    const at = profileDeviance(model, maps(value), warm);
    warm = at.phi;
    return Math.sqrt(Math.max(0, at.deviance - minimum)) - target;
  };
  let low = inside;
  let lowHeight = -target;
  let high = outside;
  let highHeight = height(outside);
  if (highHeight < 0) return null;
  let side = 0;
  for (let step = 0; step < 60 && Math.abs(high - low) > 1e-7 * Math.max(Math.abs(high), Math.abs(low)); step++) {
    const guess = low + ((high - low) * -lowHeight) / (highHeight - lowHeight);
    const width = high - low;
    const at = Math.abs(guess - low) < 1e-3 * Math.abs(width) ? low + 1e-3 * width : guess;
    const own = height(at);
    if (Math.abs(own) < 1e-7 * target) return at;
    if (own > 0) {
      high = at;
      highHeight = own;
      // Illinois rule: an end that stays put twice is given less weight.
      if (side === 1) lowHeight /= 2;
      side = 1;
    } else {
      low = at;
      lowHeight = own;
      if (side === -1) highHeight /= 2;
      side = -1;
    }
  }
  return (low + high) / 2;
}

function varianceInterval(model: FittedModel, index: number, level: number): { lower: number; upper: number } {
  const rise = chiSquareQuantile(level, 1);
  const minimum = model.fit.evaluation.deviance;
  const scale = model.engine.startingVariance;
  const estimate = model.active.includes(index) ? model.fit.theta[index]! : 0;
  // On the scale of standard deviations, where the profile is closer to a parabola.
  const maps: ProfileMap = (sd) => heldVariance(model, index)(sd * sd);
  const sd = Math.sqrt(estimate);
  let lower = 0;
  if (model.engine.parameters[index]!.kind === "residual") {
    // A residual near zero makes the model all but singular: walk down only as far as needed.
    for (let bottom = 0.8 * sd; bottom > 1e-4 * sd; bottom *= 0.8) {
      const found = crossing(model, maps, minimum, rise, sd, bottom);
      if (found === null) continue;
      lower = found;
      break;
    }
  } else if (estimate > 0) lower = crossing(model, maps, minimum, rise, sd, 0) ?? 0;
  let reach = Math.max(2 * sd, 0.5 * Math.sqrt(scale));
  let upper = crossing(model, maps, minimum, rise, sd, reach);
  for (let doubling = 0; upper === null && doubling < 30; doubling++) {
    reach *= 3;
    upper = crossing(model, maps, minimum, rise, sd, reach);
  }
  return { lower: lower ** 2, upper: (upper ?? reach) ** 2 };
}

const shareEnd = 1e-6;

function shareInterval(model: FittedModel, index: number, level: number): { lower: number; upper: number } {
  const rise = chiSquareQuantile(level, 1);
  const minimum = model.fit.evaluation.deviance;
  const maps = heldShare(model, index);
  const total = model.active.reduce((sum, own) => sum + model.fit.theta[own]!, 0);
  const estimate = model.active.includes(index) ? model.fit.theta[index]! / total : 0;
  const lower = estimate === 0 ? 0 : (crossing(model, maps, minimum, rise, estimate, 0) ?? 0);
  // A share near 1 leaves hardly any residual and makes the model all but singular: walk up only as far as needed.
  for (let rest = 0.8 * (1 - estimate); rest > shareEnd; rest *= 0.6) {
    const upper = crossing(model, maps, minimum, rise, estimate, 1 - rest);
    if (upper !== null) return { lower, upper };
  }
  return { lower, upper: 1 };
}

const unknown = { lower: null, upper: null };

/** An interval, or null limits with a note where the profile could not be followed. */
function found(
  interval: () => { lower: number; upper: number },
  notes: Note[],
): { lower: number | null; upper: number | null } {
  try {
    return interval();
  } catch (error) {
    if (!(error instanceof ModelError)) throw error;
    if (!notes.some((note) => note.code === "profile-not-followed"))
      notes.push({ code: "profile-not-followed", facts: {} });
    return unknown;
  }
}

/**
 * Variance components with profile-likelihood intervals (restricted likelihood, chi-square with one df). Covariances of effects
 * that go together are given as correlations beside their variances, without intervals.
 *
 * @param level null for no intervals
 */
export function varianceComponents(model: FittedModel, level: number | null, notes: Note[]): VarianceComponent[] {
  const { engine, structure, fit, active } = model;
  const profiled = level !== null && onlyVariances(model);
  if (level !== null && !profiled)
    notes.push({ code: "no-component-intervals", facts: { reason: "correlated effects" } });
  const value = (index: number) => (active.includes(index) ? fit.theta[index]! : 0);
  const components: VarianceComponent[] = [];
  for (const [index, parameter] of engine.parameters.entries()) {
    if (parameter.kind === "random" && parameter.row !== parameter.column) continue;
    const variance = value(index);
    const interval = profiled ? found(() => varianceInterval(model, index, level), notes) : null;
    const term = parameter.kind === "random" ? structure.terms[parameter.term]! : null;
    const correlations =
      parameter.kind === "random" && term !== null && term.correlated && term.columns.length > 1
        ? correlationsOf(model, parameter.term, parameter.row)
        : null;
    components.push({
      unit: term === null ? "residual" : term.unit,
      term:
        term === null
          ? structure.residual.labels[parameter.kind === "residual" ? parameter.stratum : 0]!
          : term.columns.length === 1
            ? term.term
            : term.columnNames[parameter.kind === "random" ? parameter.row : 0]!,
      variance,
      sd: Math.sqrt(variance),
      ...(interval === null ? {} : interval),
      boundary: !active.includes(index),
      ...(correlations === null ? {} : { correlations }),
    });
  }
  return components;
}

function correlationsOf(model: FittedModel, term: number, row: number): { with: string; value: number }[] {
  const names = model.structure.terms[term]!.columnNames;
  const entry = (a: number, b: number) => {
    const index = model.engine.parameters.findIndex(
      (parameter) =>
        parameter.kind === "random" &&
        parameter.term === term &&
        parameter.row === Math.max(a, b) &&
        parameter.column === Math.min(a, b),
    );
    return model.fit.theta[index]!;
  };
  return names.flatMap((name, other) => {
    if (other === row) return [];
    const below = Math.sqrt(entry(row, row) * entry(other, other));
    return below > 0 ? [{ with: name, value: entry(row, other) / below }] : [];
  });
}

/**
 * Intraclass correlation of every unit: the variance of its intercept as a share of all variances together (what two rows of the
 * same unit share when they have nothing else in common), with profile-likelihood interval. Only for models whose random part is
 * made of plain variances and one residual variance; otherwise there is no one such share.
 */
export function intraclassCorrelations(
  model: FittedModel,
  level: number | null,
  notes: Note[],
): NonNullable<OmnibusResult["intraclassCorrelation"]> {
  const { engine, structure, fit, active } = model;
  if (!onlyVariances(model) || structure.residual.strata !== 1) {
    notes.push({ code: "no-intraclass-correlation", facts: {} });
    return [];
  }
  const total = active.reduce((sum, index) => sum + fit.theta[index]!, 0);
  return engine.parameters.flatMap((parameter, index) => {
    if (parameter.kind !== "random" || structure.terms[parameter.term]!.term !== "intercept") return [];
    const value = active.includes(index) ? fit.theta[index]! / total : 0;
    const interval = level === null ? unknown : found(() => shareInterval(model, index, level), notes);
    return [{ unit: structure.terms[parameter.term]!.unit, value, ...interval }];
  });
}
