import type { CalibrationPicture, PowerPicture } from "../../results/index.ts";
import { percentText } from "../numbers.ts";
import {
  inLines,
  legendOf,
  measured,
  relabelled,
  type Specification,
  stateTitle,
  ticksAcross,
  widest,
} from "./axes.ts";
import { groupChannels } from "./means.ts";
import { dashes, labelSize } from "./look.ts";

const percentTicks = (low: number, high: number, about: number) => {
  const ticks = ticksAcross(low, high, about);
  return { ...ticks, labels: ticks.values.map((value) => percentText(Number(value.toPrecision(6)))) };
};
const above = { titleAngle: 0, titleAlign: "left", titleAnchor: "start", titleBaseline: "bottom", titleY: -9 };

const curveNames: Readonly<Record<string, string>> = { every: "every comparison", any: "at least one" };
/** What a curve of power is of, in words. */
export const curveName = (name: string): string => curveNames[name] ?? name;

/** Power against the number of subjects; the goal as a broken line, simulation error as bars. */
export function powerSpecification(picture: PowerPicture, width: number): Specification {
  const names = picture.curves.map((curve) => curveName(curve.name));
  const values = picture.curves.flatMap((curve) =>
    curve.points.map((point) => ({
      group: curveName(curve.name),
      subjects: point.subjects,
      power: point.power,
      low: Math.max(0, point.power - 1.96 * (point.monteCarloError ?? 0)),
      high: Math.min(1, point.power + 1.96 * (point.monteCarloError ?? 0)),
      simulated: point.monteCarloError !== null,
    })),
  );
  const sizes = values.map((value) => value.subjects);
  const ticks = ticksAcross(Math.min(...sizes), Math.max(...sizes), Math.max(3, Math.floor(width / 80)));
  const whole = ticks.values
    .map((value, index) => [value, ticks.labels[index]!] as const)
    .filter(([value]) => Number.isInteger(value));
  const x = measured(
    "subjects",
    { ...ticks, values: whole.map(([value]) => value), labels: whole.map(([, text]) => text) },
    "subjects in all",
    { grid: false },
  );
  const y = (field: string) =>
    measured(
      field,
      percentTicks(0, 1, 5),
      picture.goal === null ? "power" : `power (broken line: the goal of ${percentText(picture.goal)})`,
      { ...above, titleX: -38 },
    );
  const marks = groupChannels(names, null, width - 20);
  const legend = legendOf(names, null, width - 20);
  const stroke = marks.stroke;
  // Markers would hide a dense curve: about twelve of them tell the curves apart.
  const marked = picture.curves.flatMap((curve, place) => {
    const every = Math.max(1, Math.ceil(curve.points.length / 12));
    return values
      .filter((value) => value.group === curveName(curve.name))
      .filter((_, index) => index % every === place % every);
  });
  return {
    ...(picture.state === "rehearsal" ? stateTitle(picture) : {}),
    autosize: { type: "fit", contains: "padding" },
    width,
    height: 300 + 18 * Math.ceil(names.length / Number(legend.columns)),
    layer: [
      {
        data: { values: picture.goal === null ? [] : [{ goal: picture.goal }] },
        mark: { type: "rule", strokeDash: [4, 3] },
        encoding: { y: y("goal") },
      },
      {
        data: { values },
        mark: { type: "line", strokeWidth: 2 },
        encoding: {
          x,
          y: y("power"),
          stroke,
          strokeDash: {
            ...(stroke as Specification),
            scale: { domain: names, range: names.map((_, index) => dashes[index % dashes.length]) },
          },
        },
      },
      {
        data: { values: values.filter((value) => value.simulated) },
        mark: { type: "rule", strokeWidth: 1.2 },
        encoding: { x, y: y("low"), y2: { field: "high" }, stroke },
      },
      {
        data: { values: marked },
        mark: { type: "point", size: 55, strokeWidth: 1.8, opacity: 1 },
        encoding: {
          x,
          y: y("power"),
          ...marks,
        },
      },
    ],
  };
}

/** What the procedure really does over simulated studies: family error and missed coverage, against the error held. */
export function calibrationSpecification(picture: CalibrationPicture, width: number): Specification {
  const result = picture.calibration;
  const kinds = ["family error", "an interval misses"];
  const names = result.scenarios.map((scenario) => `${scenario.scenario}, from the ${scenario.source}`);
  const nameRoom = 0.34 * width;
  const labels = names.map((name) => inLines(name, nameRoom));
  const rows = result.scenarios.flatMap((scenario, index) =>
    [
      { group: kinds[0]!, value: scenario.familyError, error: scenario.familyErrorMonteCarlo ?? 0, at: index - 0.13 },
      {
        group: kinds[1]!,
        value: scenario.coverage === null ? null : 1 - scenario.coverage,
        error: scenario.coverageMonteCarlo ?? 0,
        at: index + 0.13,
      },
    ].flatMap((row) =>
      row.value === null
        ? []
        : [
            {
              ...row,
              value: row.value,
              low: Math.max(0, row.value - 1.96 * row.error),
              high: row.value + 1.96 * row.error,
            },
          ],
    ),
  );
  const most = Math.max(result.error * 1.25, ...rows.map((row) => row.high * 1.08));
  const shownKinds = kinds.filter((kind) => rows.some((row) => row.group === kind));
  const plot =
    width -
    8 -
    widest(
      labels.flatMap((label) => label.split("\n")),
      labelSize,
    ) -
    14;
  const ticks = percentTicks(0, most, Math.max(3, Math.floor(plot / 80)));
  const x = (field: string) => measured(field, ticks, "share of simulated studies");
  const places = names.map((_, index) => index);
  const y: Specification = {
    field: "at",
    type: "quantitative",
    title: null,
    scale: { domain: [names.length - 0.5, -0.5], nice: false, zero: false },
    axis: {
      values: places,
      labelExpr: relabelled(places, labels),
      grid: false,
      ticks: false,
      domain: false,
      labelPadding: 6,
    },
  };
  return {
    width: plot,
    height: names.length * Math.max(34, 13 * Math.max(...labels.map((label) => label.split("\n").length)) + 8),
    layer: [
      {
        data: { values: [{ error: result.error }] },
        mark: { type: "rule", strokeDash: [4, 3], strokeWidth: 1.4 },
        encoding: { x: x("error") },
      },
      {
        data: { values: [{ error: result.error, text: `error held: ${percentText(result.error)}` }] },
        mark: {
          type: "text",
          baseline: "bottom",
          dy: -3,
          fontSize: labelSize,
          align: result.error > most / 2 ? "right" : "left",
        },
        encoding: { x: x("error"), y: { value: 0 }, text: { field: "text" } },
      },
      {
        data: { values: rows },
        mark: { type: "rule", strokeWidth: 2 },
        encoding: {
          y,
          x: x("low"),
          x2: { field: "high" },
          stroke: groupChannels(shownKinds, null, width - 20).stroke,
        },
      },
      {
        data: { values: rows },
        mark: { type: "point", size: 70, strokeWidth: 2, opacity: 1 },
        encoding: { y, x: x("value"), ...groupChannels(shownKinds, null, width - 20) },
      },
    ],
  };
}
