import type { CalibrationResult, DetectableResult, PowerResult, SizeResult } from "../../results/index.ts";
import { type Block, noteBlocks, paragraph, tableOf } from "../blocks.ts";
import { countText, fixed, percentText, significant } from "../numbers.ts";
import {
  aimText,
  calibrationSentences,
  detectableSentence,
  errorText,
  methodText,
  powerSentences,
  powerText,
  sizeSentence,
} from "../sentences/planning.ts";

const percent = (share: number | null): string => (share === null ? "\u2013" : percentText(share, 1));

export function powerBlocks(result: PowerResult): Block[] {
  const comparisons = result.points[0]?.comparisons?.map((entry) => entry.comparison) ?? [];
  return [
    ...powerSentences(result).map((text) => paragraph(text)),
    {
      type: "table",
      table: tableOf(
        `Power of ${aimText(result.of)}, ${errorText(result.correction, result.errorRate)}`,
        result.points,
        [
          { label: "subjects", value: (row) => row.subjects, header: true, align: "right" },
          {
            label: "per group",
            value: (row) => row.subjectsPerGroup.join(", "),
            shown: result.points.some((row) => row.subjectsPerGroup.length > 1),
          },
          {
            label: "power",
            value: (row) => row.power,
            text: (row) => powerText(row.power),
            shown: result.points.some((row) => row.power !== undefined),
          },
          ...comparisons.map((name, index) => ({
            label: name,
            value: (row: (typeof result.points)[number]) => row.comparisons?.[index]?.power ?? null,
            text: (row: (typeof result.points)[number]) => powerText(row.comparisons?.[index]?.power),
          })),
          {
            label: "every comparison",
            value: (row) => row.every,
            text: (row) => powerText(row.every),
            shown: result.points.some((row) => row.every !== undefined),
          },
          {
            label: "at least one",
            value: (row) => row.any,
            text: (row) => powerText(row.any),
            shown: result.points.some((row) => row.any !== undefined),
          },
          {
            label: "Monte Carlo error",
            value: (row) => row.monteCarloError,
            text: (row) => (row.monteCarloError === undefined ? "" : percentText(row.monteCarloError, 2)),
            shown: result.points.some((row) => row.monteCarloError !== undefined),
          },
          {
            label: "cost",
            value: (row) => row.cost,
            text: (row) => significant(row.cost, 6),
            shown: result.points.some((row) => row.cost !== undefined),
          },
        ],
        [`${methodText(result.method)[0]!.toUpperCase()}${methodText(result.method).slice(1)}.`],
      ),
    },
    ...noteBlocks(result.notes),
  ];
}
export function sizeBlocks(result: SizeResult): Block[] {
  const blocks: Block[] = [paragraph(sizeSentence(result))];
  if (result.comparisons !== undefined && result.comparisons.length > 0) {
    const own = result.comparisons.some((row) => row.subjects !== undefined);
    blocks.push({
      type: "table",
      table: tableOf("At that size", result.comparisons, [
        { label: "comparison", value: (row) => row.comparison, header: true },
        { label: "power", value: (row) => row.power, text: (row) => powerText(row.power) },
        { label: "subjects it alone needs", value: (row) => row.subjects, shown: own },
      ]),
    });
  }
  return [...blocks, ...noteBlocks(result.notes)];
}

export function detectableBlocks(result: DetectableResult): Block[] {
  const blocks: Block[] = [paragraph(detectableSentence(result))];
  if (result.comparisons !== undefined) {
    blocks.push({
      type: "table",
      table: tableOf("Smallest differences that are detectable", result.comparisons, [
        { label: "comparison", value: (row) => row.comparison, header: true },
        { label: "difference", value: (row) => row.estimate, text: (row) => significant(row.estimate, 4) },
        {
          label: "in units of the spread",
          value: (row) => row.standardised,
          text: (row) => fixed(row.standardised, 2),
        },
      ]),
    });
  }
  return [...blocks, ...noteBlocks(result.notes)];
}

export function calibrationBlocks(result: CalibrationResult): Block[] {
  const comparisons = result.scenarios[0]?.comparisons.map((entry) => entry.comparison) ?? [];
  return [
    paragraph(calibrationSentences(result).join(" ")),
    {
      type: "table",
      table: tableOf(
        `Calibration of ${aimText(result.of)}, ${errorText(result.correction, result.error)}: ${countText(result.studies)} simulated studies, seed ${result.seed}${result.shard === null ? "" : `, shard ${result.shard.index} of ${result.shard.of}`}`,
        result.scenarios,
        [
          { label: "scenario", value: (row) => row.scenario, header: true },
          { label: "sizes and spreads from", value: (row) => row.source },
          { label: "family error", value: (row) => row.familyError, text: (row) => percent(row.familyError) },
          {
            label: "\u00b1",
            value: (row) => row.familyErrorMonteCarlo,
            text: (row) => (row.familyErrorMonteCarlo === null ? "" : percentText(row.familyErrorMonteCarlo, 2)),
          },
          { label: "every comparison", value: (row) => row.every, text: (row) => powerText(row.every) },
          { label: "at least one", value: (row) => row.any, text: (row) => powerText(row.any) },
          { label: "all intervals cover", value: (row) => row.coverage, text: (row) => percent(row.coverage) },
        ],
        ["\u00b1: Monte Carlo standard error of the family error."],
      ),
    },
    ...(comparisons.length > 1
      ? [
          {
            type: "table" as const,
            table: tableOf("How often each comparison was shown", result.scenarios, [
              { label: "scenario", value: (row) => `${row.scenario} (${row.source})`, header: true },
              ...comparisons.map((name, index) => ({
                label: name,
                value: (row: (typeof result.scenarios)[number]) => row.comparisons[index]?.rejected ?? null,
                text: (row: (typeof result.scenarios)[number]) => powerText(row.comparisons[index]?.rejected),
              })),
            ]),
          },
        ]
      : []),
    ...noteBlocks(result.notes),
  ];
}
