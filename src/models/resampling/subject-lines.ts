import type { CodedFactor, ModelData } from "../../design/types.ts";
import type { Note } from "../../results/index.ts";
import { ModelError } from "../model-error.ts";
import { subjectCells } from "../within/index.ts";

/**
 * A study as lines that can be rearranged: one per subject, with a score per within cell (one score where no factor is within).
 * The grand mean is taken out of the scores, and each block's own level.
 */
export interface SubjectLines {
  readonly subjects: number;
  readonly width: number;
  /** Subjects x within cells, row per subject. */
  readonly scores: Float64Array;
  readonly groupOf: Int32Array;
  readonly groups: number;
  readonly sizes: readonly number[];
  /** Block of each subject, all 0 without blocks. */
  readonly blockOf: Int32Array;
  readonly blocks: number;
  readonly withinFactors: readonly CodedFactor[];
  readonly betweenFactors: readonly CodedFactor[];
  readonly groupOfCell: Int32Array;
  readonly withinOfCell: Int32Array;
  readonly notes: readonly Note[];
}

/** @throws ModelError "resampling-with-covariates", and those of the subjects' layout */
export function subjectLines(data: ModelData): SubjectLines {
  if (data.covariates.length > 0) {
    throw new ModelError(
      "resampling-with-covariates",
      "Rearranging subjects would part them from their covariates.",
      "Leave the covariate out, or use the analysis of covariance: omnibus by variance analysis",
    );
  }
  const blockUnit = data.units.find((unit) => unit.role === "blocks");
  const lines = data.factors.some((factor) => factor.varies === "within")
    ? linesOfSubjects(data, blockUnit?.codes ?? null)
    : linesOfRows(data, blockUnit?.codes ?? null);
  const scores = Float64Array.from(lines.scores);
  const blocks = takeOutBlocks(scores, lines.width, lines.blockOf);
  const sizes = new Array<number>(lines.groups).fill(0);
  for (const group of lines.groupOf) sizes[group]!++;
  return { ...lines, scores, blocks, sizes };
}

type Laid = Omit<SubjectLines, "blocks" | "sizes">;

function linesOfRows(data: ModelData, blockCodes: Int32Array | null): Laid {
  return {
    subjects: data.rows,
    width: 1,
    scores: data.response.offsets,
    groupOf: data.cells,
    groups: data.cellCount,
    blockOf: blockCodes ?? new Int32Array(data.rows),
    withinFactors: [],
    betweenFactors: data.factors,
    groupOfCell: Int32Array.from({ length: data.cellCount }, (_, cell) => cell),
    withinOfCell: new Int32Array(data.cellCount),
    notes: [],
  };
}

function linesOfSubjects(data: ModelData, blockCodes: Int32Array | null): Laid {
  const cells = subjectCells(data);
  const complete = cells.completeSubjects;
  const width = cells.withinCells;
  const scores = new Float64Array(complete.length * width);
  for (const [index, subject] of complete.entries()) {
    scores.set(cells.scores.subarray(subject * width, (subject + 1) * width), index * width);
  }
  const blockOfSubject = new Int32Array(cells.subjects);
  if (blockCodes !== null) {
    for (let row = 0; row < data.rows; row++) blockOfSubject[cells.unit.codes[row]!] = blockCodes[row]!;
  }
  const notes: Note[] = [];
  if (complete.length < cells.subjects) {
    const leftOut = cells.subjects - complete.length;
    notes.push({
      code: "incomplete-subjects-left-out",
      facts: { unit: cells.unit.name, leftOut, of: cells.subjects, missingCells: cells.missing },
    });
  }
  if (cells.trialsAveraged) notes.push({ code: "trials-averaged", facts: { unit: cells.unit.name } });
  return {
    subjects: complete.length,
    width,
    scores,
    groupOf: Int32Array.from(complete, (subject) => cells.groupOf[subject]!),
    groups: cells.groups,
    blockOf: Int32Array.from(complete, (subject) => blockOfSubject[subject]!),
    withinFactors: cells.withinFactors,
    betweenFactors: cells.betweenFactors,
    groupOfCell: cells.groupOfCell,
    withinOfCell: cells.withinOfCell,
    notes,
  };
}

/** Takes each block's mean over all its scores out of them (the grand mean, where there are no blocks). */
function takeOutBlocks(scores: Float64Array, width: number, blockOf: Int32Array): number {
  const sums = new Map<number, { sum: number; subjects: number }>();
  for (const [subject, block] of blockOf.entries()) {
    const held = sums.get(block) ?? { sum: 0, subjects: 0 };
    for (let cell = 0; cell < width; cell++) held.sum += scores[subject * width + cell]!;
    held.subjects++;
    sums.set(block, held);
  }
  for (const [subject, block] of blockOf.entries()) {
    const { sum, subjects } = sums.get(block)!;
    for (let cell = 0; cell < width; cell++) scores[subject * width + cell]! -= sum / (subjects * width);
  }
  return Math.max(1, sums.size);
}

/** Number of the combination of the kept factors' levels that each cell of the factors' cross belongs to. */
export function stratumOfCells(factors: readonly CodedFactor[], keep: readonly boolean[]): Int32Array {
  let strata = [0];
  for (const [index, factor] of factors.entries()) {
    const count = factor.levels.length;
    strata = strata.flatMap((stratum) =>
      Array.from({ length: count }, (_, level) => (keep[index] === true ? stratum * count + level : stratum)),
    );
  }
  return Int32Array.from(strata);
}
