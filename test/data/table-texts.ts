import { DataProblem, textCodes } from "../../src/data/index.ts";
import type { Table } from "../../src/data/types.ts";

/** The texts of a table, null where missing. */
export function textsOf(table: Table): (string | null)[][] {
  const parts = table.columns.map(textCodes);
  return Array.from({ length: table.rows }, (_, row) =>
    parts.map(({ codes, categories }) => (codes[row]! < 0 ? null : categories[codes[row]!]!)),
  );
}

/** The problem that an action ends in; anything else is an error of the test. */
export async function problemOf(action: () => Promise<unknown> | unknown): Promise<DataProblem> {
  try {
    await action();
  } catch (error) {
    if (error instanceof DataProblem) return error;
    throw error;
  }
  throw new Error("no problem was found");
}
