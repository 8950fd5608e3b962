import fc from "fast-check";
import { parquetWriteBuffer } from "hyparquet-writer";
import { describe, expect, it } from "vitest";
import { DataProblem, type ReadOptions, readTable } from "../../src/data/index.ts";

const utf8 = (text: string) => new TextEncoder().encode(text);
const rows = Array.from({ length: 12 }, (_, row) => [
  `p${row % 4}`,
  ["bare", "knit"][row % 2]!,
  (40 + row / 7).toFixed(2),
]);

const files: readonly { readonly format: ReadOptions["format"]; readonly bytes: Uint8Array }[] = [
  { format: "csv", bytes: utf8(`op,glove,s\r\n${rows.map((row) => row.join(",")).join("\r\n")}\r\n`) },
  {
    format: "csv",
    bytes: utf8(
      `op;"gl""ove";s\n${rows.map((row) => `"${row[0]}";${row[1]};${row[2]!.replace(".", ",")}`).join("\n")}`,
    ),
  },
  {
    format: "csv",
    bytes: Uint8Array.from(
      `\ufeffop\ts\n${rows.map((row) => `\u00e9${row[0]}\t${row[2]}e-3`).join("\n")}`,
      (sign) => sign.charCodeAt(0) & 255,
    ),
  },
  { format: "json", bytes: utf8(JSON.stringify(rows.map(([op, glove, s]) => ({ op, glove, s: Number(s) })))) },
  {
    format: "json",
    bytes: utf8(JSON.stringify({ op: rows.map((row) => row[0]), s: rows.map((row) => Number(row[2])) })),
  },
  {
    format: "parquet",
    bytes: new Uint8Array(
      parquetWriteBuffer({
        columnData: [
          { name: "op", data: rows.map((row) => row[0]!), type: "STRING" },
          { name: "s", data: rows.map((row) => Number(row[2])), type: "DOUBLE" },
        ],
      }),
    ),
  },
];

const telling = [34, 44, 59, 10, 13, 9, 0, 255, 46, 45, 101, 123, 125, 91, 93, 92, 48];
const mutation = fc.record({
  file: fc.integer({ min: 0, max: files.length - 1 }),
  edits: fc.array(
    fc.record({
      kind: fc.constantFrom("replace", "insert", "delete", "cut", "double"),
      at: fc.double({ min: 0, max: 1, noNaN: true, maxExcluded: true }),
      code: fc.oneof(fc.constantFrom(...telling), fc.integer({ min: 0, max: 255 })),
      length: fc.integer({ min: 1, max: 20 }),
    }),
    { minLength: 1, maxLength: 6 },
  ),
});

describe("mutated files", () => {
  it("end in a whole table or in a problem, never in anything else", async () => {
    let tables = 0;
    let problems = 0;
    await fc.assert(
      fc.asyncProperty(mutation, async ({ file, edits }) => {
        const { format, bytes } = files[file]!;
        let mutated = [...bytes];
        for (const { kind, at, code, length } of edits) {
          const place = Math.floor(at * mutated.length);
          if (kind === "replace") mutated[place] = code;
          else if (kind === "insert") mutated.splice(place, 0, code);
          else if (kind === "delete") mutated.splice(place, length);
          else if (kind === "double") mutated.splice(place, 0, ...mutated.slice(place, place + length));
          else mutated = mutated.slice(0, place);
        }
        try {
          const { table } = await readTable(Uint8Array.from(mutated), { format });
          tables++;
          for (const column of table.columns) {
            const length = column.kind === "text" ? column.codes.length : column.offsets.length;
            expect(length).toBe(table.rows);
            if (column.kind === "text") {
              for (const code of column.codes) expect(code).toBeLessThan(column.categories.length);
            } else for (const value of column.offsets) expect(Math.abs(value)).not.toBe(Number.POSITIVE_INFINITY);
          }
        } catch (error) {
          if (!(error instanceof DataProblem)) throw error;
          expect(error.advice).not.toMatch(/undefined/);
          expect(error.message).not.toMatch(/undefined|\[object/);
          problems++;
        }
      }),
      { numRuns: 6000 },
    );
    expect(tables).toBeGreaterThan(500);
    expect(problems).toBeGreaterThan(500);
  });
});
