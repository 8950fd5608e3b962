import type { Contrast, ModelData } from "../../design/types.ts";
import type { Watch } from "../../host/index.ts";
import { DomainError, normalLowerTail, normalQuantile, randomStream } from "../../numeric/index.ts";
import { ModelError } from "../model-error.ts";
import { type SubjectLines, subjectLines } from "./subject-lines.ts";

/**
 * Bias-corrected and accelerated interval from bootstrap replicates.
 *
 * @param question.observed the estimate
 * @param question.replicates the estimate in each bootstrap sample, any order, at least 100; not all equal
 * @param question.influence what each observation adds to the estimate (jackknife or empirical influence values), for the acceleration
 * @param question.level 0 < level < 1
 * @throws DomainError
 * @source efron-1987 (J. Am. Stat. Assoc. 82, 171-185)
 */
export function bcaInterval(question: {
  readonly observed: number;
  readonly replicates: ArrayLike<number>;
  readonly influence: ArrayLike<number>;
  readonly level: number;
}): { readonly lower: number; readonly upper: number } {
  const { observed, level } = question;
  if (!(level > 0 && level < 1)) throw new DomainError("level", level, "0 < level < 1");
  const sorted = Float64Array.from(question.replicates).sort();
  const count = sorted.length;
  if (count < 100) throw new DomainError("replicates", count, "at least 100");
  if (sorted[0] === sorted[count - 1]) throw new DomainError("replicates", sorted[0], "not all equal");
  let below = 0;
  for (const value of sorted) below += value < observed ? 1 : value === observed ? 0.5 : 0;
  // All replicates on one side: half a replicate keeps the correction finite.
  const share = Math.min(count - 0.5, Math.max(0.5, below)) / count;
  const bias = normalQuantile(share);
  let second = 0;
  let third = 0;
  for (let index = 0; index < question.influence.length; index++) {
    second += question.influence[index]! ** 2;
    third += question.influence[index]! ** 3;
  }
  const acceleration = second > 0 ? third / (6 * second ** 1.5) : 0;
  const limit = (probability: number) => {
    const shifted = bias + normalQuantile(probability);
    const place = normalLowerTail(bias + shifted / (1 - acceleration * shifted));
    return quantileOf(sorted, place);
  };
  return { lower: limit((1 - level) / 2), upper: limit((1 + level) / 2) };
}

/** Linear between the order statistics, the first at 0 and the last at 1 (Hyndman & Fan 1996, definition 7). */
function quantileOf(sorted: Float64Array, p: number): number {
  const position = p * (sorted.length - 1);
  const below = Math.min(sorted.length - 1, Math.max(0, Math.floor(position)));
  const above = Math.min(sorted.length - 1, below + 1);
  return sorted[below]! + (position - below) * (sorted[above]! - sorted[below]!);
}

export interface BootstrapOptions {
  readonly level: number;
  /** Bootstrap samples, at least 100. */
  readonly resamples: number;
  readonly seed: number;
  readonly watch: Watch;
}

/**
 * Bootstrap intervals of comparisons: subjects are drawn with replacement within their groups, each with all its scores.
 *
 * @returns one interval per contrast, in the response's analysis scale
 * @throws ModelError "empty-cell", "group-of-one", "zero-variance" and those of the subjects' layout; Interrupted
 * @source efron-1987; several groups: efron-tibshirani-1993 (An Introduction to the Bootstrap, chapter 14)
 */
export function bootstrapContrasts(
  data: ModelData,
  contrasts: readonly Contrast[],
  options: BootstrapOptions,
): { readonly estimate: number; readonly lower: number; readonly upper: number }[] {
  const lines = subjectLines({ ...data, units: data.units.filter((unit) => unit.role !== "blocks") });
  const members = membersOf(lines);
  // The score that each subject brings to each contrast: the contrast is a sum over groups of their means.
  const scores = contrasts.map((contrast) => subjectScores(lines, contrast, members));
  const estimateOf = (own: Float64Array, drawn: readonly Int32Array[]) =>
    drawn.reduce((sum, list) => {
      let total = 0;
      for (const subject of list) total += own[subject]!;
      return list.length === 0 ? sum : sum + total / list.length;
    }, 0);
  const observed = scores.map((own) => estimateOf(own, members));
  const replicates = contrasts.map(() => new Float64Array(options.resamples));
  const drawn = members.map((list) => Int32Array.from(list));
  for (let index = 1; index <= options.resamples; index++) {
    if (index % 64 === 0) {
      options.watch.checkpoint();
      options.watch.progress(index, options.resamples, "drawing bootstrap samples");
    }
    const stream = randomStream(options.seed, "bootstrap", index);
    for (const [group, list] of members.entries()) {
      for (let at = 0; at < list.length; at++) drawn[group]![at] = list[stream.integer(list.length)]!;
    }
    for (const [at, own] of scores.entries()) replicates[at]![index - 1] = estimateOf(own, drawn);
  }
  return scores.map((own, at) => {
    const influence = members.flatMap((list) => {
      let mean = 0;
      for (const subject of list) mean += own[subject]! / list.length;
      return Array.from(list, (subject) => (own[subject]! - mean) / list.length);
    });
    const spread = Math.max(...influence.map(Math.abs));
    if (!(spread > 1e-14 * Math.max(...own.map(Math.abs)))) {
      throw new ModelError(
        "zero-variance",
        `All subjects have the same score on "${contrasts[at]!.name}": there is nothing to draw from.`,
        "Check that the response was read from the right column.",
      );
    }
    const { level } = options;
    return {
      estimate: observed[at]!,
      ...bcaInterval({ observed: observed[at]!, replicates: replicates[at]!, influence, level }),
    };
  });
}

function membersOf(lines: SubjectLines): Int32Array[] {
  return lines.sizes.map((_, group) =>
    Int32Array.from(Array.from(lines.groupOf.keys()).filter((subject) => lines.groupOf[subject] === group)),
  );
}

function subjectScores(lines: SubjectLines, contrast: Contrast, members: readonly Int32Array[]): Float64Array {
  const own = new Float64Array(lines.subjects);
  for (const [cell, weight] of contrast.weights.entries()) {
    if (weight === 0) continue;
    const list = members[lines.groupOfCell[cell]!]!;
    if (list.length < 2) {
      throw new ModelError(
        list.length === 0 ? "empty-cell" : "group-of-one",
        `"${contrast.name}" needs a group with ${list.length === 0 ? "no subject" : "only one subject"}.`,
        "Compare groups with at least two subjects.",
      );
    }
    for (const subject of list)
      own[subject]! += weight * lines.scores[subject * lines.width + lines.withinOfCell[cell]!]!;
  }
  return own;
}
