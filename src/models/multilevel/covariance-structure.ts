import type { CodedFactor, CodedUnit, ModelData } from "../../design/types.ts";
import type { Note } from "../../results/index.ts";
import { ModelError } from "../model-error.ts";

/** One group of random effects: a vector of `columns` effects for every level, the same covariance for all levels. */
export interface RandomTerm {
  /** Name of the sampling unit. */
  readonly unit: string;
  /** "intercept", or the factors (joined by " x ") or covariates that the effects belong to. */
  readonly term: string;
  /** Level per row, 0 <= level < levels. */
  readonly codes: Int32Array;
  readonly levels: number;
  /** Value per row of each effect beside it; null stands for 1 everywhere. */
  readonly columns: readonly (Float64Array | null)[];
  readonly columnNames: readonly string[];
  /** True: the effects of a level have any covariance; false: they are independent (one variance each). */
  readonly correlated: boolean;
}

/** Residual variances: one for all rows, one per stratum, or none (the random terms carry all variation). */
export interface ResidualStructure {
  readonly strata: number;
  /** Stratum per row; null where there is one for all rows or none. */
  readonly stratumOf: Int32Array | null;
  readonly labels: readonly string[];
}

export interface CovarianceStructure {
  readonly terms: readonly RandomTerm[];
  readonly residual: ResidualStructure;
  readonly notes: readonly Note[];
}

/** One entry of the covariance parameters, linear in the covariance of the rows. */
export type CovarianceParameter =
  | { readonly kind: "random"; readonly term: number; readonly row: number; readonly column: number }
  | { readonly kind: "residual"; readonly stratum: number };

/** The parameters in order: terms (each by rows of its lower triangle), then residual strata. */
export function covarianceParameters(structure: CovarianceStructure): CovarianceParameter[] {
  const parameters: CovarianceParameter[] = [];
  for (const [term, { columns, correlated }] of structure.terms.entries()) {
    for (let row = 0; row < columns.length; row++) {
      for (let column = correlated ? 0 : row; column <= row; column++) {
        parameters.push({ kind: "random", term, row, column });
      }
    }
  }
  for (let stratum = 0; stratum < structure.residual.strata; stratum++) parameters.push({ kind: "residual", stratum });
  return parameters;
}

/** Codes 0, 1, 2 ... for the pairs (unit, level of the chosen factors) that occur. */
function crossedCodes(unit: CodedUnit, factors: readonly CodedFactor[], rows: number) {
  const width = factors.reduce((count, factor) => count * factor.levels.length, 1);
  const codes = new Int32Array(rows);
  const seen = new Int32Array(unit.count * width).fill(-1);
  let levels = 0;
  for (let row = 0; row < rows; row++) {
    let key = unit.codes[row]!;
    for (const factor of factors) key = key * factor.levels.length + factor.codes[row]!;
    if (seen[key] === -1) seen[key] = levels++;
    codes[row] = seen[key]!;
  }
  return { codes, levels };
}

function variesWithin(unit: CodedUnit, factor: CodedFactor, rows: number): boolean {
  const first = new Int32Array(unit.count).fill(-1);
  for (let row = 0; row < rows; row++) {
    const at = unit.codes[row]!;
    if (first[at] === -1) first[at] = factor.codes[row]!;
    else if (first[at] !== factor.codes[row]) return true;
  }
  return false;
}

/** True when the two codings split the rows in the same way. */
function samePartition(left: Int32Array, leftLevels: number, right: Int32Array, rightLevels: number): boolean {
  if (leftLevels !== rightLevels) return false;
  const match = new Int32Array(leftLevels).fill(-1);
  for (let row = 0; row < left.length; row++) {
    const at = left[row]!;
    if (match[at] === -1) match[at] = right[row]!;
    else if (match[at] !== right[row]) return false;
  }
  return true;
}

function interceptTerms(data: ModelData, notes: Note[]): RandomTerm[] {
  const terms: RandomTerm[] = [];
  const add = (unit: CodedUnit, factors: readonly CodedFactor[]) => {
    const { codes, levels } = crossedCodes(unit, factors, data.rows);
    const term = factors.length === 0 ? "intercept" : factors.map((factor) => factor.name).join(" x ");
    // One row per level cannot be told from the residual; the same split as another term cannot be told from that one.
    if (levels === data.rows) {
      if (factors.length === 0) notes.push({ code: "unit-is-row", facts: { unit: unit.name } });
      return;
    }
    if (levels < 2) {
      notes.push({ code: "one-unit", facts: { unit: unit.name } });
      return;
    }
    const twin = terms.find((other) => samePartition(other.codes, other.levels, codes, levels));
    if (twin !== undefined) {
      notes.push({ code: "term-confounded", facts: { unit: unit.name, term, with: `${twin.unit} ${twin.term}` } });
      return;
    }
    terms.push({ unit: unit.name, term, codes, levels, columns: [null], columnNames: [term], correlated: false });
  };
  const compound = data.assumptions.covariance === "compound symmetry";
  for (const unit of data.units) {
    add(unit, []);
    if (unit.role === "blocks" || compound) continue;
    const within = data.factors.filter((factor) => factor.levels.length > 1 && variesWithin(unit, factor, data.rows));
    if (within.length === 0) continue;
    // Every proper subset of the factors within the unit; the whole set too, where a cell of the unit has several rows.
    for (let flags = 1; flags < 2 ** within.length; flags++) {
      const chosen = within.filter((_, index) => ((flags >> index) & 1) === 1);
      add(unit, chosen);
    }
  }
  return terms;
}

/** Random intercept and slopes of the covariates that a unit declares, with any covariance between them. */
function slopeTerms(data: ModelData): RandomTerm[] {
  return data.units.flatMap((unit) => {
    if (unit.slopes.length === 0) return [];
    const slopes = unit.slopes.map((name) => {
      const covariate = data.covariates.find((candidate) => candidate.name === name);
      if (covariate === undefined) {
        throw new ModelError(
          "unknown-slope",
          `The slope of "${name}" is to vary by ${unit.name}, and there is no covariate of that name.`,
          `Declare it: covariate ${name} within ${unit.name}`,
        );
      }
      return covariate;
    });
    return [
      {
        unit: unit.name,
        term: ["intercept", ...unit.slopes].join(" and "),
        codes: unit.codes,
        levels: unit.count,
        columns: [null, ...slopes.map((slope) => slope.values)],
        columnNames: ["intercept", ...unit.slopes],
        correlated: true,
      },
    ];
  });
}

/** Within cells of the subjects' factors as one vector of effects with any covariance. */
function unstructuredTerm(data: ModelData, unit: CodedUnit): { term: RandomTerm; repeated: boolean } | null {
  const within = data.factors.filter((factor) => factor.levels.length > 1 && variesWithin(unit, factor, data.rows));
  const width = within.reduce((count, factor) => count * factor.levels.length, 1);
  if (width < 2) return null;
  const cellOf = new Int32Array(data.rows);
  for (const factor of within) {
    for (let row = 0; row < data.rows; row++) cellOf[row] = cellOf[row]! * factor.levels.length + factor.codes[row]!;
  }
  const columns = Array.from({ length: width }, (_, cell) =>
    Float64Array.from(cellOf, (own) => (own === cell ? 1 : 0)),
  );
  const columnNames = Array.from({ length: width }, (_, cell) => {
    const names: string[] = [];
    let rest = cell;
    for (let index = within.length - 1; index >= 0; index--) {
      names.unshift(within[index]!.levels[rest % within[index]!.levels.length]!);
      rest = Math.floor(rest / within[index]!.levels.length);
    }
    return names.join(", ");
  });
  const pairs = new Set<number>();
  let repeated = false;
  for (let row = 0; row < data.rows; row++) {
    const key = unit.codes[row]! * width + cellOf[row]!;
    if (pairs.has(key)) repeated = true;
    pairs.add(key);
  }
  const name = within.map((factor) => factor.name).join(" x ");
  return {
    term: {
      unit: unit.name,
      term: name,
      codes: unit.codes,
      levels: unit.count,
      columns,
      columnNames,
      correlated: true,
    },
    repeated,
  };
}

/**
 * Factors within subjects with three levels or more: independent effects give all pairs of their levels the same correlation and
 * spread. Where that is wrong the tests reject too often (test/calibration/models.md), which a reader must be told.
 */
function termsTakenAsSpherical(data: ModelData): string[] {
  const subjects = data.units.find((unit) => unit.role === "subjects");
  if (subjects === undefined) return [];
  return data.factors
    .filter((factor) => factor.levels.length > 2 && variesWithin(subjects, factor, data.rows))
    .map((factor) => factor.name);
}

const equalResidual: ResidualStructure = { strata: 1, stratumOf: null, labels: ["residual"] };

/** A residual variance for every cell that has rows (`assume unequal variances`). */
function residualPerCell(data: ModelData): ResidualStructure {
  const stratumOfCell = new Int32Array(data.cellCount).fill(-1);
  const labels: string[] = [];
  const stratumOf = new Int32Array(data.rows);
  for (let row = 0; row < data.rows; row++) {
    const cell = data.cells[row]!;
    if (stratumOfCell[cell] === -1) {
      stratumOfCell[cell] = labels.length;
      const names: string[] = [];
      let rest = cell;
      for (let index = data.factors.length - 1; index >= 0; index--) {
        const { levels } = data.factors[index]!;
        names.unshift(levels[rest % levels.length]!);
        rest = Math.floor(rest / levels.length);
      }
      labels.push(names.join(", "));
    }
    stratumOf[row] = stratumOfCell[cell]!;
  }
  return labels.length < 2 ? equalResidual : { strata: labels.length, stratumOf, labels };
}

/**
 * The random part that the declared units and assumptions call for.
 *
 * By default: an intercept per unit, and per unit and subset of the factors that vary within it, as far as the rows can tell it
 * from the residual; so balanced data give the repeated-measures F, and trials that were kept give a term per unit and cell.
 * Blocks and larger units get an intercept each. `slopes` adds slopes that go with the intercept. `assume compound symmetry`
 * keeps only the intercept per unit; `assume unstructured` gives the subjects' cells any covariance; `assume unequal variances`
 * gives each cell its own residual variance.
 *
 * @throws ModelError "no-random-unit" (no unit has several rows), "unknown-slope", "unstructured-needs-within"
 */
export function covarianceStructure(data: ModelData): CovarianceStructure {
  const notes: Note[] = [];
  const subjects = data.units.find((unit) => unit.role === "subjects");
  let terms = interceptTerms(data, notes);
  let residual = data.assumptions.variances === "unequal" ? residualPerCell(data) : equalResidual;
  if (data.assumptions.covariance === "unstructured") {
    const free = subjects === undefined ? null : unstructuredTerm(data, subjects);
    if (free === null || subjects === undefined) {
      throw new ModelError(
        "unstructured-needs-within",
        "An unstructured covariance belongs to several measurements of one subject, and no factor varies within subjects.",
        "Leave out: assume unstructured",
      );
    }
    terms = [free.term, ...terms.filter((term) => term.unit !== subjects.name)];
    // With one row per subject and cell the residual is part of the cells' own variances.
    if (!free.repeated) residual = { strata: 0, stratumOf: null, labels: [] };
  }
  if (data.assumptions.covariance !== "unstructured") {
    const spherical = termsTakenAsSpherical(data);
    if (spherical.length > 0) notes.push({ code: "sphericity-taken-for-granted", facts: { factors: spherical } });
  }
  for (const slopes of slopeTerms(data)) {
    terms = [slopes, ...terms.filter((term) => term.unit !== slopes.unit || term.term !== "intercept")];
  }
  if (terms.length === 0) {
    throw new ModelError(
      "no-random-unit",
      "No sampling unit has more than one row: there is nothing for a multilevel model to tell apart.",
      "Use the model for independent rows: omnibus by variance analysis",
    );
  }
  return { terms, residual, notes };
}
