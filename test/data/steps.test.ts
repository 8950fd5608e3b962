import { describe, expect, it } from "vitest";
import {
  averageTable,
  cellSums,
  columnNamed,
  deriveColumn,
  excludeRows,
  foldTable,
  numberValue,
  previewTable,
  readTable,
  tableDigest,
} from "../../src/data/index.ts";
import type { Condition, Expression, NumberColumn, Table } from "../../src/data/types.ts";
import { isNearest, minus, ofDouble, ofText, plus } from "./exact-fractions.ts";
import { problemOf, textsOf } from "./table-texts.ts";

const read = async (text: string) => (await readTable(new TextEncoder().encode(text), { format: "csv" })).table;
const name = (text: string): Expression => ({ type: "name", name: text });
const number = (text: string): Expression => ({ type: "number", value: Number(text), text });
const sum = (left: Expression, operator: "+" | "-" | "*" | "/" | "^", right: Expression): Expression => ({
  type: "arithmetic",
  operator,
  left,
  right,
});
const compare = (left: Expression, operator: "=" | "!=" | "<" | "<=" | ">" | ">=", right: Expression): Condition => ({
  type: "compare",
  operator,
  left,
  right,
});
const values = (table: Table, column: string) => {
  const found = columnNamed(table, column) as NumberColumn;
  return Array.from({ length: table.rows }, (_, row) => numberValue(found, row));
};

describe("derive", () => {
  const table = read("a,b,g\n1000000000000.4,0.1,x\n1000000000000.7,0.3,y\n,2,\n");

  it.each([
    ["a constant added", sum(name("a"), "+", number("0.25")), (a: string) => [a, "0.25"]],
    ["a constant in front", sum(number("0.25"), "+", name("a")), (a: string) => [a, "0.25"]],
    ["two columns added", sum(name("a"), "+", name("b")), (a: string, b: string) => [a, b]],
    ["two columns subtracted", sum(name("a"), "-", name("b")), (a: string, b: string) => [a, `-${b}`]],
    ["a constant taken off", sum(name("a"), "-", number("1000000000000")), (a: string) => [a, "-1000000000000"]],
  ] as const)("keeps every digit: %s (oracle: rational arithmetic)", async (_, expression, parts) => {
    const given = await table;
    const column = columnNamed(deriveColumn(given, "c", expression), "c") as NumberColumn;
    for (const [row, [a, b]] of textsOf(given).slice(0, 2).entries()) {
      const [first, second] = (parts as (a: string, b: string) => string[])(a!, b!);
      const exact = plus(ofText(first!), ofText(second!));
      expect(isNearest(column.offsets[row]!, minus(exact, ofDouble(column.center)))).toBe(true);
    }
    expect(column.offsets[2]).toBeNaN();
  });

  it("computes in doubles otherwise; missing in gives missing out", async () => {
    const derived = deriveColumn(await table, "c", sum(number("60"), "/", name("b")));
    expect(values(derived, "c")).toEqual([60 / 0.1, 60 / 0.3, 30]);
    const logged = deriveColumn(await table, "c", { type: "function", function: "log", operand: name("a") });
    expect(values(logged, "c")).toEqual([Math.log(1000000000000.4), Math.log(1000000000000.7), Number.NaN]);
  });

  it("makes texts by choice, which then serve as levels", async () => {
    const choice: Expression = {
      type: "choice",
      condition: compare(name("b"), "<", number("0.2")),
      // biome-ignore lint/suspicious/noThenProperty: the name of the branch in the language's own syntax tree
      then: { type: "string", value: "low" },
      otherwise: { type: "string", value: "high" },
    };
    expect(textsOf(deriveColumn(await table, "c", choice)).map((row) => row[3])).toEqual(["low", "high", "high"]);
  });

  const zeros = read("n,x\na,2\nb,0\nc,-1\n");
  it.each([
    ["division by zero", sum(number("1"), "/", name("x")), { code: "division-by-zero", row: 3 }],
    [
      "logarithm of zero",
      { type: "function", function: "log", operand: name("x") },
      { code: "log-of-nonpositive", row: 3 },
    ],
    [
      "root of a negative",
      { type: "function", function: "root", operand: name("x") },
      { code: "root-of-negative", row: 4 },
    ],
    [
      "too large",
      { type: "function", function: "exp", operand: sum(name("x"), "*", number("1000")) },
      { code: "not-finite", row: 2 },
    ],
    ["text in arithmetic", sum(name("n"), "*", number("2")), { code: "text-in-arithmetic", row: 2, column: "n" }],
    ["unknown column", sum(name("X"), "*", number("2")), { code: "unknown-column", facts: { nearest: "x" } }],
  ] as const)("names the row: %s", async (_, expression, expected) => {
    const given = await zeros;
    expect(await problemOf(() => deriveColumn(given, "c", expression as Expression))).toMatchObject(expected);
    expect((await problemOf(() => deriveColumn(given, "x", number("1")))).code).toBe("column-exists");
  });
});

describe("exclude", () => {
  const table = read("dose,x,g\n10,0.1,a\n10.0,41,b\n20,82.7,a\n,5,none\n");
  const left = async (condition: Condition) => {
    const { table: kept, excludedRows } = excludeRows(await table, condition);
    return [textsOf(kept).map((row) => row[2]), [...excludedRows]];
  };

  it.each<[string, Condition, number[]]>([
    ["a number equals by value, however written", compare(name("dose"), "=", number("10")), [2, 3]],
    ["a text equals by text, then by value", compare(name("dose"), "=", { type: "string", value: "10.0" }), [2, 3]],
    ["a bare word is a level", compare(name("g"), "=", name("none")), [5]],
    ["missing is not unequal", compare(name("dose"), "!=", number("10")), [4]],
    ["0.1 is not above 0.1, whatever the centre", compare(name("x"), ">", number("0.1")), [3, 4, 5]],
    ["0.1 equals 0.1", compare(name("x"), "=", number("0.1")), [2]],
    ["at least", compare(name("x"), ">=", number("82.7")), [4]],
    ["among", { type: "among", left: name("g"), values: [name("a"), name("none")], negated: false }, [2, 4, 5]],
    ["not among", { type: "among", left: name("dose"), values: [number("10"), number("20")], negated: true }, [5]],
    ["between", { type: "between", left: name("x"), low: number("5"), high: number("41") }, [3, 5]],
    ["is missing", { type: "is missing", left: name("dose"), negated: false }, [5]],
    [
      "both",
      { type: "and", left: compare(name("g"), "=", name("a")), right: compare(name("x"), "<", number("1")) },
      [2],
    ],
    [
      "either, turned round",
      {
        type: "not",
        operand: { type: "or", left: compare(name("g"), "=", name("a")), right: compare(name("x"), "<", number("6")) },
      },
      [3],
    ],
  ])("%s", async (_, condition, excluded) => {
    expect((await left(condition))[1]).toEqual(excluded);
    expect((await left(condition))[0]).toHaveLength(4 - excluded.length);
  });

  it("says what it does not know, and that text has no order", async () => {
    expect(await problemOf(() => left(compare(name("g"), "=", name("b1"))))).toMatchObject({
      code: "unknown-name",
      advice: 'Did you mean "b"?',
    });
    expect((await problemOf(() => left(compare(name("g"), "<", number("2"))))).code).toBe("order-of-text");
  });
});

describe("fold and average", () => {
  it("folds wide columns into rows, subject by subject, with the digits kept", async () => {
    const table = await read("op,bare,knit\np1,1000000000000.4,1000000000000.5\np2,,1000000000000.3\n");
    const folded = foldTable(table, { columns: ["bare", "knit"], response: "seconds", factor: "glove" });
    expect(textsOf(folded)).toEqual([
      ["p1", "bare", "1000000000000.4"],
      ["p1", "knit", "1000000000000.5"],
      ["p2", "bare", null],
      ["p2", "knit", "1000000000000.3"],
    ]);
    expect([...folded.sourceRows]).toEqual([2, 2, 3, 3]);
    expect(
      await problemOf(() => foldTable(table, { columns: ["bare", "knti"], response: "s", factor: "g" })),
    ).toMatchObject({
      code: "unknown-column",
      facts: { nearest: "knit" },
    });
    const clash = { columns: ["bare", "knit"], response: "op", factor: "g" };
    expect((await problemOf(() => foldTable(table, clash))).code).toBe("column-exists");
  });

  it("averages trials to one value per subject and cell, by mean and by median", async () => {
    const table = await read("op,g,trial,s\np1,a,1,1\np1,a,2,2\np1,a,3,6\np1,b,1,5\np2,a,1,\np2,a,2,0.2\n");
    const question = { response: "s", over: ["trial"], keep: ["op", "g"] } as const;
    const mean = averageTable(table, { ...question, by: "mean" });
    expect(mean.table.columns.map((column) => column.name)).toEqual(["op", "g", "s"]);
    expect(values(mean.table, "s")).toEqual([3, 5, 0.2].map((value) => expect.closeTo(value, 14)));
    expect([mean.least, mean.most]).toEqual([1, 3]);
    expect(values(averageTable(table, { ...question, by: "median" }).table, "s")[0]).toBeCloseTo(2, 14);
  });

  it("shows and digests what the table holds", async () => {
    const table = await read("x,y\n0.1,a\n82.7,\n");
    expect(previewTable(table, 1)).toMatchObject({ rows: [["0.1", "a"]], moreRows: 1 });
    expect(new TextDecoder().decode(tableDigest(table))).toBe("x\ty\n0.1\ta\n82.7\t");
  });
});

describe("cell sums", () => {
  it("leave out missing values and rows without a cell, and give zeros for an empty cell", () => {
    const column = { center: 5, offsets: Float64Array.of(1, 2, Number.NaN, 6, 100) };
    const cells = cellSums(column, Int32Array.of(0, 0, 0, 2, -1), 3);
    expect([...cells.n]).toEqual([2, 0, 1]);
    expect([...cells.mean]).toEqual([1.5, 0, 6]);
    expect([...cells.sumOfSquares]).toEqual([0.5, 0, 0]);
  });
});
