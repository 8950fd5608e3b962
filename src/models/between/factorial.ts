import type { CellStatistics, FactorDeclaration, ModelData } from "../../design/types.ts";
import type { Note, OmnibusEffect } from "../../results/index.ts";
import { estimablePart } from "../estimable.ts";
import { effectBasis, generalizedEtaSquared, subsets } from "../within/index.ts";
import type { BetweenAnalysis } from "./analysis.ts";
import { cellStatistics, type ErrorTerm } from "./cell-statistics.ts";
import {
  cellColumn,
  type CompressedModel,
  compressedCells,
  compressedRows,
  covariateColumn,
  estimateDirection,
} from "./compressed-model.ts";
import { extend, newSpan, outside, squaredLengthWithin } from "./orthonormal-span.ts";
import { requireErrorDf, requireTwoGroups, requireVariance } from "./refusals.ts";
import { testedEffect } from "./tested-effect.ts";

export type Adjustment = "cells weigh equally" | "respecting marginality";

export interface FactorialQuestion {
  /** Counts, means and sums of squares of the cells, or the rows themselves (needed with covariates). */
  readonly data: CellStatistics | ModelData;
  /** All between factors, in the order that numbers the cells (last fastest). */
  readonly factors: readonly Pick<FactorDeclaration, "name" | "levels" | "measured">[];
  /** Default "cells weigh equally". */
  readonly adjustment?: Adjustment;
  /** Of the interval of partial eta squared, default 0.95; null leaves it out (simulations). */
  readonly level?: number | null;
}

interface Term {
  readonly name: string;
  readonly factors: readonly string[];
  readonly takesPart: readonly boolean[];
  /** Orthonormal contrasts over all cells, cells x df. */
  readonly basis: readonly (readonly number[])[];
}

interface TermSum {
  readonly df: number;
  readonly sumOfSquares: number;
}

function isRows(data: CellStatistics | ModelData): data is ModelData {
  return "cells" in data;
}

function termsOf(factors: FactorialQuestion["factors"]): Term[] {
  const levels = factors.map((factor) => factor.levels.length);
  return subsets(factors.length).map((takesPart) => {
    const named = factors.filter((_, index) => takesPart[index] === true).map((factor) => factor.name);
    return { name: named.join(" x "), factors: named, takesPart, basis: effectBasis(levels, takesPart) };
  });
}

/** Column `index` of a basis as a function of the cell. */
const columnOf = (basis: readonly (readonly number[])[], index: number) => (cell: number) => basis[cell]![index]!;

/** Contrasts of the means of cells that weigh equally; where cells are empty, those contrasts that do without them. */
function equallyWeighing(model: CompressedModel, term: Term, empty: readonly boolean[]): TermSum {
  const basis = estimablePart(term.basis, empty);
  const span = newSpan();
  for (let index = 0; index < (basis[0]?.length ?? 0); index++) {
    extend(span, estimateDirection(model, columnOf(basis, index)));
  }
  return { df: span.columns.length, sumOfSquares: squaredLengthWithin(span.columns, model.response) };
}

/** What the term adds to the model with every covariate and every term that does not contain it. */
function respectingMarginality(model: CompressedModel, term: Term, terms: readonly Term[]): TermSum {
  const span = newSpan();
  extend(
    span,
    cellColumn(model, () => 1),
  );
  for (const covariate of model.covariates.keys()) extend(span, covariateColumn(model, covariate));
  for (const other of terms) {
    const contains = term.takesPart.every((takesPart, index) => !takesPart || other.takesPart[index] === true);
    if (contains) continue;
    for (let index = 0; index < other.basis[0]!.length; index++)
      extend(span, cellColumn(model, columnOf(other.basis, index)));
  }
  const added: Float64Array[] = [];
  for (let index = 0; index < term.basis[0]!.length; index++) {
    const direction = extend(span, cellColumn(model, columnOf(term.basis, index)));
    if (direction !== null) added.push(direction);
  }
  return { df: added.length, sumOfSquares: squaredLengthWithin(added, model.response) };
}

/** What a covariate adds to the cells and the other covariates. */
function covariateSum(model: CompressedModel, covariate: number): TermSum {
  const span = newSpan();
  for (const filled of model.cells) {
    extend(
      span,
      cellColumn(model, (cell) => (cell === filled ? 1 : 0)),
    );
  }
  for (const other of model.covariates.keys()) if (other !== covariate) extend(span, covariateColumn(model, other));
  const direction = extend(span, covariateColumn(model, covariate));
  const directions = direction === null ? [] : [direction];
  return { df: directions.length, sumOfSquares: squaredLengthWithin(directions, model.response) };
}

/** Checks that the cells are those of the factors, and brings rows or statistics to the rotated model. */
function compress(question: FactorialQuestion): { model: CompressedModel; statistics: CellStatistics } {
  const { data } = question;
  const statistics = isRows(data) ? cellStatistics(data) : data;
  requireTwoGroups(statistics);
  const model =
    isRows(data) && data.covariates.length > 0 ? compressedRows(data, statistics) : compressedCells(statistics);
  requireErrorDf(model.error.df);
  requireVariance(statistics, model.error);
  return { model, statistics };
}

/**
 * Analysis of variance of any number of between factors and covariates, cell sizes as they come, from the cells' statistics.
 * The model has every interaction of the factors, and one slope per covariate for all cells.
 *
 * Adjustment "cells weigh equally" tests contrasts of (adjusted) cell means, the same means that comparisons are about
 * ("type III"). "respecting marginality" tests what each effect adds to all those that do not contain it ("type II"). Both
 * agree where cells are equally large. Covariates are tested given everything else. With empty cells the estimable part of
 * each effect is tested; the notes "effect-not-estimable" and "effect-partly-estimable" name the rest.
 *
 * @returns effects in the order main effects, two-way interactions ..., then covariates
 * @throws ModelError "too-few-groups", "no-error-df", "zero-variance", "covariate-constant"
 * @source yates-1934 (J. Am. Stat. Assoc. 29, 51-66), weighted squares of means and fitting constants; general linear hypothesis:
 * searle-1971 (Linear Models)
 */
export function factorialAnalysis(question: FactorialQuestion): BetweenAnalysis {
  const { model, statistics } = compress(question);
  const { error, observations } = model;
  const terms = termsOf(question.factors);
  const empty = Array.from(statistics.n, (size) => size === 0);
  const notes: Note[] = [];
  if (empty.some(Boolean)) {
    notes.push({ code: "empty-cells", facts: { count: empty.filter(Boolean).length, of: empty.length } });
  }
  const adjustment = question.adjustment ?? "cells weigh equally";
  const sums = terms.map((term) =>
    adjustment === "cells weigh equally"
      ? equallyWeighing(model, term, empty)
      : respectingMarginality(model, term, terms),
  );
  const tested = [
    ...terms.map((term, index) => ({
      name: term.name,
      factors: term.factors,
      wanted: term.basis[0]!.length,
      sum: sums[index]!,
    })),
    ...model.covariates.map((name, index) => ({ name, factors: [name], wanted: 1, sum: covariateSum(model, index) })),
  ];
  const shares = generalizedEtaSquared(
    tested.map(({ factors, sum }) => ({ factors, sumOfSquares: sum.sumOfSquares })),
    error.sumOfSquares,
    [...question.factors.filter((factor) => factor.measured).map((factor) => factor.name), ...model.covariates],
  );
  const method = model.covariates.length > 0 ? "covariance" : "factorial";
  const effects: OmnibusEffect[] = [];
  for (const [index, { name, wanted, sum }] of tested.entries()) {
    if (sum.df === 0) {
      notes.push({ code: "effect-not-estimable", facts: { effect: name } });
      continue;
    }
    if (sum.df < wanted)
      notes.push({ code: "effect-partly-estimable", facts: { effect: name, df: sum.df, of: wanted } });
    const level = question.level === undefined ? 0.95 : question.level;
    effects.push(
      testedEffect({
        effect: name,
        method,
        df: sum.df,
        sumOfSquares: sum.sumOfSquares,
        error,
        observations,
        level,
        generalizedEtaSquared: shares[index]!,
      }),
    );
  }
  return {
    method,
    effects,
    error,
    rSquared: explainedShare(model, error),
    residualSd: Math.sqrt(error.meanSquare),
    observations,
    notes,
  };
}

/** Share of the variation around the grand mean that the whole model explains. */
function explainedShare(model: CompressedModel, error: ErrorTerm): number {
  const constant = newSpan();
  extend(
    constant,
    cellColumn(model, () => 1),
  );
  const rest = outside(constant, model.response);
  const explained = rest.reduce((sum, value) => sum + value * value, 0);
  return explained / (explained + error.sumOfSquares);
}
