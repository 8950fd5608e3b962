import type { Note } from "../results/index.ts";
import { ColumnBuilder, headerNames, isNumberText, renamed, type Renaming, tableFrom } from "./build.ts";
import { DataProblem } from "./problem.ts";
import type { Table } from "./types.ts";

/** How many lines are looked at to find the separator. */
const sniffedLines = 20;

/** Counts each candidate outside quotes, line by line, over the first lines. */
function separatorOf(text: string): string {
  const candidates = [",", ";", "\t", "|"];
  const counts = candidates.map((): number[] => []);
  let line = candidates.map(() => 0);
  let quoted = false;
  let filled = false;
  for (let index = 0; index < text.length && counts[0]!.length < sniffedLines; index++) {
    const character = text[index]!;
    if (character === '"') quoted = !quoted;
    else if (!quoted && character === "\n") {
      if (filled) for (const [place, count] of line.entries()) counts[place]!.push(count);
      line = candidates.map(() => 0);
      filled = false;
    } else if (!quoted) {
      const place = candidates.indexOf(character);
      if (place >= 0) line[place]!++;
      if (character.trim() !== "") filled = true;
    }
  }
  if (filled) for (const [place, count] of line.entries()) counts[place]!.push(count);
  // The separator is the one that stands equally often in every line; among those, the most frequent.
  const scores = counts.map((lines) => {
    const first = lines[0] ?? 0;
    const agreeing = lines.filter((count) => count === first).length;
    return first === 0 ? 0 : (agreeing / lines.length) * 1000 + Math.min(first, 500);
  });
  const best = scores.indexOf(Math.max(...scores));
  return scores[best]! > 0 ? candidates[best]! : ",";
}

interface Field {
  readonly value: string;
  readonly quoted: boolean;
}

/** Reads the values of one record after another; `line` is where the record begins, from 1. */
function* records(text: string, separator: string): Generator<{ readonly fields: Field[]; readonly line: number }> {
  let position = 0;
  let line = 1;
  const end = text.length;
  while (position < end) {
    const start = line;
    const fields: Field[] = [];
    for (;;) {
      if (text.charCodeAt(position) === 34) {
        let value = "";
        let from = position + 1;
        for (;;) {
          const close = text.indexOf('"', from);
          if (close < 0) throw new DataProblem("open-quote", { row: start });
          value += text.slice(from, close);
          if (text.charCodeAt(close + 1) === 34) {
            value += '"';
            from = close + 2;
            continue;
          }
          position = close + 1;
          break;
        }
        for (const character of value) if (character === "\n") line++;
        fields.push({ value, quoted: true });
        while (position < end && (text[position] === " " || text[position] === "\r")) position++;
        if (position < end && text[position] !== separator && text[position] !== "\n")
          throw new DataProblem("text-after-quote", { row: line });
      } else {
        let stop = position;
        while (stop < end && text[stop] !== separator && text.charCodeAt(stop) !== 10) stop++;
        let value = text.slice(position, stop);
        if (value.endsWith("\r")) value = value.slice(0, -1);
        fields.push({ value, quoted: false });
        position = stop;
      }
      if (position < end && text[position] === separator) {
        position++;
        if (position >= end) fields.push({ value: "", quoted: false });
        else continue;
      }
      break;
    }
    position++;
    line++;
    if (fields.length === 1 && !fields[0]!.quoted && fields[0]!.value.trim() === "") continue;
    yield { fields, line: start };
  }
}

/** Whether a column of texts reads as numbers with a decimal comma: never with a point, and some comma that no thousands explain. */
function commaReading(categories: readonly string[]): "comma" | "unclear" | "no" {
  const withComma = categories.filter((text) => text.includes(","));
  if (withComma.length === 0) return "no";
  if (!categories.every((text) => isNumberText(text.replace(",", ".")) && !text.includes("."))) return "no";
  return withComma.every((text) => /^[+-]?[1-9]\d{0,2},\d{3}$/.test(text)) ? "unclear" : "comma";
}

export interface DelimitedOptions {
  readonly separator: string | null;
  readonly decimal: "." | "," | null;
  readonly missing: ReadonlySet<string>;
  readonly renames: readonly Renaming[];
}

const separatorNames: Readonly<Record<string, string>> = { "\t": "tab", ";": "semicolon", "|": "bar", ",": "comma" };

/** Reads delimited text: a header, then a row a record. */
export function readDelimited(
  source: string,
  options: DelimitedOptions,
): { readonly table: Table; readonly notes: readonly Note[] } {
  const text = source.includes("\r") && !source.includes("\n") ? source.replace(/\r/g, "\n") : source;
  const separator = options.separator ?? separatorOf(text);
  const notes: Note[] = [];
  if (options.separator === null && separator !== ",")
    notes.push({ code: "separator-detected", facts: { separator: separatorNames[separator] ?? separator } });
  let header: string[] | null = null;
  let builders: ColumnBuilder[] = [];
  const rows: number[] = [];
  for (const { fields, line } of records(text, separator)) {
    if (header === null) {
      header = headerNames(
        fields.map((field) => field.value),
        line,
      );
      builders = header.map(() => new ColumnBuilder(options.missing));
      continue;
    }
    if (fields.length !== header.length)
      throw new DataProblem("ragged-row", { row: line, found: fields.length, expected: header.length });
    for (let index = 0; index < builders.length; index++) builders[index]!.add(fields[index]!.value);
    rows.push(line);
  }
  if (header === null) throw new DataProblem("empty-file");
  if (rows.length === 0) throw new DataProblem("header-only");
  const decimal = options.decimal ?? decimalOf(header, builders, separator, notes);
  return { table: tableFrom(renamed(header, options.renames), builders, Int32Array.from(rows), decimal), notes };
}

function decimalOf(
  header: readonly string[],
  builders: readonly ColumnBuilder[],
  separator: string,
  notes: Note[],
): "." | "," {
  const readings = builders.map((builder) => commaReading(builder.texts.categories));
  if (readings.includes("comma")) {
    notes.push({
      code: "decimal-comma-detected",
      facts: { columns: header.filter((_, index) => readings[index] === "comma") },
    });
    return ",";
  }
  const unclear = readings.indexOf("unclear");
  if (unclear >= 0 && separator !== ",") {
    const value = builders[unclear]!.texts.categories.find((text) => text.includes(","))!;
    throw new DataProblem("decimal-unclear", { column: header[unclear]!, value });
  }
  return ".";
}
