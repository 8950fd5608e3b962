import { studentizedRangeUpperTail, tUpperQuantile } from "../numeric/index.ts";
import { reaches } from "./answer.ts";
import { falseDiscoveryAdjustedP } from "./benjamini-hochberg.ts";
import { harmonicSum } from "./benjamini-yekutieli.ts";
import { corrections } from "./corrections.ts";
import { hochbergAdjustedP } from "./hochberg.ts";
import { misfitOf } from "./hold.ts";
import { holmAdjustedP } from "./holm.ts";
import { hommelAdjustedP } from "./hommel.ts";
import { jointDistribution } from "./joint.ts";
import { mostTrue, possibleTrueSets } from "./logical-relations.ts";
import { FamilyProblemError } from "./misfits.ts";
import { ascendingOrder } from "./ordering.ts";
import { graphRejections } from "./passing-graph.ts";
import { once } from "./stepwise.ts";
import type { CorrectionName, FamilyProblem } from "./types.ts";

/** What changes from one simulated study to the next. What is absent is as in the template. */
export interface StudyEvidence {
  /** Own p of each comparison for the family's claim, by the t distribution. */
  readonly p: readonly number[];
  /** Where error terms are the comparisons' own. */
  readonly df?: readonly number[];
  readonly correlation?: readonly (readonly number[])[];
  readonly resamples?: FamilyProblem["resamples"];
}

/** Rejected or not, in member order. */
export type Decider = (study: StudyEvidence) => readonly boolean[];

/**
 * The decisions of a method and nothing else, as fast as simulation needs them: what is the same in every study is computed once. Decides exactly as
 * `holdFamily` does (asserted by test), from the own p alone.
 *
 * @param template  members, sides, margin, error, shape, weights, shares, commonDf and correlation; its estimates and p are not looked at.
 *   With `commonDf` and correlation and no correlation of the study's own, the joint law is the same in every study and is computed once.
 * @throws FamilyProblemError when the method does not fit the members
 */
export function familyDecider(name: CorrectionName, template: FamilyProblem): Decider {
  const unfit = misfitOf(name, template);
  if (unfit !== null) throw new FamilyProblemError(unfit);
  const { error } = template;
  const count = template.names.length;
  const atLevel =
    (level: number): Decider =>
    ({ p }) =>
      p.map((value) => value <= level);
  const byAdjusted =
    (adjust: (p: readonly number[]) => readonly number[]): Decider =>
    ({ p }) =>
      adjust(p).map((value) => reaches(value, error));
  const evidenced = (study: StudyEvidence): FamilyProblem => ({ ...template, ...study });

  switch (name) {
    case "none":
    case "bonferroni":
    case "dunn":
    case "sidak":
    case "tukey":
    case "scheffe":
    case "nemenyi":
      return atLevel(levelOf(name, template));
    case "games-howell":
      return gamesHowellDecider(template);
    case "holm":
    case "conover":
      return byAdjusted(holmAdjustedP);
    case "hochberg":
      return byAdjusted(hochbergAdjustedP);
    case "hommel":
      return byAdjusted(hommelAdjustedP);
    case "bh":
      return byAdjusted((p) => falseDiscoveryAdjustedP(p, 1));
    case "by":
      return byAdjusted((p) => falseDiscoveryAdjustedP(p, harmonicSum(count)));
    case "shaffer":
      return shafferDecider(template);
    case "fixed sequence":
    case "fallback":
    case "graph": {
      const graph = corrections[name].passing!(template);
      return ({ p }) => graphRejections(p, graph, error);
    }
    case "single-step":
    case "dunnett":
    case "step-down":
      return jointDecider(template, name === "step-down");
    case "resampling":
      return (study) => corrections.resampling.decide(evidenced(study)).rejected;
  }
}

/** The own p at which a single-step method rejects, the same for every row and study. */
function levelOf(name: CorrectionName, template: FamilyProblem): number {
  // No evidence is needed for the threshold: all estimates on zero, one standard error each.
  const spread = <T>(value: T) => template.names.map(() => value);
  const df = name === "nemenyi" ? Number.POSITIVE_INFINITY : (template.commonDf ?? Number.POSITIVE_INFINITY);
  const blank = { ...template, estimates: spread(0), standardErrors: spread(1), p: spread(1), df: spread(df) };
  return corrections[name].decide(blank).threshold[0]!;
}

/** Every pair by its own df; only p between Bonferroni's level and the error need the range. */
function gamesHowellDecider(template: FamilyProblem): Decider {
  const { error } = template;
  const count = template.names.length;
  const means = template.shape.means!;
  return ({ p, df = template.df }) =>
    p.map((value, i) => {
      if (value > error) return false;
      if (value * count <= error) return true;
      const t = tUpperQuantile(value / 2, df[i]!);
      return studentizedRangeUpperTail(Math.SQRT2 * t, means, df[i]!) <= error;
    });
}

/** Steps of S2; how many null hypotheses can still be true is looked up once for each set of rejected ones. */
function shafferDecider(template: FamilyProblem): Decider {
  const sets = possibleTrueSets(template.weights, template.watch)!;
  const words = Math.ceil(template.names.length / 32);
  const stillTrue = once((rejectedRows) => {
    const gone = new Uint32Array(words);
    for (const row of rejectedRows) gone[row >> 5]! |= 1 << (row & 31);
    return mostTrue(sets, gone);
  });
  return ({ p }) => {
    const rejected = p.map(() => false);
    const gone: number[] = [];
    for (const row of ascendingOrder(p)) {
      if (!reaches(stillTrue([...gone].sort((a, b) => a - b)) * p[row]!, template.error)) break;
      rejected[row] = true;
      gone.push(row);
    }
    return rejected;
  };
}

/** The joint law of a family, whatever its estimates. */
function jointLaw(template: FamilyProblem, correlation = template.correlation) {
  const spread = (value: number) => template.names.map(() => value);
  return jointDistribution({
    ...template,
    correlation,
    estimates: spread(0),
    standardErrors: spread(1),
    df: spread(template.commonDf ?? Number.POSITIVE_INFINITY),
  });
}

/**
 * The own p at which the smallest of some rows is rejected by the joint distribution, remembered for each set of rows.
 * @param template  as for `familyDecider`
 */
export function jointLevel(template: FamilyProblem): (rows: readonly number[]) => number {
  const law = jointLaw(template);
  return once((rows) => law.ownP(law.critical(rows, template.error)));
}

/**
 * Steps of the joint distribution, or its first step only. A set of s rows is settled without it where the smallest p is at most error / s
 * (Bonferroni's bound) or above the error (the joint tail is no less than the own one).
 */
function jointDecider(template: FamilyProblem, steps: boolean): Decider {
  const { error } = template;
  const rows = template.names.map((_, i) => i);
  const fixedLevel = jointLevel(template);
  return (study) => {
    const { p } = study;
    const rejected = rows.map(() => false);
    const order = ascendingOrder(p);
    let law: ReturnType<typeof jointLaw> | null = null;
    const passes = (set: readonly number[], value: number) => {
      if (value > error) return false;
      if (value * set.length <= error) return true;
      if (study.correlation === undefined) return value <= fixedLevel(set);
      law ??= jointLaw(template, study.correlation);
      const rough = law.upperTail(set, law.scoreAt(value), true);
      if (Math.abs(rough.p - error) > rough.error) return rough.p <= error;
      return law.upperTail(set, law.scoreAt(value)).p <= error;
    };
    for (const [place, row] of order.entries()) {
      const set = steps ? order.slice(place).sort((a, b) => a - b) : rows;
      if (!passes(set, p[row]!)) break;
      rejected[row] = true;
    }
    return rejected;
  };
}
