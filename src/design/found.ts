import { cellLabels } from "./cells.ts";
import type { Layout } from "./layout.ts";
import { listed } from "./problem.ts";
import type { CodedFactor, CodedUnit, DesignDeclaration, ModelData } from "./types.ts";

/** A finding about the design; those of severity "error" stop omnibus, compare and explore. */
export interface DesignFinding {
  readonly code: string;
  readonly message: string;
  readonly advice: string;
  readonly severity: "error" | "note";
}

/** Which analysis the design calls for, and why, as codes. */
export interface ModelChoice {
  readonly model: "between" | "within" | "multilevel";
  readonly reason:
    | "no-within-factor"
    | "complete"
    | "missing-cells"
    | "several-units"
    | "trials-kept"
    | "covariate"
    | "assumed";
}

export interface FoundDesign {
  readonly subjects: number;
  readonly cells: number;
  readonly observations: number;
  readonly factors: readonly {
    readonly name: string;
    readonly declared: string;
    readonly found: string;
    readonly levels: readonly { readonly level: string; readonly subjects: number; readonly observations: number }[];
  }[];
  readonly subjectsPerCell: readonly {
    readonly levels: Readonly<Record<string, string>>;
    readonly subjects: number;
    readonly observations: number;
  }[];
  /** Subject-by-cell combinations that the design calls for and the data lack. */
  readonly missingCells: number;
  readonly duplicates: number;
  readonly problems: readonly DesignFinding[];
  readonly choice: ModelChoice;
}

/** For each unit of a kind, how many distinct levels of the factor it has: the largest and smallest count. */
function levelsPerUnit(
  unit: CodedUnit,
  factor: CodedFactor,
): { most: number; least: number; exampleOfMany: number; exampleOfOne: number } {
  const width = factor.levels.length;
  const seen = new Uint8Array(unit.count * width);
  for (let row = 0; row < unit.codes.length; row++) seen[unit.codes[row]! * width + factor.codes[row]!] = 1;
  let most = 0;
  let least = width;
  let exampleOfMany = 0;
  let exampleOfOne = 0;
  for (let code = 0; code < unit.count; code++) {
    let distinct = 0;
    for (let level = 0; level < width; level++) distinct += seen[code * width + level]!;
    if (distinct > most) {
      most = distinct;
      exampleOfMany = code;
    }
    if (distinct < least) {
      least = distinct;
      exampleOfOne = code;
    }
  }
  return { most, least, exampleOfMany, exampleOfOne };
}

const unitOf = (data: ModelData, name: string) => data.units.find((unit) => unit.name === name);
const subjectsOf = (data: ModelData) => data.units.find((unit) => unit.role === "subjects");

function factorFindings(layout: Layout): DesignFinding[] {
  const findings: DesignFinding[] = [];
  for (const factor of layout.data.factors) {
    const unit = unitOf(layout.data, factor.unit) ?? subjectsOf(layout.data);
    const present = factor.levels.map(() => 0);
    for (const code of factor.codes) present[code]!++;
    const empty = factor.levels.filter((_, index) => present[index] === 0);
    if (empty.length > 0) {
      findings.push({
        code: "level-without-data",
        message: `The factor "${factor.name}" is declared with ${listed(empty)}, and no row has ${empty.length === 1 ? "it" : "them"}.`,
        advice: "Check the spelling in the file, what was excluded, or take the level out of the declaration.",
        severity: "error",
      });
    }
    if (unit === undefined || layout.data.rows === 0) continue;
    const found = levelsPerUnit(unit, factor);
    if (factor.varies === "within" && found.most <= 1 && factor.levels.length > 1) {
      findings.push({
        code: "declared-within-found-between",
        message: `"${factor.name}" is declared within ${unit.name}, but no ${unit.name} has more than one level of it.`,
        advice: `Declare it between: factor ${factor.name} between ${unit.name}: ${factor.levels.join(", ")}. If the ${unit.name} numbers start again in each group, make them distinct.`,
        severity: "error",
      });
    }
    if (factor.varies === "between" && found.most > 1) {
      findings.push({
        code: "declared-between-found-within",
        message: `"${factor.name}" is declared between ${unit.name}, but ${unit.name} "${unit.labels[found.exampleOfMany]}" has ${found.most} levels of it.`,
        advice: `Declare it within: factor ${factor.name} within ${unit.name}: ${factor.levels.join(", ")}. If the ${unit.name} numbers start again in each group, make them distinct.`,
        severity: "error",
      });
    }
    if (factor.betweenUnit !== null) {
      const second = unitOf(layout.data, factor.betweenUnit);
      if (second !== undefined && levelsPerUnit(second, factor).most > 1) {
        findings.push({
          code: "declared-between-found-within",
          message: `"${factor.name}" is declared between ${second.name}, but some ${second.name} have several levels of it.`,
          advice: `Leave out "between ${second.name}", or check the ${second.name} column.`,
          severity: "error",
        });
      }
    }
  }
  return findings;
}

/** Rows that share the subject, every other declared crossed unit, and the cell. */
function duplicateRows(
  data: ModelData,
  sourceRows: Int32Array,
): { extra: number; first: readonly [number, number] | null } {
  const identifying = data.units.filter((unit) => unit.role !== "blocks");
  const subjects = subjectsOf(data);
  if (subjects === undefined) return { extra: 0, first: null };
  const seen = new Map<string, number>();
  let extra = 0;
  let first: readonly [number, number] | null = null;
  const single = identifying.length === 1;
  const flat = single ? new Int32Array(subjects.count * data.cellCount).fill(-1) : null;
  for (let row = 0; row < data.rows; row++) {
    let before: number;
    if (flat !== null) {
      const key = subjects.codes[row]! * data.cellCount + data.cells[row]!;
      before = flat[key]!;
      if (before < 0) flat[key] = row;
    } else {
      const key = `${identifying.map((unit) => unit.codes[row]).join(" ")} ${data.cells[row]}`;
      before = seen.get(key) ?? -1;
      if (before < 0) seen.set(key, row);
    }
    if (before >= 0) {
      extra++;
      first ??= [sourceRows[before]!, sourceRows[row]!];
    }
  }
  return { extra, first };
}

/** Subject-by-within-cell combinations that are missing, given each subject's between levels. */
function missingWithinCells(data: ModelData): number {
  const subjects = subjectsOf(data);
  const within = data.factors.filter((factor) => factor.varies === "within");
  if (subjects === undefined || within.length === 0) return 0;
  // A within factor that is between items is missing by design for each single item; cells are still expected per subject.
  const cells = within.reduce((product, factor) => product * factor.levels.length, 1);
  const seen = new Uint8Array(subjects.count * cells);
  for (let row = 0; row < data.rows; row++) {
    let cell = 0;
    for (const factor of within) cell = cell * factor.levels.length + factor.codes[row]!;
    seen[subjects.codes[row]! * cells + cell] = 1;
  }
  return seen.length - seen.reduce((sum, value) => sum + value, 0);
}

function chooseModel(data: ModelData, missing: number, duplicates: number): ModelChoice {
  const within = data.factors.some((factor) => factor.varies === "within");
  const crossedOrNested = data.units.length > 1;
  if (crossedOrNested) return { model: "multilevel", reason: "several-units" };
  if (!within) {
    if (duplicates > 0) return { model: "multilevel", reason: "trials-kept" };
    return { model: "between", reason: "no-within-factor" };
  }
  if (data.covariates.length > 0) return { model: "multilevel", reason: "covariate" };
  if (missing > 0) return { model: "multilevel", reason: "missing-cells" };
  if (duplicates > 0) return { model: "multilevel", reason: "trials-kept" };
  return { model: "within", reason: "complete" };
}

function emptyCells(data: ModelData): string[] {
  const present = new Uint8Array(data.cellCount);
  for (const cell of data.cells) present[cell] = 1;
  const names: string[] = [];
  for (let cell = 0; cell < data.cellCount; cell++) {
    if (present[cell] === 0) names.push(Object.values(cellLabels(data.factors, cell)).join(", "));
  }
  return names;
}

function countFindings(
  layout: Layout,
  missing: number,
  duplicates: ReturnType<typeof duplicateRows>,
  design: DesignDeclaration,
): DesignFinding[] {
  const { data } = layout;
  const findings: DesignFinding[] = [];
  const subjects = subjectsOf(data);
  for (const level of layout.undeclared) {
    findings.push({
      code: "undeclared-level",
      message: `Row ${level.firstRow}: "${level.level}" is not a declared level of "${level.factor}" (${level.rows} ${level.rows === 1 ? "row" : "rows"}).`,
      advice: `Declare it, correct the file, or exclude where ${level.factor} = "${level.level}" because "...".`,
      severity: "error",
    });
  }
  if (layout.rowsAreSubjects && subjects !== undefined) {
    findings.push({
      code: "rows-are-subjects",
      message: `No column is named "${subjects.name}": each row is taken as one ${subjects.name} of its own.`,
      advice: `If rows share ${subjects.name}s, add the column that says which is which.`,
      severity: "note",
    });
  }
  if (duplicates.first !== null && subjects !== undefined) {
    findings.push({
      code: "duplicate-rows",
      message: `Rows ${duplicates.first[0]} and ${duplicates.first[1]} are the same ${subjects.name} in the same cell; ${duplicates.extra} ${duplicates.extra === 1 ? "row is" : "rows are"} such repeats.`,
      advice: `If they are repeated trials: average ${design.response.name} over TRIAL. If one is a mistake: exclude it with its reason. To keep every trial: omnibus by multilevel model.`,
      severity: "error",
    });
  }
  if (missing > 0 && subjects !== undefined) {
    findings.push({
      code: "missing-cells",
      message: `${missing} of the cells that ${subjects.count} ${subjects.name}s should have ${missing === 1 ? "is" : "are"} missing.`,
      advice:
        "Nobody is dropped: the multilevel model keeps every row, and takes cells to be missing for reasons the data show (missing at random).",
      severity: "note",
    });
  }
  const empty = emptyCells(data);
  if (empty.length > 0 && data.rows > 0) {
    findings.push({
      code: "empty-cell",
      message: `No row has ${listed(empty)}.`,
      advice: "Effects and comparisons that need this cell cannot be estimated; the others can.",
      severity: "note",
    });
  }
  if (layout.leftOut.missingResponse > 0) {
    findings.push({
      code: "missing-response",
      message: `${layout.leftOut.missingResponse} ${layout.leftOut.missingResponse === 1 ? "row has" : "rows have"} no ${design.response.name}.`,
      advice: "They are counted here and in the report, and do not enter.",
      severity: "note",
    });
  }
  for (const { column, rows } of layout.leftOut.missingColumn) {
    findings.push({
      code: "missing-value",
      message: `${rows} ${rows === 1 ? "row has" : "rows have"} no ${column}.`,
      advice: "They do not enter; if the value is known, put it into the file.",
      severity: "note",
    });
  }
  if (subjects !== undefined && subjects.count === 1) {
    findings.push({
      code: "one-subject",
      message: `There is only one ${subjects.name}.`,
      advice: `Means of conditions are compared across ${subjects.name}s: one alone tells nothing about others.`,
      severity: "error",
    });
  }
  if (data.rows === 0) {
    findings.push({
      code: "no-rows",
      message: "No row of the data fits the declared design.",
      advice: "See the other findings: levels, missing values or exclusions took every row.",
      severity: "error",
    });
  }
  return findings;
}

function foundWords(data: ModelData, factor: CodedFactor): string {
  const unit = unitOf(data, factor.unit) ?? subjectsOf(data);
  if (unit === undefined || data.rows === 0) return "no data";
  return levelsPerUnit(unit, factor).most > 1 ? `within ${unit.name}` : `between ${unit.name}`;
}

/** The design as found in the data against the design as declared. */
export function findDesign(layout: Layout, design: DesignDeclaration): FoundDesign {
  const { data } = layout;
  const subjects = subjectsOf(data);
  const unit: Pick<CodedUnit, "codes" | "count"> = subjects ?? {
    codes: Int32Array.from({ length: data.rows }, (_, row) => row),
    count: data.rows,
  };
  const distinctBy = (codes: Int32Array, groups: number) => {
    const seen = new Set<number>();
    const subjectsOfGroup = new Array<number>(groups).fill(0);
    const rowsOfGroup = new Array<number>(groups).fill(0);
    for (let row = 0; row < data.rows; row++) {
      rowsOfGroup[codes[row]!]!++;
      const key = unit.codes[row]! * groups + codes[row]!;
      if (seen.has(key)) continue;
      seen.add(key);
      subjectsOfGroup[codes[row]!]!++;
    }
    return { subjectsOfGroup, rowsOfGroup };
  };
  const byCell = distinctBy(data.cells, data.cellCount);
  const duplicates = duplicateRows(data, layout.sourceRows);
  const missing = missingWithinCells(data);
  return {
    subjects: unit.count,
    cells: data.cellCount,
    observations: data.rows,
    factors: data.factors.map((factor) => {
      const byLevel = distinctBy(factor.codes, factor.levels.length);
      return {
        name: factor.name,
        declared: `${factor.varies} ${factor.unit}`,
        found: foundWords(data, factor),
        levels: factor.levels.map((level, index) => ({
          level,
          subjects: byLevel.subjectsOfGroup[index]!,
          observations: byLevel.rowsOfGroup[index]!,
        })),
      };
    }),
    subjectsPerCell: Array.from({ length: data.cellCount }, (_, cell) => ({
      levels: cellLabels(data.factors, cell),
      subjects: byCell.subjectsOfGroup[cell]!,
      observations: byCell.rowsOfGroup[cell]!,
    })),
    missingCells: missing,
    duplicates: duplicates.extra,
    problems: [...factorFindings(layout), ...countFindings(layout, missing, duplicates, design)],
    choice: chooseModel(data, missing, duplicates.extra),
  };
}
