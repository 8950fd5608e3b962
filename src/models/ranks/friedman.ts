import type { Contrast, ModelData } from "../../design/types.ts";
import { chiSquareUpperTail, DomainError, fUpperTail } from "../../numeric/index.ts";
import type { Note, OmnibusEffect } from "../../results/index.ts";
import { ModelError } from "../model-error.ts";
import type { ContrastEstimates } from "../types.ts";
import { subjectCells } from "../within/index.ts";
import { exactFriedmanTail } from "./friedman-exact.ts";
import type { RankAnalysis } from "./kruskal-wallis.ts";
import { midRanks } from "./mid-ranks.ts";
import { rankEstimates } from "./rank-contrasts.ts";

/** One score per subject (or block) and cell, subjects x cells, row per subject, nothing missing. */
export interface ScoreTable {
  readonly scores: Float64Array;
  readonly subjects: number;
  readonly cells: number;
}

/** Ranks of the cells within each subject. */
export interface SubjectRanks extends ScoreTable {
  /** Subjects x cells. */
  readonly ranks: Float64Array;
  readonly meanRank: Float64Array;
  /** Sum over subjects of the squared deviations of their ranks. */
  readonly spread: number;
  readonly q: number;
}

/** @throws ModelError "one-subject", "too-few-groups", "zero-variance"; DomainError for a table of the wrong size */
export function subjectRanks(table: ScoreTable): SubjectRanks {
  const { scores, subjects, cells } = table;
  if (scores.length !== subjects * cells)
    throw new DomainError("scores", scores.length, `${subjects} x ${cells} values`);
  if (subjects < 2) {
    throw new ModelError("one-subject", "There is only one subject to rank.", "Ranks need two subjects or more.");
  }
  if (cells < 2)
    throw new ModelError("too-few-groups", "There is only one condition.", "Ranks need two conditions or more.");
  const ranks = new Float64Array(scores.length);
  const meanRank = new Float64Array(cells);
  const middle = (cells + 1) / 2;
  let spread = 0;
  for (let subject = 0; subject < subjects; subject++) {
    const line = midRanks(scores.subarray(subject * cells, (subject + 1) * cells));
    ranks.set(line, subject * cells);
    for (let cell = 0; cell < cells; cell++) {
      meanRank[cell]! += line[cell]! / subjects;
      spread += (line[cell]! - middle) ** 2;
    }
  }
  if (spread === 0) {
    throw new ModelError(
      "zero-variance",
      "Every subject has the same score in all conditions: there is nothing to rank.",
      "Check that the response was read from the right column.",
    );
  }
  const deviation = meanRank.reduce((sum, rank) => sum + (rank - middle) ** 2, 0);
  return { ...table, ranks, meanRank, spread, q: ((cells - 1) * subjects ** 2 * deviation) / spread };
}

/**
 * Complete subjects and their within cells as a table.
 * @throws ModelError "ranks-need-one-group" with between factors, "no-complete-subjects", and those of the layout
 */
export function scoreTable(data: ModelData): ScoreTable & { readonly notes: readonly Note[] } {
  const layout = subjectCells(data);
  if (layout.groups > 1) {
    throw new ModelError(
      "ranks-need-one-group",
      "Friedman's ranks are taken within subjects: they can say nothing about a factor between subjects, nor about groups that differ.",
      "Leave the factor between subjects out, or use omnibus by multilevel model or by resampling.",
    );
  }
  const complete = layout.completeSubjects;
  if (complete.length === 0) {
    throw new ModelError(
      "no-complete-subjects",
      `No ${layout.unit.name} has every cell of the within factors.`,
      "Use the model that takes missing cells: omnibus by multilevel model",
    );
  }
  const cells = layout.withinCells;
  const scores = new Float64Array(complete.length * cells);
  for (const [index, subject] of complete.entries()) {
    scores.set(layout.scores.subarray(subject * cells, (subject + 1) * cells), index * cells);
  }
  const notes: Note[] = [];
  if (complete.length < layout.subjects) {
    const leftOut = layout.subjects - complete.length;
    notes.push({
      code: "incomplete-subjects-left-out",
      facts: { unit: layout.unit.name, leftOut, of: layout.subjects, missingCells: layout.missing },
    });
  }
  if (layout.trialsAveraged) notes.push({ code: "trials-averaged", facts: { unit: layout.unit.name } });
  return { scores, subjects: complete.length, cells, notes };
}

/**
 * Friedman's test on the ranks of the conditions within each subject, corrected for ties.
 *
 * Where all arrangements can be counted the first entry (form "exact") has the exact p, ties included; form "chi-square" has
 * the large-sample p; form "F" is Iman and Davenport's statistic (missing where all subjects rank alike).
 *
 * @param options.effect name of the effect, default "condition"
 * @param options.exact false leaves the counting out (simulations)
 * @throws ModelError "one-subject", "too-few-groups", "zero-variance"
 * @source friedman-1937 (J. Am. Stat. Assoc. 32, 675-701); ties: conover-1999 (Practical Nonparametric Statistics);
 * iman-davenport-1980 (Commun. Stat. A 9, 571-595)
 */
export function friedmanAnalysis(
  table: ScoreTable,
  options: { readonly effect?: string; readonly exact?: boolean } = {},
): RankAnalysis {
  const facts = subjectRanks(table);
  const { subjects, cells, q } = facts;
  const df1 = cells - 1;
  const common = { effect: options.effect ?? "condition", method: "friedman" } as const;
  const effects: OmnibusEffect[] = [
    {
      ...common,
      form: "chi-square",
      statistic: "Q",
      value: q,
      df1,
      df2: null,
      p: chiSquareUpperTail(q, df1),
      exact: false,
    },
  ];
  const exact = options.exact === false ? null : exactFriedmanTail(facts);
  if (exact !== null) {
    effects.unshift({ ...common, form: "exact", statistic: "Q", value: q, df1, df2: null, p: exact, exact: true });
  }
  const left = subjects * df1 - q;
  if (left > 1e-10 * subjects * df1) {
    const value = ((subjects - 1) * q) / left;
    const df2 = (subjects - 1) * df1;
    effects.push({
      ...common,
      form: "F",
      statistic: "F",
      value,
      df1,
      df2,
      p: fUpperTail(value, df1, df2),
      exact: false,
    });
  }
  return { effects, observations: subjects * cells, notes: [] };
}

/**
 * Comparisons of mean ranks within subjects.
 * - "nemenyi": the variance that the ranks have when the conditions are the same, corrected for ties; df Infinity.
 * - "conover": the variance that the ranks have around the conditions' mean ranks, t with (subjects - 1)(cells - 1) df.
 *
 * @param contrasts weights over the table's cells
 * @throws ModelError "one-subject", "too-few-groups", "zero-variance"; DomainError for weights of the wrong length
 * @source nemenyi-1963 (thesis, Princeton); conover-1999 (Practical Nonparametric Statistics, 3rd ed., 5.8)
 */
export function friedmanContrasts(
  table: ScoreTable,
  contrasts: readonly Contrast[],
  method: "nemenyi" | "conover",
): ContrastEstimates {
  const { subjects, cells, meanRank, spread } = subjectRanks(table);
  for (const { weights } of contrasts) {
    if (weights.length !== cells)
      throw new DomainError("weights", weights.length, `one weight for each of ${cells} cells`);
  }
  const n = new Float64Array(cells).fill(subjects);
  const common = { contrasts, meanRank, n, sameSubjects: true };
  if (method === "nemenyi") {
    const variance = spread / (subjects * (cells - 1));
    return rankEstimates({ ...common, variance, df: Number.POSITIVE_INFINITY });
  }
  const df = (subjects - 1) * (cells - 1);
  const middle = (cells + 1) / 2;
  const explained = subjects * meanRank.reduce((sum, rank) => sum + (rank - middle) ** 2, 0);
  const variance = (spread - explained) / df;
  if (!(variance > 1e-12 * spread)) {
    throw new ModelError(
      "zero-variance",
      "All subjects rank the conditions alike: there is no variance of ranks to test against.",
      "Use nemenyi, which takes the variance that ranks have by themselves.",
    );
  }
  return rankEstimates({ ...common, variance, df });
}
