import type { Note } from "../results/index.ts";
import { headerNames, renamed, type Renaming } from "./build.ts";
import { ByteColumn } from "./byte-column.ts";
import { DataProblem } from "./problem.ts";
import { separatorNamed, separatorNames, separatorOf } from "./separators.ts";
import type { Table } from "./types.ts";

/*
 * Our own reader rather than a kept library: it reads decimals from their bytes into exact integers, keeps the source
 * line of every row for messages, and makes no text per value; libraries hand over texts or doubles.
 */

export interface DelimitedOptions {
  readonly separator: string | null;
  readonly decimal: "." | "," | null;
  readonly missing: ReadonlySet<string>;
  readonly renames: readonly Renaming[];
}

const quote = 34;
const newline = 10;
const blank = 32;
const carriageReturn = 13;

/** Bytes of a value with doubled quotes; they are put behind the file's own, single. */
class Unescaped {
  bytes: Uint8Array;
  #end: number;
  constructor(bytes: Uint8Array) {
    this.bytes = bytes;
    this.#end = bytes.length;
  }
  /** @returns where the value now begins and ends */
  put(from: number, to: number): readonly [number, number] {
    if (this.#end + (to - from) > this.bytes.length) {
      const next = new Uint8Array(Math.max(this.bytes.length * 1.25, this.#end + (to - from) + 1024));
      next.set(this.bytes.subarray(0, this.#end));
      this.bytes = next;
    }
    const start = this.#end;
    for (let position = from; position < to; position++) {
      this.bytes[this.#end++] = this.bytes[position]!;
      if (this.bytes[position] === quote) position++;
    }
    return [start, this.#end];
  }
}

/**
 * Cuts delimited text into records and gives each value's bytes to its column.
 * @param bytes UTF-8 without mark; lines end in LF or CR LF
 */
class Records {
  readonly #end: number;
  readonly #separator: number;
  readonly #store: Unescaped;
  #position: number;
  /** Line of the file, from 1. */
  #line: number;
  constructor(bytes: Uint8Array, start: { readonly position: number; readonly line: number }, separator: number) {
    this.#store = new Unescaped(bytes);
    this.#end = bytes.length;
    this.#separator = separator;
    this.#position = start.position;
    this.#line = start.line;
  }

  /** Names of the columns: the first record that is not blank. */
  header(): { readonly names: string[]; readonly line: number } | null {
    const decoder = new TextDecoder("utf-8");
    while (this.#position < this.#end) {
      const line = this.#line;
      const names: string[] = [];
      this.#record((start, end) => names.push(decoder.decode(this.#store.bytes.subarray(start, end)).trim()));
      if (names.length > 1 || names[0] !== "") return { names, line };
    }
    return null;
  }

  /** All further records into the columns; returns the line that each row came from. */
  rows(columns: readonly ByteColumn[]): Int32Array {
    const expected = columns.length;
    let lines = new Int32Array(1024);
    let rows = 0;
    let found = 0;
    const add = (start: number, end: number) => {
      if (found < expected) columns[found]!.add(start, end);
      found++;
    };
    while (this.#position < this.#end) {
      if (this.#skipBlankLine()) continue;
      const line = this.#line;
      found = 0;
      this.#record(add, columns);
      if (found !== expected) throw new DataProblem("ragged-row", { row: line, found, expected });
      if (rows === lines.length) {
        const next = new Int32Array(lines.length * 2);
        next.set(lines);
        lines = next;
      }
      lines[rows++] = line;
    }
    return lines.slice(0, rows);
  }

  #skipBlankLine(): boolean {
    const bytes = this.#store.bytes;
    let position = this.#position;
    while (position < this.#end && (bytes[position] === blank || bytes[position] === carriageReturn)) position++;
    if (position < this.#end && bytes[position] !== newline) return false;
    this.#position = position + 1;
    this.#line++;
    return true;
  }

  #record(add: (start: number, end: number) => void, columns: readonly ByteColumn[] = []): void {
    const end = this.#end;
    const separator = this.#separator;
    let bytes = this.#store.bytes;
    let position = this.#position;
    for (;;) {
      let start = position;
      while (start < end && bytes[start] === blank && separator !== blank) start++;
      if (start < end && bytes[start] === quote) {
        position = this.#quoted(start, add, columns);
        bytes = this.#store.bytes;
      } else {
        start = position;
        let code = 0;
        while (position < end) {
          code = bytes[position]!;
          if (code === separator || code === newline) break;
          position++;
        }
        add(start, position);
      }
      if (position < end && bytes[position] === separator) {
        position++;
        // A separator at the very end of the file still opens a value.
        if (position < end) continue;
        add(position, position);
      }
      break;
    }
    this.#position = position + 1;
    this.#line++;
  }

  /** @returns the position of the separator or line end behind the value */
  #quoted(open: number, add: (start: number, end: number) => void, columns: readonly ByteColumn[]): number {
    const bytes = this.#store.bytes;
    const first = this.#line;
    let doubled = false;
    let position = open + 1;
    for (; ; position++) {
      if (position >= this.#end) throw new DataProblem("open-quote", { row: first });
      const code = bytes[position]!;
      if (code === newline) this.#line++;
      if (code !== quote) continue;
      if (position + 1 < this.#end && bytes[position + 1] === quote) {
        doubled = true;
        position++;
      } else break;
    }
    if (doubled) {
      const [start, end] = this.#store.put(open + 1, position);
      for (const column of columns) column.moveTo(this.#store.bytes);
      add(start, end);
    } else add(open + 1, position);
    position++;
    while (position < this.#end && (bytes[position] === blank || bytes[position] === carriageReturn)) position++;
    if (position < this.#end && bytes[position] !== this.#separator && bytes[position] !== newline)
      throw new DataProblem("text-after-quote", { row: this.#line });
    return position;
  }
}

/** Old line ends, a carriage return alone, become new ones. */
function withNewlines(bytes: Uint8Array): Uint8Array {
  if (bytes.includes(newline) || !bytes.includes(carriageReturn)) return bytes;
  return bytes.map((code) => (code === carriageReturn ? newline : code));
}

/** A first line such as `sep=;`, which spreadsheets write for each other. */
function announcedSeparator(bytes: Uint8Array): { readonly separator: number; readonly length: number } | null {
  const found = /^sep=([,;\t|])\r?\n/i.exec(String.fromCharCode(...bytes.subarray(0, 8)));
  return found === null ? null : { separator: found[1]!.charCodeAt(0), length: found[0].length };
}

/**
 * Reads delimited text: a header, then a row a record.
 * @param given UTF-8 without mark
 * @throws DataProblem with the line of the file; nothing is half-loaded
 */
export function readDelimited(
  given: Uint8Array,
  options: DelimitedOptions,
): { readonly table: Table; readonly notes: readonly Note[] } {
  const bytes = withNewlines(given);
  const announced = announcedSeparator(bytes);
  const separator =
    options.separator === null ? (announced?.separator ?? separatorOf(bytes)) : separatorNamed(options.separator);
  const notes: Note[] = [];
  if (options.separator === null && separator !== 44)
    notes.push({ code: "separator-detected", facts: { separator: separatorNames[separator] ?? "sign" } });
  const start = announced === null ? { position: 0, line: 1 } : { position: announced.length, line: 2 };
  const records = new Records(bytes, start, separator);
  const first = records.header();
  if (first === null) throw new DataProblem("empty-file");
  const header = headerNames(first.names, first.line);
  const columns = header.map(() => new ByteColumn(bytes));
  const sourceRows = records.rows(columns);
  if (sourceRows.length === 0) throw new DataProblem("header-only");
  for (const column of columns) column.dropMissing(options.missing);
  const decimal = options.decimal ?? decimalOf(header, columns, separator, notes);
  const names = renamed(header, options.renames);
  return {
    table: {
      rows: sourceRows.length,
      sourceRows,
      columns: columns.map((column, index) => column.column(names[index]!, decimal, sourceRows)),
    },
    notes,
  };
}

/** Whether a column's commas are decimal signs: numbers without a point, and some comma that no thousands explain. */
function commaReading(column: ByteColumn): { readonly reading: "comma" | "unclear" | "no"; readonly example: string } {
  let example = "";
  let decisive = false;
  for (const text of column.textsWithComma()) {
    if (example === "") {
      example = text;
      if (!column.allNumbers(",")) return { reading: "no", example };
    }
    if (!/^[+-]?[1-9]\d{0,2},\d{3}$/.test(text)) {
      decisive = true;
      break;
    }
  }
  return { reading: example === "" ? "no" : decisive ? "comma" : "unclear", example };
}

function decimalOf(
  header: readonly string[],
  columns: readonly ByteColumn[],
  separator: number,
  notes: Note[],
): "." | "," {
  const readings = columns.map(commaReading);
  const withComma = header.filter((_, index) => readings[index]!.reading === "comma");
  if (withComma.length > 0) {
    // One file, one decimal sign: a column that needs the point leaves it open which of the two is right.
    const pointed = columns.findIndex(
      (column, index) => readings[index]!.reading === "no" && column.allNumbers(".") && !column.allNumbers(","),
    );
    if (pointed >= 0) throw new DataProblem("decimal-mixed", { column: withComma[0]!, other: header[pointed]! });
    notes.push({ code: "decimal-comma-detected", facts: { columns: withComma } });
    return ",";
  }
  const unclear = readings.findIndex(({ reading }) => reading === "unclear");
  if (unclear >= 0 && separator !== 44)
    throw new DataProblem("decimal-unclear", { column: header[unclear]!, value: readings[unclear]!.example });
  return ".";
}
