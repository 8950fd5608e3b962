import { readFileSync } from "node:fs";
import { describe, expect, it } from "vitest";
import { cellSums, columnNamed, readTable, textCodes } from "../../src/data/index.ts";
import type { NumberColumn } from "../../src/data/types.ts";
import { logRelativeError, ofDouble, ofText, plus } from "./exact-fractions.ts";

// NIST Statistical Reference Datasets, certified by the institute; `exact` is the same from the data text by rational arithmetic.
interface Certified {
  readonly kind: string;
  readonly file: string;
  readonly exact: Readonly<Record<string, string>>;
}
const folder = new URL("../reference/nist-strd/", import.meta.url);
const sets = JSON.parse(readFileSync(new URL("certified.json", folder), "utf8")) as Record<string, Certified>;
const read = async (file: string) =>
  (await readTable(new Uint8Array(readFileSync(new URL(file, folder))), { format: "csv" })).table;

describe("exact intake on the NIST reference sets", () => {
  const analyses = Object.entries(sets).filter(([, set]) => set.kind.includes("analysis of variance"));
  it("has the hard ones", () => expect(analyses.map(([name]) => name)).toContain("SmLs08"));

  it.each(analyses)("gives the within and between sums of squares of %s to 13 digits", async (_, set) => {
    const table = await read(set.file);
    const response = columnNamed(table, "response") as NumberColumn;
    const { codes, categories } = textCodes(columnNamed(table, "treatment"));
    const cells = cellSums(response, codes, categories.length);
    const within = cells.sumOfSquares.reduce((sum, value) => sum + value, 0);
    expect(logRelativeError(within, ofText(set.exact.within_ss!))).toBeGreaterThanOrEqual(13);
    const rows = cells.n.reduce((sum, value) => sum + value, 0);
    const grand = cells.n.reduce((sum, n, cell) => sum + n * cells.mean[cell]!, 0) / rows;
    const between = cells.n.reduce((sum, n, cell) => sum + n * (cells.mean[cell]! - grand) ** 2, 0);
    expect(logRelativeError(between, ofText(set.exact.between_ss!))).toBeGreaterThanOrEqual(13);
  });

  const summaries = Object.entries(sets).filter(([, set]) => set.kind.includes("univariate"));
  it.each(summaries)("gives mean and standard deviation of %s to 14 digits", async (_, set) => {
    const table = await read(set.file);
    const value = columnNamed(table, "value") as NumberColumn;
    const { center, n, mean, sumOfSquares } = cellSums(value, new Int32Array(table.rows), 1);
    const exactMean = Object.entries(set.exact).find(([name]) => name.includes("mean"))![1];
    const exactSd = Object.entries(set.exact).find(([name]) => /sd|deviation/.test(name))![1];
    // Centre and mean offset together: the sum as a fraction, not as a rounded double.
    const held = plus(ofDouble(center), ofDouble(mean[0]!));
    expect(logRelativeError(held, ofText(exactMean))).toBeGreaterThanOrEqual(14);
    expect(logRelativeError(Math.sqrt(sumOfSquares[0]! / (n[0]! - 1)), ofText(exactSd))).toBeGreaterThanOrEqual(14);
  });
});
