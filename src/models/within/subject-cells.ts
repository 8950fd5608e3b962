import type { CodedFactor, CodedUnit, ModelData } from "../../design/types.ts";
import { ModelError } from "../model-error.ts";

/**
 * The rows laid out as one line per subject: what repeated measures and contrast scores work on.
 * Groups are the cross of the between factors, within cells the cross of the within factors, each in declaration order,
 * last factor fastest. Scores are means over the rows of a subject and cell, minus `center`.
 */
export interface SubjectCells {
  readonly center: number;
  readonly unit: CodedUnit;
  readonly subjects: number;
  readonly withinFactors: readonly CodedFactor[];
  readonly betweenFactors: readonly CodedFactor[];
  readonly withinCells: number;
  readonly groups: number;
  /** subjects x within cells, row per subject; NaN where the subject has no row in the cell. */
  readonly scores: Float64Array;
  /** Rows behind each score, same shape. */
  readonly counts: Int32Array;
  /** Group of each subject. */
  readonly groupOf: Int32Array;
  /** Subjects of each group, whether complete or not. */
  readonly groupSizes: Int32Array;
  /** Number of subject-by-cell combinations without a row. */
  readonly missing: number;
  /** Subjects that have every within cell, in order. */
  readonly completeSubjects: Int32Array;
  /** True where some score is the mean of several rows. */
  readonly trialsAveraged: boolean;
  /** Group and within cell of every cell of the full cross. */
  readonly groupOfCell: Int32Array;
  readonly withinOfCell: Int32Array;
}

/** For each cell of the full cross, its index within the cross of the chosen factors only. */
function projectedCells(factors: readonly CodedFactor[], cellCount: number, chosen: (factor: CodedFactor) => boolean) {
  const projected = new Int32Array(cellCount);
  for (let cell = 0; cell < cellCount; cell++) {
    let rest = cell;
    let stride = 1;
    let index = 0;
    for (let position = factors.length - 1; position >= 0; position--) {
      const factor = factors[position]!;
      const level = rest % factor.levels.length;
      rest = Math.floor(rest / factor.levels.length);
      if (!chosen(factor)) continue;
      index += level * stride;
      stride *= factor.levels.length;
    }
    projected[cell] = index;
  }
  return projected;
}

/**
 * Lays rows out as subjects x within cells.
 *
 * @throws ModelError "no-subjects" (no sampling unit declared), "one-subject", "subject-in-two-groups"
 */
export function subjectCells(data: ModelData): SubjectCells {
  const unit = data.units.find((candidate) => candidate.role === "subjects");
  if (unit === undefined) {
    throw new ModelError(
      "no-subjects",
      "Nothing says which rows belong to the same subject.",
      "Declare the column that names the subject: subjects NAME",
    );
  }
  if (unit.count < 2) {
    throw new ModelError(
      "one-subject",
      `There is only one ${unit.name}.`,
      `Conditions are compared across ${unit.name}s: one alone tells nothing about others.`,
    );
  }
  const withinFactors = data.factors.filter((factor) => factor.varies === "within");
  const betweenFactors = data.factors.filter((factor) => factor.varies !== "within");
  const count = (factors: readonly CodedFactor[]) =>
    factors.reduce((product, factor) => product * factor.levels.length, 1);
  const withinCells = count(withinFactors);
  const groups = count(betweenFactors);
  const withinOfCell = projectedCells(data.factors, data.cellCount, (factor) => factor.varies === "within");
  const groupOfCell = projectedCells(data.factors, data.cellCount, (factor) => factor.varies !== "within");

  const scores = new Float64Array(unit.count * withinCells);
  const counts = new Int32Array(unit.count * withinCells);
  const groupOf = new Int32Array(unit.count).fill(-1);
  for (let row = 0; row < data.rows; row++) {
    const subject = unit.codes[row]!;
    const group = groupOfCell[data.cells[row]!]!;
    if (groupOf[subject] === -1) groupOf[subject] = group;
    else if (groupOf[subject] !== group) {
      throw new ModelError(
        "subject-in-two-groups",
        `${unit.name} "${unit.labels[subject]}" has rows in two groups of ${betweenFactors.map((factor) => `"${factor.name}"`).join(", ")}.`,
        `Declare the factor within ${unit.name}, or give different ${unit.name}s different names.`,
      );
    }
    const at = subject * withinCells + withinOfCell[data.cells[row]!]!;
    scores[at]! += data.response.offsets[row]!;
    counts[at]!++;
  }
  let missing = 0;
  let trialsAveraged = false;
  for (let at = 0; at < scores.length; at++) {
    if (counts[at] === 0) missing++;
    else if (counts[at]! > 1) trialsAveraged = true;
    scores[at] = counts[at] === 0 ? Number.NaN : scores[at]! / counts[at]!;
  }
  const groupSizes = new Int32Array(groups);
  const complete: number[] = [];
  for (let subject = 0; subject < unit.count; subject++) {
    groupSizes[groupOf[subject]!]!++;
    const line = counts.subarray(subject * withinCells, (subject + 1) * withinCells);
    if (line.every((rows) => rows > 0)) complete.push(subject);
  }
  return {
    center: data.response.center,
    unit,
    subjects: unit.count,
    withinFactors,
    betweenFactors,
    withinCells,
    groups,
    scores,
    counts,
    groupOf,
    groupSizes,
    missing,
    completeSubjects: Int32Array.from(complete),
    trialsAveraged,
    groupOfCell,
    withinOfCell,
  };
}
