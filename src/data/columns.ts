import { unknownColumn } from "./build.ts";
import { isNumberText } from "./decimal.ts";
import { DataProblem, usualMissingTexts } from "./problem.ts";
import type { Column, NumberColumn, Table, TextCodes } from "./types.ts";

/** @throws DataProblem "unknown-column" with the nearest name */
export function columnNamed(table: Table, name: string): Column {
  const found = table.columns.find((column) => column.name === name);
  if (found !== undefined) return found;
  throw unknownColumn(
    name,
    table.columns.map((column) => column.name),
  );
}

/** The value of a row, or NaN where it is missing. */
export function numberValue(column: NumberColumn, row: number): number {
  return column.center + column.offsets[row]!;
}

/** Any column as texts: levels of a factor, labels of units. Numbers without kept texts get their shortest decimal. */
export function textCodes(column: Column): TextCodes {
  if (column.kind === "text") return column;
  if (column.texts !== null) return column.texts;
  const places = new Map<number, number>();
  const categories: string[] = [];
  const codes = new Int32Array(column.offsets.length);
  for (let row = 0; row < codes.length; row++) {
    const offset = column.offsets[row]!;
    if (Number.isNaN(offset)) {
      codes[row] = -1;
      continue;
    }
    let code = places.get(offset);
    if (code === undefined) {
      code = categories.length;
      places.set(offset, code);
      categories.push(String(column.center + offset));
    }
    codes[row] = code;
  }
  return { codes, categories };
}

/** How to mend a text that stands where numbers are needed. */
function strayHint(text: string, column: string): string {
  if (usualMissingTexts.includes(text)) return `If it stands for a missing value, say so under read: missing "${text}"`;
  if (/^[+-]?\d{1,3}(?:[,' \u00a0]\d{3})+(?:\.\d+)?$/.test(text))
    return "Take the signs between thousands out of the file.";
  if (/^[+-]?\d+,\d+$/.test(text)) return "If that is a decimal comma, say so under read: decimal comma";
  const unit = /^([+-]?\d+(?:[.,]\d+)?)\s*(\D+)$/.exec(text);
  if (unit !== null)
    return `Take "${unit[2]!.trim()}" out of the file; the unit belongs into response ${column} ... in "${unit[2]!.trim()}".`;
  return "Correct it in the file, or name it as missing, or exclude the row with its reason.";
}

/**
 * A column as numbers.
 * @throws DataProblem "stray-text" naming the first row that is not a number
 */
export function asNumbers(column: Column, sourceRows: Int32Array | null = null): NumberColumn {
  if (column.kind === "number") return column;
  const strange = column.categories.findIndex((text) => !isNumberText(text));
  if (strange < 0) {
    // Every value is missing: a numeric column without numbers.
    return {
      kind: "number",
      name: column.name,
      center: 0,
      offsets: new Float64Array(column.codes.length).fill(Number.NaN),
      texts: null,
      decimals: null,
    };
  }
  const row = column.codes.indexOf(strange);
  const text = column.categories[strange]!;
  throw new DataProblem("stray-text", {
    column: column.name,
    value: text,
    hint: strayHint(text, column.name),
    ...(sourceRows === null ? {} : { row: sourceRows[row]! }),
  });
}

/** Rows of a table by index, in the order given. */
export function rowsOf(table: Table, rows: Int32Array): Table {
  const picked = (texts: TextCodes): TextCodes => ({
    codes: Int32Array.from(rows, (row) => texts.codes[row]!),
    categories: texts.categories,
  });
  return {
    rows: rows.length,
    sourceRows: Int32Array.from(rows, (row) => table.sourceRows[row]!),
    columns: table.columns.map((column) =>
      column.kind === "text"
        ? { ...column, ...picked(column) }
        : {
            ...column,
            offsets: Float64Array.from(rows, (row) => column.offsets[row]!),
            texts: column.texts === null ? null : picked(column.texts),
          },
    ),
  };
}
