import type { ComparisonRow, ComparisonsPicture, ComparisonsResult, State } from "../../results/index.ts";
import { pClause } from "../numbers.ts";
import { comparedResponse, differenceTitle, shown, stateMark } from "../response-words.ts";
import { inLines, measured, relabelled, type Specification, stateTitle, ticksAcross, widest } from "./axes.ts";
import { hueOf, ink, labelSize, titleSize } from "./look.ts";
import { conclusionOf } from "../conclusion.ts";

/** Shape of a row's estimate by its state; filled where the claim was shown. */
const stateShapes: Readonly<Record<State, string>> = {
  planned: "square",
  declared: "triangle-up",
  exploratory: "circle",
  rehearsal: "diamond",
};
const isFirm = (state: State): boolean => state === "planned" || state === "declared";

/** Lines beyond which a claim must lie, on the analysis scale. */
export function marginLines(result: ComparisonsResult): number[] {
  if (result.margin === null) return [];
  const { type, value } = result.margin;
  if (type === "equivalence") return [-value, value];
  return [result.response.better === "lower" ? value : -value];
}

const rowText = (row: ComparisonRow, result: ComparisonsResult): string => {
  const conclusion = conclusionOf(row, result);
  // Signs and numbers that belong together stay on one line.
  const p = pClause(row.adjustedP).replaceAll(" ", "\u00a0");
  return conclusion === "not tested" ? conclusion : `${conclusion}, ${p}`;
};

/** Estimates with their intervals against zero (or a ratio of one) and against the margin, a row for each comparison. */
export function comparisonsSpecification(picture: ComparisonsPicture, width: number): Specification {
  const response = comparedResponse(picture.comparisons);
  const result = { ...picture.comparisons, response };
  const log = response.scale === "log";
  const back = (value: number) => shown(value, response)!;
  const hasIntervals = result.intervals !== "none";
  const mixed = new Set(result.rows.map((row) => row.state)).size > 1;
  const ends = [
    0,
    ...marginLines(result),
    ...result.rows.flatMap((row) => [row.estimate, ...(hasIntervals ? [row.lower, row.upper] : [])]),
  ].filter((value): value is number => value !== null && Number.isFinite(value));
  const least = Math.min(...ends);
  const most = Math.max(...ends);
  const room = most > least ? 0.07 * (most - least) : 1;
  const [low, high] = [least - room, most + room];
  const narrow = width < 500;
  const words = result.rows.map((row) => rowText(row, result));
  const wordRoom = narrow ? 0 : widest(words, labelSize) + 12;
  const nameRoom = Math.min(
    widest(
      result.rows.map((row) => row.comparison),
      labelSize,
    ) + 2,
    (narrow ? 0.36 : 0.34) * width,
  );
  const names = result.rows.map((row, index) =>
    [
      inLines(mixed ? `${row.comparison} (${stateMark(row.state)})` : row.comparison, nameRoom),
      ...(narrow ? [inLines(words[index]!, nameRoom)] : []),
    ].join("\n"),
  );
  const plot =
    width -
    8 -
    widest(
      names.flatMap((name) => name.split("\n")),
      labelSize,
    ) -
    16 -
    wordRoom;
  const ticks = ticksAcross(back(low), back(high), Math.max(3, Math.floor(plot / 75)), log);
  const lines = Math.max(...names.map((name) => name.split("\n").length));
  const rows = result.rows.map((row, index) => ({
    at: index,
    comparison: row.comparison,
    estimate: back(row.estimate),
    lower: back(row.lower ?? low),
    upper: back(row.upper ?? high),
    openBelow: row.lower === null,
    openAbove: row.upper === null,
    state: row.state,
    firm: isFirm(row.state),
    rejected: row.rejected,
    words: words[index],
  }));
  const at = result.rows.map((_, index) => index);
  const y: Specification = {
    field: "at",
    type: "quantitative",
    title: null,
    scale: { domain: [result.rows.length - 0.5, -0.5], nice: false, zero: false },
    axis: {
      values: at,
      labelExpr: relabelled(at, names),
      grid: false,
      ticks: false,
      domain: false,
      labelPadding: 8,
      labelLineHeight: 13,
    },
  };
  const x = (field: string) => measured(field, ticks, inLines(differenceTitle(response), plot, titleSize));
  const colour: Specification = {
    field: "rejected",
    type: "nominal",
    legend: null,
    scale: { domain: [true, false], range: [hueOf(0), ink] },
  };
  const arrows = hasIntervals
    ? rows.flatMap((row) => [
        ...(row.openBelow ? [{ ...row, end: back(low), angle: -90 }] : []),
        ...(row.openAbove ? [{ ...row, end: back(high), angle: 90 }] : []),
      ])
    : [];
  const rule = (of: readonly (typeof rows)[number][], dash: readonly number[] | null): Specification => ({
    data: { values: of },
    mark: { type: "rule", strokeWidth: 2.2, ...(dash === null ? {} : { strokeDash: dash }) },
    encoding: { y, x: x("lower"), x2: { field: "upper" }, color: colour },
  });
  return {
    ...stateTitle(picture),
    width: plot,
    height: result.rows.length * Math.max(30, 13 * lines + 9),
    layer: [
      {
        data: { values: [{ none: back(0) }] },
        mark: { type: "rule", strokeWidth: 1.2 },
        encoding: { x: x("none") },
      },
      {
        data: { values: marginLines(result).map((margin) => ({ margin: back(margin) })) },
        mark: { type: "rule", strokeDash: [2, 3], strokeWidth: 1.8, color: hueOf(1) },
        encoding: { x: x("margin") },
      },
      ...(hasIntervals
        ? [
            rule(
              rows.filter((row) => row.firm),
              null,
            ),
            rule(
              rows.filter((row) => !row.firm),
              [5, 3],
            ),
          ]
        : []),
      {
        data: { values: arrows },
        mark: { type: "point", shape: "triangle", filled: true, size: 55, opacity: 1 },
        encoding: { y, x: x("end"), color: colour, angle: { field: "angle", type: "quantitative", scale: null } },
      },
      {
        data: { values: rows },
        mark: { type: "point", size: 85, strokeWidth: 2, opacity: 1 },
        encoding: {
          y,
          x: x("estimate"),
          stroke: colour,
          shape: {
            field: "state",
            type: "nominal",
            legend: null,
            scale: { domain: Object.keys(stateShapes), range: Object.values(stateShapes) },
          },
          fill: {
            field: "rejected",
            type: "nominal",
            legend: null,
            scale: { domain: [true, false], range: [hueOf(0), "transparent"] },
          },
        },
      },
      ...(narrow
        ? []
        : [
            {
              data: { values: rows },
              mark: { type: "text", align: "left", baseline: "middle", fontSize: labelSize },
              encoding: { y, x: { value: plot + 12 }, text: { field: "words" } },
            },
          ]),
    ],
  };
}
