import type { Contrast, ModelData } from "../../design/types.ts";
import { DomainError } from "../../numeric/index.ts";
import { ModelError } from "../model-error.ts";
import type { ContrastEstimates } from "../types.ts";
import { groupRanks } from "./kruskal-wallis.ts";

/** Estimates and errors that share one rank variance: variance of a weighted sum is `variance` times sum of weight^2 / size. */
export function rankEstimates(question: {
  readonly contrasts: readonly { readonly name: string; readonly weights: ArrayLike<number> }[];
  readonly meanRank: ArrayLike<number>;
  readonly n: ArrayLike<number>;
  readonly variance: number;
  readonly df: number;
  /** True where the groups are the same subjects, so that n counts them once. */
  readonly sameSubjects: boolean;
}): ContrastEstimates {
  const { contrasts, meanRank, n, variance, df, sameSubjects } = question;
  const cells = Array.from({ length: n.length }, (_, cell) => cell);
  const product = (left: ArrayLike<number>, right: ArrayLike<number>) =>
    cells.reduce(
      (sum, cell) => (left[cell] === 0 || right[cell] === 0 ? sum : sum + (left[cell]! * right[cell]!) / n[cell]!),
      0,
    );
  const shares = contrasts.map(({ weights }) => product(weights, weights));
  return {
    errorTerm: "ranks",
    estimates: contrasts.map(({ weights }) => cells.reduce((sum, cell) => sum + weights[cell]! * meanRank[cell]!, 0)),
    standardErrors: shares.map((share) => Math.sqrt(variance * share)),
    df: contrasts.map(() => df),
    correlation: contrasts.map((left, row) =>
      contrasts.map((right, column) =>
        row === column ? 1 : product(left.weights, right.weights) / Math.sqrt(shares[row]! * shares[column]!),
      ),
    ),
    commonDf: null,
    n: contrasts.map(({ weights }) =>
      cells.reduce((sum, cell) => {
        if (weights[cell] === 0) return sum;
        return sameSubjects ? Math.max(sum, n[cell]!) : sum + n[cell]!;
      }, 0),
    ),
    effectSizes: contrasts.map(() => null),
    notes: [],
  };
}

/**
 * Comparisons of mean ranks between groups, in ranks of all observations together.
 * - "dunn": the variance of the ranks when all groups share one distribution, corrected for ties; df Infinity (normal).
 * - "conover": the variance of the ranks within groups, t with N - groups df.
 *
 * @param contrasts weights over the cells
 * @throws ModelError "too-few-groups", "zero-variance", "empty-cell", "no-error-df"; DomainError for weights of the wrong length
 * @source dunn-1964 (Technometrics 6, 241-252); conover-iman-1979 (Los Alamos LA-7677-MS)
 */
export function rankContrasts(
  data: Pick<ModelData, "rows" | "response" | "cells" | "cellCount">,
  contrasts: readonly Contrast[],
  method: "dunn" | "conover",
): ContrastEstimates {
  const facts = groupRanks(data);
  for (const { name, weights } of contrasts) {
    if (weights.length !== data.cellCount) {
      throw new DomainError("weights", weights.length, `one weight for each of ${data.cellCount} cells`);
    }
    if (!weights.some((weight, cell) => weight !== 0 && facts.n[cell] === 0)) continue;
    throw new ModelError(
      "empty-cell",
      `"${name}" needs a group that has no observations.`,
      "Compare groups that have data.",
    );
  }
  const { observations, n, meanRank, variance, h } = facts;
  const common = { contrasts, meanRank, n, sameSubjects: false };
  if (method === "dunn") return rankEstimates({ ...common, variance, df: Number.POSITIVE_INFINITY });
  const df = observations - facts.groups.length;
  if (df < 1) {
    throw new ModelError(
      "no-error-df",
      "Every group has one observation: the ranks within groups do not vary.",
      "Conover's comparisons need a group with two observations or more; use dunn.",
    );
  }
  // (N - 1 - H) / df times the variance is the mean square of the ranks within groups.
  const within = (variance * (observations - 1 - h)) / df;
  if (!(within > 1e-12 * variance)) {
    throw new ModelError(
      "zero-variance",
      "Within every group all ranks are the same: there is no variance to test against.",
      "Use dunn, which takes the variance of all ranks.",
    );
  }
  return rankEstimates({ ...common, variance: within, df });
}
