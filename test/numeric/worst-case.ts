/** Comparison with reference values that remembers the worst case of each function and prints it after the tests of a file. */
import { readFileSync } from "node:fs";
import { afterAll, expect } from "vitest";

interface Worst {
  readonly relativeError: number;
  readonly at: string;
  readonly cases: number;
}

const worst = new Map<string, Worst>();

/** Relative difference; absolute where the reference is 0. */
export function relativeError(actual: number, reference: number): number {
  if (actual === reference) return 0;
  return Math.abs(actual - reference) / (reference === 0 ? 1 : Math.abs(reference));
}

/**
 * Expects a relative agreement and keeps the worst case under the name of the function.
 * @param reference decimal text, as long as the source gives it
 */
export function expectClose(name: string, actual: number, reference: string, tolerance: number, at: string): void {
  const error = relativeError(actual, Number(reference));
  const before = worst.get(name);
  worst.set(name, {
    relativeError: before === undefined || !(error <= before.relativeError) ? error : before.relativeError,
    at: before === undefined || !(error <= before.relativeError) ? at : before.at,
    cases: (before?.cases ?? 0) + 1,
  });
  expect(error, `${name} at ${at}: ${actual}, reference ${reference}`).toBeLessThanOrEqual(tolerance);
}

export function reportWorstCases(): void {
  afterAll(() => {
    const lines = [...worst].map(
      ([name, { relativeError, at, cases }]) =>
        `  ${name.padEnd(58)} ${relativeError.toExponential(1)}  of ${String(cases).padStart(4)} cases, at ${at}`,
    );
    if (lines.length > 0) console.log(`worst relative error\n${lines.join("\n")}`);
  });
}

export interface TableRow {
  readonly method: string;
  readonly parameters: Readonly<Record<string, string | number>>;
  readonly value: string;
}

/** Rows of a table of test/reference/tables. */
export function referenceTable(name: string): readonly TableRow[] {
  return JSON.parse(readFileSync(new URL(`../reference/tables/${name}.json`, import.meta.url), "utf8"));
}

export interface GridRow {
  readonly arguments: readonly number[];
  readonly value: string;
}

/** Rows of test/numeric/fixtures/grid.json (mpmath; see generate-grid.py) for one function. */
export function gridRows(name: string): readonly GridRow[] {
  const grid = JSON.parse(readFileSync(new URL("./fixtures/grid.json", import.meta.url), "utf8"));
  return grid[name];
}

/** A parameter of a table row as a number; "inf" is Infinity. */
export function numberOf(row: TableRow, name: string): number {
  const value = row.parameters[name];
  if (value === undefined) throw new Error(`no parameter ${name}`);
  return value === "inf" ? Infinity : Number(value);
}
