import { fUpperTail } from "../../numeric/index.ts";
import type { ModelData } from "../../design/types.ts";
import type { Note, OmnibusEffect, Sphericity } from "../../results/index.ts";
import { partialEtaSquaredInterval } from "../effect-size/index.ts";
import { estimablePart } from "../estimable.ts";
import { ModelError } from "../model-error.ts";
import { generalizedEtaSquared } from "./effect-shares.ts";
import { multivariateEffects, multivariateTests } from "./multivariate.ts";
import { effectBasis, subsets } from "./orthonormal.ts";
import { type SubjectCells, subjectCells } from "./subject-cells.ts";
import { greenhouseGeisserEpsilon, huynhFeldtEpsilon, mauchlyTest } from "./sphericity.ts";

export interface RepeatedMeasuresOptions {
  /** Level of the intervals of partial eta squared, or null for none; default 0.95. */
  readonly level?: number | null;
}

export interface RepeatedMeasures {
  /** One entry per effect, method "repeated measures", in the order main effects, two-way interactions ... */
  readonly effects: readonly OmnibusEffect[];
  /** Entries of method "multivariate", one per criterion, for every effect with a within factor. */
  readonly multivariate: readonly OmnibusEffect[];
  readonly sphericity: readonly Sphericity[];
  /** Subjects that entered (complete ones). */
  readonly subjects: number;
  readonly observations: number;
  readonly notes: readonly Note[];
}

/** Sums of squares of one effect on the subjects' scores. */
interface EffectSums {
  readonly name: string;
  readonly factors: readonly string[];
  readonly within: boolean;
  readonly hypothesis: number[][];
  readonly error: number[][];
  readonly betweenDf: number;
  readonly scores: number;
}

const trace = (matrix: readonly (readonly number[])[]) => matrix.reduce((sum, row, index) => sum + row[index]!, 0);

/** Complete subjects only, as plain lines of scores. */
interface CompleteScores {
  readonly lines: readonly Float64Array[];
  readonly groupOf: readonly number[];
  readonly groups: number;
  readonly sizes: readonly number[];
}

function completeScores(cells: SubjectCells): CompleteScores {
  const lines: Float64Array[] = [];
  const groupOf: number[] = [];
  const sizes = new Array<number>(cells.groups).fill(0);
  for (const subject of cells.completeSubjects) {
    lines.push(cells.scores.subarray(subject * cells.withinCells, (subject + 1) * cells.withinCells));
    groupOf.push(cells.groupOf[subject]!);
    sizes[cells.groupOf[subject]!]!++;
  }
  return { lines, groupOf, groups: cells.groups, sizes };
}

/** Scores of each subject on the columns of a basis, group means of them, and the pooled within-group products. */
export function pooledProducts(complete: CompleteScores, basis: readonly (readonly number[])[]) {
  const p = basis[0]!.length;
  const scores = complete.lines.map((line) => {
    const score = new Float64Array(p);
    for (let cell = 0; cell < line.length; cell++) {
      for (let column = 0; column < p; column++) score[column]! += line[cell]! * basis[cell]![column]!;
    }
    return score;
  });
  const means = Array.from({ length: complete.groups }, () => new Float64Array(p));
  scores.forEach((score, index) => {
    const mean = means[complete.groupOf[index]!]!;
    for (let column = 0; column < p; column++)
      mean[column]! += score[column]! / complete.sizes[complete.groupOf[index]!]!;
  });
  const error = Array.from({ length: p }, () => new Array<number>(p).fill(0));
  scores.forEach((score, index) => {
    const mean = means[complete.groupOf[index]!]!;
    for (let i = 0; i < p; i++) {
      const left = score[i]! - mean[i]!;
      for (let j = 0; j <= i; j++) error[i]![j]! += left * (score[j]! - mean[j]!);
    }
  });
  for (let i = 0; i < p; i++) for (let j = 0; j < i; j++) error[j]![i] = error[i]![j]!;
  return { means, error };
}

/** Inverse of a small positive definite matrix by Cholesky. */
function solvePositive(matrix: number[][], right: number[][]): number[][] {
  const size = matrix.length;
  const lower = matrix.map((row) => [...row]);
  for (let column = 0; column < size; column++) {
    for (let before = 0; before < column; before++) lower[column]![column]! -= lower[column]![before]! ** 2;
    lower[column]![column] = Math.sqrt(lower[column]![column]!);
    for (let row = column + 1; row < size; row++) {
      for (let before = 0; before < column; before++)
        lower[row]![column]! -= lower[row]![before]! * lower[column]![before]!;
      lower[row]![column]! /= lower[column]![column]!;
    }
  }
  const solved = right.map((row) => [...row]);
  for (let column = 0; column < (right[0]?.length ?? 0); column++) {
    for (let row = 0; row < size; row++) {
      for (let before = 0; before < row; before++)
        solved[row]![column]! -= lower[row]![before]! * solved[before]![column]!;
      solved[row]![column]! /= lower[row]![row]!;
    }
    for (let row = size - 1; row >= 0; row--) {
      for (let after = row + 1; after < size; after++)
        solved[row]![column]! -= lower[after]![row]! * solved[after]![column]!;
      solved[row]![column]! /= lower[row]![row]!;
    }
  }
  return solved;
}

/**
 * Products of the hypothesis that the between contrasts of the group means of the scores are zero, groups weighing equally
 * whatever their sizes.
 */
function hypothesisProducts(
  means: readonly Float64Array[],
  sizes: readonly number[],
  between: readonly (readonly number[])[],
) {
  const q = between[0]!.length;
  const p = means[0]!.length;
  const estimates = Array.from({ length: q }, (_, row) =>
    Array.from({ length: p }, (__, column) =>
      between.reduce(
        (sum, weights, group) => (sizes[group] === 0 ? sum : sum + weights[row]! * means[group]![column]!),
        0,
      ),
    ),
  );
  const spread = Array.from({ length: q }, (_, i) =>
    Array.from({ length: q }, (__, j) =>
      between.reduce(
        (sum, weights, group) => (sizes[group] === 0 ? sum : sum + (weights[i]! * weights[j]!) / sizes[group]!),
        0,
      ),
    ),
  );
  const solved = solvePositive(spread, estimates);
  return Array.from({ length: p }, (_, i) =>
    Array.from({ length: p }, (__, j) => estimates.reduce((sum, row, index) => sum + row[i]! * solved[index]![j]!, 0)),
  );
}

function effectSums(cells: SubjectCells, data: ModelData, complete: CompleteScores, notes: Note[]): EffectSums[] {
  const sums: EffectSums[] = [];
  const empty = complete.sizes.map((size) => size === 0);
  for (const flags of subsets(data.factors.length)) {
    const named = data.factors.filter((_, index) => flags[index] === true);
    const takesPart = (factor: { readonly name: string }) => named.some((other) => other.name === factor.name);
    const name = named.map((factor) => factor.name).join(" x ");
    const withinFlags = cells.withinFactors.map(takesPart);
    const within = effectBasis(
      cells.withinFactors.map((factor) => factor.levels.length),
      withinFlags,
    );
    const wanted = effectBasis(
      cells.betweenFactors.map((factor) => factor.levels.length),
      cells.betweenFactors.map(takesPart),
    );
    const between = estimablePart(wanted, empty);
    if (within[0]!.length === 0 || between[0]!.length === 0) {
      notes.push({ code: "effect-not-estimable", facts: { effect: name } });
      continue;
    }
    if (between[0]!.length < wanted[0]!.length) {
      notes.push({
        code: "effect-partly-estimable",
        facts: { effect: name, df: between[0]!.length, of: wanted[0]!.length },
      });
    }
    const { means, error } = pooledProducts(complete, within);
    sums.push({
      name,
      factors: named.map((factor) => factor.name),
      within: withinFlags.some(Boolean),
      hypothesis: hypothesisProducts(means, complete.sizes, between),
      error,
      betweenDf: between[0]!.length,
      scores: within[0]!.length,
    });
  }
  return sums;
}

/** Errors below this share of the response's own sum of squares are rounding, not variance. */
const roundingShare = 1e-26;

/**
 * Repeated-measures analysis of variance on the subjects' cell means: any number of within and between factors, each effect
 * with its own error term (its interaction with subjects), cells weighing equally whatever the group sizes.
 *
 * Complete subjects enter; those with a missing cell cannot, and a note counts them. Several rows of a subject in a cell are
 * averaged, said in a note. Epsilons come from the covariance of the orthonormal contrast scores pooled within groups;
 * Huynh-Feldt's is capped at 1. Intervals of partial eta squared take sphericity for granted (their N is df1 + df2 + 1).
 *
 * @throws ModelError "no-subjects", "one-subject", "subject-in-two-groups", "no-complete-subjects", "no-error-df", "zero-variance"
 */
export function repeatedMeasuresAnalysis(data: ModelData, options: RepeatedMeasuresOptions = {}): RepeatedMeasures {
  const cells = subjectCells(data);
  const complete = completeScores(cells);
  const notes: Note[] = [];
  const subjects = complete.lines.length;
  const groups = complete.sizes.filter((size) => size > 0).length;
  refuseTooFew(cells, subjects, groups);
  if (subjects < cells.subjects) {
    notes.push({
      code: "incomplete-subjects-left-out",
      facts: {
        unit: cells.unit.name,
        leftOut: cells.subjects - subjects,
        of: cells.subjects,
        missingCells: cells.missing,
      },
    });
  }
  if (cells.trialsAveraged) notes.push({ code: "trials-averaged", facts: { unit: cells.unit.name } });
  if (data.covariates.length > 0) {
    notes.push({
      code: "covariates-not-used",
      facts: { covariates: data.covariates.map((covariate) => covariate.name) },
    });
  }
  const errorDf = subjects - groups;
  const sums = effectSums(cells, data, complete, notes);
  const ofResponse = complete.lines.reduce((sum, line) => sum + line.reduce((s, value) => s + value * value, 0), 0);
  const floor = roundingShare * (ofResponse + subjects * cells.withinCells * cells.center ** 2);
  if (sums.length > 0 && sums.every((effect) => trace(effect.error) <= floor)) {
    throw new ModelError(
      "zero-variance",
      "The subjects do not differ from each other in anything but the conditions' means: there is no variance to test against.",
      "Check that the response was read from the right column and is not one value per condition.",
    );
  }
  const shares = generalizedEtaSquared(
    sums.map((effect) => ({ factors: effect.factors, sumOfSquares: trace(effect.hypothesis) })),
    totalErrorSum(cells, complete),
    data.factors.filter((factor) => factor.measured).map((factor) => factor.name),
  );
  const level = options.level === undefined ? 0.95 : options.level;
  const effects: OmnibusEffect[] = [];
  const multivariate: OmnibusEffect[] = [];
  const sphericity: Sphericity[] = [];
  for (const [index, effect] of sums.entries()) {
    effects.push(univariateEffect(effect, errorDf, subjects, groups, shares[index]!, floor, notes, level));
    if (!effect.within || effect.scores < 2) continue;
    const mauchly = mauchlyTest(
      effect.error.map((row) => row.map((value) => value / errorDf)),
      errorDf,
    );
    const pure = effect.factors.every((name) => cells.withinFactors.some((factor) => factor.name === name));
    if (mauchly === null) {
      if (pure)
        notes.push({
          code: "sphericity-not-testable",
          facts: { effect: effect.name, errorDf, contrasts: effect.scores },
        });
    } else if (pure) {
      sphericity.push({ effect: effect.name, ...mauchly });
    }
    const tests = multivariateTests(effect.hypothesis, effect.error, effect.betweenDf, errorDf);
    if (tests === null) {
      notes.push({
        code: "multivariate-not-available",
        facts: { effect: effect.name, errorDf, contrasts: effect.scores },
      });
    } else multivariate.push(...multivariateEffects(effect.name, tests));
  }
  return { effects, multivariate, sphericity, subjects, observations: subjects * cells.withinCells, notes };
}

function refuseTooFew(cells: SubjectCells, subjects: number, groups: number): void {
  if (subjects === 0) {
    throw new ModelError(
      "no-complete-subjects",
      `No ${cells.unit.name} has every cell of the within factors.`,
      "Use the model that takes missing cells: omnibus by multilevel model",
    );
  }
  if (subjects - groups < 1) {
    throw new ModelError(
      "no-error-df",
      `Each group has only one ${cells.unit.name} with every cell: how much ${cells.unit.name}s of a group differ cannot be seen.`,
      `More than one ${cells.unit.name} per group is needed.`,
    );
  }
}

/** Everything that varies between subjects of a group: the sum of all error terms. */
function totalErrorSum(cells: SubjectCells, complete: CompleteScores): number {
  const identity = Array.from({ length: cells.withinCells }, (_, i) =>
    Array.from({ length: cells.withinCells }, (__, j) => (i === j ? 1 : 0)),
  );
  return trace(pooledProducts(complete, identity).error);
}

function univariateEffect(
  effect: EffectSums,
  errorDfPerScore: number,
  subjects: number,
  groups: number,
  generalized: number,
  floor: number,
  notes: Note[],
  level: number | null,
): OmnibusEffect {
  const df1 = effect.scores * effect.betweenDf;
  const df2 = effect.scores * errorDfPerScore;
  const sumOfSquares = trace(effect.hypothesis);
  const errorSumOfSquares = trace(effect.error);
  const common = {
    effect: effect.name,
    method: "repeated measures",
    statistic: "F",
    df1,
    df2,
    sumOfSquares,
    meanSquare: sumOfSquares / df1,
    errorSumOfSquares,
    errorMeanSquare: errorSumOfSquares / df2,
  } as const;
  if (errorSumOfSquares <= floor) {
    notes.push({ code: "no-error-variance", facts: { effect: effect.name } });
    return { ...common, value: null, p: null };
  }
  const value = sumOfSquares / df1 / (errorSumOfSquares / df2);
  const tested = {
    ...common,
    value,
    p: fUpperTail(value, df1, df2),
    partialEtaSquared: sumOfSquares / (sumOfSquares + errorSumOfSquares),
    generalizedEtaSquared: generalized,
    ...(level === null
      ? {}
      : {
          partialEtaSquaredInterval: partialEtaSquaredInterval({
            ratio: value,
            df1,
            df2,
            observations: df1 + df2 + 1,
            level,
          }),
        }),
  };
  if (!effect.within) return tested;
  const covariance = effect.error.map((row) => row.map((entry) => entry / errorDfPerScore));
  const greenhouseGeisser = greenhouseGeisserEpsilon(covariance);
  const huynhFeldt = Math.min(1, huynhFeldtEpsilon(greenhouseGeisser, effect.scores, subjects, groups));
  return {
    ...tested,
    epsilonGreenhouseGeisser: greenhouseGeisser,
    epsilonHuynhFeldt: huynhFeldt,
    pGreenhouseGeisser: fUpperTail(value, greenhouseGeisser * df1, greenhouseGeisser * df2),
    pHuynhFeldt: fUpperTail(value, huynhFeldt * df1, huynhFeldt * df2),
  };
}
