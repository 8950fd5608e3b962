import type { Contrast, ModelData } from "../../design/types.ts";
import { DomainError } from "../../numeric/index.ts";
import type { Note } from "../../results/index.ts";
import { ModelError } from "../model-error.ts";
import { subsets } from "../within/index.ts";
import { type ArrangementOptions, labelArrangements } from "./arrangements.ts";
import { type SubjectLines, stratumOfCells, subjectLines } from "./subject-lines.ts";

/** What a family corrected by resampling takes: the statistics of every comparison in every arrangement, 0 the observed one. */
export interface ContrastResamples {
  readonly count: number;
  readonly exact: boolean;
  /** Signed t statistics of arrangement `index`, in the order of the contrasts. */
  readonly fill: (index: number, statistics: Float64Array) => void;
  readonly notes: readonly Note[];
}

/** A statistic whose standard error is zero while its estimate is not. */
const beyondAll = 1e300;

/** Weights over within cells, one array per group. */
function weightsByGroup(lines: SubjectLines, contrast: Contrast): Float64Array[] {
  if (contrast.weights.length !== lines.groupOfCell.length) {
    throw new DomainError(
      "weights",
      contrast.weights.length,
      `one weight for each of ${lines.groupOfCell.length} cells`,
    );
  }
  const byGroup = Array.from({ length: lines.groups }, () => new Float64Array(lines.width));
  for (const [cell, weight] of contrast.weights.entries()) {
    byGroup[lines.groupOfCell[cell]!]![lines.withinOfCell[cell]!]! += weight;
  }
  for (const [group, weights] of byGroup.entries()) {
    if (lines.sizes[group] === 0 && weights.some((weight) => weight !== 0)) {
      throw new ModelError(
        "empty-cell",
        `"${contrast.name}" needs a group without data.`,
        "Compare groups that have data.",
      );
    }
  }
  return byGroup;
}

/** Every combination of kept factors, most strata first; keeping none comes last. */
function keptSubsets(count: number): boolean[][] {
  return [...subsets(count).reverse(), new Array<boolean>(count).fill(false)];
}

const rounding = 1e-9;

/** The finest strata of groups in which every contrast weighs nothing in sum, cell by cell; null where there are none. */
function groupStrata(lines: SubjectLines, weights: readonly Float64Array[][]): Int32Array | null {
  for (const keep of keptSubsets(lines.betweenFactors.length)) {
    const stratum = stratumOfCells(lines.betweenFactors, keep);
    const fits = weights.every((byGroup) => {
      const sums = new Map<string, number>();
      for (const [group, vector] of byGroup.entries()) {
        for (const [cell, weight] of vector.entries()) {
          const key = `${stratum[group]} ${cell}`;
          sums.set(key, (sums.get(key) ?? 0) + weight);
        }
      }
      return [...sums.values()].every((sum) => Math.abs(sum) < rounding);
    });
    if (fits) return stratum;
  }
  return null;
}

/** The finest strata of within cells in which every contrast weighs nothing in sum, group by group; null where there are none. */
function cellStrata(lines: SubjectLines, weights: readonly Float64Array[][]): Int32Array | null {
  for (const keep of keptSubsets(lines.withinFactors.length)) {
    const stratum = stratumOfCells(lines.withinFactors, keep);
    const fits = weights.every((byGroup) =>
      byGroup.every((vector) => {
        const sums = new Map<number, number>();
        for (const [cell, weight] of vector.entries()) {
          sums.set(stratum[cell]!, (sums.get(stratum[cell]!) ?? 0) + weight);
        }
        return [...sums.values()].every((sum) => Math.abs(sum) < rounding);
      }),
    );
    if (fits) return stratum;
  }
  return null;
}

/** t statistics of contrasts on rearranged lines. */
function statisticsOf(lines: SubjectLines, weights: readonly Float64Array[][], separate: boolean) {
  const { subjects, width, groups, sizes } = lines;
  const filled = sizes.filter((size) => size > 0).length;
  const pooledDf = subjects - filled - (width === 1 ? lines.blocks - 1 : 0);
  if (pooledDf < 1) {
    throw new ModelError(
      "no-error-df",
      "There are no more subjects than groups: how much subjects of a group differ cannot be seen.",
      "At least one group needs two subjects or more.",
    );
  }
  const used = weights.map((byGroup) => byGroup.map((vector) => vector.some((weight) => weight !== 0)));
  for (const [index, flags] of used.entries()) {
    if (!separate || !flags.some((flag, group) => flag && sizes[group]! < 2)) continue;
    throw new ModelError(
      "group-of-one",
      `Comparison ${index + 1} needs a group with only one subject; its own variance is unknown.`,
      "Assume equal variances, or leave the group out of the comparison.",
    );
  }
  const means = new Float64Array(groups * width);
  const own = Array.from({ length: separate ? groups : 1 }, () => new Float64Array(width * width));
  const form = (vector: Float64Array, matrix: Float64Array) => {
    let sum = 0;
    for (let i = 0; i < width; i++) {
      if (vector[i] === 0) continue;
      for (let j = 0; j < width; j++) sum += vector[i]! * matrix[i * width + j]! * vector[j]!;
    }
    return sum;
  };
  return (scores: Float64Array, groupOf: Int32Array, target: Float64Array) => {
    means.fill(0);
    for (const matrix of own) matrix.fill(0);
    for (let subject = 0; subject < subjects; subject++) {
      const group = groupOf[subject]!;
      for (let cell = 0; cell < width; cell++) {
        means[group * width + cell]! += scores[subject * width + cell]! / sizes[group]!;
      }
    }
    for (let subject = 0; subject < subjects; subject++) {
      const group = groupOf[subject]!;
      const matrix = own[separate ? group : 0]!;
      for (let i = 0; i < width; i++) {
        const left = scores[subject * width + i]! - means[group * width + i]!;
        for (let j = 0; j < width; j++) {
          matrix[i * width + j]! += left * (scores[subject * width + j]! - means[group * width + j]!);
        }
      }
    }
    for (const [index, byGroup] of weights.entries()) {
      let estimate = 0;
      let variance = 0;
      for (const [group, vector] of byGroup.entries()) {
        if (used[index]![group] !== true) continue;
        for (let cell = 0; cell < width; cell++) estimate += vector[cell]! * means[group * width + cell]!;
        const df = separate ? sizes[group]! - 1 : pooledDf;
        variance += form(vector, own[separate ? group : 0]!) / df / sizes[group]!;
      }
      const scale = 1e-13 * Math.abs(estimate);
      if (variance > scale * scale) target[index] = estimate / Math.sqrt(variance);
      else target[index] = estimate === 0 ? 0 : Math.sign(estimate) * beyondAll;
    }
  };
}

/**
 * Rearrangements of a study for the step-down correction by resampling, with the t statistics of the comparisons in each.
 *
 * What is rearranged is the least that every comparison of the family is about: subjects change groups, within blocks and within
 * the levels of between factors that no comparison crosses; where comparisons are only within subjects, the conditions of each
 * subject change places, within the levels of within factors that no comparison crosses; where a family has both kinds, both do.
 * The note "rearranged" says which.
 *
 * @throws ModelError "resampling-with-covariates", "no-error-df", "group-of-one", "empty-cell", and those of the subjects' layout
 * @source westfall-young-1993 (Resampling-Based Multiple Testing)
 */
export function contrastResamples(
  data: ModelData,
  contrasts: readonly Contrast[],
  options: ArrangementOptions,
): ContrastResamples {
  const lines = subjectLines(data);
  const weights = contrasts.map((contrast) => weightsByGroup(lines, contrast));
  const separate = data.assumptions.variances === "unequal" && lines.groups > 1;
  const statistics = statisticsOf(lines, weights, separate);
  const ofGroups = groupStrata(lines, weights);
  const ofCells = ofGroups === null ? cellStrata(lines, weights) : null;
  if (ofGroups !== null) return shuffledSubjects(lines, ofGroups, statistics, options);
  if (ofCells !== null) return shuffledConditions(lines, ofCells, statistics, options, false);
  // Comparisons of both kinds: under the hypothesis that nothing differs at all, both may be rearranged.
  return shuffledConditions(lines, new Int32Array(lines.width), statistics, options, true);
}

type Statistics = ReturnType<typeof statisticsOf>;

function subjectStrata(lines: SubjectLines, stratum: Int32Array): Int32Array {
  return Int32Array.from(
    lines.groupOf,
    (group, subject) => stratum[group]! * (lines.subjects + 1) + lines.blockOf[subject]!,
  );
}

function shuffledSubjects(
  lines: SubjectLines,
  stratum: Int32Array,
  statistics: Statistics,
  options: ArrangementOptions,
): ContrastResamples {
  const arrangements = labelArrangements(lines.groupOf, subjectStrata(lines, stratum), options);
  const labels = new Int32Array(lines.subjects);
  return {
    count: arrangements.count,
    exact: arrangements.exact,
    fill: (index, target) => {
      arrangements.fill(index, labels);
      statistics(lines.scores, labels, target);
    },
    notes: [
      ...lines.notes,
      { code: "rearranged", facts: { what: "subjects", strata: new Set(stratum).size, blocks: lines.blocks } },
    ],
  };
}

function shuffledConditions(
  lines: SubjectLines,
  stratum: Int32Array,
  statistics: Statistics,
  options: ArrangementOptions,
  subjectsToo: boolean,
): ContrastResamples {
  const { width, subjects } = lines;
  const strata = Int32Array.from(lines.scores, (_, at) => Math.floor(at / width) * width + stratum[at % width]!);
  const cells = Int32Array.from(lines.scores, (_, at) => at % width);
  // With subjects changing groups as well the two are drawn together, so neither is enumerated.
  const drawn = subjectsToo ? { ...options, mostExact: 0 } : options;
  const conditions = labelArrangements(cells, strata, drawn);
  const everyone = subjectStrata(lines, new Int32Array(lines.groups));
  const groups = labelArrangements(lines.groupOf, everyone, drawn, "rearranging groups");
  const places = new Int32Array(lines.scores.length);
  const labels = Int32Array.from(lines.groupOf);
  const moved = new Float64Array(lines.scores.length);
  return {
    count: conditions.count,
    exact: conditions.exact,
    fill: (index, target) => {
      conditions.fill(index, places);
      if (subjectsToo) groups.fill(index, labels);
      for (let subject = 0; subject < subjects; subject++) {
        for (let cell = 0; cell < width; cell++) {
          const at = subject * width + cell;
          moved[subject * width + places[at]!] = lines.scores[at]!;
        }
      }
      statistics(moved, labels, target);
    },
    notes: [
      ...lines.notes,
      {
        code: "rearranged",
        facts: {
          what: subjectsToo ? "subjects and conditions" : "conditions within subjects",
          strata: new Set(stratum).size,
          blocks: lines.blocks,
        },
      },
    ],
  };
}
