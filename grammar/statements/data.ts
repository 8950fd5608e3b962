import type { DataStatement, Name } from "../ast.ts";
import { quoted } from "../print.ts";
import { problem } from "../problems.ts";
import { BuildProblem } from "../reader.ts";
import { defineStatement } from "../statement.ts";
import { sequence } from "../syntax.ts";

/** Anything without blanks and quotes stands bare in a row, if it does not begin like a comment. */
const bareValue = /^[^\s"#][^\s"]*$/u;
const valueText = (value: Name): string =>
  value.quoted || !bareValue.test(value.text) ? quoted(value.text) : value.text;

export const data = defineStatement<DataStatement>({
  verb: "data",
  group: "data",
  help: "Data typed into the cell: indented rows, the first naming the columns.",
  details: ['Values are separated by blanks; one with blanks is quoted, a missing one is "".'],
  example: `data
  operator glove seconds
  1 bare 41.2
  1 nitrile 43
  2 bare 39.5
  2 nitrile 44.1`,
  continues: true,
  rows: true,
  syntax: sequence(),
  build: (read) => {
    const rows = read.groups("rows").map((row) => row.names("values"));
    const columns = rows[0];
    if (columns === undefined || rows.length < 2) throw new BuildProblem(problem("data-empty", read.span));
    const seen = new Set<string>();
    for (const column of columns) {
      if (seen.has(column.text)) {
        throw new BuildProblem(problem("data-column-twice", column.span, { column: column.text }));
      }
      if (column.text === "") throw new BuildProblem(problem("name-empty", column.span, { what: "A column's name" }));
      seen.add(column.text);
    }
    for (const [index, row] of read.groups("rows").entries()) {
      const found = rows[index]!.length;
      if (found === columns.length) continue;
      throw new BuildProblem(problem("data-row-length", row.span, { found, expected: columns.length, row: index }));
    }
    return { kind: "data", rows, span: read.span };
  },
  print: (it) => {
    const texts = it.rows.map((row) => row.map(valueText));
    const widths = (texts[0] ?? []).map((_, column) =>
      texts.reduce((widest, row) => Math.max(widest, row[column]?.length ?? 0), 0),
    );
    return [
      "data",
      ...texts.map((row) =>
        row
          .map((value, column) => value.padEnd(widths[column] ?? 0))
          .join(" ")
          .trimEnd(),
      ),
    ];
  },
});
