import type { Picture, ResponseFacts } from "../../results/index.ts";
import { responseTitle, shown, stateMark } from "../response-words.ts";
import { labelSize, titleSize } from "./look.ts";
import { textWidth, widest, widestWord, wrappedLabel } from "./text-width.ts";

export type Specification = Record<string, unknown>;

/** A list as a literal of the drawing library's expressions, whatever signs the names hold. */
const literal = (list: readonly (string | number)[]): string =>
  JSON.stringify(list)
    .replace(/\u2028/g, "\\u2028")
    .replace(/\u2029/g, "\\u2029");

/** Shows `labels[i]` wherever the axis or legend would show `values[i]`. */
export const relabelled = (values: readonly (string | number)[], labels: readonly string[]): string =>
  `${literal(labels)}[indexof(${literal(values)}, datum.value)]`;

/** A label in lines no wider than the limit; the look breaks text at these line ends. */
export const inLines = (text: string, limit: number, size: number = labelSize): string =>
  wrappedLabel(text, size, Math.max(limit, 2 * size)).join("\n");

export interface Ticks {
  readonly values: readonly number[];
  readonly labels: readonly string[];
  readonly domain: readonly [number, number];
  readonly log: boolean;
}

const decimalsOf = (step: number): number => Math.max(0, Math.min(12, -Math.floor(Math.log10(step) + 1e-9)));
export function numberLabel(value: number, places: number): string {
  const size = Math.abs(value);
  if (size >= 1e7 || (size > 0 && size < 1e-5)) return value.toExponential().replace(/-/g, "\u2212").replace("e+", "e");
  return value
    .toFixed(places)
    .replace(/^-0(\.0*)?$/, "0$1")
    .replace("-", "\u2212");
}

/** Round numbers across a range: steps of 1, 2 or 5 times a power of ten, about `about` of them. */
export function ticksAcross(low: number, high: number, about: number, log = false): Ticks {
  if (log && low > 0 && high / low > 20) {
    const values: number[] = [];
    const decades = Math.log10(high / low);
    const steps = decades > about ? [1] : decades * 2 > about ? [1, 3] : [1, 2, 5];
    for (let power = Math.floor(Math.log10(low)); power <= Math.ceil(Math.log10(high)); power++)
      for (const step of steps) {
        const value = Number(`${step}e${power}`);
        if (value >= low * 0.999 && value <= high * 1.001) values.push(value);
      }
    return {
      values,
      labels: values.map((value) => numberLabel(value, decimalsOf(10 ** Math.floor(Math.log10(value))))),
      domain: [low, high],
      log,
    };
  }
  const span = high > low ? high - low : Math.max(1, Math.abs(high));
  const rough = span / Math.max(1, about);
  const power = 10 ** Math.floor(Math.log10(rough));
  const step = [1, 2, 5, 10].map((factor) => factor * power).find((size) => size >= rough * 0.999)!;
  const values: number[] = [];
  for (let index = Math.ceil(low / step - 1e-9); index * step <= high + step * 1e-9; index++)
    values.push(Number((index * step).toPrecision(12)));
  return { values, labels: values.map((value) => numberLabel(value, decimalsOf(step))), domain: [low, high], log };
}

/** The range of values on the scale that is shown, with a little room at both ends. */
export function rangeOf(
  values: readonly (number | null)[],
  response: ResponseFacts,
  about: number,
  room = 0.05,
): Ticks {
  const log = response.scale === "log";
  const known = values.filter((value): value is number => value !== null && Number.isFinite(value));
  let low = known.reduce((least, value) => Math.min(least, value), Number.POSITIVE_INFINITY);
  let high = known.reduce((most, value) => Math.max(most, value), Number.NEGATIVE_INFINITY);
  if (!(low <= high)) [low, high] = [0, 1];
  const pad = high > low ? room * (high - low) : Math.max(0.5, 0.05 * Math.abs(high));
  low -= pad;
  high += pad;
  return log ? ticksAcross(shown(low, response)!, shown(high, response)!, about, true) : ticksAcross(low, high, about);
}

/** A quantitative channel on these ticks. */
export function measured(field: string, ticks: Ticks, title: string | null, more: Specification = {}): Specification {
  return {
    field,
    type: "quantitative",
    title,
    scale: { domain: ticks.domain, nice: false, ...(ticks.log ? { type: "log" } : { zero: false }) },
    axis: { values: ticks.values, labelExpr: relabelled(ticks.values, ticks.labels), ...more },
  };
}

/** The title of an upright axis stands level above it, where it is read without turning the head. */
export const levelTitle = (ticks: Ticks, lines: number): Specification => ({
  titleAngle: 0,
  titleAlign: "left",
  titleAnchor: "start",
  titleBaseline: "bottom",
  titleX: -Math.ceil(widest(ticks.labels, labelSize)) - 8,
  titleY: -9 - (lines - 1) * 0,
});

export interface CategoryAxis {
  /** Levels stand on the upright axis because their names need the room. */
  readonly horizontal: boolean;
  readonly channel: (field: string) => Specification;
  /** Pixels that the labels take beside the plot when they stand on the upright axis. */
  readonly labelRoom: number;
  /** Lines of the tallest label. */
  readonly lines: number;
}

/**
 * An axis of levels at 0, 1, 2 ..., whose names are broken into lines and never cut. Where even the longest word has no room below
 * its level, the levels change to the upright axis.
 */
export function categoryAxis(
  levels: readonly string[],
  title: string | null,
  plotWidth: number,
  upright: "never" | "if needed" = "if needed",
): CategoryAxis {
  const band = plotWidth / levels.length - 6;
  const labelsBelow = levels.map((level) => inLines(level, band));
  const horizontal =
    upright === "if needed" &&
    (widestWord(levels, labelSize) > band || labelsBelow.some((label) => label.split("\n").length > 4));
  const labels = horizontal ? levels.map((level) => inLines(level, 0.36 * plotWidth)) : labelsBelow;
  const values = levels.map((_, index) => index);
  return {
    horizontal,
    labelRoom: horizontal
      ? widest(
          labels.flatMap((label) => label.split("\n")),
          labelSize,
        )
      : 0,
    lines: Math.max(...labels.map((label) => label.split("\n").length)),
    channel: (field) => ({
      field,
      type: "quantitative",
      title: title === null ? null : inLines(title, horizontal ? 0.36 * plotWidth : plotWidth, titleSize),
      scale: {
        domain: horizontal ? [levels.length - 0.5, -0.5] : [-0.5, levels.length - 0.5],
        nice: false,
        zero: false,
      },
      axis: {
        values,
        labelExpr: relabelled(values, labels),
        grid: false,
        ticks: false,
        labelPadding: 6,
        ...(horizontal
          ? {
              domain: false,
              titleAngle: 0,
              titleAlign: "right",
              titleAnchor: "start",
              titleBaseline: "bottom",
              titleX: -6,
              titleY: -4,
            }
          : { labelBaseline: "top" }),
      },
    }),
  };
}

/** Puts the levels' channel and the response's channels where the orientation wants them. */
export function placed(
  horizontal: boolean,
  category: Specification,
  value: Specification,
  second?: Specification,
): Specification {
  return horizontal
    ? { y: category, x: value, ...(second === undefined ? {} : { x2: second }) }
    : { x: category, y: value, ...(second === undefined ? {} : { y2: second }) };
}

export const axisTitle = (response: ResponseFacts): string =>
  responseTitle(response) + (response.scale === "log" ? ", log scale" : "");

/** The picture's state, in word and shape, above it. */
export const stateTitle = (picture: Picture): Specification => ({ title: { text: stateMark(picture.state) } });

/**
 * Offsets that keep single values of one level apart: values at about the same height stand side by side, symmetric about the middle.
 *
 * @param values on the scale that is drawn
 * @param height in the same unit: how near two values must be to stand side by side
 * @param half the widest offset allowed to each side
 * @param step the offset from one value to its neighbour
 */
export function sideBySide(values: readonly number[], height: number, half: number, step: number): number[] {
  const rows = new Map<number, number[]>();
  for (const [index, value] of values.entries()) {
    const row = Math.round(value / height);
    const list = rows.get(row);
    if (list === undefined) rows.set(row, [index]);
    else list.push(index);
  }
  const offsets = new Array<number>(values.length).fill(0);
  for (const list of rows.values()) {
    const gap = list.length > 1 ? Math.min(step, (2 * half) / (list.length - 1)) : 0;
    for (const [place, index] of list.entries()) offsets[index] = (place - (list.length - 1) / 2) * gap;
  }
  return offsets;
}

/** Legend labels in lines, with a title or none, in as many columns as have room. */
export function legendOf(names: readonly string[], title: string | null, width: number): Specification {
  const labels = names.map((name) => inLines(name, 0.8 * width));
  const column =
    widest(
      labels.flatMap((label) => label.split("\n")),
      labelSize,
    ) + 34;
  return {
    title: title === null ? null : inLines(title, width, titleSize),
    labelExpr: relabelled(names, labels),
    columns: Math.max(1, Math.min(names.length, Math.floor(width / column))),
    titleOrient: "top",
    symbolOpacity: 1,
  };
}

export { textWidth, widest };
