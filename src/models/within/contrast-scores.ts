import type { Contrast, ModelData } from "../../design/types.ts";
import { DomainError } from "../../numeric/index.ts";
import type { Note } from "../../results/index.ts";
import { ratioContrast, type Standardiser, standardisedContrast } from "../effect-size/index.ts";
import { ModelError } from "../model-error.ts";
import type { ContrastEstimates } from "../types.ts";
import { effectBasis, subsets } from "./orthonormal.ts";
import { type SubjectCells, subjectCells } from "./subject-cells.ts";

export interface WithinContrastOptions {
  /** Confidence level of the effect sizes' intervals, or null for no effect sizes (they take most of the time); default 0.95. */
  readonly level?: number | null;
  /** Default "average spread". */
  readonly standardiser?: Standardiser;
  /** Cells of the control condition, for the standardiser "control spread". */
  readonly controlCells?: readonly number[];
  /** "log": the response is a logarithm, effect sizes are ratios. Default "linear". */
  readonly scale?: "linear" | "log";
}

/** Covariance of the within cells in each group of complete subjects. */
interface GroupMoments {
  readonly means: readonly Float64Array[];
  readonly sizes: readonly number[];
  /** Sums of squares and products within each group, within cells x within cells. */
  readonly products: readonly Float64Array[];
  readonly pooledDf: number;
  readonly pooled: Float64Array;
}

function groupMoments(cells: SubjectCells): GroupMoments {
  const width = cells.withinCells;
  const sizes = new Array<number>(cells.groups).fill(0);
  const means = Array.from({ length: cells.groups }, () => new Float64Array(width));
  for (const subject of cells.completeSubjects) sizes[cells.groupOf[subject]!]!++;
  for (const subject of cells.completeSubjects) {
    const group = cells.groupOf[subject]!;
    for (let cell = 0; cell < width; cell++) {
      means[group]![cell]! += cells.scores[subject * width + cell]! / sizes[group]!;
    }
  }
  const products = Array.from({ length: cells.groups }, () => new Float64Array(width * width));
  const deviation = new Float64Array(width);
  for (const subject of cells.completeSubjects) {
    const group = cells.groupOf[subject]!;
    for (let cell = 0; cell < width; cell++) {
      deviation[cell] = cells.scores[subject * width + cell]! - means[group]![cell]!;
    }
    const product = products[group]!;
    for (let i = 0; i < width; i++)
      for (let j = 0; j < width; j++) product[i * width + j]! += deviation[i]! * deviation[j]!;
  }
  const pooledDf = sizes.reduce((sum, size) => sum + Math.max(0, size - 1), 0);
  const pooled = new Float64Array(width * width);
  for (const product of products) for (let at = 0; at < pooled.length; at++) pooled[at]! += product[at]! / pooledDf;
  return { means, sizes, products, pooledDf, pooled };
}

/** left' matrix right. */
function form(left: Float64Array, matrix: Float64Array, right: Float64Array): number {
  const width = left.length;
  let sum = 0;
  for (let i = 0; i < width; i++) {
    if (left[i] === 0) continue;
    let row = 0;
    for (let j = 0; j < width; j++) row += matrix[i * width + j]! * right[j]!;
    sum += left[i]! * row;
  }
  return sum;
}

/** Weights of a contrast over the within cells, one array per group. */
function weightsByGroup(cells: SubjectCells, contrast: Contrast): Float64Array[] {
  const byGroup = Array.from({ length: cells.groups }, () => new Float64Array(cells.withinCells));
  for (let cell = 0; cell < contrast.weights.length; cell++) {
    byGroup[cells.groupOfCell[cell]!]![cells.withinOfCell[cell]!]! += contrast.weights[cell]!;
  }
  return byGroup;
}

const norm = (vector: Float64Array) => Math.sqrt(vector.reduce((sum, value) => sum + value * value, 0));
const dot = (left: Float64Array, right: Float64Array) =>
  left.reduce((sum, value, index) => sum + value * right[index]!, 0);

/**
 * The one score per subject that a contrast stands on, where there is one: weights over within cells (`direction`) and a
 * multiplier per group. Null where groups weigh their cells differently.
 */
function sharedDirection(byGroup: readonly Float64Array[]): { direction: Float64Array; multipliers: number[] } | null {
  let longest = byGroup[0]!;
  for (const weights of byGroup) if (norm(weights) > norm(longest)) longest = weights;
  const length = norm(longest);
  if (length === 0) return null;
  const multipliers = byGroup.map((weights) => dot(weights, longest) / length ** 2);
  for (const [group, weights] of byGroup.entries()) {
    const rest = weights.map((value, cell) => value - multipliers[group]! * longest[cell]!);
    if (norm(rest) > 1e-10 * length) return null;
  }
  // Scaled so that the groups on one side of the contrast add up to 1: the score is then in the contrast's own unit.
  const positive = multipliers.reduce((sum, value) => sum + Math.max(0, value), 0);
  const direction = longest.map((value) => value * positive);
  return { direction, multipliers: multipliers.map((value) => value / positive) };
}

interface Errors {
  readonly covariance: (left: number, right: number) => number;
  readonly df: (index: number) => number;
  readonly commonDf: number | null;
  readonly errorTerm: ContrastEstimates["errorTerm"];
}

/** Each contrast's own scores, their variance pooled over groups; Satterthwaite's df where groups weigh cells differently. */
function pooledScores(weights: readonly Float64Array[][], moments: GroupMoments): Errors {
  const { pooled, pooledDf, sizes } = moments;
  const covariance = (left: number, right: number) =>
    sizes.reduce(
      (sum, size, group) =>
        size === 0 ? sum : sum + form(weights[left]![group]!, pooled, weights[right]![group]!) / size,
      0,
    );
  const directions = weights.map(sharedDirection);
  const df = (index: number) => {
    if (directions[index] !== null) return pooledDf;
    // Variance of tr(AS) with A = sum of w w' / n: the exact one where A has rank one.
    let squares = 0;
    for (const [g, left] of weights[index]!.entries()) {
      if (sizes[g] === 0) continue;
      for (const [h, right] of weights[index]!.entries()) {
        if (sizes[h] !== 0) squares += form(left, pooled, right) ** 2 / (sizes[g]! * sizes[h]!);
      }
    }
    return (pooledDf * covariance(index, index) ** 2) / squares;
  };
  const first = directions[0];
  const oneScore =
    first !== null &&
    first !== undefined &&
    directions.every(
      (other) =>
        other !== null &&
        Math.abs(Math.abs(dot(first.direction, other.direction)) - norm(first.direction) * norm(other.direction)) <
          1e-10 * norm(first.direction) * norm(other.direction),
    );
  return {
    covariance,
    df,
    commonDf: oneScore ? pooledDf : null,
    errorTerm: oneScore && isFlat(first.direction) ? "pooled" : "contrast scores",
  };
}

/** True for a direction that averages all within cells: a comparison of subjects' means. */
function isFlat(direction: Float64Array): boolean {
  return direction.every((value) => Math.abs(value - direction[0]!) < 1e-10 * Math.abs(direction[0]!));
}

/** Each group with its own covariance; Welch's df. */
function separateScores(cells: SubjectCells, weights: readonly Float64Array[][], moments: GroupMoments): Errors {
  const part = (group: number, left: number, right: number) => {
    const size = moments.sizes[group]!;
    return form(weights[left]![group]!, moments.products[group]!, weights[right]![group]!) / ((size - 1) * size);
  };
  const used = (group: number, index: number) => norm(weights[index]![group]!) > 0;
  for (let index = 0; index < weights.length; index++) {
    for (const [group, size] of moments.sizes.entries()) {
      if (!used(group, index) || size > 1) continue;
      throw new ModelError(
        "group-of-one",
        `A group has only one ${cells.unit.name} with every cell; its spread is unknown.`,
        "Assume equal variances, or leave the group out of the comparison.",
      );
    }
  }
  const groups = moments.sizes.map((_, group) => group);
  const covariance = (left: number, right: number) =>
    groups.reduce((sum, group) => (used(group, left) && used(group, right) ? sum + part(group, left, right) : sum), 0);
  const df = (index: number) => {
    const below = groups.reduce(
      (sum, group) => (used(group, index) ? sum + part(group, index, index) ** 2 / (moments.sizes[group]! - 1) : sum),
      0,
    );
    return covariance(index, index) ** 2 / below;
  };
  return { covariance, df, commonDf: null, errorTerm: "contrast scores" };
}

/**
 * Pooled errors under sphericity: one for everything within subjects that the contrasts touch (the error terms of those effects
 * together), one for the subjects' means.
 */
function sphericalErrors(cells: SubjectCells, weights: readonly Float64Array[][], moments: GroupMoments): Errors {
  const width = cells.withinCells;
  const levels = cells.withinFactors.map((factor) => factor.levels.length);
  const columns = (basis: number[][]) => basis[0]!.map((_, column) => Float64Array.from(basis, (row) => row[column]!));
  let pooledSum = 0;
  let pooledColumns = 0;
  for (const flags of subsets(levels.length)) {
    const basis = columns(effectBasis(levels, flags));
    const touched = weights.some((byGroup) =>
      byGroup.some((vector) => basis.some((column) => Math.abs(dot(column, vector)) > 1e-10 * norm(vector))),
    );
    if (!touched) continue;
    pooledColumns += basis.length;
    for (const column of basis) pooledSum += form(column, moments.pooled, column);
  }
  const flat = new Float64Array(width).fill(1 / Math.sqrt(width));
  const meanSquares = [form(flat, moments.pooled, flat), pooledColumns === 0 ? 0 : pooledSum / pooledColumns];
  const dfs = [moments.pooledDf, pooledColumns * moments.pooledDf];
  const parts = (left: number, right: number) => {
    const shares = [0, 0];
    for (const [group, size] of moments.sizes.entries()) {
      if (size === 0) continue;
      const a = weights[left]![group]!;
      const b = weights[right]![group]!;
      const mean = dot(flat, a) * dot(flat, b);
      shares[0]! += mean / size;
      shares[1]! += (dot(a, b) - mean) / size;
    }
    return shares;
  };
  const covariance = (left: number, right: number) =>
    parts(left, right).reduce((sum, share, index) => sum + share * meanSquares[index]!, 0);
  const negligible = (share: number, whole: number) => Math.abs(share) < 1e-12 * whole;
  const onlyPart = weights.map((_, index) => {
    const shares = parts(index, index);
    const whole = shares[0]! + shares[1]!;
    return negligible(shares[0]!, whole) ? 1 : negligible(shares[1]!, whole) ? 0 : -1;
  });
  const df = (index: number) => {
    if (onlyPart[index] !== -1) return dfs[onlyPart[index]!]!;
    const shares = parts(index, index).map((share, at) => share * meanSquares[at]!);
    return (shares[0]! + shares[1]!) ** 2 / (shares[0]! ** 2 / dfs[0]! + shares[1]! ** 2 / dfs[1]!);
  };
  const one = onlyPart[0]!;
  const same = one !== -1 && onlyPart.every((part) => part === one);
  return { covariance, df, commonDf: same ? dfs[one]! : null, errorTerm: same && one === 0 ? "pooled" : "sphericity" };
}

/** Spread that the effect sizes are counted in, and the df that Hedges's factor takes. */
function spreadOf(
  options: WithinContrastOptions,
  cells: SubjectCells,
  moments: GroupMoments,
  byGroup: readonly Float64Array[],
): { sd: number; df: number } | null {
  const width = cells.withinCells;
  const { pooled, pooledDf } = moments;
  switch (options.standardiser ?? "average spread") {
    case "difference spread": {
      const shared = sharedDirection(byGroup);
      return shared === null ? null : { sd: Math.sqrt(form(shared.direction, pooled, shared.direction)), df: pooledDf };
    }
    case "control spread": {
      const control = [...new Set((options.controlCells ?? []).map((cell) => cells.withinOfCell[cell]!))];
      return control.length === 0 ? null : meanSpread(pooled, width, control, pooledDf);
    }
    default:
      return meanSpread(
        pooled,
        width,
        Array.from({ length: width }, (_, cell) => cell),
        pooledDf,
      );
  }
}

/** Root of the mean of some cells' variances; df by Satterthwaite, since the cells of a subject go together. */
function meanSpread(pooled: Float64Array, width: number, chosen: readonly number[], pooledDf: number) {
  const sum = chosen.reduce((total, cell) => total + pooled[cell * width + cell]!, 0);
  const squares = chosen.reduce(
    (total, i) => total + chosen.reduce((inner, j) => inner + pooled[i * width + j]! ** 2, 0),
    0,
  );
  return { sd: Math.sqrt(sum / chosen.length), df: (pooledDf * sum ** 2) / squares };
}

/**
 * Comparisons on the subjects' own contrast scores: each has its own error (the spread of its scores between subjects), which
 * needs no sphericity. A comparison that involves between factors compares the scores of the groups: with the error pooled over
 * groups (df: subjects - groups), or with each group's own under `assume unequal variances` (Welch's df). A simple effect uses
 * the same error as the comparison without `at`. Under `assume sphericity` the error is pooled over the within contrasts.
 *
 * Complete subjects enter, the others are counted in a note. Comparisons between groups only are comparisons of the subjects'
 * means, whose error they all share (`commonDf`).
 *
 * @param contrasts weights over the cells of `data`
 * @returns estimates in the order of `contrasts`; `correlation` from the covariance of the scores
 * @throws ModelError "no-subjects", "one-subject", "subject-in-two-groups", "no-error-df", "empty-cell", "group-of-one", "zero-variance"; DomainError for weights of the wrong length
 * @source contrast scores: common practice (e.g. Maxwell & Delaney, Designing Experiments and Analyzing Data); Satterthwaite 1946
 * (Biometrics Bull. 2, 110-114); Welch 1947 (Biometrika 34, 28-35)
 */
export function withinContrasts(
  data: ModelData,
  contrasts: readonly Contrast[],
  options: WithinContrastOptions = {},
): ContrastEstimates {
  for (const { weights } of contrasts) {
    if (weights.length !== data.cellCount) {
      throw new DomainError("weights", weights.length, `one weight for each of ${data.cellCount} cells`);
    }
  }
  const cells = subjectCells(data);
  const moments = groupMoments(cells);
  const notes: Note[] = [];
  if (cells.completeSubjects.length < cells.subjects) {
    const leftOut = cells.subjects - cells.completeSubjects.length;
    notes.push({
      code: "incomplete-subjects-left-out",
      facts: { unit: cells.unit.name, leftOut, of: cells.subjects, missingCells: cells.missing },
    });
  }
  if (cells.trialsAveraged) notes.push({ code: "trials-averaged", facts: { unit: cells.unit.name } });
  if (moments.pooledDf < 1) {
    throw new ModelError(
      "no-error-df",
      `Each group has at most one ${cells.unit.name} with every cell: how much ${cells.unit.name}s differ cannot be seen.`,
      `More than one complete ${cells.unit.name} per group is needed; with missing cells: omnibus by multilevel model`,
    );
  }
  const weights = contrasts.map((contrast) => weightsByGroup(cells, contrast));
  for (const [index, byGroup] of weights.entries()) {
    if (byGroup.every((vector, group) => norm(vector) === 0 || moments.sizes[group]! > 0)) continue;
    throw new ModelError(
      "empty-cell",
      `"${contrasts[index]!.name}" needs a group that has no complete ${cells.unit.name}.`,
      "Compare groups that have data.",
    );
  }
  const errors = chooseErrors(data, cells, weights, moments);
  const estimates = weights.map((byGroup) =>
    byGroup.reduce(
      (sum, vector, group) => (moments.sizes[group] === 0 ? sum : sum + dot(vector, moments.means[group]!)),
      0,
    ),
  );
  const variances = weights.map((_, index) => errors.covariance(index, index));
  const largest = Math.max(...moments.means.flatMap((mean) => [...mean].map(Math.abs)), Math.abs(cells.center));
  for (const [index, variance] of variances.entries()) {
    if (variance > (1e-14 * largest) ** 2) continue;
    throw new ModelError(
      "zero-variance",
      `Every ${cells.unit.name} has the same score on "${contrasts[index]!.name}": there is no variance to test against.`,
      "Check that the response was read from the right column and is not one value per condition.",
    );
  }
  const standardErrors = variances.map(Math.sqrt);
  const df = weights.map((_, index) => errors.df(index));
  return {
    errorTerm: errors.errorTerm,
    estimates,
    standardErrors,
    df,
    correlation: weights.map((_, row) =>
      weights.map((__, column) =>
        row === column ? 1 : errors.covariance(row, column) / (standardErrors[row]! * standardErrors[column]!),
      ),
    ),
    commonDf: errors.commonDf,
    n: weights.map((byGroup) =>
      byGroup.reduce((sum, vector, group) => (norm(vector) > 0 ? sum + moments.sizes[group]! : sum), 0),
    ),
    effectSizes: weights.map((byGroup, index) => {
      const level = options.level === undefined ? 0.95 : options.level;
      if (level === null) return null;
      const test = { estimate: estimates[index]!, standardError: standardErrors[index]!, df: df[index]!, level };
      if (options.scale === "log") return ratioContrast(test);
      const spread = spreadOf(options, cells, moments, byGroup);
      if (spread === null || !(spread.sd > 0)) return null;
      return standardisedContrast({
        ...test,
        sd: spread.sd,
        sdDf: spread.df,
        standardiser: options.standardiser ?? "average spread",
      });
    }),
    notes,
  };
}

function chooseErrors(
  data: ModelData,
  cells: SubjectCells,
  weights: readonly Float64Array[][],
  moments: GroupMoments,
): Errors {
  const spherical = data.assumptions.covariance === "sphericity" || data.assumptions.covariance === "compound symmetry";
  if (spherical && cells.withinFactors.length > 0) return sphericalErrors(cells, weights, moments);
  const unequal = data.assumptions.variances === "unequal" && cells.groups > 1;
  return unequal ? separateScores(cells, weights, moments) : pooledScores(weights, moments);
}
