import type { OmnibusEffect, OmnibusResult, VarianceComponent } from "../../results/index.ts";
import { type Block, intervalFields, noteBlocks, paragraph, type PresentedTable, tableOf } from "../blocks.ts";
import { counted, dfText, fixed, intervalText, pText, percentText, significant } from "../numbers.ts";
import { responseTitle, stateMark } from "../response-words.ts";
import { customaryError, omnibusSentences, statisticName } from "../sentences/omnibus.ts";

const methodNames: Readonly<Record<OmnibusEffect["method"], string>> = {
  "one-way": "one-way analysis of variance",
  welch: "Welch's test",
  "brown-forsythe": "Brown and Forsythe's test",
  factorial: "factorial analysis of variance",
  covariance: "analysis of covariance",
  "repeated measures": "repeated measures",
  multivariate: "multivariate",
  multilevel: "multilevel model",
  "kruskal-wallis": "Kruskal-Wallis",
  friedman: "Friedman",
  resampling: "by rearranging",
};
export const methodName = (method: OmnibusEffect["method"]): string => methodNames[method];

const has = (effects: readonly OmnibusEffect[], field: keyof OmnibusEffect) =>
  effects.some((effect) => effect[field] !== undefined);

/** The tests of one method. */
function effectTable(result: OmnibusResult, method: OmnibusEffect["method"], first: boolean): PresentedTable {
  const effects = result.effects.filter((effect) => effect.method === method);
  const statistics = [...new Set(effects.map((effect) => effect.statistic))];
  const footnotes: string[] = first
    ? [
        `${counted(result.observations, "observation")} of ${counted(result.subjects, "subject")}. The sentences read each test at the customary ${percentText(customaryError)}.`,
      ]
    : [];
  if (first && result.error !== undefined) {
    footnotes.push(
      `Error: ${dfText(result.error.df)} df, sum of squares ${significant(result.error.sumOfSquares, 5)}, mean square ${significant(result.error.meanSquare, 5)}.`,
    );
  }
  if (first && result.rSquared !== undefined)
    footnotes.push(
      `R\u00b2 ${fixed(result.rSquared, 3)}${result.residualSd === undefined ? "" : `; residual standard deviation ${significant(result.residualSd, 4)}`}.`,
    );
  return tableOf(
    `Omnibus test of ${responseTitle(result.response)}: ${methodName(method)} (${stateMark(result.state)})`,
    effects,
    [
      { label: "effect", value: (row) => row.effect, header: true },
      {
        label: "form",
        value: (row) => row.form ?? "",
        shown: has(effects, "form"),
      },
      {
        label: statistics.length === 1 ? statisticName(statistics[0]!) : "statistic",
        value: (row) => row.value,
        text: (row) => `${statistics.length === 1 ? "" : `${statisticName(row.statistic)} `}${fixed(row.value, 2)}`,
      },
      {
        label: "df",
        value: (row) => row.df1,
        align: "right",
        fields: [
          { name: "df1", value: (row) => row.df1 },
          { name: "df2", value: (row) => row.df2 },
        ],
        text: (row) => (row.df2 === null ? dfText(row.df1) : `${dfText(row.df1)}, ${dfText(row.df2)}`),
      },
      { label: "p", value: (row) => row.p, text: (row) => pText(row.p) },
      {
        label: "sum of squares",
        value: (row) => row.sumOfSquares,
        text: (row) => significant(row.sumOfSquares, 5),
        shown: has(effects, "sumOfSquares"),
      },
      {
        label: "p, Greenhouse-Geisser",
        value: (row) => row.pGreenhouseGeisser,
        text: (row) => (row.pGreenhouseGeisser === undefined ? "" : pText(row.pGreenhouseGeisser)),
        shown: has(effects, "pGreenhouseGeisser"),
      },
      {
        label: "p, Huynh-Feldt",
        value: (row) => row.pHuynhFeldt,
        text: (row) => (row.pHuynhFeldt === undefined ? "" : pText(row.pHuynhFeldt)),
        shown: has(effects, "pHuynhFeldt"),
      },
      {
        label: "likelihood ratio",
        value: (row) => row.likelihoodRatio?.statistic,
        text: (row) =>
          row.likelihoodRatio === undefined
            ? ""
            : `${fixed(row.likelihoodRatio.statistic, 2)} (${dfText(row.likelihoodRatio.df)} df)`,
        shown: has(effects, "likelihoodRatio"),
      },
      {
        label: "its p",
        value: (row) => row.likelihoodRatio?.p,
        text: (row) =>
          row.likelihoodRatio === undefined ? "" : pText(row.likelihoodRatio.bootstrapP ?? row.likelihoodRatio.p),
        shown: has(effects, "likelihoodRatio"),
      },
      {
        label: "partial \u03b7\u00b2",
        value: (row) => row.partialEtaSquared,
        text: (row) => (row.partialEtaSquared === undefined ? "" : fixed(row.partialEtaSquared, 3)),
        shown: has(effects, "partialEtaSquared"),
      },
      {
        label: "its interval",
        value: () => null,
        fields: intervalFields(
          "partial \u03b7\u00b2",
          (row) => row.partialEtaSquaredInterval?.[0],
          (row) => row.partialEtaSquaredInterval?.[1],
        ),
        align: "right",
        text: (row) =>
          row.partialEtaSquaredInterval === undefined ? "" : intervalText(...row.partialEtaSquaredInterval, 3),
        shown: has(effects, "partialEtaSquaredInterval"),
      },
      {
        label: "generalised \u03b7\u00b2",
        value: (row) => row.generalizedEtaSquared,
        text: (row) => (row.generalizedEtaSquared === undefined ? "" : fixed(row.generalizedEtaSquared, 3)),
        shown: has(effects, "generalizedEtaSquared"),
      },
      {
        label: "\u03c9\u00b2",
        value: (row) => row.omegaSquared,
        text: (row) => (row.omegaSquared === undefined ? "" : fixed(row.omegaSquared, 3)),
        shown: has(effects, "omegaSquared"),
      },
    ],
    footnotes,
  );
}

/** Sentences first, then a table for each method, the design's own one leading. */
export function omnibusBlocks(result: OmnibusResult): Block[] {
  const blocks: Block[] = omnibusSentences(result).map((text) => paragraph(text));
  for (const [index, method] of [...new Set(result.effects.map((effect) => effect.method))].entries())
    blocks.push({ type: "table", table: effectTable(result, method, index === 0) });
  if ((result.sphericity?.length ?? 0) > 0) blocks.push({ type: "table", table: sphericityTable(result) });
  if ((result.varianceComponents?.length ?? 0) > 0)
    blocks.push({ type: "table", table: componentTable(result, result.varianceComponents!) });
  return [...blocks, ...noteBlocks(result.notes)];
}

function sphericityTable(result: OmnibusResult) {
  const epsilonOf = (effect: string) =>
    result.effects.find((entry) => entry.effect === effect && entry.epsilonGreenhouseGeisser !== undefined);
  return tableOf("Sphericity", result.sphericity!, [
    { label: "effect", value: (row) => row.effect, header: true },
    { label: "Mauchly's W", value: (row) => row.w, text: (row) => fixed(row.w, 3) },
    { label: "chi-square", value: (row) => row.statistic, text: (row) => fixed(row.statistic, 2) },
    { label: "df", value: (row) => row.df, text: (row) => dfText(row.df) },
    { label: "p", value: (row) => row.p, text: (row) => pText(row.p) },
    {
      label: "\u03b5, Greenhouse-Geisser",
      value: (row) => epsilonOf(row.effect)?.epsilonGreenhouseGeisser,
      text: (row) => fixed(epsilonOf(row.effect)?.epsilonGreenhouseGeisser, 3),
    },
    {
      label: "\u03b5, Huynh-Feldt",
      value: (row) => epsilonOf(row.effect)?.epsilonHuynhFeldt,
      text: (row) => fixed(epsilonOf(row.effect)?.epsilonHuynhFeldt, 3),
    },
  ]);
}

function componentTable(result: OmnibusResult, components: readonly VarianceComponent[]) {
  const total = components.reduce((sum, component) => sum + component.variance, 0);
  const intervals = components.some((component) => component.lower !== undefined && component.lower !== null);
  const correlations = (result.intraclassCorrelation ?? []).map(
    (entry) =>
      `Intraclass correlation of ${entry.unit}: ${fixed(entry.value, 3)}${entry.lower === null ? "" : ` ${intervalText(entry.lower, entry.upper, 3)}`}.`,
  );
  return tableOf(
    "Variance components",
    components,
    [
      { label: "between", value: (row) => row.unit, header: true },
      { label: "of", value: (row) => row.term },
      { label: "variance", value: (row) => row.variance, text: (row) => significant(row.variance, 4) },
      {
        label: "interval of the variance",
        value: () => null,
        fields: intervalFields(
          "interval of the variance",
          (row) => row.lower,
          (row) => row.upper,
        ),
        align: "right",
        text: (row) =>
          row.lower === undefined || row.lower === null
            ? "\u2013"
            : `[${significant(row.lower, 3)}, ${row.upper === null || row.upper === undefined ? "\u221e" : significant(row.upper, 3)}]`,
        shown: intervals,
      },
      { label: "standard deviation", value: (row) => row.sd, text: (row) => significant(row.sd, 4) },
      {
        label: "share",
        value: (row) => (total > 0 ? row.variance / total : null),
        text: (row) => (total > 0 ? percentText(row.variance / total, 1) : "\u2013"),
      },
    ],
    correlations,
  );
}
