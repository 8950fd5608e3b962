import { ColumnBuilder, columnFrom, unknownColumn } from "./build.ts";
import { asNumbers, columnNamed, rowsOf, textCodes } from "./columns.ts";
import { computedColumn } from "./numbers.ts";
import { DataProblem } from "./problem.ts";
import type { Column, NumberColumn, Table, TextCodes } from "./types.ts";

/**
 * Wide columns to one row each: `fold bare, nitrile into seconds by glove`.
 * Rows come subject by subject, columns in the order named. Numbers keep their exact decimals.
 */
export function foldTable(
  table: Table,
  question: { readonly columns: readonly string[]; readonly response: string; readonly factor: string },
): Table {
  const { columns, response, factor } = question;
  if (columns.length < 2) throw new DataProblem("nothing-to-fold");
  const folded = columns.map((name) => columnNamed(table, name));
  const rest = table.columns.filter((column) => !columns.includes(column.name));
  for (const name of [response, factor])
    if (rest.some((column) => column.name === name)) throw new DataProblem("column-exists", { column: name });
  if (response === factor) throw new DataProblem("column-exists", { column: factor });
  const width = columns.length;
  const rows = new Int32Array(table.rows * width).map((_, index) => Math.floor(index / width));
  const long = rowsOf({ ...table, columns: rest }, rows);
  const builder = new ColumnBuilder(new Set());
  const texts = folded.map(textCodes);
  for (let row = 0; row < table.rows; row++) {
    for (const part of texts) builder.add(part.codes[row]! < 0 ? null : part.categories[part.codes[row]!]!);
  }
  const names: TextCodes = { codes: rows.map((_, index) => index % width), categories: columns };
  return { ...long, columns: [...long.columns, columnFrom(factor, names), columnFrom(response, builder.texts)] };
}

export interface AverageQuestion {
  readonly response: string;
  /** Columns averaged over; they are gone afterwards. */
  readonly over: readonly string[];
  /** Columns that stay and tell the rows apart. */
  readonly keep: readonly string[];
  readonly by: "mean" | "median";
}

/**
 * One row per combination of the kept columns, with the mean (or median) of the response over the rows that have one.
 * @returns the table, and how many rows went into each of its rows: the least and the most
 */
export function averageTable(
  table: Table,
  question: AverageQuestion,
): { readonly table: Table; readonly least: number; readonly most: number } {
  const response = asNumbers(columnNamed(table, question.response), table.sourceRows);
  for (const name of question.over)
    if (!table.columns.some((column) => column.name === name))
      throw unknownColumn(
        name,
        table.columns.map((column) => column.name),
      );
  const kept = question.keep
    .filter((name) => name !== question.response && !question.over.includes(name))
    .map((name) => columnNamed(table, name));
  const texts = kept.map(textCodes);
  const groups = new Map<number | string, number>();
  const first: number[] = [];
  const members: number[][] = [];
  // Codes of several columns make one number where their product is exact, otherwise a text.
  const product = texts.reduce((size, part) => size * (part.categories.length + 1), 1);
  const keyOf = Number.isSafeInteger(product)
    ? (row: number): number => {
        let key = 0;
        for (const part of texts) key = key * (part.categories.length + 1) + part.codes[row]! + 1;
        return key;
      }
    : (row: number): string => texts.map((part) => part.codes[row]).join(" ");
  for (let row = 0; row < table.rows; row++) {
    const key = keyOf(row);
    let group = groups.get(key);
    if (group === undefined) {
      group = first.length;
      groups.set(key, group);
      first.push(row);
      members.push([]);
    }
    if (!Number.isNaN(response.offsets[row]!)) members[group]!.push(response.offsets[row]!);
  }
  const averages = Float64Array.from(members, (values) =>
    values.length === 0 ? Number.NaN : question.by === "median" ? medianOf(values) : meanOf(values),
  );
  const base = rowsOf({ ...table, columns: kept }, Int32Array.from(first));
  // Offsets from the exact centre are averaged, so that a large constant part costs no digits.
  const averaged: NumberColumn = { ...computedColumn(response.name, averages), center: response.center };
  const columns: readonly Column[] = [...base.columns, averaged];
  let least = members.length === 0 ? 0 : Number.POSITIVE_INFINITY;
  let most = 0;
  for (const { length } of members) {
    if (length < least) least = length;
    if (length > most) most = length;
  }
  return { table: { ...base, columns }, least, most };
}

function meanOf(values: readonly number[]): number {
  let sum = 0;
  let lost = 0;
  for (const value of values) {
    const next = sum + value;
    lost += Math.abs(sum) >= Math.abs(value) ? sum - next + value : value - next + sum;
    sum = next;
  }
  return (sum + lost) / values.length;
}

function medianOf(values: readonly number[]): number {
  const sorted = Float64Array.from(values).sort();
  const middle = sorted.length >> 1;
  return sorted.length % 2 === 1 ? sorted[middle]! : (sorted[middle - 1]! + sorted[middle]!) / 2;
}
