import type { CorrectionName, FamilyProblem, Misfit } from "./types.ts";

type Facts = Misfit["facts"];
type Words = { readonly message: string; readonly advice: string };

const list = (value: unknown) => (Array.isArray(value) ? value.join(", ") : String(value ?? ""));
const offer = (facts: Facts) => (list(facts.fitting) === "" ? "" : ` These fit: ${list(facts.fitting)}.`);

/**
 * Every way in which a family, its method or its place after other families can be wrong, each with its own answer. The facts are
 * those of the `Misfit`, with `fitting` (names of the methods that fit) added by `misfitWords`.
 */
export const misfits = {
  "empty-family": () => ({
    message: "The family has no comparison.",
    advice: "Name at least one member: a contrast, each F against L, all pairs of F, neighbours of F.",
  }),
  "duplicate-members": (it: Facts) => ({
    message:
      it.first === it.second
        ? `"${it.first}" is in the family twice.`
        : `"${it.first}" and "${it.second}" are the same comparison under two names.`,
    advice: "Name each comparison once; a repeated member would take its share of the error twice.",
  }),
  "not-all-pairs": (it: Facts) => ({
    message: `${it.method} is for all pairs of one factor, each pair once; the members of this family are not that.`,
    advice: `Declare "all pairs of F" as the only member, or choose another method.${offer(it)}`,
  }),
  "not-against-one": (it: Facts) => ({
    message: `${it.method} is for each level against one level of the same factor; the members of this family are not that.`,
    advice: `Declare "each F against L" as the only member, or choose another method.${offer(it)}`,
  }),
  "within-needs-common-error": (it: Facts) => ({
    message: `${it.method} needs one error term that all comparisons share; comparisons within subjects each have their own.`,
    advice: `Choose a method that needs no common error term, or state "assume sphericity".${offer(it)}`,
  }),
  "between-needs-common-error": (it: Facts) => ({
    message: `${it.method} needs one error term that all comparisons share; under unequal variances each has its own.`,
    advice: `Choose a method that needs no common error term, or state "assume equal variances".${offer(it)}`,
  }),
  "needs-own-errors": (it: Facts) => ({
    message: `${it.method} is for groups with unequal variances; the comparisons of this family share one pooled error term.`,
    advice: `State "assume unequal variances", or choose another method.${offer(it)}`,
  }),
  "within-subjects": (it: Facts) => ({
    message: `${it.method} is for independent groups; the comparisons of this family are within subjects.`,
    advice: `Choose a method for comparisons within subjects.${offer(it)}`,
  }),
  "two-sided-only": (it: Facts) => ({
    message: `${it.method} is for two-sided comparisons; this family makes one-sided claims.`,
    advice: `Leave out the one-sided claim, or choose another method.${offer(it)}`,
  }),
  "no-margin": (it: Facts) => ({
    message: `${it.method} is for claims of a difference; this family makes claims of equivalence.`,
    advice: `Choose a method that takes a margin.${offer(it)}`,
  }),
  "no-shift": (it: Facts) => ({
    message: `${it.method} is for claims against zero; this family claims to be not worse by a margin.`,
    advice: `Choose a method that takes a margin.${offer(it)}`,
  }),
  "margin-too-many": (it: Facts) => ({
    message: `${it.method} takes a margin for up to ${it.most} comparisons; this family has ${it.comparisons}.`,
    advice: `Choose a method whose work does not grow with the number of sign patterns.${offer(it)}`,
  }),
  "margin-needs-direction": () => ({
    message: '"not worse by" needs to know which direction is worse.',
    advice: "Say it with the response: higher is better, or lower is better.",
  }),
  "no-correlation": (it: Facts) => ({
    message: `${it.method} needs the joint distribution of the comparisons, and their correlations are not known here.`,
    advice: `Choose a method that holds under any dependence.${offer(it)}`,
  }),
  "no-contrast-weights": (it: Facts) => ({
    message: `${it.method} works from the contrast weights, and these comparisons have none.`,
    advice: `Choose another method.${offer(it)}`,
  }),
  "too-many-relations": (it: Facts) => ({
    message: `The logical relations of these ${it.comparisons} comparisons are too many to enumerate (over ${it.most} sets).`,
    advice: `Make the family smaller, or choose another method.${offer(it)}`,
  }),
  "no-resamples": (it: Facts) => ({
    message: `${it.method} needs an arrangement of the data that may be exchanged, and this analysis has none.`,
    advice: `Choose another method.${offer(it)}`,
  }),
  "needs-ranks": (it: Facts) => ({
    message: `${it.method} is for comparisons of mean ranks; this analysis compares means.`,
    advice: `Compare by ranks, or choose another method.${offer(it)}`,
  }),
  "no-weights": (it: Facts) => ({
    message: `${it.method} needs the share of the error that each comparison starts with.`,
    advice: "Declare the weights, for instance: weights a 1/2, b 1/2.",
  }),
  "weights-count": (it: Facts) => ({
    message: `There are ${it.weights} weights for ${it.comparisons} comparisons.`,
    advice: "Give one weight for each comparison; a comparison that only inherits has weight 0.",
  }),
  "weight-outside": (it: Facts) => ({
    message: `The weight of "${it.comparison}" is ${it.value}.`,
    advice: "A weight is a share of the error, from 0 to 1.",
  }),
  "weights-not-one": (it: Facts) => ({
    message: `The weights sum to ${it.sum}, not to 1.`,
    advice: "The weights are the shares in which the family's error is first spread; make them sum to 1.",
  }),
  "passes-count": (it: Facts) => ({
    message: `The passing shares are not ${it.comparisons} rows of ${it.comparisons}.`,
    advice: "Give for each comparison where its share goes when it is rejected: pass a to b 1/2, a to c 1/2.",
  }),
  "pass-outside": (it: Facts) => ({
    message: `The share passed from "${it.from}" to "${it.to}" is ${it.value}.`,
    advice: "A passing share lies between 0 and 1.",
  }),
  "pass-to-itself": (it: Facts) => ({
    message: `"${it.from}" passes error to itself.`,
    advice: "A rejected comparison passes its share to others.",
  }),
  "passes-over-one": (it: Facts) => ({
    message: `"${it.from}" passes on ${it.sum} of its share, more than it has.`,
    advice: "The shares that leave a comparison sum to at most 1.",
  }),
  "after-itself": (it: Facts) => ({
    message: `Family "${it.family}" comes after itself.`,
    advice: "Name another family, or leave out the clause.",
  }),
  "after-unknown": (it: Facts) => ({
    message: `Family "${it.family}" comes after "${it.after}", and there is no such family.`,
    advice: "Declare that family, or leave out the clause.",
  }),
  "after-cyclic": (it: Facts) => ({
    message: `The families wait for each other in a circle: ${list(it.circle)}.`,
    advice: "Leave out one of the clauses, so that some family comes first.",
  }),
  "after-any-not-passing": (it: Facts) => ({
    message: `"after any of ${it.after}" passes on the error of what was rejected, and ${it.method} of family "${it.family}" has no such shares.`,
    advice: `Write "after ${it.after}", or hold both families by a method with shares.${offer(it)}`,
  }),
  "after-any-error": (it: Facts) => ({
    message: `"${it.family}" holds ${it.error}, and "${it.after}", whose error would pass on to it, holds ${it.otherError}.`,
    advice: `Hold the same error in both families, or write "after ${it.after}".`,
  }),
  "duplicate-families": (it: Facts) => ({
    message: `There are two families called "${it.family}".`,
    advice: "Give each family its own name.",
  }),
} as const satisfies Record<string, (facts: Facts) => Words>;

export type MisfitCode = keyof typeof misfits;

/** Message and advice of a misfit, in the reader's words. */
export function misfitWords(misfit: Misfit): Words {
  const words = (misfits as Record<string, (facts: Facts) => Words>)[misfit.code];
  if (words === undefined) throw new RangeError(`No words for misfit "${misfit.code}"`);
  return words({ ...misfit.facts, fitting: misfit.fitting });
}

/** A misfit with its facts; which methods fit instead is found by the door, which knows all of them. */
export function misfit(code: MisfitCode, facts: Facts = {}, fitting: readonly CorrectionName[] = []): Misfit {
  return { code, facts, fitting };
}

/** A family that its method cannot hold. The session turns it into a problem with a place in the cell. */
export class FamilyProblemError extends Error {
  readonly misfit: Misfit;
  readonly code: string;
  readonly advice: string;
  constructor(it: Misfit) {
    const words = misfitWords(it);
    super(words.message);
    this.name = "FamilyProblemError";
    this.misfit = it;
    this.code = it.code;
    this.advice = words.advice;
  }
}

/** What is wrong with the members whatever the method: none at all, or one of them twice. */
export function memberMisfit(problem: FamilyProblem): Misfit | null {
  const { names } = problem;
  if (names.length === 0) return misfit("empty-family");
  const seen = new Set<string>();
  for (const name of names) {
    if (seen.has(name)) return misfit("duplicate-members", { first: name, second: name });
    seen.add(name);
  }
  const twins = sameComparison(problem);
  if (twins !== null) return misfit("duplicate-members", { first: names[twins[0]]!, second: names[twins[1]]! });
  if (problem.margin?.type === "not worse" && problem.margin.better === null) return misfit("margin-needs-direction");
  return null;
}

/** The first two members that ask the same question: weights equal up to a factor that changes nothing about the claim. */
function sameComparison(problem: FamilyProblem): readonly [number, number] | null {
  const rows = problem.weights;
  if (rows.length !== problem.names.length) return null;
  const keys = new Map<string, number>();
  for (let i = 0; i < rows.length; i++) {
    const row = rows[i]!;
    const largest = row.reduce((most, weight) => Math.max(most, Math.abs(weight)), 0);
    if (largest === 0) continue;
    const first = row.find((weight) => Math.abs(weight) > 1e-12 * largest)!;
    // Against zero a factor does not matter; against a margin it does. A sign matters only where a direction is claimed.
    const size = problem.margin === null ? largest : 1;
    const directed = problem.margin?.type === "not worse" || (problem.margin === null && problem.sides !== "two-sided");
    const scale = (directed || first > 0 ? 1 : -1) * size;
    const key = row.map((weight) => Number((weight / scale).toPrecision(12)) + 0).join(" ");
    const earlier = keys.get(key);
    if (earlier !== undefined) return [earlier, i];
    keys.set(key, i);
  }
  return null;
}
