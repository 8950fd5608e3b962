import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { numberValue, readTable } from "../../src/data/index.ts";
import type { NumberColumn } from "../../src/data/types.ts";
import { isNearest, minus, ofDouble, ofText } from "./exact-fractions.ts";

const digits = (least: number, most: number) =>
  fc.array(fc.integer({ min: 0, max: 9 }), { minLength: least, maxLength: most }).map((list) => list.join(""));

/** Decimal texts as people and programs write them: up to 38 digits, signs, points, exponents. */
const decimalText = fc
  .record({
    sign: fc.constantFrom("", "", "", "-", "+", "\u2212"),
    whole: digits(1, 16),
    part: fc.option(digits(0, 12)),
    exponent: fc.option(fc.integer({ min: -9, max: 9 }), { freq: 4 }),
    letter: fc.constantFrom("e", "E"),
  })
  .map(
    ({ sign, whole, part, exponent, letter }) =>
      `${sign}${whole}${part === null ? "" : `.${part}`}${exponent === null ? "" : `${letter}${exponent}`}`,
  );

const sameMagnitude = fc
  .tuple(digits(1, 14), fc.array(digits(1, 6), { minLength: 1, maxLength: 20 }))
  .map(([constant, parts]) => parts.map((part) => `${constant}.${part}`));

async function columnOf(texts: readonly string[], decimal: "." | "," = "."): Promise<NumberColumn> {
  const written = decimal === "," ? texts.map((text) => text.replace(".", ",")) : texts;
  const bytes = new TextEncoder().encode(`x;y\n${written.map((text) => `${text};t`).join("\r\n")}\n`);
  const { table } = await readTable(bytes, { format: "csv", separator: ";", decimal });
  expect(table.columns[0]!.kind).toBe("number");
  return table.columns[0] as NumberColumn;
}

function expectExact(column: NumberColumn, texts: readonly string[]): void {
  for (const [row, text] of texts.entries()) {
    const exact = minus(ofText(text), ofDouble(column.center));
    if (!isNearest(column.offsets[row]!, exact))
      throw new Error(`${text}: ${column.center} + ${column.offsets[row]} is not the nearest`);
  }
}

describe("numbers from decimal text (oracle: rational arithmetic on the text)", () => {
  it("takes the centre out before anything is rounded, whatever the digits", async () => {
    await fc.assert(
      fc.asyncProperty(fc.array(decimalText, { minLength: 1, maxLength: 12 }), async (texts) =>
        expectExact(await columnOf(texts), texts),
      ),
      { numRuns: 600 },
    );
  });

  it("keeps the digits behind a long constant part, and leaves no constant part", async () => {
    await fc.assert(
      fc.asyncProperty(sameMagnitude, async (texts) => {
        const column = await columnOf(texts);
        expectExact(column, texts);
        for (const offset of column.offsets) expect(Math.abs(offset)).toBeLessThanOrEqual(1);
      }),
      { numRuns: 300 },
    );
  });

  it("reads a decimal comma as it reads a point", async () => {
    await fc.assert(
      fc.asyncProperty(fc.array(decimalText, { minLength: 1, maxLength: 6 }), async (texts) => {
        const [comma, point] = [await columnOf(texts, ","), await columnOf(texts)];
        expect(comma.center).toBe(point.center);
        expect([...comma.offsets]).toEqual([...point.offsets]);
      }),
      { numRuns: 100 },
    );
  });

  it("gives back the double nearest to each decimal, also beside a large centre", async () => {
    const texts = ["0.1", "41", "82.7", "-3.05"];
    const column = await columnOf(texts);
    expect(texts.map((_, row) => numberValue(column, row))).toEqual([0.1, 41, 82.7, -3.05]);
    const untold = { ...column, texts: null };
    expect(texts.map((_, row) => numberValue(untold, row))).toEqual([0.1, 41, 82.7, -3.05]);
  });

  it("reads doubles written with 17 digits", async () => {
    const texts = Array.from({ length: 500 }, (_, index) => String(Math.sin(index + 1) * 10 ** (index % 9)));
    const column = await columnOf(texts);
    expectExact(column, texts);
    expect(texts.map((_, row) => numberValue(column, row))).toEqual(texts.map(Number));
  });

  it("takes more than 38 digits as doubles and says so", async () => {
    const bytes = new TextEncoder().encode(`x\n0.${"1234567890".repeat(5)}\n2\n`);
    const { table, notes } = await readTable(bytes, { format: "csv" });
    expect(numberValue(table.columns[0] as NumberColumn, 0)).toBe(0.12345678901234568);
    expect(notes).toEqual([{ code: "beyond-exact-decimals", facts: { column: "x" } }]);
  });
});
