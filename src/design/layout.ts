import type { Column, NumberColumn, Table, TextCodes } from "../data/types.ts";
import { asNumbers, textCodes } from "../data/index.ts";
import { cellCount } from "./cells.ts";
import { DesignError, listed } from "./problem.ts";
import type {
  CodedCovariate,
  CodedFactor,
  CodedUnit,
  DesignDeclaration,
  FactorDeclaration,
  ModelData,
  UnitDeclaration,
} from "./types.ts";

/** Rows that did not enter, and why. */
export interface LeftOut {
  readonly missingResponse: number;
  /** Rows whose factor, unit or covariate is missing, by column. */
  readonly missingColumn: readonly { readonly column: string; readonly rows: number }[];
}

export interface UndeclaredLevel {
  readonly factor: string;
  readonly level: string;
  readonly rows: number;
  /** Source row where it is first seen. */
  readonly firstRow: number;
}

export interface Layout {
  readonly data: ModelData;
  /** Source row of each row that entered. */
  readonly sourceRows: Int32Array;
  /** Row of the table behind each row that entered. */
  readonly tableRows: Int32Array;
  readonly leftOut: LeftOut;
  readonly undeclared: readonly UndeclaredLevel[];
  /** True where no column names the subjects and each row is taken as one. */
  readonly rowsAreSubjects: boolean;
}

function requiredColumn(table: Table, name: string, role: string): Column {
  const found = table.columns.find((column) => column.name === name);
  if (found !== undefined) return found;
  const near = table.columns.find((column) => column.name.toLowerCase() === name.toLowerCase());
  throw new DesignError(
    "unknown-column",
    `The data have no column "${name}", which is declared as ${role}.`,
    near !== undefined
      ? `There is "${near.name}". Rename it while reading: rename "${near.name}" to ${name}`
      : `Columns found: ${listed(
          table.columns.map((column) => column.name),
          12,
        )}. Use rename, or fold wide columns, under read.`,
    name,
  );
}

/** Declared level of each category: by text first, then by numeric value; -1 where nobody declared it. */
export function matchLevels(categories: readonly string[], levels: readonly string[]): Int32Array {
  const byText = new Map(levels.map((level, index) => [level, index]));
  const byValue = new Map<number, number>();
  for (const [index, level] of levels.entries()) {
    const value = level.trim() === "" ? Number.NaN : Number(level);
    if (!Number.isNaN(value) && !byValue.has(value)) byValue.set(value, index);
  }
  return Int32Array.from(categories, (category) => {
    const text = byText.get(category);
    if (text !== undefined) return text;
    const value = category.trim() === "" ? Number.NaN : Number(category);
    return Number.isNaN(value) ? -1 : (byValue.get(value) ?? -1);
  });
}

function factorCodes(table: Table, factor: FactorDeclaration): { codes: Int32Array; undeclared: UndeclaredLevel[] } {
  const column = textCodes(requiredColumn(table, factor.name, "a factor"));
  const match = matchLevels(column.categories, factor.levels);
  const codes = new Int32Array(table.rows);
  const strange = new Map<number, { rows: number; firstRow: number }>();
  for (let row = 0; row < table.rows; row++) {
    const category = column.codes[row]!;
    const code = category < 0 ? -2 : match[category]!;
    codes[row] = code;
    if (code === -1) {
      const entry = strange.get(category);
      if (entry === undefined) strange.set(category, { rows: 1, firstRow: table.sourceRows[row]! });
      else entry.rows++;
    }
  }
  const undeclared = [...strange].map(([category, entry]) => ({
    factor: factor.name,
    level: column.categories[category]!,
    ...entry,
  }));
  return { codes, undeclared };
}

/** Codes 0, 1, 2 ... in order of first appearance among the rows kept. */
function compactUnit(unit: UnitDeclaration, labelsOfRows: readonly TextCodes[], keep: Int32Array): CodedUnit {
  const codes = new Int32Array(keep.length);
  const labels: string[] = [];
  let seen = new Map<number, number>();
  // Nested units get their larger unit's code in front, so that animal 1 of two herds is two animals.
  let paired: Int32Array | null = null;
  let pairedLabels: string[] = [];
  for (const part of labelsOfRows) {
    if (paired === null) {
      paired = Int32Array.from(keep, (row) => part.codes[row]!);
      pairedLabels = [...part.categories];
      continue;
    }
    const width = part.categories.length;
    const pairs = new Map<number, number>();
    const nextLabels: string[] = [];
    const next = new Int32Array(keep.length);
    for (let index = 0; index < keep.length; index++) {
      const key = paired[index]! * width + part.codes[keep[index]!]!;
      let code = pairs.get(key);
      if (code === undefined) {
        code = nextLabels.length;
        pairs.set(key, code);
        nextLabels.push(`${pairedLabels[paired[index]!]} / ${part.categories[part.codes[keep[index]!]!]}`);
      }
      next[index] = code;
    }
    paired = next;
    pairedLabels = nextLabels;
  }
  seen = new Map();
  for (let index = 0; index < keep.length; index++) {
    const raw = paired![index]!;
    let code = seen.get(raw);
    if (code === undefined) {
      code = labels.length;
      seen.set(raw, code);
      labels.push(pairedLabels[raw]!);
    }
    codes[index] = code;
  }
  return { ...unit, codes, labels, count: labels.length };
}

function analysisResponse(
  column: NumberColumn,
  keep: Int32Array,
  scale: "linear" | "log",
  sourceRows: Int32Array,
): { center: number; offsets: Float64Array } {
  if (scale === "linear") {
    return { center: column.center, offsets: Float64Array.from(keep, (row) => column.offsets[row]!) };
  }
  const offsets = new Float64Array(keep.length);
  for (let index = 0; index < keep.length; index++) {
    const value = column.center + column.offsets[keep[index]!]!;
    if (!(value > 0)) {
      throw new DesignError(
        "log-of-nonpositive",
        `Row ${sourceRows[keep[index]!]}: "${column.name}" is ${value}, and a log scale needs values above zero.`,
        "Exclude the row with its reason, or leave out: on log scale.",
        column.name,
      );
    }
    offsets[index] = Math.log(value);
  }
  return { center: 0, offsets };
}

function codedCovariate(
  table: Table,
  name: string,
  centred: boolean,
  keep: Int32Array,
  varies: "within" | "between",
): CodedCovariate {
  const column = asNumbers(requiredColumn(table, name, "a covariate"));
  const offsets = Float64Array.from(keep, (row) => column.offsets[row]!);
  const mean = centred ? offsets.reduce((sum, value) => sum + value, 0) / Math.max(1, offsets.length) : -column.center;
  return { name, varies, centred, values: offsets.map((value) => value - mean), center: column.center + mean };
}

/**
 * Lays the table out by the declared design.
 *
 * Rows with a missing response, factor, unit or covariate do not enter and are counted; a level that nobody declared is
 * reported and its rows left out, so that `check` can say it all at once.
 *
 * @throws DesignError "unknown-column", "log-of-nonpositive"; DataProblem when the response is not numeric
 */
export function layoutData(table: Table, design: DesignDeclaration): Layout {
  const response = asNumbers(requiredColumn(table, design.response.name, "the response"));
  const factors = design.factors.map((factor) => ({ factor, ...factorCodes(table, factor) }));
  const subjects = design.units.find((unit) => unit.role === "subjects");
  const hasSubjectColumn = subjects !== undefined && table.columns.some((column) => column.name === subjects.name);
  const rowsAreSubjects = !hasSubjectColumn && design.factors.every((factor) => factor.varies === "between");
  const unitParts = design.units
    .filter((unit) => !(rowsAreSubjects && unit === subjects))
    .map((unit) => ({
      unit,
      parts: [...unit.nestedIn]
        .reverse()
        .concat(unit.name)
        .map((name) => textCodes(requiredColumn(table, name, "a sampling unit"))),
    }));
  const covariates = design.covariates.map((covariate) =>
    asNumbers(requiredColumn(table, covariate.name, "a covariate")),
  );

  const missingColumn = new Map<string, number>();
  const count = (column: string) => missingColumn.set(column, (missingColumn.get(column) ?? 0) + 1);
  let missingResponse = 0;
  const kept: number[] = [];
  for (let row = 0; row < table.rows; row++) {
    if (Number.isNaN(response.offsets[row]!)) {
      missingResponse++;
      continue;
    }
    let complete = true;
    for (const { factor, codes } of factors) {
      if (codes[row]! >= 0) continue;
      if (codes[row] === -2) count(factor.name);
      complete = false;
    }
    for (const { unit, parts } of unitParts) {
      if (parts.every((part) => part.codes[row]! >= 0)) continue;
      count(unit.name);
      complete = false;
    }
    for (const covariate of covariates) {
      if (!Number.isNaN(covariate.offsets[row]!)) continue;
      count(covariate.name);
      complete = false;
    }
    if (complete) kept.push(row);
  }
  const keep = Int32Array.from(kept);

  const codedFactors: CodedFactor[] = factors.map(({ factor, codes }) => ({
    ...factor,
    codes: Int32Array.from(keep, (row) => codes[row]!),
  }));
  const cells = new Int32Array(keep.length);
  for (const factor of codedFactors) {
    for (let index = 0; index < cells.length; index++) {
      cells[index] = cells[index]! * factor.levels.length + factor.codes[index]!;
    }
  }
  const units: CodedUnit[] = design.units.map((unit) => {
    const found = unitParts.find((entry) => entry.unit === unit);
    if (found === undefined) {
      return {
        ...unit,
        codes: Int32Array.from(keep, (_, index) => index),
        labels: Array.from(keep, (row) => `row ${table.sourceRows[row]}`),
        count: keep.length,
      };
    }
    return compactUnit(unit, found.parts, keep);
  });
  // Larger units that others are nested in are sampling units of their own.
  for (const unit of design.units) {
    for (const [depth, larger] of unit.nestedIn.entries()) {
      if (units.some((coded) => coded.name === larger)) continue;
      const parts = [...unit.nestedIn]
        .slice(depth)
        .reverse()
        .map((name) => textCodes(requiredColumn(table, name, "a sampling unit")));
      units.push(
        compactUnit(
          { name: larger, role: "blocks", nestedIn: unit.nestedIn.slice(depth + 1), slopes: [] },
          parts,
          keep,
        ),
      );
    }
  }
  return {
    data: {
      rows: keep.length,
      response: analysisResponse(response, keep, design.response.scale, table.sourceRows),
      factors: codedFactors,
      units,
      covariates: design.covariates.map((covariate) =>
        codedCovariate(table, covariate.name, covariate.centred, keep, covariate.varies),
      ),
      assumptions: design.assumptions,
      cells,
      cellCount: cellCount(design.factors),
    },
    sourceRows: Int32Array.from(keep, (row) => table.sourceRows[row]!),
    tableRows: keep,
    leftOut: { missingResponse, missingColumn: [...missingColumn].map(([column, rows]) => ({ column, rows })) },
    undeclared: factors.flatMap((entry) => entry.undeclared),
    rowsAreSubjects,
  };
}
