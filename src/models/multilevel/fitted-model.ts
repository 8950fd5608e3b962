import type { Watch } from "../../host/index.ts";
import type { ModelData } from "../../design/types.ts";
import type { Note } from "../../results/index.ts";
import { ModelError } from "../model-error.ts";
import { collapseRows } from "./collapsed-rows.ts";
import { type CovarianceStructure, covarianceStructure } from "./covariance-structure.ts";
import { crossedEngine } from "./crossed-units.ts";
import { directEngine, largestBlock } from "./direct-blocks.ts";
import type { Engine } from "./engine.ts";
import { type Precision, precisionOf } from "./fixed-tests.ts";
import { type FixedPart, fixedPart } from "./fixed-part.ts";
import { parameterMap, residualFloor } from "./parameter-map.ts";
import { mostEffects, reducedEngine } from "./reduced-blocks.ts";
import { type Fit, fitCovariance } from "./scoring.ts";

/** Blocks up to this many collapsed rows are worked densely; larger ones by elimination of the random effects. */
const denseBlock = 80;
const manyBlocks = 1000;
/** Beyond this a dense block would not end in reasonable time. */
const largestDenseBlock = 800;

export interface FittedModel {
  readonly data: ModelData;
  readonly structure: CovarianceStructure;
  readonly fixed: FixedPart;
  readonly engine: Engine;
  /** By REML. */
  readonly fit: Fit;
  /** Parameters in the model that was fitted, and those of them that were not estimated at zero. */
  readonly all: readonly number[];
  readonly active: readonly number[];
  readonly precision: Precision;
  readonly notes: readonly Note[];
}

/** Prepares the engine that suits the structure: dense blocks, or elimination where units cross or rows are many. */
function engineFor(data: ModelData, structure: CovarianceStructure, fixed: FixedPart, watch: Watch): Engine {
  const rows = collapseRows(data, structure, fixed);
  if (!(rows.variance > roundingVariance(data))) {
    throw new ModelError(
      "zero-variance",
      "Within each cell every row has the same response: there is no variance to test against.",
      "Check that the response was read from the right column and is not one value per condition.",
    );
  }
  const largest = largestBlock(structure, rows);
  const eliminable =
    structure.residual.strata === 1 && structure.terms.every((term) => !term.correlated || term.columns.length === 1);
  const everyRow = fixed.covariates.length > 0 && rows.count === data.rows;
  // Thousands of subjects with numbers of rows of their own share no pattern that dense blocks could use.
  const manyPatterns = rows.count > 4 * manyBlocks && rows.size.some((size) => size !== rows.size[0]);
  const many = largest > denseBlock || everyRow || manyPatterns;
  if (many && eliminable) return crossedEngine(data, structure, fixed, rows, watch);
  const effects = mostEffects(structure, rows);
  if (many && structure.residual.strata === 1 && effects <= largestDenseBlock) {
    return reducedEngine(data, structure, fixed, rows, watch);
  }
  if (largest > largestDenseBlock) {
    throw new ModelError(
      "random-part-too-large",
      `One connected block of the data has ${largest} rows and ${effects} random effects, too many for this kind of covariance.`,
      "With crossed units leave out slopes, assume unstructured and assume unequal variances.",
    );
  }
  return directEngine(data, structure, fixed, rows, watch);
}

function roundingVariance(data: ModelData): number {
  let largest = Math.abs(data.response.center);
  for (const value of data.response.offsets) largest = Math.max(largest, Math.abs(value));
  return (1e-14 * largest) ** 2;
}

/**
 * Fits the multilevel model that the data's units and assumptions call for, by REML.
 *
 * Components estimated at zero are dropped for the tests and named in a note ("component-at-zero").
 *
 * @throws ModelError "zero-variance", "no-random-unit", "rank-deficient", "no-convergence", "zero-residual", "too-few-rows" ...
 */
export function fitMultilevel(data: ModelData, watch: Watch, wanted: CovarianceStructure | null = null): FittedModel {
  refuseSmall(data);
  const structure = wanted ?? covarianceStructure(data);
  const fixed = fixedPart(data);
  if (data.rows <= fixed.columns) {
    throw new ModelError(
      "too-few-rows",
      `There are ${data.rows} rows for ${fixed.columns} means and slopes: nothing is left to tell how much they vary.`,
      "More subjects, or fewer factors, are needed.",
    );
  }
  const engine = engineFor(data, structure, fixed, watch);
  const notes: Note[] = [...structure.notes];
  const all = engine.parameters.map((_, index) => index);
  let active: readonly number[] = all;
  let map = parameterMap(engine, structure, active);
  let fit = fitCovariance(engine, map, active, "REML", null);
  const dropped = zeroParameters(engine, fit, active);
  if (dropped.length > 0) {
    for (const index of dropped) {
      const parameter = engine.parameters[index]!;
      if (parameter.kind !== "random") continue;
      const term = structure.terms[parameter.term]!;
      notes.push({
        code: "component-at-zero",
        facts: { unit: term.unit, term: term.columns.length === 1 ? term.term : term.columnNames[parameter.row]! },
      });
    }
    active = all.filter((index) => !dropped.includes(index));
    map = parameterMap(engine, structure, active);
    fit = fitCovariance(engine, map, active, "REML", null, startFrom(map, fit.theta, engine, structure, active));
  }
  refuseExactFit(engine, fit);
  for (const [index, term] of structure.terms.entries()) {
    if (term.correlated && term.columns.length > 1 && nearlySingular(engine, fit.theta, index, term.columns.length)) {
      notes.push({ code: "covariance-at-boundary", facts: { unit: term.unit, term: term.term } });
    }
  }
  const precision = precisionOf(engine.pieces(fit.theta, active), fit.evaluation.beta);
  if (precision === null) {
    throw new ModelError(
      "variances-not-identified",
      "These data cannot tell the variances of the random part from each other.",
      "The random part is too rich for the data: assume compound symmetry, or average repeated trials.",
    );
  }
  return { data, structure, fixed, engine, fit, all, active, precision, notes };
}

/** Start of a smaller map at the values already found, where its coordinates are plain variances. */
export function startFrom(
  map: ReturnType<typeof parameterMap>,
  theta: Float64Array,
  engine: Engine,
  structure: CovarianceStructure,
  active: readonly number[],
): Float64Array {
  const plain = active.every((index) => {
    const parameter = engine.parameters[index]!;
    return (
      parameter.kind === "residual" ||
      !structure.terms[parameter.term]!.correlated ||
      structure.terms[parameter.term]!.columns.length === 1
    );
  });
  return plain ? Float64Array.from(active, (index) => theta[index]!) : map.start;
}

/** Single variances that ended on their lower bound. */
function zeroParameters(engine: Engine, fit: Fit, active: readonly number[]): number[] {
  return active.filter((index) => {
    const parameter = engine.parameters[index]!;
    if (parameter.kind !== "random" || parameter.row !== parameter.column) return false;
    const held = fit.theta[index]! <= engine.varianceFloor * engine.startingVariance;
    return held && fit.onBound.length > 0;
  });
}

function refuseSmall(data: ModelData): void {
  const subjects = data.units.find((unit) => unit.role === "subjects");
  if (subjects !== undefined && subjects.count < 2) {
    throw new ModelError(
      "one-subject",
      `There is only one ${subjects.name}.`,
      `Conditions are compared across ${subjects.name}s: one alone tells nothing about others.`,
    );
  }
}

function refuseExactFit(engine: Engine, fit: Fit): void {
  for (const [index, parameter] of engine.parameters.entries()) {
    if (parameter.kind !== "residual") continue;
    if (fit.theta[index]! > 2 * residualFloor * engine.startingVariance) continue;
    throw new ModelError(
      "zero-residual",
      "The units and conditions reproduce the responses exactly: no variance is left to test against.",
      "Check that the response was read from the right column and that rows are not copies of each other.",
    );
  }
}

/** Whether the covariance of a term's effects has (almost) lost a dimension. */
function nearlySingular(engine: Engine, theta: Float64Array, term: number, width: number): boolean {
  const matrix = Array.from({ length: width }, () => new Float64Array(width));
  for (const [index, parameter] of engine.parameters.entries()) {
    if (parameter.kind !== "random" || parameter.term !== term) continue;
    matrix[parameter.row]![parameter.column] = theta[index]!;
    matrix[parameter.column]![parameter.row] = theta[index]!;
  }
  for (let k = 0; k < width; k++) {
    const original = matrix[k]![k]!;
    let pivot = original;
    for (let j = 0; j < k; j++) pivot -= matrix[k]![j]! ** 2;
    if (!(pivot > 1e-8 * original)) return true;
    matrix[k]![k] = Math.sqrt(pivot);
    for (let i = k + 1; i < width; i++) {
      let value = matrix[i]![k]!;
      for (let j = 0; j < k; j++) value -= matrix[i]![j]! * matrix[k]![j]!;
      matrix[i]![k] = value / matrix[k]![k]!;
    }
  }
  return false;
}
