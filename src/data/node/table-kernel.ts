import { asNumbers, columnNamed, textCodes } from "../columns.ts";
import { readDelimited } from "../delimited.ts";
import { deriveColumn, excludeRows } from "../expression.ts";
import { exactPowers } from "../numbers.ts";
import { DataProblem } from "../problem.ts";
import type { Condition, Expression, NumberColumn, Table } from "../types.ts";
import { type ChunkAnswer, type KernelPlan, levelPlace, type SubjectAnswer } from "./chunk-kernel.ts";
import { ExactSums } from "./exact-sums.ts";
import { LabelTable } from "./label-table.ts";
import { lowestKept, SampleKeeper } from "./row-sample.ts";
import { SubjectSums } from "./subject-sums.ts";

export interface TablePlan {
  /** The header as it stands in the file, with its line end. */
  readonly header: Uint8Array;
  readonly separator: string;
  readonly decimal: "." | ",";
  readonly rename: readonly { readonly from: string; readonly to: string }[];
  readonly derive: readonly { readonly name: string; readonly expression: Expression }[];
  readonly exclude: readonly Condition[];
}

/** Derives columns and leaves rows out, as the statements do one after the other. */
export function steppedTable(
  given: Table,
  plan: Pick<TablePlan, "derive" | "exclude">,
): { readonly table: Table; readonly excluded: number[] } {
  let table = given;
  for (const { name, expression } of plan.derive) table = deriveColumn(table, name, expression);
  const excluded: number[] = [];
  for (const condition of plan.exclude) {
    const next = excludeRows(table, condition);
    excluded.push(next.excludedRows.length);
    table = next.table;
  }
  return { table, excluded };
}

/**
 * Reads parts of a file by way of the small tables that everything else works on, so that derived columns and
 * exclusions mean exactly what they mean there. Slower than `ChunkKernel`, which takes over where there are none.
 */
export class TableKernel {
  readonly #plan: KernelPlan;
  readonly #steps: TablePlan;
  readonly #missing: ReadonlySet<string>;
  readonly #cells: number;
  readonly #subjects = new LabelTable();
  readonly #subjectSums: SubjectSums | null;
  #subjectPlaces: number;

  constructor(plan: KernelPlan, steps: TablePlan) {
    this.#plan = plan;
    this.#steps = steps;
    this.#missing = new Set(plan.missing);
    this.#cells = plan.factors.reduce((product, factor) => product * factor.levels.length, 1);
    this.#subjectSums = plan.subject === null ? null : new SubjectSums(this.#cells);
    this.#subjectPlaces = plan.places;
  }

  subjects(): SubjectAnswer | null {
    if (this.#subjectSums === null) return null;
    const parts = this.#subjectSums.parts(this.#subjects.count);
    return { labels: this.#subjects.packed(), ...parts, places: this.#subjectPlaces };
  }

  read(bytes: Uint8Array, from: number, to: number, limit: number, offset: number): ChunkAnswer {
    const end = recordEnd(bytes, from, to, limit);
    const lines = countLines(bytes, from, end);
    try {
      return {
        ...this.#answer(bytes.subarray(from, end), offset + from),
        lines,
        begin: offset + from,
        end: offset + end,
      };
    } catch (error) {
      if (!(error instanceof DataProblem)) throw error;
      // The line of the header in front of the part is not one of the part's.
      const row = typeof error.facts.row === "number" ? { row: error.facts.row - 2 } : {};
      const problem = { code: error.code, facts: { ...error.facts, ...row } };
      return { ...this.#nothing(), lines, begin: offset + from, end: offset + end, problem };
    }
  }

  #nothing(): ChunkAnswer {
    const sums = new ExactSums(this.#cells);
    return {
      lines: 0,
      rows: 0,
      entered: 0,
      parts: [{ places: this.#plan.places, totals: sums.totals() }],
      rounded: false,
      excluded: this.#steps.exclude.map(() => 0),
      missingResponse: 0,
      missingColumn: [],
      undeclared: [],
      sample: lowestKept(new SampleKeeper(0, 0)),
      begin: 0,
      end: 0,
      problem: null,
    };
  }

  #answer(body: Uint8Array, offset: number): ChunkAnswer {
    if (body.every((code) => code <= 32)) return this.#nothing();
    const { header, separator, decimal, rename } = this.#steps;
    const bytes = new Uint8Array(header.length + body.length);
    bytes.set(header);
    bytes.set(body, header.length);
    const read = readDelimited(bytes, { separator, decimal, missing: this.#missing, renames: rename }).table;
    const { table, excluded } = steppedTable(read, this.#steps);
    const response = asNumbers(columnNamed(table, this.#plan.response), table.sourceRows);
    return { ...this.#nothing(), ...this.#summed(table, response, offset), rows: read.rows, excluded };
  }

  #summed(table: Table, response: NumberColumn, offset: number): Partial<ChunkAnswer> {
    const { factors, subject, center, sample, mostPlaces } = this.#plan;
    const places = Math.min(mostPlaces, Math.max(this.#plan.places, response.decimals ?? mostPlaces));
    const scale = exactPowers[places]!;
    this.#subjectAt(places);
    const subjectScale = exactPowers[this.#subjectPlaces - places]!;
    const sums = new ExactSums(this.#cells);
    const keeper = new SampleKeeper(sample.size, sample.seed);
    const missingColumn = new Array<number>(factors.length + 1).fill(0);
    const undeclared = new Map<string, { factor: number; level: string; rows: number; firstLine: number }>();
    const levelCodes = factors.map((factor) => {
      const texts = textCodes(columnNamed(table, factor.name));
      return { ...texts, places: texts.categories.map((text) => levelPlace(text, factor.levels, this.#missing)) };
    });
    const subjectOf = subject === null ? null : this.#subjectCodes(table, subject);
    const shift = response.center - center;
    let entered = 0;
    let missingResponse = 0;
    for (let row = 0; row < table.rows; row++) {
      const given = response.offsets[row]!;
      const hasResponse = !Number.isNaN(given);
      let cell = 0;
      let complete = true;
      for (let factor = 0; factor < levelCodes.length; factor++) {
        const { codes, categories, places: placeOf } = levelCodes[factor]!;
        const code = codes[row]!;
        const level = code < 0 ? -2 : placeOf[code]!;
        if (level >= 0) {
          cell = cell * factors[factor]!.levels.length + level;
          continue;
        }
        complete = false;
        if (level === -2) {
          if (hasResponse) missingColumn[factor]!++;
          continue;
        }
        const key = `${factor} ${categories[code]}`;
        const had = undeclared.get(key);
        if (had !== undefined) had.rows++;
        else undeclared.set(key, { factor, level: categories[code]!, rows: 1, firstLine: table.sourceRows[row]! - 2 });
      }
      if (!hasResponse) {
        missingResponse++;
        continue;
      }
      if (subjectOf !== null && subjectOf[row]! < 0) {
        missingColumn[factors.length]!++;
        continue;
      }
      if (!complete) continue;
      entered++;
      const value = Math.round((shift + given) * scale);
      if (Math.abs(value) < 4503599627370496) sums.add(cell, value);
      else sums.addBig(cell, BigInt(value));
      if (subjectOf !== null) this.#subjectSums!.add(subjectOf[row]!, cell, value * subjectScale, offset + row);
      keeper.offer(offset + row, cell, shift + given);
    }
    return {
      entered,
      missingResponse,
      missingColumn,
      rounded: (response.decimals ?? 0) > places,
      parts: [{ places, totals: sums.totals() }],
      undeclared: [...undeclared.values()],
      sample: lowestKept(keeper),
    };
  }

  #subjectAt(places: number): void {
    if (places <= this.#subjectPlaces) return;
    this.#subjectSums?.rescale(exactPowers[places - this.#subjectPlaces]!);
    this.#subjectPlaces = places;
  }

  #subjectCodes(table: Table, name: string): Int32Array {
    const { codes, categories } = textCodes(columnNamed(table, name));
    const encoder = new TextEncoder();
    const labels = categories.map((text) => {
      const bytes = encoder.encode(text);
      return this.#subjects.find(bytes, 0, bytes.length, LabelTable.hash(bytes, 0, bytes.length));
    });
    return codes.map((code) => (code < 0 ? -1 : labels[code]!));
  }
}

const quote = 34;
const newline = 10;

/** Where the record ends that begins last before `to`, quotes counted. */
function recordEnd(bytes: Uint8Array, from: number, to: number, limit: number): number {
  let quoted = false;
  let position = from;
  for (; position < limit; position++) {
    const code = bytes[position]!;
    if (code === quote) quoted = !quoted;
    else if (code === newline && !quoted && position + 1 >= to) return position + 1;
  }
  return from >= to ? from : position;
}

function countLines(bytes: Uint8Array, from: number, to: number): number {
  let lines = 0;
  for (let position = bytes.indexOf(newline, from); position >= 0 && position < to; ) {
    lines++;
    position = bytes.indexOf(newline, position + 1);
  }
  return lines;
}
