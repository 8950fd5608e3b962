/** Data that cannot be taken in as they stand, with the place. Nothing is half-loaded when this is thrown. */
export class DataProblem extends Error {
  readonly code: DataProblemCode;
  readonly advice: string;
  /** Line of the source, from 1, header counted; null where no single row is meant. */
  readonly row: number | null;
  /** Name of the column, or null. */
  readonly column: string | null;
  readonly facts: Facts;
  /** Name that the mistake hangs on, so that the session can mark it. */
  readonly about: string | null;
  constructor(code: DataProblemCode, facts: Facts = {}) {
    const { message, advice } = (dataProblems[code] as (it: Facts) => { message: string; advice: string })(facts);
    const place = typeof facts.row === "number" ? `Row ${facts.row}: ` : "";
    super(place + message);
    this.name = "DataProblem";
    this.code = code;
    this.advice = advice;
    this.row = typeof facts.row === "number" ? facts.row : null;
    this.column = typeof facts.column === "string" ? facts.column : null;
    this.about = this.column;
    this.facts = facts;
  }
}

type Facts = Readonly<Record<string, string | number | null>>;

/** The texts that people write for "nothing": suggested, never assumed. */
export const usualMissingTexts = [
  "NA",
  "N/A",
  "n/a",
  "na",
  "NaN",
  "nan",
  "-",
  ".",
  "?",
  "null",
  "NULL",
  "none",
  "missing",
  "*",
  "--",
  "#N/A",
];

/** Every message of this room. A `row` fact is put in front of the message. */
const dataProblems = {
  "empty-file": () => ({ message: "The file is empty.", advice: "Check that it was saved with its data." }),
  "header-only": () => ({
    message: "The file has a header and no rows.",
    advice: "Check that it was saved with its data.",
  }),
  "ragged-row": (it: Facts) => ({
    message: `There are ${it.found} values, and the header names ${it.expected} columns.`,
    advice: "A value that holds the separator must stand in quotes; a missing value still needs its separator.",
  }),
  "duplicate-header": (it: Facts) => ({
    message: `Two columns are named "${it.column}" (positions ${it.first} and ${it.second}).`,
    advice: "Give each column a name of its own in the file.",
  }),
  "empty-header": (it: Facts) => ({
    message: `Column ${it.position} has no name.`,
    advice: "Name it in the first row of the file, or remove the column.",
  }),
  "open-quote": () => ({
    message: "The quote that opens here is never closed.",
    advice: 'Close it; a quote inside a quoted value is written "".',
  }),
  "text-after-quote": () => ({
    message: "There is text after the closing quote of a value.",
    advice: 'A quote inside a quoted value is written "".',
  }),
  "stray-text": (it: Facts) => ({
    message: `"${it.value}" in "${it.column}" is not a number${Number(it.others ?? 0) > 0 ? `; nor are ${it.others} further values of the column` : ""}.`,
    advice: String(it.hint),
  }),
  "decimal-unclear": (it: Facts) => ({
    message: `"${it.value}" in "${it.column}" can be read with a decimal comma or with a comma between thousands.`,
    advice: "Say which under read: decimal comma, or decimal point.",
  }),
  "decimal-mixed": (it: Facts) => ({
    message: `"${it.column}" is written with a decimal comma, "${it.other}" with a decimal point.`,
    advice: "Say which one holds under read: decimal comma, or decimal point; the other column is then text.",
  }),
  "separator-unknown": (it: Facts) => ({
    message: `"${it.value}" cannot separate values.`,
    advice: "Separators are comma, semicolon, tab, bar, or another single sign.",
  }),
  "number-too-large": (it: Facts) => ({
    message: `"${it.value}" in "${it.column}" is larger than any number that can be computed with.`,
    advice: "Correct it in the file, or declare it as missing under read.",
  }),
  "unknown-column": (it: Facts) => ({
    message: `There is no column "${it.column}".`,
    advice: it.nearest === null ? `Columns: ${it.columns}.` : `Did you mean "${it.nearest}"? Columns: ${it.columns}.`,
  }),
  "column-exists": (it: Facts) => ({
    message: `There is already a column "${it.column}".`,
    advice: "Choose another name.",
  }),
  "unknown-sheet": (it: Facts) => ({
    message: `The workbook has no sheet "${it.sheet}".`,
    advice: `Its sheets: ${it.sheets}.`,
  }),
  "not-a-workbook": () => ({
    message: "The file is not an .xlsx workbook, or it is damaged.",
    advice: "Open it in a spreadsheet program and save it as .xlsx or .csv.",
  }),
  "not-json": (it: Facts) => ({
    message: `The file is not JSON: ${it.why}.`,
    advice: "It must be a list of objects with the same fields, or an object of lists of equal length.",
  }),
  "json-shape": (it: Facts) => ({
    message: `The JSON has another shape: ${it.why}.`,
    advice: "It must be a list of objects with the same fields, or an object of lists of equal length.",
  }),
  "not-parquet": (it: Facts) => ({
    message: `The file is not Parquet, or it is damaged: ${it.why}.`,
    advice: "Write it again from its source.",
  }),
  "parquet-codec": (it: Facts) => ({
    message: `The Parquet file is compressed by ${it.codec}, which cannot be opened here.`,
    advice: "Write it again with Snappy or gzip compression, or without.",
  }),
  "password-in-address": () => ({
    message: "The address holds a password, which would stay in the notebook and its record.",
    advice: "Take it out; it is read from PGPASSWORD, a password file or a service file.",
  }),
  "not-an-address": () => ({
    message: "This is not the address of a PostgreSQL database.",
    advice: 'Write it as "postgresql://host/database".',
  }),
  "unknown-service": (it: Facts) => ({
    message: `No service file has a section [${it.service}].`,
    advice: "Service files are ~/.pg_service.conf, or what PGSERVICEFILE names.",
  }),
  "database-refused": (it: Facts) => ({
    message: `The database at ${it.database} does not let this user in.`,
    advice: "Check PGUSER, and PGPASSWORD or the password file.",
  }),
  "database-not-allowed": (it: Facts) => ({
    message: `This user may not read the table at ${it.database}.`,
    advice: "Ask whoever keeps the database for the right to read it.",
  }),
  "unknown-database": (it: Facts) => ({
    message: `There is no database at ${it.database}.`,
    advice: "Check the name behind the last stroke of the address.",
  }),
  "unknown-table": (it: Facts) => ({
    message: `The database has no table "${it.table}".`,
    advice:
      it.nearest === null ? `Its tables: ${it.tables}.` : `Did you mean "${it.nearest}"? Its tables: ${it.tables}.`,
  }),
  "too-many-rows": (it: Facts) => ({
    message: `The table has ${it.rows} rows; at most ${it.most} are taken into memory.`,
    advice: "Declare response and factors first: then only their counts, means and spreads are taken in.",
  }),
  "encoding-not-streamed": () => ({
    message: "A file of this size is read as UTF-8, and this one is in UTF-16 or holds other bytes.",
    advice: "Save it as UTF-8.",
  }),
  "bad-encoding": () => ({
    message: "The file's bytes are not text in a known encoding.",
    advice: "Save it as UTF-8.",
  }),
  "nothing-to-fold": () => ({
    message: "fold needs at least two columns.",
    advice: "fold bare, nitrile, knit into seconds by glove",
  }),
  "division-by-zero": (it: Facts) => ({
    message: `"${it.column}" would divide by zero.`,
    advice: "Exclude the row with its reason, or use if ... then ... else.",
  }),
  "log-of-nonpositive": (it: Facts) => ({
    message: `"${it.column}" would take the logarithm of ${it.value}.`,
    advice: "Exclude the row with its reason, or use if ... then ... else.",
  }),
  "root-of-negative": (it: Facts) => ({
    message: `"${it.column}" would take the root of ${it.value}.`,
    advice: "Exclude the row with its reason, or use if ... then ... else.",
  }),
  "not-finite": (it: Facts) => ({
    message: `"${it.column}" would be too large for a number.`,
    advice: "Check the arithmetic.",
  }),
  "text-in-arithmetic": (it: Facts) => ({
    message: `"${it.column}" holds text, and arithmetic needs numbers.`,
    advice: String(it.hint ?? "Compare it with = or among instead."),
  }),
  "order-of-text": (it: Facts) => ({
    message: `"${it.column}" holds text, which has no order.`,
    advice: "Use = or among with texts, < and > with numbers.",
  }),
  "unknown-name": (it: Facts) => ({
    message: `"${it.column}" is neither a column nor a value of the column it is compared with.`,
    advice: it.nearest === null ? `Columns: ${it.columns}.` : `Did you mean "${it.nearest}"?`,
  }),
} as const satisfies Record<string, (it: Facts) => { message: string; advice: string }>;

export type DataProblemCode = keyof typeof dataProblems;
