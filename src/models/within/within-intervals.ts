import type { ModelData } from "../../design/types.ts";
import type { Note } from "../../results/index.ts";
import { tQuantile } from "../../numeric/index.ts";
import { subjectCells } from "./subject-cells.ts";

/** Interval of one within cell in one group, in the unit of the offsets (add the center for the response's own unit). */
export interface WithinInterval {
  readonly group: number;
  readonly withinCell: number;
  /** Index over the cross of the kept factors in declaration order (last fastest). */
  readonly cell: number;
  readonly n: number;
  readonly mean: number;
  readonly lower: number;
  readonly upper: number;
}

/**
 * Within-subject intervals: the subjects' own level is taken out of their scores (each group by itself) before the spread of a
 * cell is taken, and the variance is put right for the number of cells.
 *
 * @param by names of the factors whose cells are described; factors left out are averaged over
 * @param level confidence level, 0 < level < 1
 * @returns one entry per cell with at least two complete subjects; empty when no within factor is kept
 * @source cousineau-2005 (Tutor. Quant. Methods Psychol. 1, 42-45); morey-2008 (same journal 4, 61-64)
 */
export function withinIntervals(
  data: ModelData,
  by: readonly string[],
  level: number,
): { readonly intervals: readonly WithinInterval[]; readonly notes: readonly Note[] } {
  const kept: ModelData = keepFactors(data, by);
  const cells = subjectCells(kept);
  const width = cells.withinCells;
  if (cells.withinFactors.length === 0 || width < 2) return { intervals: [], notes: [] };
  const notes: Note[] = [];
  if (cells.completeSubjects.length < cells.subjects) {
    notes.push({
      code: "within-intervals-of-complete-subjects",
      facts: { unit: cells.unit.name, complete: cells.completeSubjects.length, of: cells.subjects },
    });
  }
  const intervals: WithinInterval[] = [];
  for (let group = 0; group < cells.groups; group++) {
    const members = cells.completeSubjects.filter((subject) => cells.groupOf[subject] === group);
    if (members.length < 2) continue;
    const score = (subject: number, cell: number) => cells.scores[subject * width + cell]!;
    const ownMean = (subject: number) => {
      let sum = 0;
      for (let cell = 0; cell < width; cell++) sum += score(subject, cell);
      return sum / width;
    };
    const ownMeans = Array.from(members, ownMean);
    const half = tQuantile((1 + level) / 2, members.length - 1);
    for (let cell = 0; cell < width; cell++) {
      let mean = 0;
      for (const subject of members) mean += score(subject, cell) / members.length;
      const centred = Array.from(members, (subject, index) => score(subject, cell) - ownMeans[index]!);
      const centre = centred.reduce((sum, value) => sum + value, 0) / members.length;
      const squares = centred.reduce((sum, value) => sum + (value - centre) ** 2, 0);
      const variance = (squares / (members.length - 1)) * (width / (width - 1));
      const reach = half * Math.sqrt(variance / members.length);
      let full = 0;
      while (cells.withinOfCell[full] !== cell || cells.groupOfCell[full] !== group) full++;
      intervals.push({
        group,
        withinCell: cell,
        cell: full,
        n: members.length,
        mean,
        lower: mean - reach,
        upper: mean + reach,
      });
    }
  }
  return { intervals, notes };
}

/** The same rows with cells over the kept factors only. */
function keepFactors(data: ModelData, by: readonly string[]): ModelData {
  const factors = data.factors.filter((factor) => by.includes(factor.name));
  const cells = new Int32Array(data.rows);
  for (const factor of factors) {
    for (let row = 0; row < data.rows; row++) cells[row] = cells[row]! * factor.levels.length + factor.codes[row]!;
  }
  return { ...data, factors, cells, cellCount: factors.reduce((count, factor) => count * factor.levels.length, 1) };
}
