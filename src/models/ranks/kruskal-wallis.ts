import type { ModelData } from "../../design/types.ts";
import { chiSquareUpperTail } from "../../numeric/index.ts";
import type { Note, OmnibusEffect } from "../../results/index.ts";
import { emptyCellNotes, type GroupNaming } from "../between/analysis.ts";
import { ModelError } from "../model-error.ts";
import { exactTail } from "./kruskal-wallis-exact.ts";
import { midRanks } from "./mid-ranks.ts";

export interface RankAnalysis {
  readonly effects: readonly OmnibusEffect[];
  readonly observations: number;
  readonly notes: readonly Note[];
}

/** Ranks of all observations together, and what they sum to in each cell. */
export interface GroupRanks {
  /** Rank of every row. */
  readonly ranks: Float64Array;
  readonly observations: number;
  /** Filled cells. */
  readonly groups: readonly number[];
  /** Per cell. */
  readonly n: Float64Array;
  /** Mean rank per cell, 0 where empty. */
  readonly meanRank: Float64Array;
  /** Variance of all ranks, divisor N - 1: N (N + 1) / 12 without ties. */
  readonly variance: number;
  readonly h: number;
}

/** @throws ModelError "too-few-groups", "zero-variance" */
export function groupRanks(data: Pick<ModelData, "rows" | "response" | "cells" | "cellCount">): GroupRanks {
  const ranks = midRanks(data.response.offsets);
  const observations = data.rows;
  const n = new Float64Array(data.cellCount);
  const sums = new Float64Array(data.cellCount);
  const middle = (observations + 1) / 2;
  let squares = 0;
  for (let row = 0; row < observations; row++) {
    n[data.cells[row]!]!++;
    sums[data.cells[row]!]! += ranks[row]!;
    squares += (ranks[row]! - middle) ** 2;
  }
  const groups = Array.from(n.keys()).filter((cell) => n[cell]! > 0);
  if (groups.length < 2) {
    throw new ModelError(
      "too-few-groups",
      groups.length === 0 ? "There are no observations to rank." : "Only one group has observations.",
      "Comparing ranks needs at least two groups with data.",
    );
  }
  if (squares === 0) {
    throw new ModelError(
      "zero-variance",
      "All observations are the same: there is nothing to rank.",
      "Check that the response was read from the right column.",
    );
  }
  const meanRank = sums.map((sum, cell) => (n[cell] === 0 ? 0 : sum / n[cell]!));
  const variance = squares / (observations - 1);
  const h = groups.reduce((sum, cell) => sum + n[cell]! * (meanRank[cell]! - middle) ** 2, 0) / variance;
  return { ranks, observations, groups, n, meanRank, variance, h };
}

/**
 * Kruskal and Wallis's test on the ranks of all observations, each filled cell a group, corrected for ties.
 *
 * Where all arrangements of the ranks over the groups can be counted, the first entry (form "exact") has the exact p, ties
 * included; the entry of form "chi-square" has the large-sample p and is always there.
 *
 * @param options.exact false leaves the counting out (simulations)
 * @throws ModelError "too-few-groups", "zero-variance"
 * @source kruskal-wallis-1952 (J. Am. Stat. Assoc. 47, 583-621)
 */
export function kruskalWallisAnalysis(
  data: Pick<ModelData, "rows" | "response" | "cells" | "cellCount">,
  options: GroupNaming & { readonly exact?: boolean } = {},
): RankAnalysis {
  const facts = groupRanks(data);
  const df1 = facts.groups.length - 1;
  const common = {
    effect: options.effect ?? "group",
    method: "kruskal-wallis",
    statistic: "H",
    value: facts.h,
    df1,
    df2: null,
  } as const;
  const effects: OmnibusEffect[] = [
    { ...common, form: "chi-square", p: chiSquareUpperTail(facts.h, df1), exact: false },
  ];
  const exact = options.exact === false ? null : exactTail(facts);
  if (exact !== null) effects.unshift({ ...common, form: "exact", p: exact, exact: true });
  return { effects, observations: facts.observations, notes: emptyCellNotes(facts.n, options) };
}
