import type { Note } from "../results/index.ts";
import { ColumnBuilder, headerNames, type Renaming, tableFrom } from "./build.ts";
import { isNumberText } from "./decimal.ts";
import { readDelimited } from "./delimited.ts";
import { utf8Bytes } from "./encoding.ts";
import { readJson } from "./json.ts";
import { readParquet } from "./parquet.ts";
import { DataProblem, usualMissingTexts } from "./problem.ts";
import type { Table } from "./types.ts";
import { readWorkbook } from "./workbook.ts";

export interface ReadOptions {
  readonly format: "csv" | "tsv" | "xlsx" | "json" | "parquet";
  readonly sheet?: string;
  /** Texts that stand for nothing, beside the empty value. */
  readonly missing?: readonly string[];
  readonly rename?: readonly Renaming[];
  readonly separator?: string;
  readonly decimal?: "." | ",";
}

/** Says where a text that people write for "nothing" keeps a column of numbers from being one. */
function missingHints(table: Table): Note[] {
  return table.columns.flatMap((column): Note[] => {
    if (column.kind === "number")
      return column.decimals === null ? [{ code: "beyond-exact-decimals", facts: { column: column.name } }] : [];
    const strange = column.categories.filter((text) => !isNumberText(text));
    const numbers = column.categories.length - strange.length;
    if (
      numbers < 2 ||
      strange.length === 0 ||
      strange.length > 3 ||
      !strange.every((text) => usualMissingTexts.includes(text))
    )
      return [];
    return [{ code: "perhaps-missing", facts: { column: column.name, texts: strange } }];
  });
}

/**
 * Reads a data file from its bytes, numbers exactly as the decimals they are.
 * @throws DataProblem with row and column; nothing is half-loaded
 */
export async function readTable(
  bytes: Uint8Array,
  options: ReadOptions,
): Promise<{ readonly table: Table; readonly notes: readonly Note[] }> {
  if (bytes.length === 0) throw new DataProblem("empty-file");
  const missing = new Set(options.missing ?? []);
  const renames = options.rename ?? [];
  const notes: Note[] = [];
  let table: Table;
  switch (options.format) {
    case "xlsx":
      table = await readWorkbook(bytes, { sheet: options.sheet ?? null, missing, renames });
      break;
    case "parquet":
      table = await readParquet(bytes, { missing, renames });
      break;
    case "json": {
      const decoded = utf8Bytes(bytes);
      notes.push(...decoded.notes);
      table = readJson(new TextDecoder().decode(decoded.bytes), { missing, renames });
      break;
    }
    case "csv":
    case "tsv": {
      const decoded = utf8Bytes(bytes);
      notes.push(...decoded.notes);
      const separator = options.separator ?? (options.format === "tsv" ? "\t" : null);
      const found = readDelimited(decoded.bytes, { separator, decimal: options.decimal ?? null, missing, renames });
      notes.push(...found.notes);
      table = found.table;
      break;
    }
  }
  return { table, notes: [...notes, ...missingHints(table)] };
}

/**
 * A table from rows typed into a cell; the first names the columns.
 * @throws DataProblem "ragged-row", "empty-header", "duplicate-header", "header-only"
 */
export function typedTable(rows: readonly (readonly string[])[]): Table {
  if (rows.length === 0) throw new DataProblem("empty-file");
  const header = headerNames(rows[0]!, 1);
  if (rows.length === 1) throw new DataProblem("header-only");
  const builders = header.map(() => new ColumnBuilder(new Set()));
  for (const [index, row] of rows.slice(1).entries()) {
    if (row.length !== header.length)
      throw new DataProblem("ragged-row", { row: index + 2, found: row.length, expected: header.length });
    for (const [column, builder] of builders.entries()) builder.add(row[column]!);
  }
  return tableFrom(
    header,
    builders,
    Int32Array.from({ length: rows.length - 1 }, (_, index) => index + 2),
  );
}
