import type { Name, StatementOf } from "../../../grammar/index.ts";
import {
  averageTable,
  columnNamed,
  DataProblem,
  deriveColumn,
  excludeRows,
  foldTable,
  previewTable,
  readTable,
  tableDigest,
  textCodes,
  typedTable,
} from "../../data/index.ts";
import type { Table } from "../../data/types.ts";
import { cellLabels, layoutData } from "../../design/index.ts";
import { digestOf, digestOfValue, doneAfterResults } from "../../record/index.ts";
import type { DataResult, Note } from "../../results/index.ts";
import { needData } from "../analysis/layout.ts";
import type { Context, Handler, Outcome } from "../handler.ts";
import { SessionProblem } from "../problem.ts";
import { designOf, type Exclusion, type HeldData, type Study } from "../study.ts";

type Format = "csv" | "tsv" | "xlsx" | "json" | "parquet";

const texts = (names: readonly Name[]): string[] => names.map((name) => name.text);

function formatOf(path: string): Format {
  const ending = /\.([^./\\]+)$/.exec(path)?.[1]?.toLowerCase() ?? "";
  const formats: Readonly<Record<string, Format>> = {
    csv: "csv",
    txt: "csv",
    tsv: "tsv",
    tab: "tsv",
    xlsx: "xlsx",
    json: "json",
    parquet: "parquet",
  };
  const format = formats[ending];
  if (format !== undefined) return format;
  throw new SessionProblem(
    "unknown-format",
    `"${path}" ends in ${ending === "" ? "no known ending" : `".${ending}"`}.`,
    "Files are read as .csv, .tsv, .xlsx, .json or .parquet.",
    path,
  );
}

function roleOf(study: Study, column: string): string | null {
  if (study.response?.name === column) return "response";
  if (study.factors.some((factor) => factor.name === column)) return "factor";
  const unit = study.units.find((candidate) => candidate.name === column || candidate.nestedIn.includes(column));
  if (unit !== undefined) return unit.name === column ? unit.role : "larger unit";
  return study.covariates.some((covariate) => covariate.name === column) ? "covariate" : null;
}

function columnsOf(study: Study, table: Table): DataResult["columns"] {
  return table.columns.map((column) => {
    if (column.kind === "number" && column.texts === null) {
      const missing = column.offsets.reduce((count, value) => count + (Number.isNaN(value) ? 1 : 0), 0);
      return {
        name: column.name,
        type: column.kind,
        role: roleOf(study, column.name),
        missing,
        distinct: new Set(column.offsets).size,
      };
    }
    const { codes, categories } = textCodes(column);
    const missing = codes.reduce((count, code) => count + (code < 0 ? 1 : 0), 0);
    return {
      name: column.name,
      type: column.kind,
      role: roleOf(study, column.name),
      missing,
      distinct: categories.length,
    };
  });
}

interface ResultParts {
  readonly action: DataResult["action"];
  readonly reason?: string | null;
  readonly excluded?: number;
  readonly excludedByCell?: DataResult["excludedByCell"];
  readonly afterResults?: boolean;
  readonly preview?: DataResult["preview"];
  readonly notes?: readonly Note[];
}

export function dataResult(study: Study, held: HeldData, parts: ResultParts): DataResult {
  return {
    kind: "data",
    action: parts.action,
    source: held.source,
    digest: held.digest,
    rows: held.table.rows,
    columns: columnsOf(study, held.table),
    excluded: parts.excluded ?? 0,
    excludedByCell: parts.excludedByCell ?? [],
    reason: parts.reason ?? null,
    afterResults: parts.afterResults ?? false,
    seed: held.seed,
    rehearsal: held.rehearsal,
    preview: parts.preview ?? null,
    notes: parts.notes ?? [],
  };
}

export function holdTable(
  table: Table,
  source: string | null,
  digest: string,
  rehearsal: { readonly seed: number } | null,
): HeldData {
  return {
    table,
    source,
    digest,
    rehearsal: rehearsal !== null,
    seed: rehearsal?.seed ?? null,
    rowsRead: table.rows,
    exclusions: [],
    steps: [],
    stateDigest: digest,
    laidOut: null,
  };
}

/** The held data after a step, which is part of what their digest says. */
function stepped(held: HeldData, table: Table, text: string): HeldData {
  return {
    ...held,
    table,
    steps: [...held.steps, text],
    stateDigest: digestOfValue({ before: held.stateDigest, step: text }),
    laidOut: null,
  };
}

/** A file that was read before with other content: said, so that nobody works on without knowing. */
function changedSince(study: Study, source: string, digest: string): Note[] {
  const before = study.ledger.entries.filter((entry) => entry.event === "read" && entry.facts.source === source).at(-1);
  return before !== undefined && before.facts.digest !== digest
    ? [{ code: "data-changed-since-last-read", facts: { source, before: String(before.facts.digest), now: digest } }]
    : [];
}

async function nearestFile(context: Context, path: string): Promise<string> {
  const folder = /^(.*)[/\\][^/\\]*$/.exec(path)?.[1] ?? ".";
  const name = path.slice(folder === "." ? 0 : folder.length + 1).toLowerCase();
  const files = (await context.host.listFiles(folder)).filter(
    (file) => /\.(csv|tsv|txt|xlsx|json|parquet)$/i.test(file) && !/\.plan\.json$/.test(file),
  );
  const close =
    files.find((file) => file.toLowerCase() === name) ??
    files.find((file) => file.toLowerCase().startsWith(name.slice(0, 3)));
  if (close !== undefined) return `Did you mean "${close}"?`;
  return files.length > 0
    ? `Data files here: ${files.slice(0, 6).join(", ")}.`
    : "There is no data file beside the notebook.";
}

/** A database table of more rows is not held in memory. */
const mostDatabaseRows = 5_000_000;

/** Nothing secret is kept: an address with a password in it is shown and recorded without. */
const withoutSecret = (text: string): string => text.replace(/(\/\/[^/@:\s"]+):[^/@\s"]*@/g, "$1@");

async function readDatabase(statement: StatementOf<"read">, study: Study, context: Context): Promise<Outcome> {
  const { bulk } = context.host;
  if (bulk === undefined) {
    throw new SessionProblem(
      "no-database",
      "Databases are not reached from here.",
      "Export the table to a file and read that.",
      statement.path.text,
    );
  }
  if (statement.table === null) {
    throw new SessionProblem(
      "no-table",
      "Which table is to be read is not said.",
      'Write: read table "trials" from "postgresql://host/database"',
      statement.path.text,
    );
  }
  if (
    statement.missing.length > 0 ||
    statement.sheet !== null ||
    statement.separator !== null ||
    statement.decimal !== null
  ) {
    throw new SessionProblem(
      "only-for-files",
      "missing, sheet, separator and decimal are for files; a database knows its own types and its own missing values.",
      "Leave them out, or mend the column in the table.",
    );
  }
  const source = `table "${statement.table.text}" from ${withoutSecret(statement.path.text)}`;
  let table = (await bulk.readDatabase(
    { connection: statement.path.text, table: statement.table.text, most: mostDatabaseRows },
    context.host.watch,
  )) as Table;
  for (const { from, to } of statement.renames) {
    columnNamed(table, from.text);
    if (table.columns.some((column) => column.name === to.text))
      throw new DataProblem("column-exists", { column: to.text });
    table = {
      ...table,
      columns: table.columns.map((column) => (column.name === from.text ? { ...column, name: to.text } : column)),
    };
  }
  for (const fold of statement.folds) {
    table = foldTable(table, { columns: texts(fold.columns), response: fold.response.text, factor: fold.factor.text });
  }
  const digest = digestOf(tableDigest(table));
  const text = withoutSecret(context.text);
  const held = { ...holdTable(table, source, digest, null), stateDigest: digestOfValue({ digest, read: text }) };
  return {
    study: { ...study, data: held },
    result: dataResult(study, held, { action: "read", notes: changedSince(study, source, digest) }),
    events: [{ event: "read", facts: { source, digest, rows: table.rows, statement: text } }],
  };
}

const read: Handler<"read"> = async (statement, study, context) => {
  const path = statement.path.text;
  if (statement.table !== null || /^[a-z]+:\/\//i.test(path)) return readDatabase(statement, study, context);
  const format = formatOf(path);
  let bytes: Uint8Array;
  try {
    bytes = await context.host.readBytes(path);
  } catch (error) {
    if (error instanceof Error && "code" in error && error.code === "missing-file") {
      throw new SessionProblem("missing-file", `There is no file "${path}".`, await nearestFile(context, path), path);
    }
    throw error;
  }
  const found = await readTable(bytes, {
    format,
    missing: texts(statement.missing),
    rename: statement.renames.map(({ from, to }) => ({ from: from.text, to: to.text })),
    ...(statement.sheet === null ? {} : { sheet: statement.sheet.text }),
    ...(statement.separator === null ? {} : { separator: statement.separator.text }),
    ...(statement.decimal === null ? {} : { decimal: statement.decimal === "comma" ? "," : "." }),
  });
  let table = found.table;
  for (const fold of statement.folds) {
    table = foldTable(table, { columns: texts(fold.columns), response: fold.response.text, factor: fold.factor.text });
  }
  const digest = digestOf(bytes);
  // How the file was read belongs to what the numbers are.
  const held = { ...holdTable(table, path, digest, null), stateDigest: digestOfValue({ digest, read: context.text }) };
  const notes = [...found.notes, ...changedSince(study, path, digest)];
  if (study.data?.rehearsal === true) notes.push({ code: "rehearsal-dropped", facts: {} });
  return {
    study: { ...study, data: held },
    result: dataResult(study, held, { action: "read", notes }),
    events: [{ event: "read", facts: { source: path, digest, rows: table.rows, statement: context.text } }],
  };
};

const data: Handler<"data"> = (statement, study, context) => {
  const table = typedTable(statement.rows.map((row) => row.map((name) => name.text)));
  const digest = digestOf(tableDigest(table));
  const held = holdTable(table, null, digest, null);
  const notes: Note[] = study.data?.rehearsal === true ? [{ code: "rehearsal-dropped", facts: {} }] : [];
  return {
    study: { ...study, data: held },
    result: dataResult(study, held, { action: "typed", notes }),
    events: [
      {
        event: "read",
        facts: { source: "typed into the notebook", digest, rows: table.rows, statement: context.text.split("\n")[0]! },
      },
    ],
  };
};

function repeated(study: Study, held: HeldData, context: Context, action: DataResult["action"]): Outcome | null {
  if (!held.steps.includes(context.text)) return null;
  return {
    study,
    result: dataResult(study, held, {
      action,
      notes: [{ code: "step-already-taken", facts: { statement: context.text } }],
    }),
  };
}

const derive: Handler<"derive"> = (statement, study, context) => {
  const held = needData(study);
  const again = repeated(study, held, context, "derive");
  if (again !== null) return again;
  const next = stepped(held, deriveColumn(held.table, statement.name.text, statement.expression), context.text);
  return {
    study: { ...study, data: next },
    result: dataResult(study, next, { action: "derive" }),
    events: held.rehearsal
      ? []
      : [{ event: "change data", facts: { statement: context.text, data: next.stateDigest } }],
  };
};

/** Rows taken out, by cell of the declared design, where it is declared far enough to say. */
function excludedByCell(study: Study, table: Table, excluded: Int32Array): Exclusion["byCell"] {
  const design = designOf(study);
  if (design === null || design.factors.length === 0) return [];
  const gone = new Set(excluded);
  try {
    const layout = layoutData(table, design);
    const counts = new Map<number, number>();
    for (let row = 0; row < layout.data.rows; row++) {
      if (gone.has(layout.sourceRows[row]!))
        counts.set(layout.data.cells[row]!, (counts.get(layout.data.cells[row]!) ?? 0) + 1);
    }
    return [...counts]
      .sort(([left], [right]) => left - right)
      .map(([cell, rows]) => ({ levels: cellLabels(design.factors, cell), rows }));
  } catch {
    // The design does not fit the data yet; check says so, and the count alone stands.
    return [];
  }
}

const exclude: Handler<"exclude"> = (statement, study, context) => {
  const held = needData(study);
  if (statement.reason.text.trim() === "") {
    throw new SessionProblem(
      "reason-empty",
      "The reason is empty.",
      'Say why the rows are left out: because "practice trial"',
    );
  }
  const again = repeated(study, held, context, "exclude");
  if (again !== null) return again;
  const { table, excludedRows } = excludeRows(held.table, statement.condition);
  const act = {
    statement: context.text,
    reason: statement.reason.text,
    rows: excludedRows.length,
    data: stepped(held, table, context.text).stateDigest,
  };
  const afterResults = !held.rehearsal && doneAfterResults(study.ledger, "exclude", act);
  const byCell = excludedByCell(study, held.table, excludedRows);
  const exclusion: Exclusion = {
    text: context.text,
    reason: statement.reason.text,
    rows: excludedRows.length,
    byCell,
    afterResults,
  };
  const next: HeldData = { ...stepped(held, table, context.text), exclusions: [...held.exclusions, exclusion] };
  const notes: Note[] = [];
  if (excludedRows.length === 0) notes.push({ code: "nothing-excluded", facts: {} });
  if (table.rows === 0) notes.push({ code: "everything-excluded", facts: {} });
  return {
    study: { ...study, data: next },
    result: dataResult(study, next, {
      action: "exclude",
      excluded: excludedRows.length,
      excludedByCell: byCell,
      reason: exclusion.reason,
      afterResults,
      notes,
    }),
    events: held.rehearsal
      ? []
      : [
          {
            event: "exclude",
            facts: { ...act, afterResults },
          },
        ],
  };
};

const average: Handler<"average"> = (statement, study, context) => {
  const held = needData(study);
  const again = repeated(study, held, context, "average");
  if (again !== null) return again;
  const declared = [
    ...study.units.flatMap((unit) => [unit.name, ...unit.nestedIn]),
    ...study.factors.map((factor) => factor.name),
    ...study.covariates.map((covariate) => covariate.name),
  ];
  const over = texts(statement.over);
  const clash = over.find((name) => declared.includes(name));
  if (clash !== undefined) {
    throw new SessionProblem(
      "averaged-over-design",
      `"${clash}" is part of the declared design and cannot be averaged over.`,
      "Average over the column that numbers the trials.",
      clash,
    );
  }
  const keep = declared.filter(
    (name, index) => declared.indexOf(name) === index && held.table.columns.some((column) => column.name === name),
  );
  const { table } = averageTable(held.table, {
    response: statement.response.text,
    over: over.join("\u0000") === "" ? [] : over,
    keep,
    by: statement.by,
  });
  const next = stepped(held, table, context.text);
  return {
    study: { ...study, data: next },
    result: dataResult(study, next, {
      action: "average",
      notes: [{ code: "averaged", facts: { before: held.table.rows, after: table.rows, over, by: statement.by } }],
    }),
    events: held.rehearsal
      ? []
      : [{ event: "change data", facts: { statement: context.text, data: next.stateDigest } }],
  };
};

/** Rows shown by `show data`. */
const previewRows = 12;

export function showData(study: Study): Outcome {
  const held = needData(study);
  return { study, result: dataResult(study, held, { action: "show", preview: previewTable(held.table, previewRows) }) };
}

export const dataHandlers = { read, data, derive, exclude, average } as const;
