import type {
  ComparisonsPicture,
  DistributionsPicture,
  MeansPicture,
  PassingPicture,
  Picture,
  PowerPicture,
  ProfilesPicture,
  ResidualsPicture,
  CalibrationPicture,
} from "../../results/index.ts";
import { responseTitle, shown } from "../response-words.ts";
import { hues, ink, shapes } from "./look.ts";

type Specification = Record<string, unknown>;

const axisTitle = (picture: Picture): string =>
  responseTitle(picture.response) + (picture.response.scale === "log" ? ", log scale" : "");
const measure = (picture: Picture, field: string, more: Specification = {}): Specification => ({
  field,
  type: "quantitative",
  title: axisTitle(picture),
  scale: { zero: false, nice: true, ...(picture.response.scale === "log" ? { type: "log" } : {}) },
  ...more,
});
/** Bands wide enough for their labels: long names get more room, and turn only when there is no other way. */
function bandStep(levels: readonly string[], groups = 1): number {
  const longest = Math.max(...levels.map((level) => [...level].length));
  return Math.min(190, Math.max(56 + 14 * groups, longest * 8.2));
}

const tooLong = (levels: readonly string[]): boolean =>
  Math.max(...levels.map((level) => [...level].length)) * 8.2 > 190;

function means(picture: MeansPicture): Specification {
  const [first, second, third] = picture.factors;
  const key = (levels: Readonly<Record<string, string>>) => ({
    x: levels[first!.name]!,
    ...(second === undefined ? {} : { group: levels[second.name]! }),
    ...(third === undefined
      ? {}
      : {
          panel: picture.factors
            .slice(2)
            .map((factor) => levels[factor.name])
            .join(", "),
        }),
  });
  const back = (value: number | null) => shown(value, picture.response);
  const cells = picture.cells
    .filter((cell) => cell.mean !== null)
    .map((cell) => ({ ...key(cell.levels), mean: back(cell.mean), lower: back(cell.lower), upper: back(cell.upper) }));
  const points = picture.points.map((point, index) => ({
    ...key(point.levels),
    value: back(point.value),
    spread: ((index * 7919) % 101) / 101 - 0.5,
  }));
  const groups = second?.levels.length ?? 1;
  const x = {
    field: "x",
    type: "nominal",
    sort: first!.levels,
    title: first!.name,
    axis: { labelAngle: tooLong(first!.levels) ? -35 : 0 },
    scale: { paddingInner: 0.25, paddingOuter: 0.2 },
  };
  const offset = second === undefined ? {} : { xOffset: { field: "group", type: "nominal", sort: second.levels } };
  const colour =
    second === undefined
      ? { color: { value: hues[0] } }
      : {
          color: {
            field: "group",
            type: "nominal",
            sort: second.levels,
            title: second.name,
            scale: { domain: second.levels, range: hues },
          },
        };
  const shape =
    second === undefined
      ? { shape: { value: "circle" } }
      : {
          shape: {
            field: "group",
            type: "nominal",
            sort: second.levels,
            title: second.name,
            scale: { domain: second.levels, range: shapes },
          },
        };
  const layers = [
    {
      data: { values: points },
      mark: { type: "point", filled: true, size: 14, opacity: 0.38 },
      encoding: { x, ...offset, y: measure(picture, "value"), ...colour },
    },
    {
      data: { values: cells },
      mark: { type: "rule", strokeWidth: 2.4 },
      encoding: { x, ...offset, y: measure(picture, "lower"), y2: { field: "upper" }, ...colour },
    },
    {
      data: { values: cells },
      mark: { type: "point", filled: true, size: 120, opacity: 1, stroke: ink, strokeWidth: 0.6 },
      encoding: { x, ...offset, y: measure(picture, "mean"), ...colour, ...shape },
    },
  ];
  const size = {
    width: { step: bandStep(first!.levels, groups) / Math.max(1, second === undefined ? 1 : groups) },
    height: 320,
  };
  const width =
    second === undefined
      ? { step: bandStep(first!.levels) }
      : { step: Math.max(26, bandStep(first!.levels, groups) / groups), for: "offset" };
  if (third === undefined) return { ...size, width, layer: layers };
  const panels = [...new Set(cells.map((cell) => (cell as { panel?: string }).panel ?? ""))];
  return {
    data: {
      values: [
        ...points.map((point) => ({ ...point, kind: "point" })),
        ...cells.map((cell) => ({ ...cell, kind: "cell" })),
      ],
    },
    facet: {
      field: "panel",
      type: "nominal",
      sort: panels,
      title: picture.factors
        .slice(2)
        .map((factor) => factor.name)
        .join(", "),
    },
    columns: 2,
    spec: {
      width,
      height: 260,
      layer: layers.map(({ data: _, ...layer }, index) => ({
        transform: [{ filter: `datum.kind === '${index === 0 ? "point" : "cell"}'` }],
        ...layer,
      })),
    },
  };
}

function profiles(picture: ProfilesPicture): Specification {
  const { levels } = picture.factor;
  const back = (value: number | null) => shown(value, picture.response);
  const lines = picture.lines
    .flatMap((line) =>
      line.values.map((value, index) => ({
        subject: line.subject,
        group: line.group ?? "",
        x: levels[index]!,
        value: back(value),
      })),
    )
    .filter((row) => row.value !== null);
  const means_ = picture.means
    .flatMap((mean) =>
      mean.values.map((value, index) => ({ group: mean.group ?? "", x: levels[index]!, value: back(value) })),
    )
    .filter((row) => row.value !== null);
  const x = {
    field: "x",
    type: "nominal",
    sort: levels,
    title: picture.factor.name,
    axis: { labelAngle: tooLong(levels) ? -35 : 0 },
  };
  const group = picture.group;
  const colour =
    group === null
      ? { color: { value: hues[0] } }
      : {
          color: {
            field: "group",
            type: "nominal",
            sort: group.levels,
            title: group.name,
            scale: { domain: group.levels, range: hues },
          },
        };
  const layer = [
    {
      transform: [{ filter: "datum.subject !== null && isValid(datum.subject)" }],
      mark: { type: "line", strokeWidth: 1, opacity: 0.38 },
      encoding: { x, y: measure(picture, "value"), detail: { field: "subject" }, ...colour },
    },
    {
      transform: [{ filter: "!isValid(datum.subject)" }],
      mark: { type: "line", strokeWidth: 3.2, point: { size: 110, filled: true } },
      encoding: { x, y: measure(picture, "value"), ...colour },
    },
  ];
  const values = [...lines, ...means_];
  const spec = { width: { step: bandStep(levels) }, height: 320, layer };
  if (group === null) return { data: { values }, ...spec };
  return {
    data: { values },
    facet: { field: "group", type: "nominal", sort: group.levels, title: group.name },
    columns: 2,
    spec,
  };
}

function distributions(picture: DistributionsPicture): Specification {
  const { levels, name } = picture.factor;
  const values = picture.values.flatMap((entry) =>
    entry.values.map((value, index) => ({
      x: entry.level,
      value: shown(value, picture.response),
      spread: ((index * 61) % 97) / 97,
    })),
  );
  const x = { field: "x", type: "nominal", sort: levels, title: name, axis: { labelAngle: tooLong(levels) ? -35 : 0 } };
  return {
    data: { values },
    width: { step: bandStep(levels) + 20 },
    height: 320,
    layer: [
      {
        mark: { type: "point", filled: true, size: 16, opacity: 0.45, color: hues[0] },
        encoding: {
          x,
          xOffset: { field: "spread", type: "quantitative", scale: { domain: [-0.6, 1.6] } },
          y: measure(picture, "value"),
        },
      },
      {
        transform: [{ aggregate: [{ op: "median", field: "value", as: "middle" }], groupby: ["x"] }],
        mark: { type: "tick", thickness: 3, size: 46, color: hues[1] },
        encoding: { x, y: measure(picture, "middle") },
      },
      {
        transform: [
          {
            aggregate: [
              { op: "q1", field: "value", as: "low" },
              { op: "q3", field: "value", as: "high" },
            ],
            groupby: ["x"],
          },
        ],
        mark: { type: "rule", strokeWidth: 2.2, color: hues[1] },
        encoding: { x, y: measure(picture, "low"), y2: { field: "high" } },
      },
    ],
  };
}

function residuals(picture: ResidualsPicture): Specification {
  const order = picture.residuals
    .map((_, index) => index)
    .sort((left, right) => picture.residuals[left]! - picture.residuals[right]!);
  const quantiles = [...picture.normalQuantiles].sort((left, right) => left - right);
  const points = picture.fitted.map((fitted, index) => ({ fitted, residual: picture.residuals[index] }));
  const normal = order.map((index, place) => ({ expected: quantiles[place], residual: picture.residuals[index] }));
  const reach = Math.max(2.5, ...picture.residuals.map(Math.abs)) * 1.05;
  const vertical = {
    field: "residual",
    type: "quantitative",
    title: "residual (in standard deviations)",
    scale: { domain: [-reach, reach] },
  };
  const mark = { type: "point", filled: true, size: 22, opacity: 0.55, color: hues[0] };
  return {
    hconcat: [
      {
        width: 300,
        height: 260,
        layer: [
          {
            data: { values: [{ at: 0 }] },
            mark: { type: "rule", strokeDash: [4, 3] },
            encoding: { y: { field: "at", type: "quantitative" } },
          },
          {
            data: { values: points },
            mark,
            encoding: {
              x: {
                field: "fitted",
                type: "quantitative",
                title: `fitted ${responseTitle(picture.response)}`,
                scale: { zero: false, nice: true },
              },
              y: vertical,
            },
          },
        ],
      },
      {
        width: 300,
        height: 260,
        layer: [
          {
            data: { values: [{ from: -reach, to: reach }] },
            mark: { type: "rule", strokeDash: [4, 3], clip: true },
            encoding: {
              x: { field: "from", type: "quantitative" },
              x2: { field: "to" },
              y: { field: "from", type: "quantitative" },
              y2: { field: "to" },
            },
          },
          {
            data: { values: normal },
            mark,
            encoding: {
              x: {
                field: "expected",
                type: "quantitative",
                title: "normal quantile",
                scale: { domain: [-reach, reach] },
              },
              y: vertical,
            },
          },
        ],
      },
    ],
    spacing: 36,
  };
}

function comparisons(picture: ComparisonsPicture): Specification {
  const result = picture.comparisons;
  const log = result.response.scale === "log";
  const back = (value: number | null) => shown(value, result.response);
  const finite = result.rows
    .flatMap((row) => [row.lower, row.upper, row.estimate])
    .filter((value): value is number => value !== null)
    .map((value) => back(value)!);
  const margins =
    result.margin === null
      ? []
      : result.margin.type === "equivalence"
        ? [-result.margin.value, result.margin.value]
        : [(result.response.better === "lower" ? 1 : -1) * result.margin.value];
  const none = log ? 1 : 0;
  const ends = [...finite, none, ...margins.map((margin) => back(margin)!)];
  const reach = Math.max(...ends) - Math.min(...ends);
  const low = log ? Math.min(...ends) * 0.9 : Math.min(...ends) - 0.06 * reach;
  const high = log ? Math.max(...ends) * 1.1 : Math.max(...ends) + 0.06 * reach;
  const rows = result.rows.map((row) => ({
    comparison: row.comparison,
    estimate: back(row.estimate),
    lower: back(row.lower) ?? low,
    upper: back(row.upper) ?? high,
    conclusion: row.rejected
      ? result.margin?.type === "equivalence"
        ? "equivalent"
        : result.margin === null
          ? "shown"
          : "not worse"
      : "not shown",
  }));
  const names = result.rows.map((row) => row.comparison);
  const found = [...new Set(rows.map((row) => row.conclusion))].sort(
    (left, right) => Number(left === "not shown") - Number(right === "not shown"),
  );
  const y = {
    field: "comparison",
    type: "nominal",
    sort: names,
    title: null,
    axis: { labelLimit: 340, ticks: false, domain: false },
  };
  const scale = { domain: [low, high], nice: false, zero: false, ...(log ? { type: "log" } : {}) };
  const title = log ? `ratio of ${responseTitle(result.response)}` : `difference in ${responseTitle(result.response)}`;
  const dashed = picture.state === "exploratory" || picture.state === "rehearsal" ? { strokeDash: [5, 3] } : {};
  const colour = {
    field: "conclusion",
    type: "nominal",
    title: null,
    scale: { domain: found, range: found.map((word) => (word === "not shown" ? ink : hues[0])) },
  };
  return {
    width: 460,
    height: { step: 34 },
    layer: [
      {
        data: { values: [{ none }] },
        mark: { type: "rule", strokeWidth: 1.2 },
        encoding: { x: { field: "none", type: "quantitative", scale } },
      },
      ...(margins.length === 0
        ? []
        : [
            {
              data: { values: margins.map((margin) => ({ margin: back(margin) })) },
              mark: { type: "rule", strokeDash: [2, 3], strokeWidth: 1.6, color: hues[1] },
              encoding: { x: { field: "margin", type: "quantitative", scale } },
            },
          ]),
      ...(result.intervals === "none"
        ? []
        : [
            {
              data: { values: rows },
              mark: { type: "rule", strokeWidth: 2.6, ...dashed },
              encoding: {
                y,
                x: { field: "lower", type: "quantitative", title, scale },
                x2: { field: "upper" },
                color: colour,
              },
            },
          ]),
      {
        data: { values: rows },
        mark: {
          type: "point",
          size: 120,
          strokeWidth: 2.2,
          filled: picture.state === "planned" || picture.state === "declared",
          opacity: 1,
        },
        encoding: {
          y,
          x: { field: "estimate", type: "quantitative", title, scale },
          color: colour,
          shape: {
            field: "conclusion",
            type: "nominal",
            title: null,
            scale: { domain: found, range: found.map((word) => (word === "not shown" ? "circle" : "square")) },
          },
        },
      },
    ],
  };
}

function power(picture: PowerPicture): Specification {
  const values = picture.curves.flatMap((curve) =>
    curve.points.map((point) => ({ curve: curve.name, subjects: point.subjects, power: point.power })),
  );
  const names = picture.curves.map((curve) => curve.name);
  const x = { field: "subjects", type: "quantitative", title: "subjects in all", scale: { zero: false, nice: false } };
  const y = {
    field: "power",
    type: "quantitative",
    title: "power",
    scale: { domain: [0, 1] },
    axis: { format: ".0%" },
  };
  const colour = { field: "curve", type: "nominal", title: null, scale: { domain: names, range: hues } };
  return {
    width: 460,
    height: 300,
    layer: [
      ...(picture.goal === null
        ? []
        : [
            {
              data: { values: [{ goal: picture.goal }] },
              mark: { type: "rule", strokeDash: [4, 3] },
              encoding: { y: { field: "goal", type: "quantitative" } },
            },
          ]),
      {
        data: { values },
        mark: { type: "line", strokeWidth: 2.2 },
        encoding: {
          x,
          y,
          color: colour,
          strokeDash: { field: "curve", type: "nominal", title: null, scale: { domain: names } },
        },
      },
      ...(values.length > 120
        ? []
        : [
            {
              data: { values },
              mark: { type: "point", size: 46, filled: true },
              encoding: {
                x,
                y,
                color: colour,
                shape: { field: "curve", type: "nominal", title: null, scale: { domain: names, range: shapes } },
              },
            },
          ]),
    ],
  };
}

function passing(picture: PassingPicture): Specification {
  const families = [...new Set(picture.nodes.map((node) => node.family))];
  const place = new Map<string, { x: number; y: number }>();
  for (const [row, family] of families.entries()) {
    const own = picture.nodes.filter((node) => node.family === family);
    for (const [index, node] of own.entries())
      place.set(node.name, { x: (index + 0.5) / own.length, y: families.length - row });
    place.set(`family ${family}`, { x: 0.5, y: families.length - row });
  }
  const at = (name: string) => place.get(name) ?? place.get(`family ${name}`);
  const arrows = picture.passes.flatMap((pass) => {
    const from = at(pass.from);
    const to = at(pass.to);
    if (from === undefined || to === undefined || pass.share <= 0) return [];
    const lift = from.y === to.y ? 0.16 : 0;
    return [
      {
        x: from.x,
        y: from.y + lift * 0.6,
        x2: to.x,
        y2: to.y + lift * 0.6,
        middle: from.x * 0.42 + to.x * 0.58,
        height: from.y * 0.42 + to.y * 0.58 + lift,
        share: `${Number((pass.share * 100).toPrecision(3))}%`,
      },
    ];
  });
  const nodes = picture.nodes.map((node) => ({
    ...at(node.name)!,
    name: node.name,
    family: node.family,
    weight: `${Number((node.weight * 100).toPrecision(3))}%`,
    rejected: node.rejected === true ? "shown" : node.rejected === false ? "not shown" : "before data",
  }));
  const most = Math.max(...families.map((family) => picture.nodes.filter((node) => node.family === family).length));
  const hidden = { type: "quantitative", axis: null };
  const x = { field: "x", ...hidden, scale: { domain: [0, 1] } };
  const y = { field: "y", ...hidden, scale: { domain: [0.4, families.length + 0.6] } };
  return {
    width: Math.max(360, most * 170),
    height: 130 * families.length,
    layer: [
      {
        data: { values: arrows },
        mark: { type: "rule", strokeWidth: 1.6, opacity: 0.8 },
        encoding: { x, y, x2: { field: "x2" }, y2: { field: "y2" } },
      },
      {
        data: { values: arrows },
        mark: { type: "text", fontSize: 11, dy: -7 },
        encoding: { x: { field: "middle", ...hidden }, y: { field: "height", ...hidden }, text: { field: "share" } },
      },
      {
        data: { values: nodes },
        mark: { type: "point", filled: true, size: 420, opacity: 1 },
        encoding: {
          x,
          y,
          color: { field: "family", type: "nominal", title: "family", scale: { domain: families, range: hues } },
          shape: { field: "family", type: "nominal", title: "family", scale: { domain: families, range: shapes } },
        },
      },
      {
        data: { values: nodes },
        mark: { type: "text", fontSize: 12, dy: 24 },
        encoding: { x, y, text: { field: "name" } },
      },
      {
        data: { values: nodes },
        mark: { type: "text", fontSize: 11, dy: 39 },
        encoding: { x, y, text: { field: "weight" } },
      },
    ],
  };
}

function calibration(picture: CalibrationPicture): Specification {
  const result = picture.calibration;
  const rows = result.scenarios.flatMap((scenario) => {
    const name = `${scenario.scenario} (${scenario.source})`;
    return [
      { name, what: "family error", value: scenario.familyError, error: scenario.familyErrorMonteCarlo ?? 0 },
      {
        name,
        what: "all intervals miss",
        value: scenario.coverage === null ? null : 1 - scenario.coverage,
        error: scenario.coverageMonteCarlo ?? 0,
      },
    ]
      .filter((row) => row.value !== null)
      .map((row) => ({ ...row, low: Math.max(0, row.value! - 1.96 * row.error), high: row.value! + 1.96 * row.error }));
  });
  const y = { field: "name", type: "nominal", sort: null, title: null, axis: { labelLimit: 340 } };
  const x = {
    type: "quantitative",
    title: "share of simulated studies",
    axis: { format: ".1%" },
    scale: { zero: true },
  };
  const colour = {
    color: { field: "what", type: "nominal", title: null, scale: { range: hues } },
    yOffset: { field: "what", type: "nominal" },
  };
  return {
    width: 440,
    height: { step: 30 },
    layer: [
      {
        data: { values: [{ error: result.error }] },
        mark: { type: "rule", strokeDash: [4, 3], strokeWidth: 1.4 },
        encoding: { x: { field: "error", type: "quantitative" } },
      },
      {
        data: { values: rows },
        mark: { type: "rule", strokeWidth: 2.4 },
        encoding: { y, x: { field: "low", ...x }, x2: { field: "high" }, ...colour },
      },
      {
        data: { values: rows },
        mark: { type: "point", filled: true, size: 90, opacity: 1 },
        encoding: {
          y,
          x: { field: "value", ...x },
          ...colour,
          shape: { field: "what", type: "nominal", title: null, scale: { range: shapes } },
        },
      },
    ],
  };
}

/** The Vega-Lite body of a picture: data inlined, no address of anything outside. */
export function specificationOf(picture: Picture): Specification {
  switch (picture.picture) {
    case "means":
      return means(picture);
    case "profiles":
      return profiles(picture);
    case "distributions":
      return distributions(picture);
    case "residuals":
      return residuals(picture);
    case "comparisons":
      return comparisons(picture);
    case "power":
      return power(picture);
    case "passing":
      return passing(picture);
    case "calibration":
      return calibration(picture);
  }
}
