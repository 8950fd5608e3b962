import type { DistributionsPicture, ProfilesPicture } from "../../results/index.ts";
import { shown } from "../response-words.ts";
import {
  axisTitle,
  categoryAxis,
  inLines,
  levelTitle,
  measured,
  placed,
  rangeOf,
  sideBySide,
  type Specification,
  stateTitle,
  widest,
} from "./axes.ts";
import { hueOf, labelSize, shapeOf, titleSize } from "./look.ts";

/** Each subject's own line, thin, and the means, thick; a panel for each group. */
export function profilesSpecification(picture: ProfilesPicture, width: number): Specification {
  const { response, factor, group } = picture;
  const panels = group?.levels ?? [null];
  const columns = panels.length > 1 && width > 500 ? 2 : 1;
  const values = [...picture.lines, ...picture.means].flatMap((line) => line.values);
  const ticks = rangeOf(values, response, 6);
  const plot = (width - 10) / columns - widest(ticks.labels, labelSize) - 14 - (columns - 1) * 10;
  const axis = categoryAxis(factor.levels, factor.name, plot, "never");
  const title = inLines(axisTitle(response), plot, titleSize);
  const value = measured("value", ticks, title, levelTitle(ticks, title.split("\n").length));
  // A line breaks where a value is missing: what lies between two breaks is a run of its own.
  const rows = (lines: readonly { readonly values: readonly (number | null)[]; readonly subject: string }[]) =>
    lines.flatMap((line) => {
      let run = 0;
      return line.values.flatMap((each, index) => {
        if (each === null) {
          run++;
          return [];
        }
        const alone = (line.values[index - 1] ?? null) === null && (line.values[index + 1] ?? null) === null;
        return [
          { subject: line.subject, run, alone, level: factor.levels[index]!, at: index, value: shown(each, response) },
        ];
      });
    });
  const layersFor = (panel: string | null, index: number): Specification[] => {
    const own = <Line extends { readonly group: string | null }>(lines: readonly Line[]) =>
      group === null ? lines : lines.filter((line) => line.group === panel);
    const each = rows(own(picture.lines));
    const means = rows(own(picture.means).map((mean) => ({ subject: "mean", values: mean.values })));
    const encoding = {
      ...placed(false, axis.channel("at"), value),
      detail: [
        { field: "subject", type: "nominal" },
        { field: "run", type: "nominal" },
      ],
      color: { value: hueOf(index) },
    };
    return [
      { data: { values: each }, mark: { type: "line", strokeWidth: 1, opacity: 0.45 }, encoding },
      {
        data: { values: each.filter((row) => row.alone) },
        mark: { type: "point", size: 12, filled: true, opacity: 0.6 },
        encoding,
      },
      {
        data: { values: means },
        mark: {
          type: "line",
          strokeWidth: 3,
          point: { size: 80, filled: true, shape: shapeOf(index), opacity: 1, color: hueOf(index) },
        },
        encoding,
      },
    ];
  };
  if (group === null)
    return {
      ...stateTitle(picture),
      autosize: { type: "fit", contains: "padding" },
      width,
      height: 320 + 14 * axis.lines,
      layer: layersFor(null, 0),
    };
  return {
    ...stateTitle(picture),
    columns,
    spacing: 22,
    concat: panels.map((panel, index) => ({
      title: { text: inLines(`${group.name}: ${panel}`, plot), frame: "group" },
      width: plot,
      height: 220,
      layer: layersFor(panel, index),
    })),
  };
}

function quantile(sorted: readonly number[], share: number): number {
  const place = share * (sorted.length - 1);
  const below = Math.floor(place);
  const above = Math.min(sorted.length - 1, below + 1);
  return sorted[below]! + (place - below) * (sorted[above]! - sorted[below]!);
}

/** Every value of a level, with its median and quartiles beside them. */
export function distributionsSpecification(picture: DistributionsPicture, width: number): Specification {
  const { response, factor } = picture;
  const { levels } = factor;
  const all = picture.values.flatMap((entry) => entry.values);
  const upright = rangeOf(all, response, 6);
  const plot = width - 10 - widest(upright.labels, labelSize) - 14;
  const axis = categoryAxis(levels, factor.name, plot);
  const ticks = axis.horizontal ? rangeOf(all, response, Math.max(3, Math.floor(plot / 90))) : upright;
  const height = axis.horizontal ? Math.max(120, levels.length * Math.max(44, 14 * axis.lines)) : 280;
  const extent = axis.horizontal ? width - axis.labelRoom - 20 : plot;
  const [low, high] = ticks.log ? ticks.domain.map(Math.log) : ticks.domain;
  const near = (4.5 / (axis.horizontal ? extent : height)) * (high! - low!);
  const unit = (axis.horizontal ? height : extent) / levels.length;
  const title = inLines(axisTitle(response), extent, titleSize);
  const value = (field: string) =>
    measured(field, ticks, title, axis.horizontal ? {} : levelTitle(ticks, title.split("\n").length));
  const points = picture.values.flatMap((entry) => {
    const offsets = sideBySide(entry.values, near, 0.26, 4.5 / unit);
    return entry.values.map((each, index) => ({
      level: entry.level,
      at: levels.indexOf(entry.level) - 0.08 + offsets[index]!,
      value: shown(each, response),
    }));
  });
  const middles = picture.values
    .filter((entry) => entry.values.length > 0)
    .map((entry) => {
      const sorted = entry.values.slice().sort((left, right) => left - right);
      const at = levels.indexOf(entry.level);
      return {
        level: entry.level,
        at: at + 0.3,
        from: at + 0.24,
        to: at + 0.36,
        lowerQuartile: shown(quantile(sorted, 0.25), response),
        median: shown(quantile(sorted, 0.5), response),
        upperQuartile: shown(quantile(sorted, 0.75), response),
      };
    });
  return {
    ...stateTitle(picture),
    autosize: { type: "fit", contains: "padding" },
    width,
    height: height + (axis.horizontal ? 70 : 70),
    layer: [
      {
        data: { values: points },
        mark: { type: "point", shape: "circle", filled: true, size: 15, opacity: 0.55, color: hueOf(0) },
        encoding: placed(axis.horizontal, axis.channel("at"), value("value")),
      },
      {
        data: { values: middles },
        mark: { type: "rule", strokeWidth: 3, color: hueOf(1) },
        encoding: placed(axis.horizontal, axis.channel("at"), value("lowerQuartile"), { field: "upperQuartile" }),
      },
      {
        data: { values: middles },
        mark: { type: "point", shape: "diamond", filled: true, size: 90, opacity: 1, color: hueOf(1) },
        encoding: placed(axis.horizontal, axis.channel("at"), value("median")),
      },
    ],
  };
}
