/** Every code that an answer of this room can carry in `notes`, with what it means; `src/present` has the sentences. */
export const familyNotes = {
  "family-of-one": "The family has one comparison; there is nothing to correct.",
  "limits-at-threshold":
    "Limits are each comparison's own, at the level of its threshold: they agree with the decision and each alone covers with at least 1 - error; together they need not.",
  "limits-of-steps":
    "Joint limits of a stepwise method for directed claims; facts.all says whether everything was rejected. A rejected comparison is bounded by its claim until all are rejected.",
  "own-p-not-from-t":
    "Own p are not those of estimate over standard error, so there are no limits that agree with them.",
  "statistics-not-t":
    "The resampled statistics are not estimates over standard errors, so there are no limits that agree with them.",
  "needs-positive-dependence": "The method holds its error for independent or positively dependent comparisons.",
  "false-discovery-not-family-error": "The false discovery rate is held, not the family's error.",
  "logical-relations": "facts.sets: how many sets of null hypotheses can be true together.",
  "contrast-space": "facts.dimension: dimension of the space of contrasts over which the error is held.",
  resamples: "facts.count arrangements; facts.exact says whether they are all there are.",
  "joint-normal-scores":
    "Comparisons have error terms of their own: own p are right, their joint distribution is approximated by that of normal scores.",
  "approximate-df": "The method refers each pair to its own approximate df.",
  "gate-closed": "Not tested: facts.after names the family of which not every comparison was rejected.",
} as const satisfies Record<string, string>;

export type FamilyNoteCode = keyof typeof familyNotes;
