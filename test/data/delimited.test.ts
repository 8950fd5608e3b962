import { describe, expect, it } from "vitest";
import { asNumbers, columnNamed, excludeRows, readTable, textCodes, typedTable } from "../../src/data/index.ts";
import type { ReadOptions } from "../../src/data/index.ts";
import { problemOf, textsOf } from "./table-texts.ts";

const utf8 = (text: string) => new TextEncoder().encode(text);
const read = (source: string | Uint8Array, options: Partial<ReadOptions> = {}) =>
  readTable(typeof source === "string" ? utf8(source) : source, { format: "csv", ...options });

describe("delimited text", () => {
  it("reads quotes, separators and line ends inside values (RFC 4180)", async () => {
    const { table } = await read('id,note,x\r\n1,"a, ""b""\r\nc",2.5\r\n2,  plain  ,\r\n');
    expect(textsOf(table)).toEqual([
      ["1", 'a, "b"\r\nc', "2.5"],
      ["2", "plain", null],
    ]);
    // The second row begins in line 4: the first one holds a line end.
    expect([...table.sourceRows]).toEqual([2, 4]);
  });

  it.each([
    ["comma", "a,b\n1,x\n2,y\n", []],
    ["semicolon", "a;b\n1;x\n2;y\n", [{ code: "separator-detected", facts: { separator: "semicolon" } }]],
    ["tab", "a\tb\n1\tx\n2\ty\n", [{ code: "separator-detected", facts: { separator: "tab" } }]],
    ["bar", "a|b\n1|x, with comma\n2|y\n", [{ code: "separator-detected", facts: { separator: "bar" } }]],
    [
      "announced semicolon",
      "sep=;\na;b\n1;x\n2;y\n",
      [{ code: "separator-detected", facts: { separator: "semicolon" } }],
    ],
  ])("finds a %s as separator and says so", async (_, text, notes) => {
    const found = await read(text);
    expect(found.table.columns.map((column) => column.name)).toEqual(["a", "b"]);
    expect(found.notes).toEqual(notes);
  });

  it("takes the separator that was named", async () => {
    const { table } = await read("a;b:c\n1;2:3\n", { separator: ":" });
    expect(table.columns.map((column) => column.name)).toEqual(["a;b", "c"]);
    expect((await read("a b\n1 2\n", { separator: " " })).table.columns).toHaveLength(2);
    expect((await problemOf(() => read("a,b\n1,2\n", { separator: "xy" }))).code).toBe("separator-unknown");
  });

  it("finds a decimal comma and says so", async () => {
    const { table, notes } = await read("glove;seconds\nbare;41,25\nknit;1000,5\n");
    expect(notes.map((note) => note.code)).toEqual(["separator-detected", "decimal-comma-detected"]);
    expect(textsOf(table).map((row) => row[1])).toEqual(["41.25", "1000.5"]);
    const quoted = await read('glove,seconds\nbare,"41,25"\nknit,"1000,5"\n');
    expect(textsOf(quoted.table).map((row) => row[1])).toEqual(["41.25", "1000.5"]);
  });

  const sample = "operator;seconds\nJos\u00e9;41.2\n\u00c5sa;39\n";
  const utf16 = (text: string, little: boolean, mark: boolean) => {
    const codes = [...(mark ? "\ufeff" : ""), ...text].map((sign) => sign.charCodeAt(0));
    return Uint8Array.from(codes.flatMap((code) => (little ? [code & 255, code >> 8] : [code >> 8, code & 255])));
  };
  it.each([
    ["UTF-8", utf8(sample), null],
    ["UTF-8 with mark", utf8(`\ufeff${sample}`), null],
    ["UTF-16 little end first, with mark", utf16(sample, true, true), "UTF-16"],
    ["UTF-16 big end first, with mark", utf16(sample, false, true), "UTF-16"],
    ["UTF-16 little end first", utf16(sample, true, false), "UTF-16"],
    ["UTF-16 big end first", utf16(sample, false, false), "UTF-16"],
    ["Latin-1", Uint8Array.from(sample, (sign) => sign.charCodeAt(0)), "Latin-1 (Windows-1252)"],
  ])("reads %s", async (_, bytes, said) => {
    const { table, notes } = await read(bytes);
    expect(textsOf(table).map((row) => row[0])).toEqual(["Jos\u00e9", "\u00c5sa"]);
    expect(notes.filter((note) => note.code === "encoding-detected").map((note) => note.facts.encoding)).toEqual(
      said === null ? [] : [said],
    );
  });

  it("reads old line ends, no line end at the close, and blank lines", async () => {
    const expected = [
      ["1", "x"],
      ["2", "y"],
    ];
    expect(textsOf((await read("a,b\r1,x\r2,y")).table)).toEqual(expected);
    expect(textsOf((await read("\n\na,b\n1,x\n\n2,y\n\n  \n")).table)).toEqual(expected);
    expect([...(await read("\na,b\n1,x\n\n2,y\n")).table.sourceRows]).toEqual([3, 5]);
    expect(textsOf((await read("a,b\n1,x\n2,")).table)[1]).toEqual(["2", null]);
  });

  it("takes declared texts for missing, and only those", async () => {
    const { table } = await read("x,y\nNA,a\n1.5,-\n,NA\n", { missing: ["NA", "-"] });
    expect(table.columns.map((column) => column.kind)).toEqual(["number", "text"]);
    expect(textsOf(table)).toEqual([
      [null, "a"],
      ["1.5", null],
      [null, null],
    ]);
  });

  it("suggests, and does not assume, what stands for a missing value", async () => {
    const { table, notes } = await read("x\n1\n2\nNA\n");
    expect(table.columns[0]!.kind).toBe("text");
    expect(notes).toEqual([{ code: "perhaps-missing", facts: { column: "x", texts: ["NA"] } }]);
    const problem = await problemOf(() => asNumbers(columnNamed(table, "x"), table.sourceRows));
    expect(problem).toMatchObject({ code: "stray-text", row: 4, column: "x" });
    expect(problem.advice).toContain('missing "NA"');
  });

  it("names columns anew", async () => {
    const { table } = await read('"Time (s)",Op No.\n1,2\n', { rename: [{ from: "Time (s)", to: "seconds" }] });
    expect(table.columns.map((column) => column.name)).toEqual(["seconds", "Op No."]);
    expect(await problemOf(() => read("a,b\n1,2\n", { rename: [{ from: "A", to: "c" }] }))).toMatchObject({
      code: "unknown-column",
      advice: expect.stringContaining('Did you mean "a"?'),
    });
    expect((await problemOf(() => read("a,b\n1,2\n", { rename: [{ from: "a", to: "b" }] }))).code).toBe(
      "column-exists",
    );
  });

  it("keeps texts and numbers apart over many distinct values", async () => {
    const rows = Array.from({ length: 60_000 }, (_, index) => `${index}.5,p${index % 7}`);
    const numbers = await read(`x,p\n${rows.join("\n")}\n`);
    expect(numbers.table.columns[0]).toMatchObject({ kind: "number", texts: null, decimals: 1 });
    const stray = await read(`x,p\n${rows.join("\n")}\n0.5,p1\n7.5 s,p1\n`);
    const column = columnNamed(stray.table, "x");
    expect(column.kind).toBe("text");
    expect(textCodes(column).categories).toHaveLength(60_001);
    expect(textCodes(column).codes[60_000]).toBe(0);
    const mended = excludeRows(stray.table, {
      type: "compare",
      operator: "=",
      left: { type: "name", name: "x" },
      right: { type: "string", value: "7.5 s" },
    });
    expect([...mended.excludedRows]).toEqual([60_003]);
    expect(columnNamed(mended.table, "x")).toMatchObject({ kind: "number", decimals: 1 });
  });
});

describe("bad input: code, place and advice", () => {
  const cases: readonly (readonly [string, string | Uint8Array, Partial<ReadOptions>, object])[] = [
    ["an empty file", "", {}, { code: "empty-file" }],
    ["a file of blank lines", "\n  \n", {}, { code: "empty-file" }],
    ["a header alone", "a,b\n", {}, { code: "header-only" }],
    ["a short row", "a,b,c\n1,2,3\n4,5\n", {}, { code: "ragged-row", row: 3, facts: { found: 2, expected: 3 } }],
    ["a long row", "a,b\n1,2\n3,4,5\n", {}, { code: "ragged-row", row: 3, facts: { found: 3, expected: 2 } }],
    ["a row cut off", "a,b,c\n1,2,3\n4,", {}, { code: "ragged-row", row: 3 }],
    [
      "a name twice",
      "a,b,a\n1,2,3\n",
      {},
      { code: "duplicate-header", row: 1, column: "a", facts: { first: 1, second: 3 } },
    ],
    ["a column without a name", "a,,c\n1,2,3\n", {}, { code: "empty-header", row: 1, facts: { position: 2 } }],
    ["a quote left open", 'a,b\n1,2\n3,"4\n5,6\n', {}, { code: "open-quote", row: 3 }],
    ["text behind a quote", 'a,b\n1,"2"x\n', {}, { code: "text-after-quote", row: 2 }],
    [
      "a comma that can be both",
      "g;x\na;1,234\nb;2,500\n",
      {},
      { code: "decimal-unclear", column: "x", facts: { value: "1,234" } },
    ],
    [
      "both decimal signs",
      "x;y\n1,5;2.5\n2,25;3.5\n",
      {},
      { code: "decimal-mixed", column: "x", facts: { other: "y" } },
    ],
    ["bytes that are no text", Uint8Array.from([97, 44, 98, 10, 0, 1, 2, 0, 10]), {}, { code: "bad-encoding" }],
    ["a number beyond all bounds", "x\n1\n1e999\n", {}, { code: "number-too-large", row: 3, column: "x" }],
    ["a file that is no workbook", "a,b\n1,2\n", { format: "xlsx" }, { code: "not-a-workbook" }],
    ["a file that is no JSON", "[{", { format: "json" }, { code: "not-json" }],
    ["JSON of another shape", "[1,2]", { format: "json" }, { code: "json-shape" }],
    ["a file that is not Parquet", "PAR1 no", { format: "parquet" }, { code: "not-parquet" }],
  ];
  it.each(cases)("%s", async (_, source, options, expected) => {
    const problem = await problemOf(() => read(source, options));
    expect(problem).toMatchObject(expected);
    expect(problem.advice.length).toBeGreaterThan(10);
    expect(problem.message).not.toMatch(/undefined|null|NaN/);
  });

  it.each([
    ["41.2s", /Take "s" out/],
    ["n/a", /missing "n\/a"/],
    ["1,234.5", /thousands/],
    ["1 234", /thousands/],
    ["3,5", /decimal comma/],
    ["about 40", /Correct it in the file/],
  ])("a value such as %s in a column of numbers", async (value, advice) => {
    const { table } = await read(`operator,seconds\n1,41.2\n2,"${value}"\n3,40\n4,"${value}"\n`);
    const problem = await problemOf(() => asNumbers(columnNamed(table, "seconds"), table.sourceRows));
    expect(problem).toMatchObject({ code: "stray-text", row: 3, column: "seconds", facts: { value, others: 1 } });
    expect(problem.advice).toMatch(advice);
  });

  it("rows typed into a cell", async () => {
    expect(
      textsOf(
        typedTable([
          ["a", "b"],
          ["1", "x"],
        ]),
      ),
    ).toEqual([["1", "x"]]);
    expect(await problemOf(() => typedTable([["a", "b"], ["1"]]))).toMatchObject({ code: "ragged-row", row: 2 });
    expect(
      (
        await problemOf(() =>
          typedTable([
            ["a", "a"],
            ["1", "2"],
          ]),
        )
      ).code,
    ).toBe("duplicate-header");
    expect((await problemOf(() => typedTable([["a"]]))).code).toBe("header-only");
    expect((await problemOf(() => typedTable([]))).code).toBe("empty-file");
  });
});
