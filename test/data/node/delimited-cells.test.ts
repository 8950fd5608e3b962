import { mkdtempSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { build } from "esbuild";
import fc from "fast-check";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { Interrupted, silentWatch } from "../../../src/host/index.ts";
import { averageTable, columnNamed, numberValue, readTable, textCodes } from "../../../src/data/index.ts";
import {
  aggregateCells,
  type CellAnswer,
  fileDigest,
  type FileQuestion,
  subjectTable,
} from "../../../src/data/node/index.ts";
import type { Condition, Expression, NumberColumn, Table } from "../../../src/data/types.ts";
import { problemOf } from "../table-texts.ts";
import { expectSame, factors, header, rowsOf, smallPath, type Writer } from "./small-path.ts";

let folder = "";
let workerFile = "";
beforeAll(async () => {
  folder = mkdtempSync(join(tmpdir(), "meanwise-bulk-"));
  workerFile = join(folder, "chunk-worker.mjs");
  await build({
    entryPoints: [new URL("../../../src/data/node/chunk-worker.ts", import.meta.url).pathname],
    bundle: true,
    platform: "node",
    target: "node20",
    format: "esm",
    outfile: workerFile,
    logLevel: "error",
  });
});
afterAll(() => rmSync(folder, { recursive: true, force: true }));

let files = 0;
function saved(text: string | Uint8Array): string {
  const path = join(folder, `file-${files++}.csv`);
  writeFileSync(path, text);
  return path;
}
const ask = (path: string, more: Partial<FileQuestion> = {}) =>
  aggregateCells(
    {
      path,
      format: "csv",
      response: "seconds",
      factors,
      subject: "operator",
      threads: 0,
      sample: { size: 50, seed: 3 },
      ...more,
    },
    silentWatch,
  );

const writers: readonly (readonly [string, Writer])[] = [
  ["two places", (value) => value.toFixed(2)],
  ["places that grow in the file", (value, u) => value.toFixed(Math.floor(u() * 7))],
  ["doubles of 16 digits", (value) => String(value)],
  ["exponents", (value) => (value / 1000).toExponential(5)],
  ["thirteen constant digits (as in SmLs07)", (value) => `1000000000000.${Math.floor(value * 10) % 10}`],
  ["twenty digits", (value) => `123456789012345${(value * 1e5).toFixed(0)}.25`],
  ["whole numbers with signs", (value, u) => `${u() < 0.5 ? "+" : "-"}${Math.floor(value)}`],
];

describe("cells of a delimited file, streamed", () => {
  it.each(writers)("are those of the small path: %s", async (_, write) => {
    const text = `${header}\n${rowsOf(3000, 11, write).join("\n")}\n`;
    const small = await smallPath(text);
    const path = saved(text);
    const answer = await ask(path, { partBytes: 1 << 14 });
    expectSame(answer, small);
    expect(answer.subjects!.labels).toEqual(small.labels);
  });

  it("are the same to the last bit for any cut of the file and any number of threads", async () => {
    const path = saved(
      `${header}\r\n${rowsOf(20_000, 5, (value, u) => value.toFixed(2 + Math.floor(u() * 3))).join("\r\n")}`,
    );
    const whole = await ask(path);
    for (const more of [
      { partBytes: 5000 },
      { partBytes: 99_999, threads: 2, workerFile },
      { partBytes: 30_000, threads: 5, workerFile },
    ]) {
      const cut = await ask(path, more);
      expect(cut.statistics).toEqual(whole.statistics);
      expect({ ...cut, statistics: null, subjects: null }).toEqual({ ...whole, statistics: null, subjects: null });
      expect(cut.subjects!.labels).toEqual(whole.subjects!.labels);
      expect(cut.subjects!.mean).toEqual(whole.subjects!.mean);
    }
  });

  it("holds for values in quotes with line ends, wherever a cut falls", async () => {
    const rows = rowsOf(2000, 8, (value) => value.toFixed(3)).map((row, index) =>
      index % 3 === 0 ? row.replace(/note \d+/, '"a\nb, ""c""\n,,,\n1,2,3,4,5\n"') : row,
    );
    const text = `${header}\n${rows.join("\n")}\n`;
    const small = await smallPath(text);
    const path = saved(text);
    for (const more of [{ partBytes: 1000 }, { partBytes: 777, threads: 3, workerFile }])
      expectSame(await ask(path, more), small);
  });

  it("reads decimal commas, semicolons, marks and declared missing texts", async () => {
    const rows = rowsOf(500, 9, (value) => (value > 44 ? "-99" : value.toFixed(2).replace(".", ",")));
    const text = `\ufeff${header.replaceAll(",", ";")}\n${rows.map((row) => row.replace(/"p,4"/, "p4").replace(/,/, ";").replace(/,/, ";").replace(/,/, ";").replace(/,/, ";")).join("\n")}\n`;
    const more = { missing: ["-99", "p2", "bare"], decimal: ",", separator: ";" } as const;
    expectSame(await ask(saved(text), more), await smallPath(text.slice(1), more));
    const answer = await ask(saved(text));
    expect(answer.notes.map((note) => note.code)).toEqual(["separator-detected", "decimal-comma-detected"]);
  });

  it("derives and excludes as the statements do, in parts", async () => {
    const name = (text: string): Expression => ({ type: "name", name: text });
    const number = (text: string): Expression => ({ type: "number", value: Number(text), text });
    const text = `${header.replace("seconds", "time")}\n${rowsOf(3000, 12, (value) => value.toFixed(2), false).join("\n")}\n`;
    const derive = [
      {
        name: "seconds",
        expression: { type: "arithmetic", operator: "/", left: number("60"), right: name("time") } as Expression,
      },
    ];
    const exclude: Condition[] = [
      { type: "compare", operator: ">", left: name("time"), right: number("46.5") },
      { type: "compare", operator: "=", left: name("operator"), right: name("p3") },
    ];
    const small = await smallPath(text, { derive, exclude });
    const answer = await ask(saved(text), { derive, exclude, partBytes: 9000 });
    expectSame(answer, small);
    expect(answer.excluded.reduce((sum, rows) => sum + rows, 0) + answer.entered).toBe(3000);
    expect(answer.excluded.every((rows) => rows > 100)).toBe(true);
  });

  it("counts what is left out, as laying out does", async () => {
    const text = `${header}\np1,bare,x,day,1\np1,wool,x,day,2\n,bare,x,day,3\np1,,x,,4\np1,bare,x,day,\np1,wool,x,night,\np2,silk,x,day,5\n`;
    const answer = await ask(saved(text));
    expect(answer).toMatchObject({
      rows: 7,
      entered: 1,
      missingResponse: 2,
      missingColumn: [
        { column: "glove", rows: 1 },
        { column: "shift", rows: 1 },
        { column: "operator", rows: 1 },
      ],
      undeclared: [
        { factor: "glove", level: "wool", rows: 2, firstRow: 3 },
        { factor: "glove", level: "silk", rows: 1, firstRow: 8 },
      ],
    });
    expect(answer.subjects!.labels).toEqual(["p1"]);
  });

  it("gives subjects' means as a table, as averaging the trials does", async () => {
    const text = `${header}\n${rowsOf(2000, 14, (value) => value.toFixed(2), false).join("\n")}\n`;
    const question = { response: "seconds", factors, subject: "operator" } as const;
    const bulk = subjectTable(await ask(saved(text)), question);
    const { table } = await readTable(new TextEncoder().encode(text), { format: "csv" });
    const keep = ["operator", "glove", "shift"];
    const small = averageTable(table, { response: "seconds", over: ["note"], keep, by: "mean" }).table;
    const listed = (of: Table) => {
      const parts = keep.map((name) => textCodes(columnNamed(of, name)));
      const values = columnNamed(of, "seconds") as NumberColumn;
      return Array.from({ length: of.rows }, (_, row) => ({
        key: parts.map(({ codes, categories }) => categories[codes[row]!]).join(" "),
        value: numberValue(values, row),
      })).sort((left, right) => (left.key < right.key ? -1 : 1));
    };
    expect(bulk.columns.map((column) => column.name)).toEqual(["operator", "glove", "shift", "seconds"]);
    const expected = listed(small);
    expect(listed(bulk)).toEqual(expected.map(({ key, value }) => ({ key, value: expect.closeTo(value, 11) })));
    expect(expected).toHaveLength(18);
  });

  it("draws rows at random, evenly over the file", async () => {
    const count = 20_000;
    const text = `${header}\n${Array.from({ length: count }, (_, row) => `p1,bare,x,day,${row}`).join("\n")}\n`;
    const { sample, statistics } = await ask(saved(text), { sample: { size: 2000, seed: 42 } });
    expect(sample.of).toBe(count);
    expect(new Set(sample.offsets).size).toBe(2000);
    const tenths = new Array<number>(10).fill(0);
    for (const offset of sample.offsets) tenths[Math.floor((10 * (statistics.center + offset)) / count)]!++;
    // Binomial: 200 expected, standard deviation 13; five of them.
    for (const own of tenths) expect(Math.abs(own - 200)).toBeLessThan(65);
    const other = await ask(saved(text), { sample: { size: 2000, seed: 43 } });
    expect(other.sample.offsets).not.toEqual(sample.offsets);
  });

  it("reads any mutated file as the small path does, or refuses it as well", async () => {
    const text = `${header}\n${rowsOf(40, 21, (value) => value.toFixed(2)).join("\n")}\n`;
    const edit = fc.record({
      at: fc.nat(text.length - 1),
      put: fc.constantFrom('"', ",", "\n", "x", "1", ".", " ", ""),
    });
    await fc.assert(
      fc.asyncProperty(
        fc.array(edit, { minLength: 1, maxLength: 3 }),
        fc.integer({ min: 60, max: 900 }),
        async (edits, partBytes) => {
          let mutated = text;
          for (const { at, put } of edits) mutated = mutated.slice(0, at) + put + mutated.slice(at + 1);
          const options = { separator: ",", decimal: "." } as const;
          const code = (error: unknown) => (error instanceof Error && "code" in error ? error.code : error);
          const small = await smallPath(mutated, options).catch(code);
          const bulk = await ask(saved(mutated), { ...options, partBytes }).catch(code);
          // Which of several mistakes is named first may differ; that one is named may not.
          if (typeof small === "string" || typeof bulk === "string") expect(typeof bulk).toBe(typeof small);
          else expectSame(bulk as CellAnswer, small as Awaited<ReturnType<typeof smallPath>>);
        },
      ),
      { numRuns: 300 },
    );
  });
});

describe("a file that cannot be taken in", () => {
  const good = rowsOf(60_000, 3, (value) => value.toFixed(2), false);
  const broken = (row: number, text: string) =>
    saved(`${header}\n${good.map((own, index) => (index === row - 2 ? text : own)).join("\n")}\n`);

  it.each([
    [
      "a bad value far down",
      55_555,
      "p1,bare,x,day,41.2s",
      { code: "stray-text", row: 55_555, column: "seconds", facts: { value: "41.2s" } },
    ],
    [
      "a short row far down",
      44_444,
      "p1,bare,x",
      { code: "ragged-row", row: 44_444, facts: { found: 3, expected: 5 } },
    ],
    ["a bad value among the first", 3, "p1,bare,x,day,?", { code: "stray-text", row: 3 }],
    ["text behind a quote", 50_000, 'p1,"bare"x,x,day,1', { code: "text-after-quote", row: 50_000 }],
    ["a quote left open", 50_001, 'p1,"bare,x,day,1', { code: "open-quote", row: 50_001 }],
    ["a number beyond all bounds", 50_002, "p1,bare,x,day,1e999", { code: "number-too-large", row: 50_002 }],
  ] as const)("names the line of %s, on any number of threads", async (_, row, text, expected) => {
    const path = broken(row, text);
    for (const more of [{ partBytes: 100_000 }, { partBytes: 100_000, threads: 2, workerFile }])
      expect(await problemOf(() => ask(path, more))).toMatchObject(expected);
  });

  it("names the earliest of several lines", async () => {
    const rows = [...good];
    for (const row of [58_000, 30_000, 45_000]) rows[row - 2] = "p1,bare,x,day,oops";
    const path = saved(`${header}\n${rows.join("\n")}\n`);
    expect(await problemOf(() => ask(path, { partBytes: 50_000, threads: 4, workerFile }))).toMatchObject({
      row: 30_000,
    });
  });

  it("names the line where a file was cut off", async () => {
    const text = `${header}\n${good.join("\n")}`;
    const path = saved(
      text.slice(
        0,
        text.lastIndexOf(",day") +
          text.slice(text.lastIndexOf(",day")).length -
          text.slice(text.lastIndexOf("\n") + 6).length,
      ),
    );
    expect(await problemOf(() => ask(path))).toMatchObject({ code: "ragged-row", row: 60_001 });
  });

  it("knows no missing file, no missing column, no empty file", async () => {
    await expect(ask(join(folder, "none.csv"))).rejects.toMatchObject({ name: "HostError", code: "missing-file" });
    const path = saved(`${header}\np1,bare,x,day,1\n`);
    expect(await problemOf(() => ask(path, { response: "second" }))).toMatchObject({
      code: "unknown-column",
      facts: { nearest: "seconds" },
    });
    expect((await problemOf(() => ask(saved("")))).code).toBe("empty-file");
    expect((await problemOf(() => ask(saved(`${header}\n`)))).code).toBe("header-only");
  });

  it("has the digest that the standard gives for its bytes (FIPS 180-4, example abc)", async () => {
    expect(await fileDigest(saved("abc"), silentWatch)).toBe(
      "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad",
    );
    await expect(fileDigest(join(folder, "none.csv"), silentWatch)).rejects.toMatchObject({ code: "missing-file" });
  });

  it("stops when asked to", async () => {
    const path = saved(`${header}\n${good.join("\n")}\n`);
    let looks = 0;
    const watch = {
      checkpoint() {
        if (++looks > 2) throw new Interrupted();
      },
      progress() {},
    };
    const question: FileQuestion = {
      path,
      format: "csv",
      response: "seconds",
      factors,
      threads: 0,
      partBytes: 100_000,
    };
    await expect(aggregateCells(question, watch)).rejects.toBeInstanceOf(Interrupted);
  });
});
