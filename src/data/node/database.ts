import type { Watch } from "../../host/index.ts";
import { nearestName, unknownColumn } from "../build.ts";
import { ratioToNumber } from "../decimal.ts";
import { DataProblem } from "../problem.ts";
import { typedTable } from "../read.ts";
import type { Expression, Table } from "../types.ts";
import { type Ask, withDatabase } from "./connection.ts";
import { cellsOfGroups, type GroupRow } from "./level-cells.ts";
import type { CellAnswer, CellQuestion } from "./question.ts";
import { resolvedConditions, resolvedExpression } from "./resolved-names.ts";
import { postgresDialect, quotedName, quotedText, SqlWriter } from "./sql.ts";

const lookEveryMs = 15;

export interface DatabaseSource {
  /** `postgresql://host:port/database`, without password; what it leaves out comes from the PG* environment, a service or password file. */
  readonly connection: string;
  /** Name of the table or view, with its schema in front where needed: `lab.trials`. */
  readonly table: string;
}
export interface DatabaseQuestion extends CellQuestion, DatabaseSource {}

interface Column {
  readonly name: string;
  readonly type: string;
}

/** Runs `work`; when the watch says stop, the statement at the server is cancelled. */
async function watched<Answer>(
  source: DatabaseSource,
  watch: Watch,
  work: (ask: Ask) => Promise<Answer>,
): Promise<Answer> {
  let cancel: (() => Promise<void>) | null = null;
  const running = withDatabase(source.connection, work, (way) => {
    cancel = way;
  });
  running.catch(() => {});
  for (;;) {
    const finished = await Promise.race([
      running.then(() => true),
      new Promise<false>((resolve) => setTimeout(resolve, lookEveryMs, false)),
    ]);
    if (finished) return running;
    try {
      watch.checkpoint();
    } catch (error) {
      if (cancel !== null) await (cancel as () => Promise<void>)().catch(() => {});
      await running.catch(() => {});
      throw error;
    }
  }
}

/** The table's columns, in order. */
async function columnsOf(
  ask: Ask,
  table: string,
): Promise<{ readonly sql: string; readonly columns: readonly Column[] }> {
  const parts = table.split(".");
  const sql = parts.map(quotedName).join(".");
  const rows = await ask(
    `SELECT a.attname, format_type(a.atttypid, NULL) FROM pg_attribute a
     WHERE a.attrelid = to_regclass($1) AND a.attnum > 0 AND NOT a.attisdropped ORDER BY a.attnum`,
    [sql],
  );
  if (rows.length > 0) return { sql, columns: rows.map(([name, type]) => ({ name: name!, type: type! })) };
  const others = await ask(
    "SELECT table_name FROM information_schema.tables WHERE table_schema NOT IN ('pg_catalog', 'information_schema') ORDER BY 1 LIMIT 200",
  );
  const names = others.map(([name]) => name!);
  throw new DataProblem("unknown-table", {
    table,
    nearest: nearestName(table, names),
    tables: names.slice(0, 20).join(", "),
  });
}

const isFloat = (type: string) => /^(real|double precision)$/.test(type);
const isNumeric = (type: string) => isFloat(type) || /^(smallint|integer|bigint|numeric)$/.test(type);

/** A column as exact decimals: a binary float as the shortest decimal that gives it back, as everywhere here. */
function exactColumn(
  { name, type }: Column,
  missing: readonly string[],
): { readonly sql: string; readonly numeric: boolean } {
  const sql = quotedName(name);
  if (isNumeric(type)) {
    const numbers = missing
      .filter((text) => text.trim() !== "" && Number.isFinite(Number(text)))
      .map((text) => String(Number(text)));
    const kept = numbers.length === 0 ? "" : ` AND ${sql} NOT IN (${numbers.join(", ")})`;
    const value = isFloat(type) ? `${sql}::text::numeric` : `${sql}::numeric`;
    return { sql: `(CASE WHEN ${sql}::text <> 'NaN'${kept} THEN ${value} END)`, numeric: true };
  }
  const gone = ["", ...missing].map(quotedText).join(", ");
  return { sql: `(CASE WHEN btrim(${sql}::text) NOT IN (${gone}) THEN btrim(${sql}::text) END)`, numeric: false };
}

/**
 * Counts, means and sums of squares by cell of a table in a PostgreSQL database. The database does the counting; only
 * one line for each cell (or subject and cell) crosses the wire. Sums are exact.
 *
 * @throws DataProblem for what is wrong with the table or the address; HostError "lost-connection"; Interrupted
 */
export function databaseCells(question: DatabaseQuestion, watch: Watch): Promise<CellAnswer> {
  return watched(question, watch, async (ask) => {
    const { sql: table, columns } = await columnsOf(ask, question.table);
    return aggregated(ask, table, columns, question);
  });
}

async function aggregated(
  ask: Ask,
  table: string,
  columns: readonly Column[],
  question: DatabaseQuestion,
): Promise<CellAnswer> {
  const renames = question.rename ?? [];
  const named = columns.map((column) => ({
    ...column,
    as: renames.find(({ from }) => from === column.name)?.to ?? column.name,
  }));
  const names = named.map((column) => column.as);
  const derived = new Map<string, Expression>();
  for (const { name, expression } of question.derive ?? []) {
    if (names.includes(name) || derived.has(name)) throw new DataProblem("column-exists", { column: name });
    derived.set(name, resolvedExpression(expression, [...names, ...derived.keys()]));
  }
  const missing = question.missing ?? [];
  const writer: SqlWriter = new SqlWriter(postgresDialect, (name) => {
    const expression = derived.get(name);
    if (expression !== undefined) return writer.expression(expression);
    const column = named.find((candidate) => candidate.as === name);
    return column === undefined ? null : exactColumn(column, missing);
  });
  const known = [...names, ...derived.keys()];
  const part = (name: string) => {
    if (!known.includes(name)) throw unknownColumn(name, known);
    return writer.expression({ type: "name", name });
  };
  const conditions = resolvedConditions(question.exclude ?? [], known).map((condition) => writer.condition(condition));
  const excludedBy = `CASE ${conditions.map((sql, index) => `WHEN ${sql} THEN ${index}`).join(" ")} END`;
  const from = conditions.length === 0 ? table : `(SELECT * FROM ${table} WHERE (${excludedBy}) IS NULL) kept`;
  const response = part(question.response);
  if (!response.numeric) await refuseText(ask, from, question.response, response.sql);
  const numeric = `(${response.numeric ? response.sql : postgresDialect.number(response.sql)})::text::numeric`;
  const [[middle]] = (await ask(
    `SELECT round((min(x) + max(x)) / 2) FROM (SELECT ${numeric} AS x FROM ${from} LIMIT 20000) first`,
  )) as [[string | null]];
  if (middle !== null && !Number.isFinite(Number(middle)))
    throw new DataProblem("not-finite", { column: question.response });
  const center = middle === null || !Number.isSafeInteger(Number(middle)) ? 0 : Number(middle);
  const texts = question.factors.map(({ name }) => postgresDialect.text(part(name).sql));
  const hasSubject = question.subject !== undefined && question.subject !== null;
  if (hasSubject) texts.push(postgresDialect.text(part(question.subject!).sql));
  const keys = texts.map((sql, index) => `${sql} AS k${index}, `).join("");
  const group = texts.length === 0 ? "" : ` GROUP BY ${texts.map((_, index) => index + 1).join(", ")}`;
  const rows = await ask(
    `SELECT ${keys}count(*), count(x), coalesce(sum(x - ${center}), 0), coalesce(sum((x - ${center}) * (x - ${center})), 0)
     FROM (SELECT *, ${numeric} AS x FROM ${from}) valued${group}`,
  );
  const cells = cellsOfGroups(
    rows.map((row) => groupOf(row, question.factors.length, hasSubject)),
    question,
    center,
  );
  const excluded = conditions.map(() => 0);
  if (conditions.length > 0) {
    for (const [which, count] of await ask(`SELECT ${excludedBy}, count(*) FROM ${table} GROUP BY 1`))
      if (which !== null) excluded[Number(which)] = Number(count);
  }
  const sample = { cells: new Int32Array(), offsets: new Float64Array(), of: cells.entered };
  return { ...cells, rows: cells.rows + excluded.reduce((sum, count) => sum + count, 0), excluded, sample, notes: [] };
}

function groupOf(row: readonly (string | null)[], factors: number, hasSubject: boolean): GroupRow {
  const [count, n, sum, square] = row.slice(-4).map((value) => value!) as [string, string, string, string];
  const number = BigInt(n);
  const s = scaled(sum);
  const q = scaled(square);
  return {
    factors: row.slice(0, factors),
    subject: hasSubject ? row[factors]! : null,
    rows: Number(count),
    n: Number(n),
    mean: number === 0n ? 0 : ratioToNumber(s.digits, number * s.scale),
    sumOfSquares:
      number === 0n
        ? 0
        : ratioToNumber(
            q.digits * number * s.scale * s.scale - s.digits * s.digits * q.scale,
            number * q.scale * s.scale * s.scale,
          ),
  };
}

function scaled(text: string): { readonly digits: bigint; readonly scale: bigint } {
  if (!/^-?\d+(\.\d+)?$/.test(text)) throw new DataProblem("not-finite", { column: "the response" });
  const [whole, part = ""] = text.split(".");
  return { digits: BigInt(whole! + part), scale: 10n ** BigInt(part.length) };
}

async function refuseText(ask: Ask, from: string, column: string, sql: string): Promise<void> {
  const [first] = await ask(
    `SELECT ${sql} FROM ${from} WHERE ${sql} IS NOT NULL AND ${postgresDialect.number(sql)} IS NULL LIMIT 1`,
  );
  if (first === undefined) return;
  const hint = "Correct it in the table, or name it as missing, or exclude the row with its reason.";
  throw new DataProblem("stray-text", { column, value: first[0]!, hint });
}

/**
 * The rows of a table in a database as a table in memory, exactly, for studies of ordinary size.
 * @param most rows taken at most; a larger table is an error that says to work with `databaseCells`
 */
export function databaseTable(source: DatabaseSource & { readonly most: number }, watch: Watch): Promise<Table> {
  return watched(source, watch, async (ask) => {
    const { sql, columns } = await columnsOf(ask, source.table);
    const [[count]] = (await ask(`SELECT count(*) FROM ${sql}`)) as [[string]];
    if (Number(count) > source.most) throw new DataProblem("too-many-rows", { rows: Number(count), most: source.most });
    const list = columns.map(({ name }) => `${quotedName(name)}::text`).join(", ");
    const rows = await ask(`SELECT ${list} FROM ${sql}`);
    const empty = (value: string | null) => (value === null || value === "NaN" ? "" : value);
    return typedTable([columns.map((column) => column.name), ...rows.map((row) => row.map(empty))]);
  });
}

/** Columns and number of rows of a table, for showing what there is. */
export function databaseColumns(
  source: DatabaseSource,
  watch: Watch,
): Promise<{
  readonly rows: number;
  readonly columns: readonly { readonly name: string; readonly type: "number" | "text" }[];
}> {
  return watched(source, watch, async (ask) => {
    const { sql, columns } = await columnsOf(ask, source.table);
    const [[count]] = (await ask(`SELECT count(*) FROM ${sql}`)) as [[string]];
    return {
      rows: Number(count),
      columns: columns.map(({ name, type }) => ({ name, type: isNumeric(type) ? "number" : "text" })),
    };
  });
}
