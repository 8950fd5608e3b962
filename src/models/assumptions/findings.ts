import type { ModelData } from "../../design/types.ts";
import type { AssumptionFinding } from "../../results/index.ts";
import { homogeneousSlopes } from "../between/index.ts";
import { cookLimit, outlyingRows, type ResidualDiagnostics, residualDiagnostics } from "./residuals.ts";
import {
  concernOf,
  type FindingContext,
  isNearerToNormal,
  logarithmsOf,
  normalityFinding,
  spreadFindings,
} from "./single-findings.ts";
import { valuesByCell } from "./spread.ts";
import { withinFindings } from "./within-findings.ts";

export interface AssumptionOptions {
  /** The response as a statement writes it (quoted where its name needs it), for advice. */
  readonly response: string;
  /** True where the response is already a logarithm: then advice never names log scale. Default false. */
  readonly logScale?: boolean;
  /** Below this p a finding is a concern; default 0.05. */
  readonly error?: number;
}

/** The rows that stand out, and those that pull the fit. */
function outlierFindings(
  diagnostics: ResidualDiagnostics,
  context: FindingContext,
  statement: string,
): AssumptionFinding[] {
  const outlying = outlyingRows(diagnostics, context.error);
  const largest = outlying[0] ?? null;
  const standOut = outlying.filter((row) => row.adjustedP < context.error);
  const finding = concernOf(largest?.adjustedP ?? null, context.error);
  const findings: AssumptionFinding[] = [
    {
      assumption: "outliers",
      method: "studentised residuals, Bonferroni",
      of: "residuals",
      statistic: largest?.studentised ?? null,
      df1: null,
      df2: largest === null ? null : diagnostics.errorDf - 1,
      p: largest?.adjustedP ?? null,
      finding,
      facts: { rows: standOut.map((row) => row.row), studentised: standOut.map((row) => row.studentised) },
      statement: finding === "concern" ? statement : null,
    },
  ];
  if (!diagnostics.varies) return findings;
  const limit = cookLimit(diagnostics);
  const rows = Array.from(diagnostics.cook.keys()).filter((row) => diagnostics.cook[row]! > limit);
  const distance = diagnostics.cook.reduce((most, value) => Math.max(most, value), 0);
  findings.push({
    assumption: "influence",
    method: "Cook's distance",
    of: "rows",
    statistic: distance,
    df1: diagnostics.parameters,
    df2: diagnostics.errorDf,
    p: null,
    finding: rows.length > 0 ? "concern" : "no concern",
    facts: { rows, limit },
    statement: rows.length > 0 ? statement : null,
  });
  return findings;
}

/** Residuals of the logarithms, from the same model. */
function logarithmResiduals(data: ModelData): Float64Array {
  return residualDiagnostics(logarithmsOf(data)).residuals;
}

function slopeFindings(data: ModelData, context: FindingContext): AssumptionFinding[] {
  return homogeneousSlopes(data).map((test) => {
    const finding = concernOf(test.p, context.error);
    return {
      assumption: "homogeneous slopes",
      method: "F",
      of: test.covariate,
      statistic: test.value,
      df1: test.df1,
      df2: test.df2,
      p: test.p,
      finding,
      facts: { covariate: test.covariate },
      statement: finding === "concern" ? "draw residuals" : null,
    };
  });
}

/**
 * What the data say about what the analysis assumes, for between, within and mixed designs: spread, normality of residuals,
 * outlying rows or subjects, influence, equal slopes of covariates, equal covariances, sphericity.
 * A finding never stops an analysis; each concern names a statement of the language.
 *
 * @throws ModelError where the layout itself cannot be read ("no-subjects", "one-subject", "subject-in-two-groups", "covariate-constant")
 */
export function assumptionFindings(data: ModelData, options: AssumptionOptions): AssumptionFinding[] {
  const context: FindingContext = {
    response: options.response,
    error: options.error ?? 0.05,
    unequalAssumed: data.assumptions.variances === "unequal",
    logScalePossible:
      options.logScale !== true && data.response.offsets.every((offset) => data.response.center + offset > 0),
  };
  if (data.factors.some((factor) => factor.varies === "within")) return withinFindings(data, context);
  const diagnostics = residualDiagnostics(data);
  const plain = data.covariates.length === 0;
  const statement = plain ? "omnibus by ranks" : "draw residuals";
  const groups = plain
    ? valuesByCell(data)
    : valuesByCell({ ...data, response: { center: 0, offsets: diagnostics.residuals } });
  const logHelps =
    context.logScalePossible && diagnostics.varies && isNearerToNormal(logarithmResiduals(data), diagnostics.residuals);
  const residuals = diagnostics.varies ? diagnostics.residuals : new Float64Array(0);
  return [
    ...spreadFindings(groups, plain ? "groups" : "residuals of groups", context),
    normalityFinding(residuals, "residuals", context, { ranks: plain, logHelps }),
    ...outlierFindings(diagnostics, context, statement),
    ...slopeFindings(data, context),
  ];
}
