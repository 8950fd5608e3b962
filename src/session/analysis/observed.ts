import type { FactorDeclaration } from "../../design/index.ts";
import { cellStatistics, subjectCells } from "../../models/index.ts";
import type { ObservedDesign } from "../../planning/index.ts";
import type { Prepared } from "./layout.ts";

/** Sizes, means, covariances and standardised residuals of the held data, for a calibration on data like these. */
export function observedDesign(prepared: Prepared): ObservedDesign {
  const { data } = prepared.layout;
  if (!data.factors.some((factor: FactorDeclaration) => factor.varies === "within")) {
    const cells = cellStatistics(data);
    const variance = (cell: number) => (cells.n[cell]! > 1 ? cells.sumOfSquares[cell]! / (cells.n[cell]! - 1) : 0);
    const sizes = Array.from(cells.n);
    const residuals: number[] = [];
    for (let row = 0; row < data.rows; row++) {
      const cell = data.cells[row]!;
      const sd = Math.sqrt(variance(cell));
      if (sd > 0) residuals.push((data.response.offsets[row]! - cells.mean[cell]!) / sd);
    }
    return {
      groupSizes: sizes,
      cellMeans: Array.from(cells.mean, (mean) => data.response.center + mean),
      covariances: sizes.map((_, cell) => [[variance(cell)]]),
      residuals,
    };
  }
  const cells = subjectCells(data);
  const width = cells.withinCells;
  const sizes = new Array<number>(cells.groups).fill(0);
  const means = Array.from({ length: cells.groups }, () => new Float64Array(width));
  for (const subject of cells.completeSubjects) {
    const group = cells.groupOf[subject]!;
    sizes[group]!++;
    for (let cell = 0; cell < width; cell++) means[group]![cell]! += cells.scores[subject * width + cell]!;
  }
  for (const [group, mean] of means.entries())
    for (let cell = 0; cell < width; cell++) mean[cell]! /= Math.max(1, sizes[group]!);
  const covariances = sizes.map(() => Array.from({ length: width }, () => new Array<number>(width).fill(0)));
  for (const subject of cells.completeSubjects) {
    const group = cells.groupOf[subject]!;
    const deviation = Array.from(
      { length: width },
      (_, cell) => cells.scores[subject * width + cell]! - means[group]![cell]!,
    );
    for (let row = 0; row < width; row++) {
      for (let column = 0; column < width; column++)
        covariances[group]![row]![column]! += (deviation[row]! * deviation[column]!) / Math.max(1, sizes[group]! - 1);
    }
  }
  const residuals: number[] = [];
  for (const subject of cells.completeSubjects) {
    const group = cells.groupOf[subject]!;
    for (let cell = 0; cell < width; cell++) {
      const sd = Math.sqrt(covariances[group]![cell]![cell]!);
      if (sd > 0) residuals.push((cells.scores[subject * width + cell]! - means[group]![cell]!) / sd);
    }
  }
  return {
    groupSizes: sizes,
    cellMeans: Array.from(
      { length: data.cellCount },
      (_, cell) => cells.center + means[cells.groupOfCell[cell]!]![cells.withinOfCell[cell]!]!,
    ),
    covariances,
    residuals,
  };
}
