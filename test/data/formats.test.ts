import { mkdtempSync, readFileSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { DuckDBConnection } from "@duckdb/node-api";
import { type ColumnSource, parquetWriteBuffer } from "hyparquet-writer";
import { describe, expect, it } from "vitest";
import writeExcelFile from "write-excel-file/universal";
import { columnNamed, numberValue, readTable } from "../../src/data/index.ts";
import type { NumberColumn } from "../../src/data/types.ts";
import { isNearest, minus, ofDouble, ofText } from "./exact-fractions.ts";
import { problemOf, textsOf } from "./table-texts.ts";

const utf8 = (text: string) => new TextEncoder().encode(text);

function expectExact(column: NumberColumn, texts: readonly string[]): void {
  for (const [row, text] of texts.entries())
    expect(isNearest(column.offsets[row]!, minus(ofText(text), ofDouble(column.center)))).toBe(true);
}

describe("JSON", () => {
  const numbers = ["1000000000000.4", "1000000000000.3", "1000000000000.45"];
  it("keeps the decimals of a list of objects: no number goes through a double", async () => {
    const text = `[${numbers.map((value, index) => `{"id": "p${index}", "x": ${value}}`).join(",\n")}]`;
    const { table } = await readTable(utf8(text), { format: "json" });
    expectExact(columnNamed(table, "x") as NumberColumn, numbers);
    expect(textsOf(table).map((row) => row[0])).toEqual(["p0", "p1", "p2"]);
  });
  it("keeps those of an object of lists, and 38-digit integers", async () => {
    const long = ["12345678901234567890123456789012345678", "12345678901234567890123456789012345999"];
    const { table } = await readTable(utf8(`{"x": [${long.join(", ")}], "b": [true, null]}`), { format: "json" });
    expectExact(columnNamed(table, "x") as NumberColumn, long);
    expect(textsOf(table).map((row) => row[1])).toEqual(["true", null]);
  });
  it("fills fields that an object lacks with missing", async () => {
    const { table } = await readTable(utf8('[{"a": 1}, {"b": "x\\u00e9"}]'), { format: "json" });
    expect(textsOf(table)).toEqual([
      ["1", null],
      [null, "x\u00e9"],
    ]);
  });
  it.each([
    ['[{"a": 1} {"b": 2}]', "not-json", /line 1/],
    ['[{"a": 01}]', "not-json", /line 1/],
    ['[\n{"a": 1},\n{"a": }]', "not-json", /line 3/],
    ['[{"a": [1]}]', "json-shape", /"a" in row 1/],
    ['{"a": [1, 2], "b": [1]}', "json-shape", /"b" has 1 values/],
    ["[]", "empty-file", /./],
    ["  ", "empty-file", /./],
  ])("refuses %s", async (text, code, message) => {
    const problem = await problemOf(() => readTable(utf8(text), { format: "json" }));
    expect(problem.code).toBe(code);
    expect(problem.message).toMatch(message);
  });
});

describe("workbooks", () => {
  const cell = (value: string | number | null) => (value === null ? null : { value });
  const workbook = async (sheets: Record<string, readonly (readonly (string | number | null)[])[]>) => {
    const names = Object.keys(sheets);
    const made = writeExcelFile(
      names.map((sheet) => ({ sheet, data: sheets[sheet]!.map((row) => row.map(cell)) })) as never,
    ) as unknown as { toBlob(): Promise<Blob> };
    return new Uint8Array(await (await made.toBlob()).arrayBuffer());
  };
  it("takes the shortest decimal of the doubles that a workbook holds, and the sheet that was named", async () => {
    const bytes = await workbook({
      Notes: [["a"], ["b"]],
      Trials: [
        ["glove", "seconds"],
        ["bare", 0.1],
        ["knit", 1000000000000.4],
        ["leather", null],
      ],
    });
    const { table } = await readTable(bytes, { format: "xlsx", sheet: "Trials" });
    expect(textsOf(table)).toEqual([
      ["bare", "0.1"],
      ["knit", "1000000000000.4"],
      ["leather", null],
    ]);
    expect(columnNamed(table, "seconds").kind).toBe("number");
    const problem = await problemOf(() => readTable(bytes, { format: "xlsx", sheet: "Trial" }));
    expect(problem).toMatchObject({ code: "unknown-sheet", advice: "Its sheets: Notes, Trials." });
  });
  it("names the row of a value outside the named columns", async () => {
    const bytes = await workbook({
      A: [
        ["a", "b"],
        [1, 2],
        [3, 4, 5],
      ],
    });
    expect(await problemOf(() => readTable(bytes, { format: "xlsx" }))).toMatchObject({ code: "ragged-row", row: 3 });
  });
});

describe("Parquet", () => {
  const read = (columnData: ColumnSource[], extra: object = {}) =>
    readTable(new Uint8Array(parquetWriteBuffer({ columnData, ...extra })), { format: "parquet" });
  it("reads texts, doubles, 64-bit integers and nothing", async () => {
    const { table } = await read([
      { name: "glove", data: ["bare", "knit", null], type: "STRING", nullable: true },
      { name: "seconds", data: [0.1, 41.25, Number.NaN], type: "DOUBLE" },
      { name: "nanoseconds", data: [9007199254740993n, 9007199254740995n, -1n], type: "INT64" },
    ]);
    expect(textsOf(table)).toEqual([
      ["bare", "0.1", "9007199254740993"],
      ["knit", "41.25", "9007199254740995"],
      [null, null, "-1"],
    ]);
    expectExact(columnNamed(table, "nanoseconds") as NumberColumn, ["9007199254740993", "9007199254740995", "-1"]);
  });
  it("reads decimals exactly, also those of 38 digits (written by DuckDB)", async () => {
    const folder = mkdtempSync(join(tmpdir(), "meanwise-data-"));
    try {
      const path = join(folder, "decimals.parquet");
      const connection = await DuckDBConnection.create();
      await connection.run(`COPY (SELECT * FROM (VALUES
        (41.25::DECIMAL(9,2), 1000000000000.4::DECIMAL(18,1), 1234567890123456.78901234567890123456::DECIMAL(38,20)),
        (-0.03::DECIMAL(9,2), NULL, -0.00000000000000000005::DECIMAL(38,20))) v(small, middle, large))
        TO '${path}' (FORMAT parquet)`);
      connection.closeSync();
      const { table } = await readTable(new Uint8Array(readFileSync(path)), { format: "parquet" });
      expect(textsOf(table)).toEqual([
        ["41.25", "1000000000000.4", "1234567890123456.78901234567890123456"],
        ["-0.03", null, "-0.00000000000000000005"],
      ]);
    } finally {
      rmSync(folder, { recursive: true, force: true });
    }
  });
  it("reads four-byte floats as the decimals that they stand for", async () => {
    const { table } = await read([
      { name: "x", data: [Math.fround(0.1), Math.fround(16777216.5), 2.5], type: "FLOAT" },
    ]);
    expect([0, 1, 2].map((row) => numberValue(table.columns[0] as NumberColumn, row))).toEqual([0.1, 16777216, 2.5]);
  });
});
