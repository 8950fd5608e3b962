import { gunzipSync } from "fflate";
import { type FileMetaData, parquetMetadataAsync, parquetReadObjects, parquetSchema } from "hyparquet";
import { ColumnBuilder, headerNames, renamed, type Renaming, tableFrom } from "./build.ts";
import { decimalText } from "./decimal.ts";
import { DataProblem } from "./problem.ts";
import type { Table } from "./types.ts";

/** A float of four bytes: the shortest decimal that gives the same float. */
function shortestOfSingle(value: number): string {
  for (let digits = 6; digits < 9; digits++) {
    const text = value.toPrecision(digits);
    if (Math.fround(Number(text)) === value) return String(Number(text));
  }
  return String(value);
}

function integerOf(bytes: Uint8Array): bigint {
  let value = 0n;
  for (const byte of bytes) value = (value << 8n) | BigInt(byte);
  return bytes.length > 0 && bytes[0]! > 127 ? value - (1n << BigInt(8 * bytes.length)) : value;
}

function decimalCell(value: unknown, places: number): string {
  if (!(value instanceof Uint8Array) && typeof value !== "number" && typeof value !== "bigint")
    throw new DataProblem("not-parquet", { why: "a decimal column is stored in an unusual way" });
  const digits = value instanceof Uint8Array ? integerOf(value) : BigInt(value);
  return decimalText({ digits, places });
}

function cellText(value: unknown, single: boolean): string | null {
  if (value === null || value === undefined) return null;
  if (typeof value === "number") {
    if (Number.isNaN(value)) return null;
    return single && Number.isFinite(value) ? shortestOfSingle(value) : String(value);
  }
  if (value instanceof Date) return value.toISOString().replace("T00:00:00.000Z", "");
  if (typeof value === "object")
    throw new DataProblem("not-parquet", { why: "a column holds lists, records or bytes" });
  return String(value);
}

/**
 * The metadata with decimal columns as the integers that they are stored as: the library would divide them into doubles.
 * @returns decimal places by column
 */
function withoutDecimals(metadata: FileMetaData): {
  readonly metadata: FileMetaData;
  readonly places: Map<string, number>;
} {
  const places = new Map<string, number>();
  const schema = metadata.schema.map((element) => {
    const decimal = element.converted_type === "DECIMAL" || element.logical_type?.type === "DECIMAL";
    if (!decimal) return element;
    const logical = element.logical_type?.type === "DECIMAL" ? element.logical_type.scale : undefined;
    places.set(element.name, element.scale ?? logical ?? 0);
    const { converted_type: _converted, logical_type: _logical, ...rest } = element;
    return rest as typeof element;
  });
  return { metadata: { ...metadata, schema }, places };
}

/** Reads a Parquet file: decimals and integers exactly, doubles as their shortest decimals. */
export async function readParquet(
  bytes: Uint8Array,
  options: { readonly missing: ReadonlySet<string>; readonly renames: readonly Renaming[] },
): Promise<Table> {
  const file = bytes.slice().buffer;
  let rows: readonly Record<string, unknown>[];
  let names: string[];
  let places: Map<string, number>;
  let singles: Set<string>;
  try {
    const found = await parquetMetadataAsync({
      byteLength: file.byteLength,
      slice: (start: number, end?: number) => file.slice(start, end),
    });
    const schema = parquetSchema(found);
    names = schema.children.map((child) => child.element.name);
    singles = new Set(schema.children.flatMap(({ element }) => (element.type === "FLOAT" ? [element.name] : [])));
    const plain = withoutDecimals(found);
    places = plain.places;
    rows = (await parquetReadObjects({
      file,
      metadata: plain.metadata,
      compressors: { GZIP: (input: Uint8Array) => gunzipSync(input) },
      utf8: true,
    })) as Record<string, unknown>[];
  } catch (error) {
    const why = error instanceof Error ? error.message.split("\n")[0]! : "unknown reason";
    const codec = /unsupported compression codec: (\w+)/.exec(why)?.[1];
    if (codec !== undefined) throw new DataProblem("parquet-codec", { codec });
    throw new DataProblem("not-parquet", { why: "its parts do not fit together" });
  }
  if (rows.length === 0) throw new DataProblem("header-only");
  const header = headerNames(names, null);
  const builders = header.map(() => new ColumnBuilder(options.missing));
  for (const row of rows) {
    for (const [index, name] of header.entries()) {
      const value = row[name];
      const scale = places.get(name);
      const present = value !== null && value !== undefined;
      builders[index]!.add(
        scale !== undefined && present ? decimalCell(value, scale) : cellText(value, singles.has(name)),
      );
    }
  }
  return tableFrom(
    renamed(header, options.renames),
    builders,
    Int32Array.from({ length: rows.length }, (_, index) => index + 1),
  );
}
