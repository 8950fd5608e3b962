import { mkdtempSync, readFileSync, rmSync, truncateSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { DuckDBConnection } from "@duckdb/node-api";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { silentWatch } from "../../../src/host/index.ts";
import { aggregateCells, type FileQuestion } from "../../../src/data/node/index.ts";
import type { Condition, Expression } from "../../../src/data/types.ts";
import { problemOf } from "../table-texts.ts";
import { expectSame, factors, header, rowsOf, smallPath } from "./small-path.ts";

let folder = "";
let engine: DuckDBConnection;
beforeAll(async () => {
  folder = mkdtempSync(join(tmpdir(), "meanwise-parquet-"));
  engine = await DuckDBConnection.create();
});
afterAll(() => {
  engine.closeSync();
  rmSync(folder, { recursive: true, force: true });
});

const ask = (path: string, more: Partial<FileQuestion> = {}) =>
  aggregateCells({ path, format: "parquet", response: "seconds", factors, subject: "operator", ...more }, silentWatch);

let files = 0;
async function parquet(text: string, type: string): Promise<string> {
  const csv = join(folder, `rows-${files++}.csv`);
  const path = csv.replace(".csv", ".parquet");
  writeFileSync(csv, text);
  await engine.run(
    `COPY (SELECT * REPLACE (CAST(seconds AS ${type}) AS seconds) FROM read_csv('${csv}', header = true, all_varchar = true, quote = '"', escape = '"')) TO '${path}' (FORMAT parquet)`,
  );
  return path;
}

const kinds: readonly (readonly [string, string, (value: number) => string])[] = [
  ["decimals", "DECIMAL(9,2)", (value) => value.toFixed(2)],
  ["long decimals behind a constant part", "DECIMAL(18,3)", (value) => `100000000${value.toFixed(3)}`],
  ["short decimals kept as doubles", "DOUBLE", (value) => value.toFixed(3)],
  ["a constant part kept as doubles", "DOUBLE", (value) => `1000000000000.${Math.floor(value * 10) % 10}`],
  ["full doubles", "DOUBLE", (value) => String(value)],
  ["whole numbers", "INTEGER", (value) => value.toFixed(0)],
  ["large whole numbers", "BIGINT", (value) => (value * 1e9).toFixed(0)],
  ["texts that are numbers", "VARCHAR", (value) => value.toFixed(2)],
];

describe("cells of a Parquet file", () => {
  it.each(kinds)("are those of the small path: %s", async (_, type, write) => {
    const text = `${header}\n${rowsOf(3000, 31, write).join("\n")}\n`;
    const path = await parquet(text, type);
    expectSame(await ask(path), await smallPath(new Uint8Array(readFileSync(path)), { format: "parquet" }));
  });

  it("derives, excludes and takes texts for missing as the statements do", async () => {
    const name = (text: string): Expression => ({ type: "name", name: text });
    const number = (text: string): Expression => ({ type: "number", value: Number(text), text });
    const text = `${header}\n${rowsOf(3000, 12, (value) => value.toFixed(2)).join("\n")}\n`;
    const path = await parquet(text, "DOUBLE");
    const exclude: Condition[] = [
      { type: "compare", operator: ">", left: name("seconds"), right: number("46.5") },
      {
        type: "among",
        left: name("operator"),
        values: [name("p2"), { type: "string", value: "nobody" }],
        negated: false,
      },
      {
        type: "and",
        left: { type: "is missing", left: name("seconds"), negated: true },
        right: {
          type: "not",
          operand: { type: "between", left: name("seconds"), low: number("34"), high: number("46") },
        },
      },
      { type: "compare", operator: "!=", left: name("shift"), right: name("day") },
    ];
    const more = { exclude, missing: ["knit"] };
    const answer = await ask(path, more);
    expectSame(answer, await smallPath(new Uint8Array(readFileSync(path)), { ...more, format: "parquet" }));
    expect(answer.excluded.every((rows) => rows > 20)).toBe(true);
    const derive = [
      {
        name: "speed",
        expression: { type: "arithmetic", operator: "/", left: number("60"), right: name("seconds") } as Expression,
      },
    ];
    const derived = await ask(path, { derive, response: "speed" });
    const renamed = await smallPath(new Uint8Array(readFileSync(path)), {
      derive,
      response: "speed",
      format: "parquet",
    });
    expectSame(derived, renamed);
  });

  it("draws rows at random", async () => {
    const text = `${header}\n${Array.from({ length: 5000 }, (_, row) => `p1,bare,x,day,${row}`).join("\n")}\n`;
    const { sample } = await ask(await parquet(text, "INTEGER"), { sample: { size: 500, seed: 1 } });
    expect(new Set(sample.offsets).size).toBe(500);
    expect(sample.of).toBe(5000);
  });

  it("names what is wrong", async () => {
    const good = `${header}\np1,bare,x,day,1\np1,bare,x,day,oops\n`;
    const path = await parquet(good, "VARCHAR");
    expect(await problemOf(() => ask(path))).toMatchObject({ code: "stray-text", row: 2, facts: { value: "oops" } });
    expect(await problemOf(() => ask(path, { response: "second" }))).toMatchObject({
      code: "unknown-column",
      facts: { nearest: "seconds" },
    });
    truncateSync(path, 300);
    expect((await problemOf(() => ask(path))).code).toBe("not-parquet");
    await expect(ask(join(folder, "none.parquet"))).rejects.toMatchObject({ code: "missing-file" });
  });
});
