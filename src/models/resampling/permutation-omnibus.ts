import type { Watch } from "../../host/index.ts";
import type { ModelData } from "../../design/types.ts";
import type { Note, OmnibusEffect } from "../../results/index.ts";
import { extend, newSpan } from "../between/orthonormal-span.ts";
import { estimablePart } from "../estimable.ts";
import { ModelError } from "../model-error.ts";
import { effectBasis, subsets } from "../within/index.ts";
import { type ArrangementOptions, labelArrangements, signArrangements } from "./arrangements.ts";
import { type SubjectLines, stratumOfCells, subjectLines } from "./subject-lines.ts";

export interface ResamplingOptions extends ArrangementOptions {
  readonly watch: Watch;
}

export interface PermutationAnalysis {
  /** Method "resampling"; `form` says what was rearranged: "subjects", "conditions within subjects", "signs", "residuals". */
  readonly effects: readonly OmnibusEffect[];
  readonly observations: number;
  readonly subjects: number;
  readonly notes: readonly Note[];
}

/** Resamples between two looks at the watch. */
const stride = 64;
/** F ratios that agree to this share are the same arrangement, summed in another order. */
const tie = 1e-10;

interface Effect {
  readonly name: string;
  readonly withinFlags: readonly boolean[];
  readonly betweenFlags: readonly boolean[];
  /** Contrasts over within cells, columns of length width. */
  readonly within: readonly Float64Array[];
  /** Orthonormal directions over filled groups in units of root n, columns of length groups. */
  readonly between: readonly Float64Array[];
}

function effectsOf(data: ModelData, lines: SubjectLines, notes: Note[]): Effect[] {
  const empty = lines.sizes.map((size) => size === 0);
  return subsets(data.factors.length).flatMap((takesPart) => {
    const names = data.factors.filter((_, index) => takesPart[index] === true).map((factor) => factor.name);
    const flagsOf = (factors: SubjectLines["withinFactors"]) => factors.map((factor) => names.includes(factor.name));
    const levelsOf = (factors: SubjectLines["withinFactors"]) => factors.map((factor) => factor.levels.length);
    const withinFlags = flagsOf(lines.withinFactors);
    const betweenFlags = flagsOf(lines.betweenFactors);
    const within = effectBasis(levelsOf(lines.withinFactors), withinFlags);
    const between = estimablePart(effectBasis(levelsOf(lines.betweenFactors), betweenFlags), empty);
    const span = newSpan();
    for (let column = 0; column < (between[0]?.length ?? 0); column++) {
      extend(
        span,
        lines.sizes.map((size, group) => (size === 0 ? 0 : between[group]![column]! / Math.sqrt(size))),
      );
    }
    const name = names.join(" x ");
    if (span.columns.length === 0) {
      notes.push({ code: "effect-not-estimable", facts: { effect: name } });
      return [];
    }
    const columns = within[0]!.map((_, column) => Float64Array.from(within, (row) => row[column]!));
    return [{ name, withinFlags, betweenFlags, within: columns, between: span.columns }];
  });
}

/** Subjects x contrasts. */
function contrastScores(lines: SubjectLines, effect: Effect, scores: Float64Array, target: Float64Array): void {
  const columns = effect.within.length;
  for (let subject = 0; subject < lines.subjects; subject++) {
    for (const [column, weights] of effect.within.entries()) {
      let sum = 0;
      for (let cell = 0; cell < lines.width; cell++) sum += weights[cell]! * scores[subject * lines.width + cell]!;
      target[subject * columns + column] = sum;
    }
  }
}

/** Sums of squares of an effect from contrast scores and the groups they are put in. */
function fRatio(
  lines: SubjectLines,
  effect: Effect,
  scores: Float64Array,
  groupOf: Int32Array,
): { f: number; left: number; all: number } {
  const columns = effect.within.length;
  let hypothesis = 0;
  let all = 0;
  let between = 0;
  const sums = new Float64Array(lines.groups);
  for (let column = 0; column < columns; column++) {
    sums.fill(0);
    for (let subject = 0; subject < lines.subjects; subject++) {
      const value = scores[subject * columns + column]!;
      sums[groupOf[subject]!]! += value;
      all += value * value;
    }
    for (let group = 0; group < lines.groups; group++) {
      if (lines.sizes[group] === 0) continue;
      sums[group]! /= Math.sqrt(lines.sizes[group]!);
      between += sums[group]! ** 2;
    }
    for (const direction of effect.between) {
      let along = 0;
      for (let group = 0; group < lines.groups; group++) along += direction[group]! * sums[group]!;
      hypothesis += along * along;
    }
  }
  const left = all - between;
  const f = left > 1e-13 * all ? hypothesis / left : hypothesis > 1e-13 * all ? 1e300 : 0;
  return { f, left, all };
}

/** Residuals of the model without the effect: what is rearranged where the hypothesis leaves other effects standing. */
function reducedResiduals(lines: SubjectLines, effect: Effect, scores: Float64Array): Float64Array {
  const columns = effect.within.length;
  const residuals = Float64Array.from(scores);
  for (let column = 0; column < columns; column++) {
    const roots = new Float64Array(lines.groups);
    for (let subject = 0; subject < lines.subjects; subject++) {
      const group = lines.groupOf[subject]!;
      roots[group]! += scores[subject * columns + column]! / Math.sqrt(lines.sizes[group]!);
    }
    const reduced = Float64Array.from(roots);
    for (const direction of effect.between) {
      const along = direction.reduce((sum, value, group) => sum + value * roots[group]!, 0);
      for (let group = 0; group < lines.groups; group++) reduced[group]! -= along * direction[group]!;
    }
    for (let subject = 0; subject < lines.subjects; subject++) {
      const group = lines.groupOf[subject]!;
      residuals[subject * columns + column]! -= reduced[group]! / Math.sqrt(lines.sizes[group]!);
    }
  }
  return residuals;
}

interface Plan {
  readonly form: string;
  readonly count: number;
  readonly exact: boolean;
  /** Ratio of arrangement `index`. */
  readonly ratio: (index: number) => number;
}

/** Number of true flags. */
const named = (flags: readonly boolean[]) => flags.filter(Boolean).length;

/** What the hypothesis allows to be rearranged. */
function planOf(lines: SubjectLines, effect: Effect, options: ArrangementOptions): Plan {
  if (named(effect.betweenFlags) > 0) return shuffledGroups(lines, effect, options);
  if (named(effect.withinFlags) === 1) return shuffledCells(lines, effect, options);
  return turnedSigns(lines, effect, options);
}

function shuffledGroups(lines: SubjectLines, effect: Effect, options: ArrangementOptions): Plan {
  const scores = new Float64Array(lines.subjects * effect.within.length);
  contrastScores(lines, effect, lines.scores, scores);
  const single = named(effect.betweenFlags) === 1;
  const moved = single ? scores : reducedResiduals(lines, effect, scores);
  const keep = effect.betweenFlags.map((flag) => single && !flag);
  const stratum = stratumOfCells(lines.betweenFactors, keep);
  const strata = Int32Array.from(
    lines.groupOf,
    (group, subject) => stratum[group]! * (lines.subjects + 1) + lines.blockOf[subject]!,
  );
  const arrangements = labelArrangements(lines.groupOf, strata, options);
  const labels = new Int32Array(lines.subjects);
  return {
    form: single ? "subjects" : "residuals",
    count: arrangements.count,
    exact: arrangements.exact,
    ratio: (index) => {
      arrangements.fill(index, labels);
      return fRatio(lines, effect, moved, labels).f;
    },
  };
}

function shuffledCells(lines: SubjectLines, effect: Effect, options: ArrangementOptions): Plan {
  const others = stratumOfCells(
    lines.withinFactors,
    effect.withinFlags.map((flag) => !flag),
  );
  const strata = Int32Array.from(
    lines.scores,
    (_, at) => Math.floor(at / lines.width) * lines.width + others[at % lines.width]!,
  );
  const cells = Int32Array.from(lines.scores, (_, at) => at % lines.width);
  const arrangements = labelArrangements(cells, strata, options);
  const labels = new Int32Array(lines.scores.length);
  const moved = new Float64Array(lines.scores.length);
  const scores = new Float64Array(lines.subjects * effect.within.length);
  return {
    form: "conditions within subjects",
    count: arrangements.count,
    exact: arrangements.exact,
    ratio: (index) => {
      arrangements.fill(index, labels);
      for (let at = 0; at < labels.length; at++) moved[at - (at % lines.width) + labels[at]!] = lines.scores[at]!;
      contrastScores(lines, effect, moved, scores);
      return fRatio(lines, effect, scores, lines.groupOf).f;
    },
  };
}

function turnedSigns(lines: SubjectLines, effect: Effect, options: ArrangementOptions): Plan {
  const columns = effect.within.length;
  const scores = new Float64Array(lines.subjects * columns);
  contrastScores(lines, effect, lines.scores, scores);
  const arrangements = signArrangements(lines.subjects, options);
  const signs = new Int32Array(lines.subjects);
  const turned = new Float64Array(scores.length);
  return {
    form: "signs",
    count: arrangements.count,
    exact: arrangements.exact,
    ratio: (index) => {
      arrangements.fill(index, signs);
      for (let at = 0; at < scores.length; at++) turned[at] = scores[at]! * signs[Math.floor(at / columns)]!;
      return fRatio(lines, effect, turned, lines.groupOf).f;
    },
  };
}

/**
 * Tests every effect by rearranging the study as the hypothesis and the design allow, with the F ratio as statistic:
 * - an effect between subjects: subjects change groups, within blocks and within the levels of the other between factors; where
 *   two or more between factors interact, the residuals of the model without the interaction do (approximate, said in a note)
 * - an effect with within and between factors: subjects with their contrast scores change groups
 * - one within factor: each subject's conditions change places, within the levels of the other within factors
 * - within factors that interact: the subjects' contrast scores change sign (symmetric under the hypothesis)
 *
 * All arrangements are counted when there are at most `mostExact` (entry `exact`); otherwise `resamples` are drawn besides the
 * observed one, which counts itself. Blocks' means are taken out first.
 *
 * @throws ModelError "resampling-with-covariates", "no-error-df", "zero-variance", and those of the subjects' layout; Interrupted
 * @source fisher-1935 (The Design of Experiments); edgington-onghena-2007 (Randomization Tests); residuals: freedman-lane-1983
 * (J. Bus. Econ. Stat. 1, 292-298); counting the observed one: phipson-smyth-2010 (Stat. Appl. Genet. Mol. Biol. 9, 39)
 */
export function permutationOmnibus(data: ModelData, options: ResamplingOptions): PermutationAnalysis {
  const lines = subjectLines(data);
  const notes: Note[] = [...lines.notes];
  const groups = lines.sizes.filter((size) => size > 0).length;
  const plainDf = lines.subjects - groups;
  if (plainDf - (lines.blocks - 1) < 1) {
    throw new ModelError(
      "no-error-df",
      "There are no more subjects than groups to tell apart: how much subjects differ cannot be seen.",
      "At least one group needs two subjects or more.",
    );
  }
  const effects = effectsOf(data, lines, notes).map((effect): OmnibusEffect => {
    const df1 = effect.within.length * effect.between.length;
    // Blocks' levels cost their df where they were in the way: not in contrasts within subjects.
    const df2 = effect.within.length * (named(effect.withinFlags) > 0 ? plainDf : plainDf - (lines.blocks - 1));
    const plan = planOf(lines, effect, options);
    const scores = new Float64Array(lines.subjects * effect.within.length);
    contrastScores(lines, effect, lines.scores, scores);
    const { left, all, f } = fRatio(lines, effect, scores, lines.groupOf);
    const common = { effect: effect.name, method: "resampling", form: plan.form, statistic: "F", df1, df2 } as const;
    if (!(left > 1e-13 * all)) {
      notes.push({ code: "no-error-variance", facts: { effect: effect.name } });
      return { ...common, value: null, p: null };
    }
    const value = (f * df2) / df1;
    if (plan.count < 2) {
      notes.push({ code: "nothing-to-rearrange", facts: { effect: effect.name } });
      return { ...common, value, p: null };
    }
    if (plan.form === "residuals") notes.push({ code: "residuals-rearranged", facts: { effect: effect.name } });
    const p = shareReached(plan, effect.name, options.watch);
    return {
      ...common,
      value,
      p,
      exact: plan.exact,
      resamples: plan.exact ? plan.count : plan.count - 1,
      ...(plan.exact ? {} : { monteCarloError: Math.sqrt((p * (1 - p)) / plan.count) }),
    };
  });
  return { effects, observations: lines.subjects * lines.width, subjects: lines.subjects, notes };
}

function shareReached(plan: Plan, name: string, watch: Watch): number {
  const observed = plan.ratio(0);
  let reached = 1;
  for (let index = 1; index < plan.count; index++) {
    if (index % stride === 0) {
      watch.checkpoint();
      watch.progress(index, plan.count, `rearranging for ${name}`);
    }
    if (plan.ratio(index) >= observed * (1 - tie)) reached++;
  }
  return reached / plan.count;
}
