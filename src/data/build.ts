import { allNumbers, numberColumn, plainNumber } from "./numbers.ts";
import { DataProblem } from "./problem.ts";
import type { Column, Table, TextCodes } from "./types.ts";

/** Collects one column's texts as codes, so that a repeated text is kept once. */
export class ColumnBuilder {
  readonly #codes: number[] = [];
  readonly #places = new Map<string, number>();
  readonly #categories: string[] = [];
  readonly #missing: ReadonlySet<string>;
  constructor(missing: ReadonlySet<string>) {
    this.#missing = missing;
  }
  /** Takes a value; blank ends are not part of it. Null, an empty text and declared texts are missing. */
  add(value: string | null): void {
    const trimmed = value === null ? "" : value.trim();
    if (trimmed === "" || this.#missing.has(trimmed)) {
      this.#codes.push(-1);
      return;
    }
    let code = this.#places.get(trimmed);
    if (code === undefined) {
      code = this.#categories.length;
      this.#places.set(trimmed, code);
      this.#categories.push(trimmed);
    }
    this.#codes.push(code);
  }
  get texts(): TextCodes {
    return { codes: Int32Array.from(this.#codes), categories: this.#categories };
  }
}

/** A column from its texts: numeric when every value present is a number, otherwise text. */
export function columnFrom(name: string, texts: TextCodes): Column {
  const categories = texts.categories.map((text) => plainNumber(text, "."));
  if (categories.length > 0 && allNumbers(categories)) return numberColumn(name, texts);
  return { kind: "text", name, codes: texts.codes, categories: texts.categories };
}

/** Checks and trims the names of columns. */
export function headerNames(names: readonly (string | null)[], row: number | null): string[] {
  const header = names.map((name) => (name ?? "").trim());
  for (const [index, name] of header.entries()) {
    if (name === "") throw new DataProblem("empty-header", { position: index + 1, row });
    const first = header.indexOf(name);
    if (first !== index)
      throw new DataProblem("duplicate-header", { column: name, first: first + 1, second: index + 1, row });
  }
  return header;
}

export interface Renaming {
  readonly from: string;
  readonly to: string;
}

export function renamed(header: readonly string[], renames: readonly Renaming[]): string[] {
  const next = [...header];
  for (const { from, to } of renames) {
    const index = header.indexOf(from);
    if (index < 0) throw unknownColumn(from, header);
    if (next.some((name, other) => name === to && other !== index))
      throw new DataProblem("column-exists", { column: to });
    next[index] = to;
  }
  return next;
}

/** The name that was most likely meant; letter case and signs between words count for nothing. */
export function nearestName(name: string, names: readonly string[]): string | null {
  const plain = name.toLowerCase().replace(/[^\p{L}\p{N}]/gu, "");
  const score = (other: string): number => {
    const text = other.toLowerCase().replace(/[^\p{L}\p{N}]/gu, "");
    if (text === plain) return 0;
    // Edit distance in which two letters swapped are one slip; names are short, a few lines of the table are enough.
    let before: number[] = [];
    let line = Array.from({ length: text.length + 1 }, (_, index) => index);
    for (let row = 1; row <= plain.length; row++) {
      const next = [row];
      for (let column = 1; column <= text.length; column++) {
        const same = plain[row - 1] === text[column - 1];
        let least = Math.min(line[column]! + 1, next[column - 1]! + 1, line[column - 1]! + (same ? 0 : 1));
        const swapped = row > 1 && plain[row - 1] === text[column - 2] && plain[row - 2] === text[column - 1];
        if (swapped) least = Math.min(least, before[column - 2]! + 1);
        next[column] = least;
      }
      before = line;
      line = next;
    }
    return line[text.length]!;
  };
  const best = names.map((other) => ({ other, far: score(other) })).sort((left, right) => left.far - right.far)[0];
  return best !== undefined && best.far <= Math.max(1, Math.floor(name.length / 3)) ? best.other : null;
}

export function unknownColumn(name: string, names: readonly string[]): DataProblem {
  return new DataProblem("unknown-column", {
    column: name,
    nearest: nearestName(name, names),
    columns: names.slice(0, 20).join(", "),
  });
}

/** A table from its columns' builders. */
export function tableFrom(
  header: readonly string[],
  builders: readonly ColumnBuilder[],
  sourceRows: Int32Array,
): Table {
  return {
    rows: sourceRows.length,
    sourceRows,
    columns: header.map((name, index) => columnFrom(name, builders[index]!.texts)),
  };
}
