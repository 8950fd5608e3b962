import type { ComparisonsResult } from "../../results/index.ts";
import { type Block, intervalFields, noteBlocks, type PresentedTable, paragraph, tableOf } from "../blocks.ts";
import { conclusionOf } from "../conclusion.ts";
import { dfText, fixed, intervalText, pText, percentText } from "../numbers.ts";
import type { PresentOptions } from "../options.ts";
import { comparedResponse, responseTitle, shown, stateMark, stateSentence } from "../response-words.ts";
import { comparisonSentence, familyPlaces, familySentences } from "../sentences/comparison.ts";
import { correctionWords, intervalName } from "../sentences/words.ts";

const errorTerms: Readonly<Record<string, string>> = {
  pooled: "error pooled over all groups",
  "unequal variances": "each comparison with its own error, variances not pooled",
  "contrast scores": "each comparison on the subjects' own contrast scores",
  multilevel: "multilevel model",
  covariance: "means adjusted for the covariates",
  ranks: "mean ranks",
  sphericity: "error pooled within subjects (sphericity assumed)",
  residual: "residual error",
};

export function comparisonsTable(given: ComparisonsResult, options: PresentOptions): PresentedTable {
  const result = { ...given, response: comparedResponse(given) };
  const places = familyPlaces(result, options.digits);
  const log = result.response.scale === "log";
  const raw = result.correction === "none";
  const back = (value: number | null) => shown(value, result.response);
  const effectName = result.rows.find((row) => row.effectSize !== null)?.effectSize?.name ?? "effect size";
  const what = result.family === null ? "Comparisons" : `Family "${result.family}"`;
  const sides = result.sides === "two-sided" ? "" : `, one-sided ${result.sides}`;
  const held =
    result.holds === "nothing"
      ? "no correction"
      : `${result.holds === "family-wise error" ? "family-wise error" : "false discovery rate"} ${percentText(result.error)} by ${correctionWords(result.correction)}`;
  const thresholds = options.showThresholds && !raw && result.rows.some((row) => row.threshold !== null);
  const closed = result.after !== null && !result.after.open;
  const ranks = result.errorTerm === "ranks";
  const footnotes = [
    `${log ? "Ratios of geometric means" : ranks ? "Differences of mean ranks" : "Differences of means, or the declared contrasts of them"}; ${errorTerms[result.errorTerm] ?? result.errorTerm}.`,
    result.intervals === "simultaneous"
      ? `Intervals hold jointly at ${percentText(result.intervalLevel)} and agree with the decisions.`
      : result.intervals === "individual"
        ? "Intervals are each comparison's own."
        : closed
          ? "What was not tested has no intervals."
          : "This method has no intervals that agree with its decisions.",
  ];
  if (thresholds)
    footnotes.push(
      "Threshold: the largest own p with which the comparison would have been shown, the others as they are.",
    );
  return tableOf(
    `${what}: ${responseTitle(result.response)}; ${held}${sides} (${stateMark(result.state)})`,
    result.rows,
    [
      { label: "comparison", value: (row) => row.comparison, header: true },
      {
        label: log ? "ratio" : "estimate",
        value: (row) => shown(row.estimate, result.response),
        text: (row) => fixed(shown(row.estimate, result.response), places),
      },
      {
        label: intervalName(result),
        value: () => null,
        fields: intervalFields(
          intervalName(result),
          (row) => back(row.lower),
          (row) => back(row.upper),
        ),
        align: "right",
        text: (row) => intervalText(shown(row.lower, result.response), shown(row.upper, result.response), places),
        shown: result.intervals !== "none",
      },
      { label: "own p", value: (row) => row.p, text: (row) => pText(row.p) },
      {
        label: "adjusted p",
        value: (row) => row.adjustedP,
        text: (row) => pText(row.adjustedP),
        shown: options.showAdjustedP && !raw,
      },
      {
        label: "threshold",
        value: (row) => row.threshold,
        text: (row) =>
          row.threshold === null ? "\u2013" : row.threshold < 0.0001 ? "< 0.0001" : fixed(row.threshold, 4),
        shown: thresholds,
      },
      { label: "conclusion", value: (row) => conclusionOf(row, result) },
      {
        label: "state",
        value: (row) => row.state,
        text: (row) => stateMark(row.state),
        shown: new Set(result.rows.map((row) => row.state)).size > 1,
      },
      {
        label: log ? "standard error of the log" : "standard error",
        value: (row) => row.standardError,
        text: (row) => fixed(row.standardError, places),
      },
      { label: "df", value: (row) => row.df, text: (row) => dfText(row.df) },
      {
        label: ranks && result.rows.every((row) => row.df === null) ? "z" : "t",
        value: (row) => row.statistic,
        text: (row) => fixed(row.statistic, 2),
      },
      {
        label: effectName,
        value: (row) => row.effectSize?.value,
        text: (row) => (row.effectSize === null ? "\u2013" : fixed(row.effectSize.value, 2)),
        shown: !log && result.rows.some((row) => row.effectSize !== null),
      },
      {
        label: "its interval",
        value: () => null,
        fields: intervalFields(
          effectName,
          (row) => row.effectSize?.lower,
          (row) => row.effectSize?.upper,
        ),
        align: "right",
        text: (row) =>
          row.effectSize === null ? "\u2013" : intervalText(row.effectSize.lower, row.effectSize.upper, 2),
        shown: !log && result.rows.some((row) => row.effectSize !== null),
      },
    ],
    footnotes,
  );
}

function besideTable(result: ComparisonsResult): PresentedTable {
  const views = result.beside!.filter((view) => view.unfit === undefined);
  const unfit = result
    .beside!.filter((view) => view.unfit !== undefined)
    .map((view) => `${view.correction}: ${view.unfit}`);
  return tableOf(
    "What other methods would have said: a view of sensitivity, not a choice",
    views.map((view) => ({ view })),
    [
      { label: "method", value: ({ view }) => `${view.correction}${view.declared ? " (declared)" : ""}`, header: true },
      ...result.rows.map((row, index) => ({
        label: row.comparison,
        value: ({ view }: { view: (typeof views)[number] }) => view.adjustedP[index] ?? null,
        text: ({ view }: { view: (typeof views)[number] }) =>
          `${pText(view.adjustedP[index])} ${view.rejected[index] === true ? "shown" : "not shown"}`,
      })),
    ],
    unfit.length > 0
      ? [`Not fit for this family: ${unfit.map((reason) => reason.replace(/\.$/, "")).join("; ")}.`]
      : [],
  );
}

export function comparisonsBlocks(result: ComparisonsResult, options: PresentOptions): Block[] {
  const blocks: Block[] = familySentences(result).map((text) => paragraph(text));
  if (result.state !== "planned") blocks.push(paragraph(stateSentence[result.state], "state"));
  blocks.push({ type: "table", table: comparisonsTable(result, options) });
  if (result.after?.open !== false && result.rows.length <= 12)
    blocks.push({ type: "list", items: result.rows.map((row) => comparisonSentence(row, result, options.digits)) });
  if (result.beside !== undefined) blocks.push({ type: "table", table: besideTable(result) });
  return [...blocks, ...noteBlocks(result.notes)];
}
