import type { CellStatistics, FactorDeclaration } from "../../design/types.ts";
import { fUpperTail } from "../../numeric/index.ts";
import type { Note, OmnibusEffect } from "../../results/index.ts";
import { estimablePart } from "../estimable.ts";
import { effectBasis, subsets } from "../within/index.ts";
import { type BetweenAnalysis, cellName, type GroupNaming } from "./analysis.ts";
import { filledCells, observationsOf } from "./cell-statistics.ts";
import { exactSum } from "./compensated-sum.ts";
import { extend, newSpan, squaredLengthWithin } from "./orthonormal-span.ts";
import { requireOwnVariances, requireTwoGroups } from "./refusals.ts";

/**
 * Every effect of any number of between factors when each cell has its own variance: contrasts of cell means that weigh equally,
 * by the general form of Welch's test. With one factor it is Welch's test, with one contrast the square of Welch's t.
 *
 * @throws ModelError "too-few-groups", "group-of-one", "group-without-variance"
 * @source johansen-1980 (Biometrika 67, 85-92); welch-1951
 */
export function welchFactorialAnalysis(
  statistics: CellStatistics,
  factors: readonly Pick<FactorDeclaration, "name" | "levels">[],
  naming: GroupNaming = {},
): BetweenAnalysis {
  requireTwoGroups(statistics);
  const cells = filledCells(statistics);
  requireOwnVariances(statistics, cells, (cell) => cellName(naming, cell));
  const observations = observationsOf(statistics);
  const notes: Note[] = [];
  const empty = Array.from(statistics.n, (size) => size === 0);
  if (cells.length < empty.length) {
    notes.push({ code: "empty-cells", facts: { count: empty.length - cells.length, of: empty.length } });
  }
  const standardErrors = cells.map((cell) =>
    Math.sqrt(statistics.sumOfSquares[cell]! / (statistics.n[cell]! - 1) / statistics.n[cell]!),
  );
  const weight = standardErrors.map((value) => 1 / value ** 2);
  const centre = exactSum(cells.map((cell, index) => weight[index]! * statistics.mean[cell]!)) / exactSum(weight);
  // In units of their standard errors the means have variance one each, and a contrast is a direction among them.
  const scaled = Float64Array.from(cells, (cell, index) => (statistics.mean[cell]! - centre) / standardErrors[index]!);
  const effects: OmnibusEffect[] = [];
  for (const takesPart of subsets(factors.length)) {
    const effect = factors.flatMap((factor, index) => (takesPart[index] === true ? [factor.name] : [])).join(" x ");
    const wanted = effectBasis(
      factors.map((factor) => factor.levels.length),
      takesPart,
    );
    const basis = estimablePart(wanted, empty);
    const span = newSpan();
    for (let column = 0; column < (basis[0]?.length ?? 0); column++) {
      extend(
        span,
        cells.map((cell, index) => basis[cell]![column]! * standardErrors[index]!),
      );
    }
    const df1 = span.columns.length;
    if (df1 === 0) {
      notes.push({ code: "effect-not-estimable", facts: { effect } });
      continue;
    }
    if (df1 < wanted[0]!.length) {
      notes.push({ code: "effect-partly-estimable", facts: { effect, df: df1, of: wanted[0]!.length } });
    }
    const uncertainty = exactSum(
      cells.map((cell, index) => {
        const share = span.columns.reduce((sum, direction) => sum + direction[index]! ** 2, 0);
        return share ** 2 / (statistics.n[cell]! - 1);
      }),
    );
    const divisor = df1 + 2 * uncertainty - (6 * uncertainty) / (df1 + 2);
    const value = squaredLengthWithin(span.columns, scaled) / divisor;
    const df2 = (df1 * (df1 + 2)) / (3 * uncertainty);
    effects.push({ effect, method: "welch", statistic: "F", value, df1, df2, p: fUpperTail(value, df1, df2) });
  }
  return { method: "welch", effects, observations, notes };
}
