import { parquetWriteBuffer } from "hyparquet-writer";
import { previewTable } from "../data/index.ts";
import { tablesOf } from "../present/index.ts";
import type { Result } from "../results/index.ts";
import { needData } from "./analysis/layout.ts";
import type { Study } from "./study.ts";

type Cell = string | number | boolean | null;

interface PlainTable {
  readonly columns: readonly { readonly name: string; readonly numeric: boolean }[];
  readonly rows: readonly (readonly Cell[])[];
}

/** A spreadsheet takes a text that begins like this for a formula; a leading apostrophe keeps it text. */
const formulaStart = /^[=+\-@\t\r]/;

function csvCell(value: Cell): string {
  if (value === null) return "";
  const text = String(value);
  const safe = typeof value === "string" && formulaStart.test(text) && Number.isNaN(Number(text)) ? `'${text}` : text;
  return /[",\n\r]/.test(safe) ? `"${safe.replace(/"/g, '""')}"` : safe;
}

function parquetBytes(table: PlainTable): Uint8Array {
  const columnData = table.columns.map((column, index) => ({
    name: column.name,
    type: column.numeric ? ("DOUBLE" as const) : ("STRING" as const),
    nullable: true,
    data: table.rows.map((row) => {
      const value = row[index] ?? null;
      return value === null ? null : column.numeric ? Number(value) : String(value);
    }),
  }));
  return new Uint8Array(parquetWriteBuffer({ columnData }));
}

function heldTable(study: Study): PlainTable {
  const held = needData(study);
  const whole = previewTable(held.table, held.table.rows);
  return {
    columns: whole.columns.map((column) => ({ name: column.name, numeric: column.type === "number" })),
    rows: whole.rows,
  };
}

/** The held data as they enter analyses: after renaming, folding, exclusions. Null for a format they have not. */
export async function exportData(study: Study, format: string): Promise<Uint8Array | null> {
  const table = heldTable(study);
  if (format === "parquet") return parquetBytes(table);
  if (format === "csv") {
    const lines = [table.columns.map((column) => csvCell(column.name)), ...table.rows.map((row) => row.map(csvCell))];
    return new TextEncoder().encode(`${lines.map((line) => line.join(",")).join("\r\n")}\r\n`);
  }
  if (format === "json") {
    const rows = table.rows.map((row) =>
      Object.fromEntries(
        table.columns.map((column, index) => [
          column.name,
          row[index] === null ? null : column.numeric ? Number(row[index]) : row[index],
        ]),
      ),
    );
    return new TextEncoder().encode(`${JSON.stringify(rows, null, 1)}\n`);
  }
  return null;
}

/** The first table of a result, unrounded, as Parquet. */
export async function resultToParquet(result: Result): Promise<Uint8Array | null> {
  const [table] = tablesOf(result);
  if (table === undefined) return null;
  return parquetBytes({
    columns: table.fields.map((field) => ({ name: field.name, numeric: field.type === "number" })),
    rows: table.values,
  });
}
