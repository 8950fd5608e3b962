import type { DescribeCell, DescribeResult } from "../../results/index.ts";
import { type Block, intervalFields, noteBlocks, paragraph, type PresentedTable, tableOf } from "../blocks.ts";
import { fixed, intervalText, listed, percentText } from "../numbers.ts";
import type { PresentOptions } from "../options.ts";
import { responseTitle, shown } from "../response-words.ts";
import { capitalised } from "../sentences/words.ts";
import { cellPlaces, describeSentences } from "../sentences/description.ts";

export function describeTable(result: DescribeResult, options: PresentOptions): PresentedTable {
  const { response } = result;
  const log = response.scale === "log";
  const places = cellPlaces(result, options.digits);
  const within = result.cells.some((cell) => cell.withinLower !== undefined);
  const quartiles = result.cells.some((cell) => cell.median !== undefined);
  const missing = result.cells.some((cell) => cell.missing > 0);
  const level = percentText(result.intervalLevel);
  const back = (value: number | null | undefined) => shown(value ?? null, response);
  return tableOf(
    `${capitalised(responseTitle(response))}${result.by.length === 0 ? "" : ` by ${listed(result.by)}`}${result.rehearsal ? " (\u25c7 rehearsal)" : ""}`,
    result.cells,
    [
      ...result.by.map((name) => ({
        label: name,
        value: (cell: DescribeCell) => cell.levels[name] ?? "",
        header: true,
      })),
      { label: "n", value: (cell) => cell.n },
      { label: "missing", value: (cell) => cell.missing, shown: missing },
      {
        label: log ? "geometric mean" : "mean",
        value: (cell) => back(cell.mean),
        text: (cell) => fixed(back(cell.mean), places),
      },
      { label: log ? "spread of the log" : "spread", value: (cell) => cell.sd, text: (cell) => fixed(cell.sd, places) },
      {
        label: log ? "standard error of the log" : "standard error",
        value: (cell) => cell.standardError,
        text: (cell) => fixed(cell.standardError, places),
      },
      {
        label: `${level} interval`,
        value: () => null,
        fields: intervalFields(
          `${level} interval`,
          (cell) => back(cell.lower),
          (cell) => back(cell.upper),
        ),
        align: "right",
        text: (cell) => intervalText(back(cell.lower), back(cell.upper), places),
      },
      {
        label: `${level} within-subject interval`,
        value: () => null,
        fields: intervalFields(
          `${level} within-subject interval`,
          (cell) => back(cell.withinLower),
          (cell) => back(cell.withinUpper),
        ),
        align: "right",
        text: (cell) => intervalText(back(cell.withinLower), back(cell.withinUpper), places),
        shown: within,
      },
      {
        label: "lower quartile",
        value: (cell) => back(cell.lowerQuartile),
        text: (cell) => fixed(back(cell.lowerQuartile), places),
        shown: quartiles,
      },
      {
        label: "median",
        value: (cell) => back(cell.median),
        text: (cell) => fixed(back(cell.median), places),
        shown: quartiles,
      },
      {
        label: "upper quartile",
        value: (cell) => back(cell.upperQuartile),
        text: (cell) => fixed(back(cell.upperQuartile), places),
        shown: quartiles,
      },
    ],
    within
      ? [
          "Spread is the standard deviation. Within-subject intervals (Cousineau 2005, Morey 2008) serve comparisons between the levels of a within factor; the others serve each mean by itself.",
        ]
      : ["Spread is the standard deviation."],
  );
}

export function describeBlocks(result: DescribeResult, options: PresentOptions): Block[] {
  return [
    ...describeSentences(result, options.digits).map((text) => paragraph(text)),
    { type: "table", table: describeTable(result, options) },
    ...noteBlocks(result.notes),
  ];
}
