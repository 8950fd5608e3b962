import readExcelFile from "read-excel-file/universal";
import { ColumnBuilder, headerNames, renamed, type Renaming, tableFrom } from "./build.ts";
import { DataProblem } from "./problem.ts";
import type { Table } from "./types.ts";

interface Sheet {
  readonly sheet: string;
  readonly data: readonly (readonly unknown[])[];
}

/** A workbook holds doubles; the shortest decimal that gives the same double is what was typed. */
function cellText(value: unknown): string | null {
  if (value === null || value === undefined) return null;
  if (typeof value === "number") return Number.isFinite(value) ? String(value) : null;
  if (value instanceof Date) return value.toISOString().replace("T00:00:00.000Z", "");
  return String(value);
}

export async function readWorkbook(
  bytes: Uint8Array,
  options: {
    readonly sheet: string | null;
    readonly missing: ReadonlySet<string>;
    readonly renames: readonly Renaming[];
  },
): Promise<Table> {
  let sheets: readonly Sheet[];
  try {
    const buffer = bytes.slice().buffer;
    sheets = (await (readExcelFile as unknown as (input: ArrayBuffer) => Promise<readonly Sheet[]>)(
      buffer,
    )) as readonly Sheet[];
  } catch {
    throw new DataProblem("not-a-workbook");
  }
  const chosen = options.sheet === null ? sheets[0] : sheets.find((sheet) => sheet.sheet === options.sheet);
  if (chosen === undefined) {
    if (options.sheet === null) throw new DataProblem("empty-file");
    throw new DataProblem("unknown-sheet", {
      sheet: options.sheet,
      sheets: sheets.map((sheet) => sheet.sheet).join(", "),
    });
  }
  const filled = (row: readonly unknown[]) => row.some((cell) => cellText(cell)?.trim());
  const first = chosen.data.findIndex(filled);
  if (first < 0) throw new DataProblem("empty-file");
  const titles = chosen.data[first]!.map(cellText);
  while (titles.length > 0 && (titles.at(-1) ?? "").trim() === "") titles.pop();
  const header = headerNames(titles, first + 1);
  const builders = header.map(() => new ColumnBuilder(options.missing));
  const rows: number[] = [];
  for (const [index, row] of chosen.data.entries()) {
    if (index <= first || !filled(row)) continue;
    const beyond = row.findIndex((cell, column) => column >= header.length && (cellText(cell) ?? "").trim() !== "");
    if (beyond >= 0)
      throw new DataProblem("ragged-row", { row: index + 1, found: beyond + 1, expected: header.length });
    for (const [column, builder] of builders.entries()) builder.add(cellText(row[column]));
    rows.push(index + 1);
  }
  if (rows.length === 0) throw new DataProblem("header-only");
  return tableFrom(renamed(header, options.renames), builders, Int32Array.from(rows));
}
