import type {
  CalibrationResult,
  CheckResult,
  DataResult,
  DescribeCell,
  DescribeResult,
  DetectableResult,
  HelpResult,
  LedgerResult,
  MessageResult,
  PlanResult,
  PowerResult,
  SizeResult,
  TableFacts,
} from "../../results/index.ts";
import { type Block, type PresentedTable, tableOf } from "../blocks.ts";
import { noteTexts } from "../notes.ts";
import {
  counted,
  countText,
  dfText,
  fixed,
  intervalText,
  listed,
  pText,
  percentText,
  placesFor,
  significant,
} from "../numbers.ts";
import type { PresentOptions } from "../options.ts";
import { responseTitle, shown } from "../response-words.ts";

const noteBlocks = (notes: Parameters<typeof noteTexts>[0]): Block[] =>
  noteTexts(notes).map((text) => ({ type: "paragraph", text, tone: "note" }));
const paragraph = (text: string, tone: "plain" | "note" | "caution" | "state" = "plain"): Block => ({
  type: "paragraph",
  text,
  tone,
});

export function factsTable(facts: TableFacts): PresentedTable {
  return tableOf(
    facts.title,
    facts.rows,
    facts.columns.map((column, index) => ({
      label: column.name,
      value: (row: TableFacts["rows"][number]) => row[index] ?? null,
      text: (row: TableFacts["rows"][number]) => {
        const value = row[index] ?? null;
        if (value === null) return "\u2013";
        return typeof value === "number" ? (column.type === "p" ? pText(value) : significant(value, 6)) : value;
      },
      header: index === 0,
      align: column.type === "text" ? ("left" as const) : ("right" as const),
    })),
    facts.moreRows > 0 ? [`${counted(facts.moreRows, "more row")}.`] : [],
  );
}

export function describeTable(result: DescribeResult, options: PresentOptions): PresentedTable {
  const { response } = result;
  const errors = result.cells
    .map((cell) => cell.standardError)
    .filter((error): error is number => error !== null && error > 0);
  const log = response.scale === "log";
  const places = options.digits ?? (log || errors.length === 0 ? 2 : (placesFor(Math.min(...errors)) ?? 2));
  const within = result.cells.some((cell) => cell.withinLower !== undefined);
  const quartiles = result.cells.some((cell) => cell.median !== undefined);
  const missing = result.cells.some((cell) => cell.missing > 0);
  const level = percentText(result.intervalLevel);
  const back = (value: number | null | undefined) => shown(value ?? null, response);
  return tableOf(
    `${responseTitle(response)} by ${listed(result.by)}${result.rehearsal ? " (\u25c7 rehearsal)" : ""}`,
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
        value: (cell) => (cell.lower === null ? null : `${back(cell.lower)} to ${back(cell.upper)}`),
        align: "right",
        text: (cell) => intervalText(back(cell.lower), back(cell.upper), places),
      },
      {
        label: `${level} within-subject interval`,
        value: (cell) =>
          cell.withinLower === null || cell.withinLower === undefined
            ? null
            : `${back(cell.withinLower)} to ${back(cell.withinUpper)}`,
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
  return [{ type: "table", table: describeTable(result, options) }, ...noteBlocks(result.notes)];
}

const findingWords = { "no concern": "no concern", concern: "look at this", "cannot tell": "cannot tell" } as const;

function assumptionTable(result: CheckResult): PresentedTable {
  return tableOf(
    "Assumptions",
    result.assumptions,
    [
      { label: "assumption", value: (row) => row.assumption, header: true },
      { label: "of", value: (row) => row.of },
      { label: "by", value: (row) => row.method },
      {
        label: "statistic",
        value: (row) => row.statistic,
        text: (row) => (row.statistic === null ? "\u2013" : fixed(row.statistic, 2)),
      },
      {
        label: "df",
        value: (row) => row.df1,
        text: (row) =>
          row.df1 === null ? "" : row.df2 === null ? dfText(row.df1) : `${dfText(row.df1)}, ${dfText(row.df2)}`,
      },
      { label: "p", value: (row) => row.p, text: (row) => (row.p === null ? "\u2013" : pText(row.p)) },
      { label: "finding", value: (row) => row.finding, text: (row) => findingWords[row.finding] },
      {
        label: "what to do",
        value: (row) => row.statement,
        text: (row) => (row.finding === "concern" && row.statement !== null ? row.statement : ""),
      },
    ],
    [
      "A test that finds nothing does not prove the assumption, least of all in a small study: look at the picture too.",
    ],
  );
}

export function checkBlocks(result: CheckResult): Block[] {
  const { design } = result;
  const errors = design.problems.filter((problem) => problem.severity === "error");
  const blocks: Block[] = [];
  if (result.rehearsal) blocks.push(paragraph("Rehearsal: simulated data.", "state"));
  blocks.push(
    paragraph(
      `${counted(design.observations, "observation")} of ${counted(design.subjects, "subject")} in ${counted(design.cells, "cell")}. ${
        errors.length === 0
          ? "The data have the structure that the design declares."
          : `${counted(errors.length, "finding")} must be settled before anything is tested.`
      }`,
    ),
  );
  blocks.push({
    type: "table",
    table: tableOf("Design declared and found", design.factors, [
      { label: "factor", value: (row) => row.name, header: true },
      { label: "declared", value: (row) => row.declared },
      { label: "found", value: (row) => row.found },
      {
        label: "subjects (observations) by level",
        value: (row) =>
          row.levels.map((level) => `${level.level}: ${level.subjects} (${level.observations})`).join("; "),
      },
    ]),
  });
  if (design.subjectsPerCell.length <= 40 && design.factors.length > 1) {
    blocks.push({
      type: "table",
      table: tableOf("Subjects in each cell", design.subjectsPerCell, [
        ...design.factors.map((factor) => ({
          label: factor.name,
          value: (row: (typeof design.subjectsPerCell)[number]) => row.levels[factor.name] ?? "",
          header: true,
        })),
        { label: "subjects", value: (row) => row.subjects },
        { label: "observations", value: (row) => row.observations },
      ]),
    });
  }
  if (design.problems.length > 0) {
    blocks.push({
      type: "list",
      items: design.problems.map(
        (problem) => `${problem.severity === "error" ? "To settle: " : ""}${problem.message} ${problem.advice}`,
      ),
    });
  }
  if (result.assumptions.length > 0) blocks.push({ type: "table", table: assumptionTable(result) });
  for (const picture of result.pictures)
    blocks.push({ type: "picture", picture, caption: "Residuals against fitted values, and against normal quantiles" });
  return [...blocks, ...noteBlocks(result.notes)];
}

export function dataBlocks(result: DataResult): Block[] {
  const source = result.source === null ? "the notebook" : `"${result.source}"`;
  const blocks: Block[] = [];
  switch (result.action) {
    case "read":
      blocks.push(
        paragraph(
          `Read ${counted(result.rows, "row")} and ${counted(result.columns.length, "column")} from ${source}, SHA-256 ${result.digest?.slice(0, 16) ?? ""}\u2026`,
        ),
      );
      break;
    case "typed":
      blocks.push(paragraph(`Took in ${counted(result.rows, "row")} typed into the notebook.`));
      break;
    case "rehearse":
      blocks.push(
        paragraph(
          `Rehearsal: ${counted(result.rows, "row")} simulated from the plan's expectations with seed ${result.seed}. Everything computed from them is marked; reading real data drops them.`,
          "state",
        ),
      );
      break;
    case "derive":
      blocks.push(
        paragraph(`Added the column "${result.columns.at(-1)?.name ?? ""}" to ${counted(result.rows, "row")}.`),
      );
      break;
    case "average":
      blocks.push(paragraph(`${counted(result.rows, "row")} after averaging.`));
      break;
    case "show":
      blocks.push(paragraph(`${counted(result.rows, "row")} from ${source}.`));
      break;
    case "exclude": {
      const by = result.excludedByCell.map((cell) => `${Object.values(cell.levels).join(", ")}: ${cell.rows}`);
      blocks.push(
        paragraph(
          `Excluded ${counted(result.excluded, "row")} because: ${result.reason ?? ""}. ${counted(result.rows, "row")} left.${by.length > 0 ? ` By cell: ${by.join("; ")}.` : ""}${
            result.afterResults ? " Results had already been seen: the report says so." : ""
          }`,
          result.afterResults ? "state" : "plain",
        ),
      );
      break;
    }
  }
  if (result.action === "read" || result.action === "typed" || result.action === "rehearse") {
    blocks.push({
      type: "table",
      table: tableOf("Columns", result.columns, [
        { label: "column", value: (row) => row.name, header: true },
        { label: "type", value: (row) => row.type },
        { label: "declared as", value: (row) => row.role, text: (row) => row.role ?? "" },
        { label: "different values", value: (row) => row.distinct, text: (row) => countText(row.distinct) },
        { label: "missing", value: (row) => row.missing, text: (row) => countText(row.missing) },
      ]),
    });
  }
  if (result.preview !== null) blocks.push({ type: "table", table: factsTable(result.preview) });
  return [...blocks, ...noteBlocks(result.notes)];
}

const perGroup = (sizes: readonly number[]): string =>
  sizes.length <= 1
    ? ""
    : sizes.every((size) => size === sizes[0])
      ? ` (${sizes[0]} in each group)`
      : ` (${sizes.join(", ")} by group)`;
const powerMethods = {
  "closed form": "exactly",
  "joint distribution": "from the joint distribution of the comparisons",
  simulation: "by simulation",
} as const;
const aimText = (of: string): string => (of === "omnibus" ? "the omnibus test" : `the family "${of}"`);
const correctionText = (correction: string | null, error: number): string =>
  correction === null ? `error ${percentText(error)}` : `error ${percentText(error)} by ${correction}`;
const share = (value: number | null | undefined): string =>
  value === null || value === undefined ? "\u2013" : percentText(value, 1);

export function powerBlocks(result: PowerResult): Block[] {
  const comparisons = result.points[0]?.comparisons?.map((entry) => entry.comparison) ?? [];
  return [
    {
      type: "table",
      table: tableOf(
        `Power of ${aimText(result.of)}, ${correctionText(result.correction, result.errorRate)}`,
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
            text: (row) => share(row.power),
            shown: result.points.some((row) => row.power !== undefined),
          },
          ...comparisons.map((name, index) => ({
            label: name,
            value: (row: (typeof result.points)[number]) => row.comparisons?.[index]?.power ?? null,
            text: (row: (typeof result.points)[number]) => share(row.comparisons?.[index]?.power),
          })),
          {
            label: "every",
            value: (row) => row.every,
            text: (row) => share(row.every),
            shown: result.points.some((row) => row.every !== undefined),
          },
          {
            label: "any",
            value: (row) => row.any,
            text: (row) => share(row.any),
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
        [`Computed ${powerMethods[result.method]}.`],
      ),
    },
    ...noteBlocks(result.notes),
  ];
}

const goalText = {
  every: "on every comparison together",
  any: "on any comparison",
  each: "on each comparison",
  omnibus: "",
} as const;

export function sizeBlocks(result: SizeResult): Block[] {
  const goal = goalText[result.goal];
  const blocks: Block[] = [
    paragraph(
      `${counted(result.subjects, "subject")}${perGroup(result.subjectsPerGroup)} give ${aimText(result.of)} ${share(result.achieved)} power${goal === "" ? "" : ` ${goal}`} (asked: ${percentText(result.target)}; ${correctionText(result.correction, result.errorRate)}), computed ${powerMethods[result.method]}${
        result.monteCarloError === undefined ? "" : `, Monte Carlo error ${percentText(result.monteCarloError, 2)}`
      }.${result.enrolled === undefined ? "" : ` Allowing for dropout, enrol ${countText(result.enrolled)}.`}${result.cost === undefined ? "" : ` Cost: ${significant(result.cost, 6)}.`}`,
    ),
  ];
  if (result.comparisons !== undefined && result.comparisons.length > 0) {
    const own = result.comparisons.some((row) => row.subjects !== undefined);
    blocks.push({
      type: "table",
      table: tableOf("At that size", result.comparisons, [
        { label: "comparison", value: (row) => row.comparison, header: true },
        { label: "power", value: (row) => row.power, text: (row) => share(row.power) },
        { label: "subjects it alone needs", value: (row) => row.subjects, shown: own },
      ]),
    });
  }
  return [...blocks, ...noteBlocks(result.notes)];
}

export function detectableBlocks(result: DetectableResult): Block[] {
  const blocks: Block[] = [
    paragraph(
      `With ${counted(result.subjects, "subject")}${perGroup(result.subjectsPerGroup)}, ${aimText(result.of)} reaches ${percentText(result.target)} power when the expected differences are ${fixed(result.multiple, 2)} times what was expected${
        result.effectF === undefined ? "" : ` (f = ${fixed(result.effectF, 3)})`
      }; ${correctionText(result.correction, result.errorRate)}, computed ${powerMethods[result.method]}.`,
    ),
  ];
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

const conclusions = {
  holds: (result: CalibrationResult) =>
    `Under no difference the procedure holds its error of ${percentText(result.error)} on data like these, within the error of the simulation.`,
  conservative: (result: CalibrationResult) =>
    `Under no difference the procedure stays below its error of ${percentText(result.error)} on data like these: it is on the safe side, at some cost in power.`,
  exceeds: (result: CalibrationResult) =>
    `Under no difference the procedure exceeds its error of ${percentText(result.error)} on data like these. Take a method that needs fewer assumptions: resampling, or assume unequal variances.`,
  "cannot tell": () => "There are too few simulated studies to tell whether the procedure holds its error: run more.",
} as const;

export function calibrationBlocks(result: CalibrationResult): Block[] {
  const stopped =
    result.studies < result.asked
      ? ` Stopped after ${countText(result.studies)} of ${countText(result.asked)} studies.`
      : "";
  const comparisons = result.scenarios[0]?.comparisons.map((entry) => entry.comparison) ?? [];
  return [
    paragraph(`${conclusions[result.conclusion](result)}${stopped}`),
    {
      type: "table",
      table: tableOf(
        `Calibration of ${aimText(result.of)}, ${correctionText(result.correction, result.error)}: ${countText(result.studies)} simulated studies, seed ${result.seed}${result.shard === null ? "" : `, shard ${result.shard.index} of ${result.shard.of}`}`,
        result.scenarios,
        [
          { label: "scenario", value: (row) => row.scenario, header: true },
          { label: "sizes and spreads from", value: (row) => row.source },
          { label: "family error", value: (row) => row.familyError, text: (row) => share(row.familyError) },
          {
            label: "\u00b1",
            value: (row) => row.familyErrorMonteCarlo,
            text: (row) => (row.familyErrorMonteCarlo === null ? "" : percentText(row.familyErrorMonteCarlo, 2)),
          },
          { label: "every", value: (row) => row.every, text: (row) => share(row.every) },
          { label: "any", value: (row) => row.any, text: (row) => share(row.any) },
          { label: "all intervals cover", value: (row) => row.coverage, text: (row) => share(row.coverage) },
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
                text: (row: (typeof result.scenarios)[number]) => share(row.comparisons[index]?.rejected),
              })),
            ]),
          },
        ]
      : []),
    ...noteBlocks(result.notes),
  ];
}

export function planBlocks(result: PlanResult): Block[] {
  const sealed = result.digest === null ? "" : `sealed ${result.sealedAt}, SHA-256 ${result.digest}`;
  const first = {
    seal: `Plan "${result.name}" ${sealed}, in ${result.path}. Deposit the file or the digest where your lab registers plans.`,
    open: `Opened plan "${result.name}", ${sealed}. Its declarations are fixed.`,
    amend: `Amended plan "${result.name}"; the original stays beside the change.`,
    show: result.digest === null ? "Declared so far; not sealed." : `Plan "${result.name}", ${sealed}.`,
  }[result.action];
  const blocks: Block[] = [paragraph(first)];
  if (result.action !== "seal") blocks.push({ type: "statements", lines: result.statements });
  if (result.amendments.length > 0) {
    blocks.push({
      type: "list",
      items: result.amendments.map(
        (entry) =>
          `${entry.at}${entry.afterResults ? ", after results were seen" : ""}: ${entry.statement.replace(/\s+/g, " ")} (because: ${entry.reason})`,
      ),
    });
  }
  return [...blocks, ...noteBlocks(result.notes)];
}

export function ledgerBlocks(result: LedgerResult): Block[] {
  const blocks: Block[] = [];
  if (result.action === "audit") {
    blocks.push(
      paragraph(
        result.whole
          ? `The record is whole: ${counted(result.entries.length, "entry", "entries")}, each following the one before.`
          : "The record is not whole.",
      ),
    );
  }
  if (result.head !== null) blocks.push(paragraph(`Head digest, to publish: ${result.head}`));
  if (result.problems.length > 0)
    blocks.push({ type: "list", items: result.problems.map((problem) => `${problem.message} ${problem.advice}`) });
  if (result.entries.length > 0) {
    blocks.push({
      type: "table",
      table: tableOf("Ledger", result.entries, [
        { label: "entry", value: (row) => row.index, header: true, align: "right" },
        { label: "at", value: (row) => row.at },
        { label: "what", value: (row) => row.event },
        {
          label: "of",
          value: (row) => row.summary,
          text: (row) => (row.summary.length > 60 ? `${row.summary.slice(0, 59)}\u2026` : row.summary),
        },
        { label: "digest", value: (row) => row.digest, text: (row) => row.digest.slice(0, 12) },
      ]),
    });
  }
  return [...blocks, ...noteBlocks(result.notes)];
}

export function helpBlocks(result: HelpResult): Block[] {
  return result.sections.flatMap((section): Block[] => [
    ...(section.heading === null ? [] : [{ type: "heading" as const, level: 2 as const, text: section.heading }]),
    ...section.lines.map((line) => paragraph(line)),
    ...(section.example === null ? [] : [{ type: "statements" as const, lines: [section.example] }]),
    ...(section.table === null ? [] : [{ type: "table" as const, table: factsTable(section.table) }]),
  ]);
}

export function messageBlocks(result: MessageResult): Block[] {
  const { what, name, value } = result.facts;
  const named =
    name === null || name === undefined ? String(what ?? "") : `${what === undefined ? "" : `${what} `}${name}`;
  const texts: Readonly<Record<string, string>> = {
    declared: `Declared ${named}.`,
    unchanged: `${named} stands as declared.`,
    replaced: `${named} declared anew; the earlier declaration is replaced.`,
    set: `Set ${name} to ${value}.`,
  };
  return [
    paragraph(texts[result.code] ?? noteTexts([{ code: result.code, facts: result.facts }]).join(" ")),
    ...noteBlocks(result.notes),
  ];
}
