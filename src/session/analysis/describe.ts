import { cellCount, cellLabels, type ModelData } from "../../design/index.ts";
import { cellQuartiles, cellStatistics, describeCells, withinIntervals } from "../../models/index.ts";
import type {
  DescribeCell,
  DescribeResult,
  DistributionsPicture,
  MeansPicture,
  Note,
  Picture,
  ProfilesPicture,
  State,
} from "../../results/index.ts";
import { SessionProblem } from "../problem.ts";
import { type Prepared, responseFacts } from "./layout.ts";

/** Pictures show at most so many single values. */
const mostPoints = 5000;

/** One value per subject and cell of the kept factors: what a description counts, so that no subject counts twice. */
export interface KeptCells {
  readonly factors: ModelData["factors"];
  readonly rows: number;
  readonly cells: Int32Array;
  readonly cellCount: number;
  readonly response: ModelData["response"];
  readonly subjects: Int32Array;
}

/** Factors to describe by, in declaration order. */
export function keptFactors(prepared: Prepared, by: readonly string[]): readonly string[] {
  for (const name of by) {
    if (prepared.layout.data.factors.some((factor) => factor.name === name)) continue;
    const declared = prepared.layout.data.factors.map((factor) => factor.name);
    throw new SessionProblem(
      "unknown-factor",
      `There is no factor "${name}".`,
      `Declared: ${declared.join(", ")}.`,
      name,
    );
  }
  return by.length === 0 ? prepared.layout.data.factors.map((factor) => factor.name) : by;
}

/** Averages each subject's rows within a cell of the kept factors. */
export function keepCells(data: ModelData, by: readonly string[]): KeptCells {
  const factors = by.map((name) => data.factors.find((factor) => factor.name === name)!);
  const count = cellCount(factors);
  const subjects = data.units.find((unit) => unit.role === "subjects");
  const places = new Map<number, number>();
  const sums: number[] = [];
  const counts: number[] = [];
  const cells: number[] = [];
  const owners: number[] = [];
  for (let row = 0; row < data.rows; row++) {
    let cell = 0;
    for (const factor of factors) cell = cell * factor.levels.length + factor.codes[row]!;
    const owner = subjects?.codes[row] ?? row;
    const key = owner * count + cell;
    let place = places.get(key);
    if (place === undefined) {
      place = sums.length;
      places.set(key, place);
      sums.push(0);
      counts.push(0);
      cells.push(cell);
      owners.push(owner);
    }
    sums[place]! += data.response.offsets[row]!;
    counts[place]!++;
  }
  return {
    factors,
    rows: sums.length,
    cells: Int32Array.from(cells),
    cellCount: count,
    response: { center: data.response.center, offsets: Float64Array.from(sums, (sum, index) => sum / counts[index]!) },
    subjects: Int32Array.from(owners),
  };
}

export function describeData(
  prepared: Prepared,
  by: readonly string[],
  quartiles: boolean,
  level: number,
): DescribeResult {
  const { data } = prepared.layout;
  const kept = keepCells(data, by);
  const notes: Note[] = [];
  const described = describeCells(cellStatistics(kept), level);
  const middle = quartiles ? cellQuartiles(kept) : null;
  const within = kept.factors.some((factor) => factor.varies === "within")
    ? withinIntervalsBy(data, by, level, notes)
    : null;
  if (kept.rows < data.rows)
    notes.push({ code: "rows-averaged-within-subjects", facts: { rows: data.rows, values: kept.rows } });
  const missing = missingBy(kept);
  return {
    kind: "describe",
    response: responseFacts(prepared.design),
    by,
    intervalLevel: level,
    cells: described.map((cell): DescribeCell => {
      const interval = within?.get(cell.cell);
      return {
        levels: cellLabels(kept.factors, cell.cell),
        n: cell.n,
        missing: missing[cell.cell]!,
        mean: cell.mean,
        sd: cell.sd,
        standardError: cell.standardError,
        lower: cell.lower,
        upper: cell.upper,
        ...(middle === null ? {} : { ...middle[cell.cell]! }),
        ...(within === null ? {} : { withinLower: interval?.lower ?? null, withinUpper: interval?.upper ?? null }),
      };
    }),
    rehearsal: prepared.held.rehearsal,
    notes,
  };
}

/** Within-subject intervals by cell of the kept factors, whatever order they were asked for in. */
function withinIntervalsBy(
  data: ModelData,
  by: readonly string[],
  level: number,
  notes: Note[],
): Map<number, { lower: number; upper: number }> {
  const declared = data.factors.filter((factor) => by.includes(factor.name));
  const { intervals, notes: found } = withinIntervals(
    data,
    declared.map((factor) => factor.name),
    level,
  );
  notes.push(...found);
  const asked = by.map((name) => data.factors.find((factor) => factor.name === name)!);
  return new Map(
    intervals.map((interval) => {
      const labels = cellLabels(declared, interval.cell);
      const cell = asked.reduce(
        (index, factor) => index * factor.levels.length + factor.levels.indexOf(labels[factor.name]!),
        0,
      );
      // Intervals come on the centred scale of the rows.
      const { center } = data.response;
      return [cell, { lower: center + interval.lower, upper: center + interval.upper }];
    }),
  );
}

/** How many subjects of the group lack each cell. */
function missingBy(kept: KeptCells): number[] {
  const within = kept.factors.map((factor) => factor.varies === "within");
  const missing = new Array<number>(kept.cellCount).fill(0);
  if (!within.some((value) => value)) return missing;
  const groupOf = (cell: number) => {
    const labels = cellLabels(kept.factors, cell);
    return kept.factors
      .filter((_, index) => !within[index])
      .map((factor) => labels[factor.name])
      .join("\u0000");
  };
  const subjectsOfGroup = new Map<string, Set<number>>();
  const present = new Array<number>(kept.cellCount).fill(0);
  for (let row = 0; row < kept.rows; row++) {
    const group = groupOf(kept.cells[row]!);
    if (!subjectsOfGroup.has(group)) subjectsOfGroup.set(group, new Set());
    subjectsOfGroup.get(group)!.add(kept.subjects[row]!);
    present[kept.cells[row]!]!++;
  }
  return missing.map((_, cell) => Math.max(0, (subjectsOfGroup.get(groupOf(cell))?.size ?? 0) - present[cell]!));
}

/** At most `mostPoints` rows, evenly through the data, so that the same picture comes every time. */
function sampledRows(rows: number): { readonly rows: readonly number[]; readonly sampledFrom: number | null } {
  if (rows <= mostPoints) return { rows: Array.from({ length: rows }, (_, row) => row), sampledFrom: null };
  return {
    rows: Array.from({ length: mostPoints }, (_, index) => Math.floor((index * rows) / mostPoints)),
    sampledFrom: rows,
  };
}

export function meansPicture(prepared: Prepared, by: readonly string[], level: number, state: State): MeansPicture {
  const described = describeData(prepared, by, false, level);
  const kept = keepCells(prepared.layout.data, by);
  const within = described.cells.some((cell) => typeof cell.withinLower === "number");
  const sample = sampledRows(kept.rows);
  return {
    picture: "means",
    response: described.response,
    state,
    notes: described.notes,
    factors: kept.factors.map(({ name, levels, ordered }) => ({ name, levels, ordered })),
    cells: described.cells.map((cell) => ({
      levels: cell.levels,
      n: cell.n,
      mean: cell.mean,
      lower: within ? (cell.withinLower ?? null) : cell.lower,
      upper: within ? (cell.withinUpper ?? null) : cell.upper,
    })),
    points: sample.rows.map((row) => ({
      levels: cellLabels(kept.factors, kept.cells[row]!),
      value: kept.response.center + kept.response.offsets[row]!,
    })),
    sampledFrom: sample.sampledFrom,
    interval: within ? "within" : "between",
    intervalLevel: level,
  };
}

export function distributionsPicture(prepared: Prepared, by: readonly string[], state: State): DistributionsPicture {
  const kept = keepCells(prepared.layout.data, by.slice(0, 1));
  const factor = kept.factors[0]!;
  const sample = sampledRows(kept.rows);
  const values = factor.levels.map((): number[] => []);
  for (const row of sample.rows) values[kept.cells[row]!]!.push(kept.response.center + kept.response.offsets[row]!);
  return {
    picture: "distributions",
    response: responseFacts(prepared.design),
    state,
    notes: [],
    factor: { name: factor.name, levels: factor.levels },
    values: factor.levels.map((level, index) => ({ level, values: values[index]! })),
    sampledFrom: sample.sampledFrom,
  };
}

export function profilesPicture(prepared: Prepared, by: readonly string[], state: State): ProfilesPicture {
  const { data } = prepared.layout;
  const asked = by.length > 0 ? by : data.factors.map((factor) => factor.name);
  const within = data.factors.find((factor) => asked.includes(factor.name) && factor.varies === "within");
  if (within === undefined) {
    throw new SessionProblem(
      "no-within-factor",
      "Profiles follow each subject over the levels of a within factor; none is named.",
      "Use draw means or draw distributions.",
    );
  }
  const between = data.factors.find((factor) => asked.includes(factor.name) && factor.varies === "between") ?? null;
  const kept = keepCells(data, between === null ? [within.name] : [between.name, within.name]);
  const unit = data.units.find((candidate) => candidate.role === "subjects")!;
  const width = within.levels.length;
  const lines = new Map<number, { group: string | null; values: (number | null)[] }>();
  for (let row = 0; row < kept.rows; row++) {
    const cell = kept.cells[row]!;
    const group = between === null ? null : between.levels[Math.floor(cell / width)]!;
    const line = lines.get(kept.subjects[row]!) ?? { group, values: within.levels.map((): number | null => null) };
    line.values[cell % width] = kept.response.center + kept.response.offsets[row]!;
    lines.set(kept.subjects[row]!, line);
  }
  const groups = between === null ? [null] : [...between.levels];
  return {
    picture: "profiles",
    response: responseFacts(prepared.design),
    state,
    notes: [],
    factor: { name: within.name, levels: within.levels },
    group: between === null ? null : { name: between.name, levels: between.levels },
    lines: [...lines]
      .slice(0, 500)
      .map(([subject, line]) => ({ subject: unit.labels[subject]!, group: line.group, values: line.values })),
    means: groups.map((group) => ({
      group,
      values: within.levels.map((_, index) => {
        const own = [...lines.values()]
          .filter((line) => line.group === group && line.values[index] !== null)
          .map((line) => line.values[index]!);
        return own.length === 0 ? null : own.reduce((sum, value) => sum + value, 0) / own.length;
      }),
    })),
  };
}

export type { Picture };
