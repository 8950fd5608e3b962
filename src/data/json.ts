import { ColumnBuilder, headerNames, renamed, type Renaming, tableFrom } from "./build.ts";
import { DataProblem } from "./problem.ts";
import type { Table } from "./types.ts";

type Value =
  | string
  | null
  | { readonly number: string }
  | { readonly list: Value[] }
  | { readonly object: [string, Value][] };

/** A JSON reader that keeps numbers as their decimal texts: JSON.parse would round them before anyone could stop it. */
function parseJson(text: string): Value {
  let position = 0;
  const fail = (why: string): never => {
    const line = text.slice(0, position).split("\n").length;
    throw new DataProblem("not-json", { why: `${why} in line ${line}` });
  };
  const blank = () => {
    while (position < text.length && " \t\r\n".includes(text[position]!)) position++;
  };
  const stringAt = (): string => {
    const start = position++;
    while (position < text.length && text[position] !== '"') position += text[position] === "\\" ? 2 : 1;
    if (position >= text.length) fail("a text is not closed");
    position++;
    try {
      return JSON.parse(text.slice(start, position)) as string;
    } catch {
      return fail("a text is not valid");
    }
  };
  const valueAt = (depth: number): Value => {
    if (depth > 50) fail("it is nested too deeply");
    blank();
    const character = text[position];
    if (character === '"') return stringAt();
    if (character === "[") {
      position++;
      const list: Value[] = [];
      blank();
      if (text[position] === "]") {
        position++;
        return { list };
      }
      for (;;) {
        list.push(valueAt(depth + 1));
        blank();
        if (text[position] === ",") position++;
        else if (text[position] === "]") {
          position++;
          return { list };
        } else fail("a list is not closed");
      }
    }
    if (character === "{") {
      position++;
      const object: [string, Value][] = [];
      blank();
      if (text[position] === "}") {
        position++;
        return { object };
      }
      for (;;) {
        blank();
        if (text[position] !== '"') fail("a field has no name");
        const name = stringAt();
        blank();
        if (text[position] !== ":") fail("a field has no value");
        position++;
        object.push([name, valueAt(depth + 1)]);
        blank();
        if (text[position] === ",") position++;
        else if (text[position] === "}") {
          position++;
          return { object };
        } else fail("an object is not closed");
      }
    }
    const word = /(?:true|false|null|-?(?:0|[1-9]\d*)(?:\.\d+)?(?:[eE][+-]?\d+)?)/y;
    word.lastIndex = position;
    const found = word.exec(text)?.[0];
    if (found === undefined) return fail("something is not a value");
    position += found.length;
    if (found === "null") return null;
    return found === "true" || found === "false" ? found : { number: found };
  };
  const value = valueAt(0);
  blank();
  if (position < text.length) fail("there is text after the end");
  return value;
}

function cellText(value: Value, row: number, column: string): string | null {
  if (value === null || typeof value === "string") return value;
  if ("number" in value) return value.number;
  throw new DataProblem("json-shape", { why: `"${column}" in row ${row} is not a single value` });
}

/** Reads a list of objects, or an object of lists. */
export function readJson(
  text: string,
  options: { readonly missing: ReadonlySet<string>; readonly renames: readonly Renaming[] },
): Table {
  if (text.trim() === "") throw new DataProblem("empty-file");
  const value = parseJson(text);
  if (value === null || typeof value === "string" || "number" in value)
    throw new DataProblem("json-shape", { why: "it is a single value" });
  const columns = new Map<string, (string | null)[]>();
  let rows = 0;
  if ("list" in value) {
    rows = value.list.length;
    for (const [index, entry] of value.list.entries()) {
      if (entry === null || typeof entry === "string" || !("object" in entry))
        throw new DataProblem("json-shape", { why: `entry ${index + 1} is not an object` });
      for (const [name, cell] of entry.object) {
        let column = columns.get(name);
        if (column === undefined) {
          column = new Array<string | null>(rows).fill(null);
          columns.set(name, column);
        }
        column[index] = cellText(cell, index + 1, name);
      }
    }
  } else {
    for (const [name, cells] of value.object) {
      if (cells === null || typeof cells === "string" || !("list" in cells))
        throw new DataProblem("json-shape", { why: `"${name}" is not a list` });
      if (columns.has(name))
        throw new DataProblem("duplicate-header", {
          column: name,
          first: [...columns.keys()].indexOf(name) + 1,
          second: columns.size + 1,
        });
      columns.set(
        name,
        cells.list.map((cell, index) => cellText(cell, index + 1, name)),
      );
      if (columns.size === 1) rows = cells.list.length;
      else if (cells.list.length !== rows)
        throw new DataProblem("json-shape", {
          why: `"${name}" has ${cells.list.length} values, other columns ${rows}`,
        });
    }
  }
  if (columns.size === 0) throw new DataProblem("empty-file");
  if (rows === 0) throw new DataProblem("header-only");
  const header = headerNames([...columns.keys()], null);
  const builders = [...columns.values()].map((cells) => {
    const builder = new ColumnBuilder(options.missing);
    for (const cell of cells) builder.add(cell);
    return builder;
  });
  return tableFrom(
    renamed(header, options.renames),
    builders,
    Int32Array.from({ length: rows }, (_, index) => index + 1),
  );
}
