import type { ModelData } from "../../design/types.ts";
import { tTwoSidedTail } from "../../numeric/index.ts";
import type { AssumptionFinding } from "../../results/index.ts";
import {
  greenhouseGeisserEpsilon,
  mauchlyTest,
  effectBasis,
  type SubjectCells,
  subjectCells,
  subsets,
} from "../within/index.ts";
import { boxM } from "./box-m.ts";
import {
  concernOf,
  type FindingContext,
  isNearerToNormal,
  logarithmsOf,
  normalityFinding,
  spreadFindings,
} from "./single-findings.ts";

/** Scores of the complete subjects, their groups, and what is left of them. */
export interface CompleteScores {
  readonly cells: SubjectCells;
  /** Complete subjects, by index of the unit. */
  readonly subjects: readonly number[];
  readonly width: number;
  readonly sizes: readonly number[];
  /** Mean of each group and within cell, groups x cells. */
  readonly means: readonly Float64Array[];
  /** Score minus its group's mean of the cell, subjects x cells. */
  readonly deviations: readonly Float64Array[];
}

export function completeScores(data: ModelData): CompleteScores {
  const cells = subjectCells(data);
  const width = cells.withinCells;
  const subjects = Array.from(cells.completeSubjects);
  const sizes = new Array<number>(cells.groups).fill(0);
  for (const subject of subjects) sizes[cells.groupOf[subject]!]!++;
  const means = Array.from({ length: cells.groups }, () => new Float64Array(width));
  for (const subject of subjects) {
    const group = cells.groupOf[subject]!;
    for (let cell = 0; cell < width; cell++)
      means[group]![cell]! += cells.scores[subject * width + cell]! / sizes[group]!;
  }
  const deviations = subjects.map((subject) =>
    means[cells.groupOf[subject]!]!.map((mean, cell) => cells.scores[subject * width + cell]! - mean),
  );
  return { cells, subjects, width, sizes, means, deviations };
}

const meanOf = (values: ArrayLike<number>) => Array.from(values).reduce((sum, value) => sum + value, 0) / values.length;

/** Fit and residuals with each subject's own level taken out, for complete subjects, subject by subject. */
export function subjectResiduals(scores: CompleteScores): { fitted: number[]; residuals: number[]; df: number } {
  const fitted: number[] = [];
  const residuals: number[] = [];
  for (const [index, deviation] of scores.deviations.entries()) {
    const level = meanOf(deviation);
    const means = scores.means[scores.cells.groupOf[scores.subjects[index]!]!]!;
    for (let cell = 0; cell < scores.width; cell++) {
      residuals.push(deviation[cell]! - level);
      fitted.push(scores.cells.center + means[cell]! + level);
    }
  }
  const groups = scores.sizes.filter((size) => size > 0).length;
  return { fitted, residuals, df: (scores.subjects.length - groups) * (scores.width - 1) };
}

/** Subjects whose own level stands out from their group's. */
function subjectOutliers(scores: CompleteScores, context: FindingContext): AssumptionFinding {
  const levels = scores.deviations.map(meanOf);
  const groups = scores.sizes.filter((size) => size > 0).length;
  const df = levels.length - groups;
  const total = levels.reduce((sum, value) => sum + value ** 2, 0);
  const tested = levels.flatMap((level, index) => {
    const subject = scores.subjects[index]!;
    const room = 1 - 1 / scores.sizes[scores.cells.groupOf[subject]!]!;
    if (df < 2 || room <= 0 || total <= 0) return [];
    const others = Math.max(0, total - level ** 2 / room) / (df - 1);
    const studentised = others > 0 ? level / Math.sqrt(others * room) : level === 0 ? 0 : Math.sign(level) * 1e300;
    return [{ label: scores.cells.unit.labels[subject]!, studentised, p: tTwoSidedTail(studentised, df - 1) }];
  });
  const corrected = tested
    .map((row) => ({ ...row, adjustedP: Math.min(1, row.p * tested.length) }))
    .sort((left, right) => left.p - right.p);
  const largest = corrected[0] ?? null;
  const standOut = corrected.filter((row) => row.adjustedP < context.error);
  const finding = concernOf(largest?.adjustedP ?? null, context.error);
  return {
    assumption: "outliers",
    method: "studentised residuals, Bonferroni",
    of: `${scores.cells.unit.name}s`,
    statistic: largest?.studentised ?? null,
    df1: null,
    df2: largest === null ? null : df - 1,
    p: largest?.adjustedP ?? null,
    finding,
    facts: {
      subjects: standOut.map((row) => row.label),
      studentised: standOut.map((row) => row.studentised),
    },
    statement:
      finding === "concern" ? (scores.cells.groups === 1 ? "omnibus by ranks" : "omnibus by resampling") : null,
  };
}

function productsByGroup(scores: CompleteScores): { products: Float64Array[]; df: number[] } {
  const { width } = scores;
  const filled = scores.sizes.flatMap((size, group) => (size > 0 ? [group] : []));
  const products = filled.map(() => new Float64Array(width * width));
  for (const [index, deviation] of scores.deviations.entries()) {
    const product = products[filled.indexOf(scores.cells.groupOf[scores.subjects[index]!]!)]!;
    for (let i = 0; i < width; i++)
      for (let j = 0; j < width; j++) product[i * width + j]! += deviation[i]! * deviation[j]!;
  }
  return { products, df: filled.map((group) => scores.sizes[group]! - 1) };
}

function covarianceFinding(scores: CompleteScores, context: FindingContext): AssumptionFinding {
  const { products, df } = productsByGroup(scores);
  const test = boxM(products, df, scores.width);
  const finding = concernOf(test?.p ?? null, context.error);
  return {
    assumption: "equal covariances",
    method: "Box's M",
    of: "groups",
    statistic: test?.f ?? null,
    df1: test?.df1 ?? null,
    df2: test?.df2 ?? null,
    p: test?.p ?? null,
    finding,
    facts: {
      m: test?.m ?? null,
      chiSquare: test?.chiSquare ?? null,
      smallestGroup: Math.min(...df) + 1,
      cells: scores.width,
    },
    statement: finding === "concern" && !context.unequalAssumed ? "assume unequal variances" : null,
  };
}

/** Mauchly's W of each effect of the within factors with more than one contrast. */
function sphericityFindings(data: ModelData, scores: CompleteScores, context: FindingContext): AssumptionFinding[] {
  const { products, df } = productsByGroup(scores);
  const pooledDf = df.reduce((sum, value) => sum + value, 0);
  const factors = scores.cells.withinFactors;
  const levels = factors.map((factor) => factor.levels.length);
  const assumed = data.assumptions.covariance;
  return subsets(factors.length).flatMap((takesPart): AssumptionFinding[] => {
    const basis = effectBasis(levels, takesPart);
    const size = basis[0]!.length;
    if (size < 2) return [];
    const of = factors
      .filter((_, index) => takesPart[index] === true)
      .map((factor) => factor.name)
      .join(" x ");
    const covariance = Array.from({ length: size }, (_, left) =>
      Array.from({ length: size }, (__, right) => {
        let sum = 0;
        for (const product of products)
          for (let i = 0; i < scores.width; i++)
            for (let j = 0; j < scores.width; j++)
              sum += basis[i]![left]! * product[i * scores.width + j]! * basis[j]![right]!;
        return pooledDf > 0 ? sum / pooledDf : 0;
      }),
    );
    const varies = covariance.some((row, index) => row[index]! > 0);
    const test = pooledDf > 0 && varies ? mauchlyTest(covariance, pooledDf) : null;
    const epsilon = pooledDf > 0 && varies ? greenhouseGeisserEpsilon(covariance) : null;
    const finding = concernOf(test?.p ?? null, context.error);
    return [
      {
        assumption: "sphericity",
        method: "Mauchly",
        of,
        statistic: test?.w ?? null,
        df1: test?.df ?? null,
        df2: null,
        p: test?.p ?? null,
        finding,
        facts: { epsilonGreenhouseGeisser: epsilon, assumed },
        statement: finding === "concern" ? "assume unstructured" : null,
      },
    ];
  });
}

/** Findings for designs with a within factor; subjects that miss a cell take no part. */
export function withinFindings(data: ModelData, context: FindingContext): AssumptionFinding[] {
  const scores = completeScores(data);
  const { residuals } = subjectResiduals(scores);
  const varies = residuals.some((value) => Math.abs(value) > 1e-13 * Math.abs(data.response.center));
  const findings: AssumptionFinding[] = [];
  const severalGroups = scores.sizes.filter((size) => size > 0).length > 1;
  if (severalGroups) {
    const groups = scores.sizes.map((): number[] => []);
    for (const [index, deviation] of scores.deviations.entries()) {
      groups[scores.cells.groupOf[scores.subjects[index]!]!]!.push(meanOf(deviation));
    }
    findings.push(...spreadFindings(groups, `${scores.cells.unit.name}s' means in groups`, context));
    findings.push(covarianceFinding(scores, context));
  }
  const logHelps =
    context.logScalePossible &&
    varies &&
    isNearerToNormal(subjectResiduals(completeScores(logarithmsOf(data))).residuals, residuals);
  findings.push(
    normalityFinding(varies ? residuals : [], "residuals", context, {
      ranks: scores.cells.groups === 1,
      logHelps,
    }),
    subjectOutliers(scores, context),
    ...sphericityFindings(data, scores, context),
  );
  return findings;
}
