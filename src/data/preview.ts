import type { TableFacts } from "../results/index.ts";
import { textCodes } from "./columns.ts";
import { nearestValues } from "./numbers.ts";
import type { Table } from "./types.ts";

/** The first rows as a table of words. */
export function previewTable(table: Table, count: number): TableFacts {
  const texts = table.columns.map((column) => {
    if (column.kind === "number" && column.texts === null) {
      const valueAt = nearestValues(column);
      return (row: number) => (Number.isNaN(column.offsets[row]!) ? null : valueAt(row));
    }
    const { codes, categories } = textCodes(column);
    return (row: number) => (codes[row]! < 0 ? null : categories[codes[row]!]!);
  });
  const shown = Math.min(count, table.rows);
  return {
    title: "Data",
    columns: table.columns.map((column) => ({ name: column.name, type: column.kind === "number" ? "number" : "text" })),
    rows: Array.from({ length: shown }, (_, row) => texts.map((text) => text(row))),
    moreRows: table.rows - shown,
  };
}

/** Bytes that stand for a table's content, for a digest: names and values, tab and line separated. */
export function tableDigest(table: Table): Uint8Array {
  const preview = previewTable(table, table.rows);
  const lines = [
    preview.columns.map((column) => column.name).join("\t"),
    ...preview.rows.map((row) => row.map((value) => (value === null ? "" : String(value))).join("\t")),
  ];
  return new TextEncoder().encode(lines.join("\n"));
}
