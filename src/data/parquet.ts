import { parquetMetadataAsync, parquetReadObjects, parquetSchema } from "hyparquet";
import { ColumnBuilder, headerNames, renamed, type Renaming, tableFrom } from "./build.ts";
import { DataProblem } from "./problem.ts";
import type { Table } from "./types.ts";

function cellText(value: unknown): string | null {
  if (value === null || value === undefined) return null;
  if (typeof value === "number") return Number.isFinite(value) ? String(value) : null;
  if (value instanceof Date) return value.toISOString();
  if (typeof value === "object") throw new DataProblem("not-parquet", { why: "a column holds lists or records" });
  return String(value);
}

/** Decimal columns come as scaled doubles; rounding to their declared places gives the decimal back up to 15 digits. */
export async function readParquet(
  bytes: Uint8Array,
  options: { readonly missing: ReadonlySet<string>; readonly renames: readonly Renaming[] },
): Promise<Table> {
  const file = bytes.slice().buffer;
  let rows: readonly Record<string, unknown>[];
  let names: string[];
  let places: Map<string, number>;
  try {
    const metadata = await parquetMetadataAsync({
      byteLength: file.byteLength,
      slice: (start: number, end?: number) => file.slice(start, end),
    });
    const schema = parquetSchema(metadata);
    names = schema.children.map((child) => child.element.name);
    places = new Map(
      schema.children.flatMap((child) =>
        child.element.converted_type === "DECIMAL" ? [[child.element.name, child.element.scale ?? 0] as const] : [],
      ),
    );
    rows = (await parquetReadObjects({ file, metadata })) as Record<string, unknown>[];
  } catch (error) {
    throw new DataProblem("not-parquet", {
      why: error instanceof Error ? error.message.split("\n")[0]! : "unknown reason",
    });
  }
  if (rows.length === 0) throw new DataProblem("header-only");
  const header = headerNames(names, null);
  const builders = header.map(() => new ColumnBuilder(options.missing));
  for (const row of rows) {
    for (const [index, name] of header.entries()) {
      const value = row[name];
      const scale = places.get(name);
      builders[index]!.add(scale !== undefined && typeof value === "number" ? value.toFixed(scale) : cellText(value));
    }
  }
  return tableFrom(
    renamed(header, options.renames),
    builders,
    Int32Array.from({ length: rows.length }, (_, index) => index + 1),
  );
}
