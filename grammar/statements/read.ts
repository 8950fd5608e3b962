import type { ReadStatement } from "../ast.ts";
import { nameText, namesText, quoted } from "../print.ts";
import { problem } from "../problems.ts";
import { BuildProblem } from "../reader.ts";
import { defineStatement } from "../statement.ts";
import { choice, clauses, either, group, list, name, part, sequence, text, words } from "../syntax.ts";

export const read = defineStatement<ReadStatement>({
  verb: "read",
  group: "data",
  help: "Reads a table from a file or a database; its digest goes into the record.",
  details: [
    "Files: .csv, .tsv, .xlsx, .json, .parquet. Separator, decimal sign and encoding are found and said; a clause overrides.",
    "Passwords never stand in a cell: the database's own service file or environment has them.",
  ],
  example: `read "trials.csv"
  rename "Op No." to operator
  fold bare, nitrile, knit into seconds by glove
  missing "NA", "-"`,
  syntax: sequence(
    either(
      sequence(
        words("table", "fromTable"),
        text("table", "a table in quotes"),
        words("from"),
        text("path", "a connection in quotes"),
      ),
      text("path", "a file in quotes", "files"),
    ),
    clauses(
      part("Which sheet of a workbook.", words("sheet"), text("sheet", "a sheet in quotes")),
      part(
        "Gives a column another name.",
        group("rename", words("rename"), name("from", "a column", "columns"), words("to"), name("to", "a new name")),
      ),
      part(
        "Turns several columns into one of values and one of levels.",
        group(
          "fold",
          words("fold"),
          list("columns", name("column", "a column", "columns")),
          words("into"),
          name("response", "a name for the values", "response"),
          words("by"),
          name("factor", "a name for the levels", "factors"),
        ),
      ),
      part(
        "Texts that stand for no value.",
        words("missing", "missing"),
        list("texts", text("text", "a text in quotes")),
      ),
      part("What separates the columns.", words("separator"), text("separator", "a separator in quotes")),
      part(
        "Which sign stands before the decimals.",
        words("decimal"),
        choice("comma or point", words("comma", "decimal"), words("point", "decimal")),
      ),
      part("How the file's characters are stored.", words("encoding"), text("encoding", "an encoding in quotes")),
    ),
  ),
  build: (it) => {
    const path = it.name("path");
    if (path.text.trim() === "") throw new BuildProblem(problem("name-empty", path.span, { what: "The file" }));
    return {
      kind: "read",
      path,
      table: it.nameOrNull("table"),
      sheet: it.nameOrNull("sheet"),
      folds: it.groups("fold").map((each) => ({
        columns: each.groups("columns").map((column) => column.name("column")),
        response: each.name("response"),
        factor: each.name("factor"),
      })),
      renames: it.groups("rename").map((each) => ({ from: each.name("from"), to: each.name("to") })),
      missing: it.word("missing") === null ? [] : it.groups("texts").map((each) => each.name("text")),
      separator: it.nameOrNull("separator"),
      encoding: it.nameOrNull("encoding"),
      decimal: it.word<"comma" | "point">("decimal"),
      span: it.span,
    };
  },
  print: (it) => [
    it.table === null
      ? `read ${quoted(it.path.text)}`
      : `read table ${quoted(it.table.text)} from ${quoted(it.path.text)}`,
    ...(it.sheet === null ? [] : [`sheet ${quoted(it.sheet.text)}`]),
    ...(it.separator === null ? [] : [`separator ${quoted(it.separator.text)}`]),
    ...(it.decimal === null ? [] : [`decimal ${it.decimal}`]),
    ...(it.encoding === null ? [] : [`encoding ${quoted(it.encoding.text)}`]),
    ...(it.missing.length === 0 ? [] : [`missing ${it.missing.map((each) => quoted(each.text)).join(", ")}`]),
    ...it.renames.map((each) => `rename ${nameText(each.from)} to ${nameText(each.to)}`),
    ...it.folds.map(
      (each) => `fold ${namesText(each.columns)} into ${nameText(each.response)} by ${nameText(each.factor)}`,
    ),
  ],
});
