import { silentWatch, type Watch } from "../../host/index.ts";
import type { Contrast, ModelData } from "../../design/types.ts";
import { DomainError } from "../../numeric/index.ts";
import type { Note } from "../../results/index.ts";
import { ratioContrast, type Standardiser, standardisedContrast } from "../effect-size/index.ts";
import { ModelError } from "../model-error.ts";
import type { ContrastEstimates } from "../types.ts";
import type { CovarianceStructure } from "./covariance-structure.ts";
import { fitMultilevel, type FittedModel } from "./fitted-model.ts";
import { sandwich } from "./fixed-tests.ts";
import { testHypothesis } from "./omnibus.ts";

export interface MultilevelContrastOptions {
  readonly watch?: Watch;
  readonly df?: "kenward-roger" | "satterthwaite";
  /** Confidence level of the effect sizes' intervals, or null for no effect sizes; default 0.95. */
  readonly level?: number | null;
  /** "log": the response is a logarithm, effect sizes are ratios. Default "linear". */
  readonly scale?: "linear" | "log";
  readonly structure?: CovarianceStructure;
}

/**
 * Comparisons in the multilevel model of the design: all rows enter, standard errors from Kenward and Roger's adjusted
 * covariance, df per comparison, correlation of the estimates from the same covariance.
 *
 * Effect sizes are in units of the total standard deviation of a single row (the root of all variances together), which stands
 * in for the average spread of the cells; its df are taken from the spread of the variance estimates.
 *
 * @param contrasts weights over the cells of `data`
 * @throws ModelError as `fitMultilevel`, and "empty-cell" for a comparison that needs a cell without rows
 */
export function multilevelContrasts(
  data: ModelData,
  contrasts: readonly Contrast[],
  options: MultilevelContrastOptions = {},
): ContrastEstimates {
  for (const { weights } of contrasts) {
    if (weights.length !== data.cellCount) {
      throw new DomainError("weights", weights.length, `one weight for each of ${data.cellCount} cells`);
    }
  }
  const model = fitMultilevel(data, options.watch ?? silentWatch, options.structure ?? null);
  const method = options.df ?? "kenward-roger";
  const notes: Note[] = [...model.notes];
  const { columns } = model.fixed;
  const count = contrasts.length;
  const weights = contrasts.map((contrast) => columnWeights(model, contrast));
  const together = new Float64Array(columns * count);
  for (const [index, own] of weights.entries()) {
    for (let column = 0; column < columns; column++) together[column * count + index] = own[column]!;
  }
  const used = method === "kenward-roger" ? model.precision.adjusted : model.precision.phi;
  const covariance = sandwich(used, together, columns, count);
  const standardErrors = contrasts.map((_, index) => Math.sqrt(covariance[index * count + index]!));
  const estimates = weights.map((own) =>
    own.reduce((sum, weight, column) => sum + weight * model.precision.beta[column]!, 0),
  );
  const df = weights.map((own, index) => {
    const { test, form } = testHypothesis(model, own, 1, method);
    if (test === null) {
      throw new ModelError(
        "no-df",
        `The precision of "${contrasts[index]!.name}" cannot be told from these data.`,
        "More subjects are needed, or a simpler random part: assume compound symmetry",
      );
    }
    if (form === "Satterthwaite" && method === "kenward-roger") {
      notes.push({ code: "satterthwaite-instead", facts: { comparison: contrasts[index]!.name } });
    }
    return test.df2;
  });
  const spread = totalSpread(model);
  return {
    errorTerm: "multilevel",
    estimates,
    standardErrors,
    df,
    correlation: contrasts.map((_, row) =>
      contrasts.map((__, column) =>
        row === column ? 1 : covariance[row * count + column]! / (standardErrors[row]! * standardErrors[column]!),
      ),
    ),
    commonDf: null,
    n: contrasts.map((contrast) => subjectsBehind(data, contrast)),
    effectSizes: contrasts.map((_, index) => {
      const level = options.level === undefined ? 0.95 : options.level;
      if (level === null) return null;
      const test = { estimate: estimates[index]!, standardError: standardErrors[index]!, df: df[index]!, level };
      if (options.scale === "log") return ratioContrast(test);
      const standardiser: Standardiser = "average spread";
      return standardisedContrast({ ...test, sd: spread.sd, sdDf: spread.df, standardiser });
    }),
    notes,
  };
}

function columnWeights(model: FittedModel, contrast: Contrast): Float64Array {
  const weights = new Float64Array(model.fixed.columns);
  for (const [cell, weight] of contrast.weights.entries()) {
    if (weight === 0) continue;
    const column = model.fixed.columnOfCell[cell]!;
    if (column < 0) {
      throw new ModelError(
        "empty-cell",
        `"${contrast.name}" needs a cell that has no rows.`,
        "Compare cells that have data.",
      );
    }
    weights[column]! += weight;
  }
  return weights;
}

/**
 * Standard deviation of a row: the mean over rows of the covariance's diagonal, which is linear in the parameters; its df by
 * Satterthwaite from their spread.
 */
function totalSpread(model: FittedModel): { sd: number; df: number } {
  const { engine, structure, fit, active, data, precision } = model;
  const share = active.map((index) => {
    const parameter = engine.parameters[index]!;
    if (parameter.kind === "residual") {
      const { stratumOf } = structure.residual;
      if (stratumOf === null) return 1;
      return stratumOf.reduce((sum, own) => sum + (own === parameter.stratum ? 1 : 0), 0) / data.rows;
    }
    const columns = structure.terms[parameter.term]!.columns;
    const left = columns[parameter.row]!;
    const right = columns[parameter.column]!;
    if (left === null && right === null) return 1;
    let sum = 0;
    for (let row = 0; row < data.rows; row++)
      sum += (left === null ? 1 : left[row]!) * (right === null ? 1 : right[row]!);
    return (parameter.row === parameter.column ? sum : 2 * sum) / data.rows;
  });
  const variance = active.reduce((sum, index, at) => sum + share[at]! * fit.theta[index]!, 0);
  let spread = 0;
  const r = active.length;
  for (let i = 0; i < r; i++)
    for (let j = 0; j < r; j++) spread += share[i]! * share[j]! * precision.spread[i * r + j]!;
  return { sd: Math.sqrt(variance), df: (2 * variance ** 2) / spread };
}

function subjectsBehind(data: ModelData, contrast: Contrast): number {
  const unit = data.units.find((candidate) => candidate.role === "subjects");
  const seen = new Set<number>();
  for (let row = 0; row < data.rows; row++) {
    if (contrast.weights[data.cells[row]!] !== 0) seen.add(unit === undefined ? row : unit.codes[row]!);
  }
  return seen.size;
}
