import type { MeansPicture } from "../../results/index.ts";
import { shown } from "../response-words.ts";
import {
  axisTitle,
  categoryAxis,
  inLines,
  legendOf,
  levelTitle,
  measured,
  placed,
  rangeOf,
  sideBySide,
  type Specification,
  stateTitle,
  widest,
} from "./axes.ts";
import { hueOf, isOpen, labelSize, shapeOf, titleSize } from "./look.ts";

/** Colour, shape and filling of groups, once for the legend and all layers; null where there is only one group. */
export function groupChannels(names: readonly string[], title: string | null, width: number): Specification {
  const domain = [...names];
  const legend = legendOf(names, title, width);
  const channel = (range: readonly unknown[]) => ({
    field: "group",
    type: "nominal",
    legend,
    scale: { domain, range },
  });
  return {
    stroke: channel(names.map((_, index) => hueOf(index))),
    shape: channel(names.map((_, index) => shapeOf(index))),
    fill: channel(names.map((_, index) => (isOpen(index) ? "transparent" : hueOf(index)))),
  };
}

/**
 * Means with their intervals beside the single values: the first factor along the axis, the second by shape, filling and colour, further
 * ones as panels.
 */
export function meansSpecification(picture: MeansPicture, width: number): Specification {
  const [first, second, ...further] = picture.factors;
  const { response } = picture;
  const groups = second?.levels ?? [""];
  const panelOf = (levels: Readonly<Record<string, string>>) =>
    further.map((factor) => levels[factor.name] ?? "").join(", ");
  const panels = [...new Set(picture.cells.map((cell) => panelOf(cell.levels)))];
  const several = further.length > 0 && panels.length > 1;
  const columns = several && width > 500 ? Math.min(2, panels.length) : 1;
  const values = [
    ...picture.cells.flatMap((cell) => [cell.mean, cell.lower, cell.upper]),
    ...picture.points.map((point) => point.value),
  ];
  const upright = rangeOf(values, response, 6);
  const tickRoom = widest(upright.labels, labelSize) + 14;
  const plot = (width - 10) / columns - tickRoom - (columns - 1) * 10;
  const axis = categoryAxis(first!.levels, first!.name, plot);
  const ticks = axis.horizontal ? rangeOf(values, response, Math.max(3, Math.floor(plot / 90))) : upright;
  const slot = 0.84 / groups.length;
  const at = (levels: Readonly<Record<string, string>>) =>
    first!.levels.indexOf(levels[first!.name]!) +
    (second === undefined ? 0 : (groups.indexOf(levels[second.name]!) - (groups.length - 1) / 2) * slot);
  const label = (levels: Readonly<Record<string, string>>) => ({
    level: levels[first!.name]!,
    group: second === undefined ? "" : levels[second.name]!,
    panel: panelOf(levels),
  });
  const cells = picture.cells
    .filter((cell) => cell.mean !== null)
    .map((cell) => ({
      ...label(cell.levels),
      at: at(cell.levels) + 0.16 * slot,
      mean: shown(cell.mean, response),
      lower: shown(cell.lower ?? cell.mean, response),
      upper: shown(cell.upper ?? cell.mean, response),
      n: cell.n,
    }));
  const height = axis.horizontal
    ? Math.max(120, first!.levels.length * Math.max(36, 22 * groups.length, 14 * axis.lines))
    : 240;
  const extent = axis.horizontal ? (width - axis.labelRoom - 20) / columns : plot;
  const [low, high] = ticks.log ? ticks.domain.map(Math.log) : ticks.domain;
  const near = (4.5 / (axis.horizontal ? extent : height)) * (high! - low!);
  const unit = (axis.horizontal ? height : extent) / first!.levels.length;
  const byCell = new Map<string, (typeof picture.points)[number][]>();
  for (const point of picture.points) {
    const key = JSON.stringify(picture.factors.map((factor) => point.levels[factor.name]));
    const list = byCell.get(key);
    if (list === undefined) byCell.set(key, [point]);
    else list.push(point);
  }
  const points = [...byCell.values()].flatMap((list) => {
    const offsets = sideBySide(
      list.map((point) => point.value),
      near,
      0.2 * slot,
      4.5 / unit,
    );
    return list.map((point, index) => ({
      ...label(point.levels),
      at: at(point.levels) - 0.2 * slot + offsets[index]!,
      value: shown(point.value, response),
    }));
  });
  const reach = Math.min(0.13 * slot, 7 / unit);
  const ends = cells.flatMap((cell) =>
    cell.lower === cell.upper
      ? []
      : [cell.lower, cell.upper].map((end) => ({
          level: cell.level,
          group: cell.group,
          panel: cell.panel,
          end,
          from: cell.at - reach,
          to: cell.at + reach,
        })),
  );
  const valueTitle = axis.horizontal
    ? inLines(axisTitle(response), extent, titleSize)
    : inLines(axisTitle(response), plot, titleSize);
  const value = (field: string) =>
    measured(field, ticks, valueTitle, axis.horizontal ? {} : levelTitle(ticks, valueTitle.split("\n").length));
  const marks: Specification =
    second === undefined
      ? { stroke: { value: hueOf(0) }, fill: { value: hueOf(0) }, shape: { value: "circle" } }
      : groupChannels(groups, second.name, width - 20);
  const layersFor = (panel: string | null): Specification[] => {
    const own = <Row extends { readonly panel: string }>(rows: readonly Row[]) =>
      panel === null ? rows : rows.filter((row) => row.panel === panel);
    return [
      {
        data: { values: own(points) },
        mark: { type: "point", shape: "circle", size: 3, strokeWidth: 2.2, opacity: 0.55 },
        encoding: { ...placed(axis.horizontal, axis.channel("at"), value("value")), stroke: marks.stroke },
      },
      {
        data: { values: own(cells) },
        mark: { type: "rule", strokeWidth: 2 },
        encoding: {
          ...placed(axis.horizontal, axis.channel("at"), value("lower"), { field: "upper" }),
          stroke: marks.stroke,
        },
      },
      // Ends across the interval keep it in sight where many values make it shorter than the mark of the mean.
      {
        data: { values: own(ends) },
        mark: { type: "rule", strokeWidth: 1.6 },
        encoding: {
          ...(axis.horizontal
            ? { y: axis.channel("from"), y2: { field: "to" }, x: value("end") }
            : { x: axis.channel("from"), x2: { field: "to" }, y: value("end") }),
          stroke: marks.stroke,
        },
      },
      {
        data: { values: own(cells) },
        mark: { type: "point", size: 50, strokeWidth: 2, opacity: 1 },
        encoding: {
          ...placed(axis.horizontal, axis.channel("at"), value("mean")),
          ...marks,
        },
      },
    ];
  };
  if (!several)
    return {
      ...stateTitle(picture),
      autosize: { type: "fit", contains: "padding" },
      width,
      height: height + (axis.horizontal ? 70 : 80) + (second === undefined ? 0 : 40),
      layer: layersFor(null),
    };
  return {
    ...stateTitle(picture),
    columns,
    spacing: 22,
    concat: panels.map((panel) => ({
      title: { text: inLines(`${further.map((factor) => factor.name).join(", ")}: ${panel}`, extent), frame: "group" },
      width: extent - (axis.horizontal ? 20 : 0),
      height: axis.horizontal ? height : 200,
      layer: layersFor(panel),
    })),
    resolve: { scale: { stroke: "shared", shape: "shared", fill: "shared" } },
  };
}
