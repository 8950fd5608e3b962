import type { AverageStatement, ConditionNode, DataStatement, DeriveStatement, ExcludeStatement, ExpressionNode, ReadStatement, ShowStatement } from "../ast.ts";
import { defineStatement } from "../statement.ts";
import { clauses, either, group, list, mark, name, optional, rule, sequence, text, words } from "../syntax.ts";

const column = (label: string) => name(label, "a column", "columns");

export const read = defineStatement<ReadStatement>({
  verb: "read",
  group: "data",
  help: "Reads a data file (.csv, .tsv, .xlsx, .json, .parquet) or a database table, exactly as written there.",
  details: [
    "fold turns wide columns into one row each: fold bare, nitrile, knit into seconds by glove.",
    'rename "Op No." to operator; missing "NA", "-" says which texts stand for nothing; sheet "Trials" picks a sheet.',
    'separator ";" and decimal comma settle what the file leaves open.',
    "The file's digest goes into the record. Reading real data ends a rehearsal.",
  ],
  example: 'read "assembly.csv"',
  syntax: sequence(
    optional(words("table"), text("table", "a table in quotes"), words("from")),
    text("path", "a file in quotes", "files"),
    clauses(
      group("fold", words("fold"), list("columns", column("column")), words("into"), column("response"), words("by"), column("factor")),
      group("rename", words("rename"), column("from"), words("to"), column("to")),
      sequence(words("missing"), list("missing", text("value", "a text in quotes"))),
      sequence(words("sheet"), text("sheet", "a sheet in quotes")),
      sequence(words("separator"), text("separator", "a separator in quotes")),
      words("decimal comma", "comma"),
      words("decimal point", "point"),
    ),
  ),
  build: (from) => ({
    kind: "read",
    path: from.name("path"),
    table: from.nameOrNull("table"),
    sheet: from.nameOrNull("sheet"),
    folds: from.groups("fold").map((part) => ({
      columns: part.groups("columns").map((entry) => entry.name("column")),
      response: part.name("response"),
      factor: part.name("factor"),
    })),
    renames: from.groups("rename").map((part) => ({ from: part.name("from"), to: part.name("to") })),
    missing: from.groups("missing").map((part) => part.name("value")),
    separator: from.nameOrNull("separator"),
    decimal: from.has("comma") ? "comma" : from.has("point") ? "point" : null,
    span: from.span,
  }),
});

export const data = defineStatement<DataStatement>({
  verb: "data",
  group: "data",
  help: "Takes rows typed into the cell: the first names the columns, values are separated by blanks.",
  details: ['A value with blanks is quoted; "" is missing.'],
  example: "data\n  operator glove seconds\n  1 bare 40.1\n  1 knit 45.2\n  2 bare 38.7\n  2 knit 47.0",
  syntax: null,
  form: "data, then indented rows",
  build: () => {
    throw new Error("data is read in its own way");
  },
});

export const derive = defineStatement<DeriveStatement>({
  verb: "derive",
  group: "data",
  help: "Makes a new column by arithmetic.",
  details: ["+ - * / ^ and brackets; log of x, log10 of x, root of x, abs of x, exp of x, round of x; if CONDITION then A else B."],
  example: "derive speed = 60 / seconds",
  syntax: sequence(name("name", "a name for the column"), mark("="), rule("expression", "expression")),
  build: (from) => ({ kind: "derive", name: from.name("name"), expression: from.built<ExpressionNode>("expression"), span: from.span }),
});

export const exclude = defineStatement<ExcludeStatement>({
  verb: "exclude",
  group: "data",
  help: "Leaves rows out, with the reason; counted by cell, listed in the report, and marked when it came after results were seen.",
  details: ["Conditions: = != < <= > >=, among a, b, between 1 and 2, is missing, joined by and, or, not."],
  example: 'exclude where trial = 1 because "practice trial, excluded in the plan"',
  syntax: sequence(words("where"), rule("condition", "condition"), words("because"), text("reason", "a reason in quotes")),
  build: (from) => ({ kind: "exclude", condition: from.built<ConditionNode>("condition"), reason: from.name("reason"), span: from.span }),
});

export const average = defineStatement<AverageStatement>({
  verb: "average",
  group: "data",
  help: "Makes one value of repeated trials: the mean (or median) over the named columns, per subject and cell.",
  details: ["by median takes the middle value instead of the mean."],
  example: "average seconds over trial",
  syntax: sequence(
    name("response", "the response", "response"),
    words("over"),
    list("over", column("column")),
    clauses(either(words("by mean", "mean"), words("by median", "median"))),
  ),
  build: (from) => ({
    kind: "average",
    response: from.name("response"),
    over: from.groups("over").map((part) => part.name("column")),
    by: from.has("median") ? "median" : "mean",
    span: from.span,
  }),
});

const shown = ["data", "design", "plan", "families", "ledger", "settings"] as const;

export const show = defineStatement<ShowStatement>({
  verb: "show",
  group: "data",
  help: "Shows what is held: data, design, plan, families, ledger or settings.",
  details: ["show data shows values of the response, so it counts as having seen results."],
  example: "show design",
  syntax: either(...shown.map((what) => words(what, what))),
  build: (from) => ({ kind: "show", what: shown.find((what) => from.has(what))!, span: from.span }),
});
