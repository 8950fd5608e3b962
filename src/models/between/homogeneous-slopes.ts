import type { CellStatistics, CodedCovariate, ModelData } from "../../design/types.ts";
import { fUpperTail } from "../../numeric/index.ts";
import { cellStatistics } from "./cell-statistics.ts";
import { covariateDirections, withinCells } from "./compressed-model.ts";
import { exactSum } from "./compensated-sum.ts";
import { dotProduct, extend, newSpan, outside } from "./orthonormal-span.ts";

/** Test of one slope in all cells against a slope of its own in each cell. */
export interface SlopesTest {
  readonly covariate: string;
  /** Null where there are too few observations, or no variance left, to tell. */
  readonly value: number | null;
  readonly df1: number;
  readonly df2: number;
  readonly p: number | null;
}

/** Takes the straight line on the covariate, cell by cell, out of a vector that is centred within cells. */
function clearOfOwnSlopes(data: ModelData, statistics: CellStatistics, covariate: Float64Array, vector: Float64Array) {
  const products = new Float64Array(data.cellCount);
  const squares = new Float64Array(data.cellCount);
  for (let row = 0; row < data.rows; row++) {
    products[data.cells[row]!]! += covariate[row]! * vector[row]!;
    squares[data.cells[row]!]! += covariate[row]! ** 2;
  }
  const floor = 1e-24 * squares.reduce((most, value) => Math.max(most, value), 0);
  const varies = squares.map((value, cell) => (statistics.n[cell]! > 1 && value > floor ? 1 : 0));
  return {
    rest: vector.map((value, row) => {
      const cell = data.cells[row]!;
      return varies[cell] === 0 ? value : value - (products[cell]! / squares[cell]!) * covariate[row]!;
    }),
    /** Cells in which the covariate varies, so that a slope can be told. */
    slopes: varies.reduce((sum, value) => sum + value, 0),
  };
}

/**
 * Whether each covariate has the same slope in all cells, the other covariates keeping a common one.
 *
 * @returns one test per covariate of the data, in their order; empty without covariates
 * @throws ModelError "covariate-constant"
 * @source common practice: F test of the model with a slope per cell against the model with a common slope
 */
export function homogeneousSlopes(data: ModelData): SlopesTest[] {
  if (data.covariates.length === 0) return [];
  const statistics = cellStatistics(data);
  const { span } = covariateDirections(data, statistics, data.covariates);
  const response = withinCells(data, statistics, data.response.offsets).deviations;
  const common = outside(span, response);
  const filled = statistics.n.reduce((count, size) => count + (size > 0 ? 1 : 0), 0);
  return data.covariates.map((covariate) => testOf(data, statistics, covariate, response, common, filled));
}

function testOf(
  data: ModelData,
  statistics: CellStatistics,
  covariate: CodedCovariate,
  response: Float64Array,
  common: Float64Array,
  filled: number,
): SlopesTest {
  const own = withinCells(data, statistics, covariate.values).deviations;
  const { rest, slopes } = clearOfOwnSlopes(data, statistics, own, response);
  const others = newSpan();
  for (const other of data.covariates) {
    if (other.name === covariate.name) continue;
    const deviations = withinCells(data, statistics, other.values).deviations;
    extend(others, clearOfOwnSlopes(data, statistics, own, deviations).rest);
  }
  const separate = outside(others, rest);
  const df1 = slopes - 1;
  const df2 = data.rows - filled - slopes - others.columns.length;
  if (df1 < 1 || df2 < 1) return { covariate: covariate.name, value: null, df1, df2, p: null };
  // The fit with own slopes contains the common one: what the residuals differ by is what the own slopes explain.
  const gained = exactSum(common.map((value, row) => (value - separate[row]!) ** 2));
  const left = exactSum(separate.map((value) => value * value));
  if (left <= 1e-24 * dotProduct(response, response))
    return { covariate: covariate.name, value: null, df1, df2, p: null };
  const value = gained / df1 / (left / df2);
  return { covariate: covariate.name, value, df1, df2, p: fUpperTail(value, df1, df2) };
}
