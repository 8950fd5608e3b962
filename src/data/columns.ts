import { unknownColumn } from "./build.ts";
import { isNumberText } from "./decimal.ts";
import { nearestValues, numberColumn, plainNumber } from "./numbers.ts";
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

/** The value of a row as the double nearest to its decimal, or NaN where it is missing. For many rows see `nearestValues`. */
export function numberValue(column: NumberColumn, row: number): number {
  const { texts } = column;
  if (texts === null) return nearestValues(column)(row);
  return texts.codes[row]! < 0 ? Number.NaN : Number(plainNumber(texts.categories[texts.codes[row]!]!, "."));
}

/** Any column as texts: levels of a factor, labels of units. Numbers without kept texts get their shortest decimal. */
export function textCodes(column: Column): TextCodes {
  if (column.kind === "text") return column;
  if (column.texts !== null) return column.texts;
  const valueAt = nearestValues(column);
  const places = new Map<number, number>();
  const categories: string[] = [];
  const codes = new Int32Array(column.offsets.length);
  for (let row = 0; row < codes.length; row++) {
    const value = valueAt(row);
    if (Number.isNaN(value)) {
      codes[row] = -1;
      continue;
    }
    let code = places.get(value);
    if (code === undefined) {
      code = categories.length;
      places.set(value, code);
      categories.push(String(value));
    }
    codes[row] = code;
  }
  return { codes, categories };
}

/** How to mend a text that stands where numbers are needed. */
export function strayHint(text: string, column: string): string {
  if (usualMissingTexts.includes(text)) return `If it stands for a missing value, say so under read: missing "${text}"`;
  if (/^[+-]?\d{1,3}(?:[,' \u00a0]\d{3})+(?:\.\d+)?$/.test(text))
    return "Take the signs between thousands out of the file.";
  if (/^[+-]?\d+,\d+$/.test(text)) return "If that is a decimal comma, say so under read: decimal comma";
  const unit = /^([+-]?\d+(?:[.,]\d+)?)\s*(\D+)$/.exec(text);
  if (unit !== null)
    return `Take "${unit[2]!.trim()}" out of the file; the unit belongs into response ${column} ... in "${unit[2]!.trim()}".`;
  return "Correct it in the file, or name it as missing, or exclude the row with its reason.";
}

/** The texts that some row still has; rows may have been excluded since the column was read. */
export function usedTexts({ codes, categories }: TextCodes): TextCodes {
  const next = new Int32Array(categories.length).fill(-1);
  const used: string[] = [];
  const recoded = new Int32Array(codes.length);
  for (let row = 0; row < codes.length; row++) {
    const code = codes[row]!;
    if (code >= 0 && next[code]! < 0) next[code] = used.push(categories[code]!) - 1;
    recoded[row] = code < 0 ? -1 : next[code]!;
  }
  return { codes: recoded, categories: used };
}

/**
 * A column as numbers.
 * @param sourceRows of its table, so that a message can name the row
 * @throws DataProblem "stray-text" naming the first row that is not a number, its value and what to do
 */
export function asNumbers(column: Column, sourceRows: Int32Array | null = null): NumberColumn {
  if (column.kind === "number") return column;
  const strange = column.categories.map((text) => !isNumberText(plainNumber(text, ".")));
  const row = column.codes.findIndex((code) => code >= 0 && strange[code]!);
  if (row < 0) return numberColumn(column.name, usedTexts(column));
  const text = column.categories[column.codes[row]!]!;
  const others = column.codes.reduce((count, code) => count + (code >= 0 && strange[code]! ? 1 : 0), 0) - 1;
  throw new DataProblem("stray-text", {
    column: column.name,
    value: text,
    others,
    hint: strayHint(text, column.name),
    ...(sourceRows === null ? {} : { row: sourceRows[row]! }),
  });
}

/** The column as a numeric one where every text that is left in it is a number. */
export function numericWherePossible(column: Column): Column {
  if (column.kind === "number" || !column.categories.some((text) => isNumberText(plainNumber(text, "."))))
    return column;
  const used = usedTexts(column);
  const numeric = used.categories.length > 0 && used.categories.every((text) => isNumberText(plainNumber(text, ".")));
  return numeric ? numberColumn(column.name, used) : column;
}

function pickedIntegers(values: Int32Array, rows: Int32Array): Int32Array {
  const picked = new Int32Array(rows.length);
  for (let index = 0; index < rows.length; index++) picked[index] = values[rows[index]!]!;
  return picked;
}

function pickedNumbers(values: Float64Array, rows: Int32Array): Float64Array {
  const picked = new Float64Array(rows.length);
  for (let index = 0; index < rows.length; index++) picked[index] = values[rows[index]!]!;
  return picked;
}

/** Rows of a table by index, in the order given. */
export function rowsOf(table: Table, rows: Int32Array): Table {
  const picked = (texts: TextCodes): TextCodes => ({
    codes: pickedIntegers(texts.codes, rows),
    categories: texts.categories,
  });
  return {
    rows: rows.length,
    sourceRows: pickedIntegers(table.sourceRows, rows),
    columns: table.columns.map((column) =>
      column.kind === "text"
        ? { ...column, ...picked(column) }
        : {
            ...column,
            offsets: pickedNumbers(column.offsets, rows),
            texts: column.texts === null ? null : picked(column.texts),
          },
    ),
  };
}
