import { existsSync } from "node:fs";
import { availableParallelism } from "node:os";
import type { DuckDBConnection } from "@duckdb/node-api";
import { HostError, type Watch } from "../../host/index.ts";
import { unknownColumn } from "../build.ts";
import { ratioToNumber } from "../decimal.ts";
import { DataProblem } from "../problem.ts";
import type { Expression } from "../types.ts";
import { cellsOfGroups, type GroupRow } from "./level-cells.ts";
import type { CellAnswer, FileQuestion } from "./question.ts";
import { resolvedConditions, resolvedExpression } from "./resolved-names.ts";
import { duckdbDialect, quotedName, quotedText, SqlWriter } from "./sql.ts";

/** How often the watch is looked at while the engine works. */
const lookEveryMs = 15;
/** Decimal places tried on a column of doubles, taken from its first values. */
const looked = 20_000;

type Row = Record<string, unknown>;

/** Runs a statement; the watch can interrupt it and hears how far it has come. */
async function rowsOf(connection: DuckDBConnection, sql: string, watch: Watch): Promise<Row[]> {
  const running = connection.runAndReadAll(sql).then((reader) => reader.getRowObjectsJS() as Row[]);
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
      connection.interrupt();
      await running.catch(() => {});
      throw error;
    }
    const { percentage } = connection.progress;
    if (percentage > 0) watch.progress(Math.min(100, percentage), 100, "reading the file");
  }
}

interface ColumnType {
  readonly name: string;
  readonly type: string;
}

const isNumeric = (type: string) => /^(U?(TINY|SMALL|BIG|HUGE)?INT(EGER)?|DECIMAL.*|DOUBLE|FLOAT)$/.test(type);

/**
 * Counts, means and sums of squares by cell of a Parquet file of any size, by DuckDB, which reads only the columns that
 * are needed, on all cores, and puts on disk what does not fit into memory.
 *
 * Decimals and integers, and doubles that are short decimals, are summed as exact decimals; other doubles are summed
 * centred, by compensated summation.
 */
export async function parquetCells(question: FileQuestion, watch: Watch): Promise<CellAnswer> {
  if (!existsSync(question.path))
    throw new HostError("missing-file", question.path, `There is no file "${question.path}".`);
  const { DuckDBInstance } = await import("@duckdb/node-api").catch(() => {
    throw new HostError(
      "no-engine",
      question.path,
      "Large Parquet files need the DuckDB engine, which is not installed here.",
    );
  });
  const threads = String(Math.max(1, question.threads ?? availableParallelism()));
  const instance = await DuckDBInstance.create(":memory:", { threads, memory_limit: "700MB" });
  const connection = await instance.connect();
  try {
    return await aggregated(connection, question, watch);
  } catch (error) {
    throw engineProblem(error);
  } finally {
    connection.closeSync();
    instance.closeSync();
  }
}

function engineProblem(error: unknown): unknown {
  if (!(error instanceof Error) || error instanceof DataProblem || error.name === "Interrupted") return error;
  if (/No space left|could not write|max_temp_directory_size/i.test(error.message))
    return new HostError(
      "disk-full",
      "",
      "The disk is full: reading this file needs room for what does not fit into memory.",
    );
  if (/logarithm/i.test(error.message))
    return new DataProblem("log-of-nonpositive", {
      column: "the derived column",
      value: "a value that is not above zero",
    });
  if (/square root/i.test(error.message))
    return new DataProblem("root-of-negative", { column: "the derived column", value: "a negative value" });
  if (
    /parquet|Invalid Input Error|magic bytes|Snappy|ZSTD|thrift/i.test(error.message) &&
    !/Binder|Parser/.test(error.message)
  )
    return new DataProblem("not-parquet", { why: "its parts do not fit together" });
  return error;
}

async function aggregated(connection: DuckDBConnection, question: FileQuestion, watch: Watch): Promise<CellAnswer> {
  const source = `read_parquet(${quotedText(question.path)})`;
  const numbered = `read_parquet(${quotedText(question.path)}, file_row_number = true)`;
  const described = await rowsOf(
    connection,
    `DESCRIBE SELECT * FROM read_parquet(${quotedText(question.path)})`,
    watch,
  );
  const renames = question.rename ?? [];
  const columns = described.map((row): ColumnType & { readonly inFile: string } => {
    const inFile = String(row.column_name);
    return { inFile, name: renames.find(({ from }) => from === inFile)?.to ?? inFile, type: String(row.column_type) };
  });
  const names = columns.map((column) => column.name);
  const derived = new Map<string, Expression>();
  for (const { name, expression } of question.derive ?? []) {
    if (names.includes(name) || derived.has(name)) throw new DataProblem("column-exists", { column: name });
    derived.set(name, resolvedExpression(expression, [...names, ...derived.keys()]));
  }
  const missing = (question.missing ?? []).map(quotedText).join(", ");
  const writer: SqlWriter = new SqlWriter(duckdbDialect, (name) => {
    const expression = derived.get(name);
    if (expression !== undefined) return writer.expression(expression);
    const column = columns.find((candidate) => candidate.name === name);
    if (column === undefined) return null;
    const sql = quotedName(column.inFile);
    const numeric = isNumeric(column.type);
    if (!numeric && missing !== "")
      return { sql: `(CASE WHEN trim(${sql}) NOT IN (${missing}) THEN ${sql} END)`, numeric };
    if (!numeric) return { sql, numeric };
    const numbers = (question.missing ?? []).filter((text) => text.trim() !== "" && Number.isFinite(Number(text)));
    const gone = [
      // A double that is not a number is a missing one.
      ...(/DOUBLE|FLOAT/.test(column.type) ? [`isnan(${sql})`] : []),
      ...(numbers.length > 0 ? [`${sql} IN (${numbers.map(Number).join(", ")})`] : []),
    ];
    return { sql: gone.length === 0 ? sql : `(CASE WHEN ${gone.join(" OR ")} THEN NULL ELSE ${sql} END)`, numeric };
  });
  const known = [...names, ...derived.keys()];
  const part = (name: string) => {
    if (!known.includes(name)) throw unknownColumn(name, known);
    return writer.expression({ type: "name", name });
  };
  const response = part(question.response);
  const conditions = resolvedConditions(question.exclude ?? [], known).map((condition) => writer.condition(condition));
  // Each excluded row counts for the first condition that it meets.
  const excludedBy = `CASE ${conditions.map((sql, index) => `WHEN ${sql} THEN ${index}`).join(" ")} END`;
  const kept = (rows: string) =>
    conditions.length === 0 ? rows : `(SELECT * FROM ${rows} WHERE (${excludedBy}) IS NULL)`;
  const from = kept(source);
  if (!response.numeric) await refuseText(connection, kept(numbered), question.response, response.sql, watch);
  const numeric = response.numeric ? response.sql : `TRY_CAST(${response.sql} AS DOUBLE)`;
  const scale = await scaleOf(
    connection,
    numeric,
    from,
    columns.find(({ name }) => name === question.response)?.type ?? "DOUBLE",
    watch,
  );
  const texts = question.factors.map(({ name }) => duckdbDialect.text(part(name).sql));
  const hasSubject = question.subject !== undefined && question.subject !== null;
  if (hasSubject) texts.push(duckdbDialect.text(part(question.subject!).sql));
  const groups =
    (scale.places === null ? null : await exactGroups(connection, { from, numeric, texts, scale }, watch)) ??
    (await doubleGroups(connection, { from, numeric, texts, scale }, watch));
  const cells = cellsOfGroups(
    groups.map(({ keys, ...rest }) => ({
      ...rest,
      factors: keys.slice(0, question.factors.length),
      subject: hasSubject ? keys.at(-1)! : null,
    })),
    question,
    scale.center,
  );
  const excluded = conditions.map(() => 0);
  if (conditions.length > 0) {
    const counts = await rowsOf(
      connection,
      `SELECT ${excludedBy} AS which, count(*) AS rows FROM ${source} GROUP BY 1`,
      watch,
    );
    for (const { which, rows } of counts) if (which !== null) excluded[Number(which)] = Number(rows);
  }
  const rows = cells.rows + excluded.reduce((sum, count) => sum + count, 0);
  const sample = await sampled(
    connection,
    question,
    { from: kept(numbered), numeric, texts, center: scale.center },
    watch,
  );
  return { ...cells, rows, excluded, sample: { ...sample, of: cells.entered }, notes: [] };
}

async function refuseText(
  connection: DuckDBConnection,
  from: string,
  column: string,
  sql: string,
  watch: Watch,
): Promise<void> {
  const [first] = await rowsOf(
    connection,
    `SELECT file_row_number AS row, ${sql} AS value FROM ${from} WHERE ${sql} IS NOT NULL AND trim(${sql}) <> '' AND TRY_CAST(${sql} AS DOUBLE) IS NULL ORDER BY 1 LIMIT 1`,
    watch,
  );
  if (first === undefined) return;
  throw new DataProblem("stray-text", {
    row: Number(first.row) + 1,
    column,
    value: String(first.value),
    hint: "Correct it in the file, or name it as missing, or exclude the row with its reason.",
  });
}

interface Scale {
  readonly center: number;
  /** Decimal places at which the values are exact decimals, as far as the first ones tell; null where they are not. */
  readonly places: number | null;
  readonly doubles: boolean;
  /** Digits of a decimal column; null for others. */
  readonly width: number | null;
}

async function scaleOf(
  connection: DuckDBConnection,
  numeric: string,
  from: string,
  type: string,
  watch: Watch,
): Promise<Scale> {
  const first = await rowsOf(connection, `SELECT CAST(${numeric} AS DOUBLE) AS x FROM ${from} LIMIT ${looked}`, watch);
  const values = first
    .map((row) => row.x)
    .filter((value): value is number => typeof value === "number" && Number.isFinite(value));
  if (values.length === 0) return { center: 0, places: null, doubles: true, width: null };
  const low = values.reduce((least, value) => Math.min(least, value));
  const high = values.reduce((most, value) => Math.max(most, value));
  const center = Math.round(low / 2 + high / 2);
  if (!Number.isSafeInteger(center)) return { center, places: null, doubles: true, width: null };
  const declared = /^DECIMAL\((\d+),\s*(\d+)\)$/.exec(type);
  if (declared !== null) return { center, places: Number(declared[2]), doubles: false, width: Number(declared[1]) };
  if (/INT/.test(type)) return { center, places: 0, doubles: false, width: null };
  const places = values.reduce((most, value) => Math.max(most, decimalPlaces(value)), 0);
  const digits = Math.log10(Math.max(Math.abs(low), Math.abs(high), 1)) + places;
  return { center, places: digits <= 15 && places <= 12 ? places : null, doubles: true, width: null };
}

function decimalPlaces(value: number): number {
  const text = String(value);
  const [mantissa, exponent] = text.split("e");
  return Math.max(0, (mantissa!.split(".")[1]?.length ?? 0) - Number(exponent ?? 0));
}

interface Aggregate {
  readonly from: string;
  readonly numeric: string;
  readonly texts: readonly string[];
  readonly scale: Scale;
}
type Group = Omit<GroupRow, "factors" | "subject"> & { readonly keys: readonly (string | null)[] };

const keysOf = (texts: readonly string[]) => texts.map((sql, index) => `${sql} AS k${index}`).join(", ");
const groupBy = (texts: readonly string[]) =>
  texts.length === 0 ? "" : `GROUP BY ${texts.map((_, index) => index + 1).join(", ")}`;
const textKeys = (row: Row, texts: readonly string[]) =>
  texts.map((_, index) => (row[`k${index}`] === null ? null : String(row[`k${index}`])));

/** Ways to the exact sums, quickest first; each is given up where a value does not fit into its digits. */
function exactWays({ numeric, scale }: Aggregate): { readonly offset: string; readonly center: number }[] {
  const { center, places, width } = scale;
  // Decimals are summed as they are: exact sums need no centre.
  const plain = width !== null && width <= 18 ? [{ offset: numeric, center: 0 }] : [];
  const centred = [9, 18]
    .filter((digits) => places! < digits - 1)
    .map((digits) => ({
      offset: `CAST(CAST(${numeric} AS DECIMAL(18,${places})) - ${center} AS DECIMAL(${digits},${places}))`,
      center,
    }));
  return [...plain, ...centred];
}

/** Sums of exact decimals; null where the values turn out to be none, or too large for them. */
async function exactGroups(connection: DuckDBConnection, question: Aggregate, watch: Watch): Promise<Group[] | null> {
  const { from, numeric, texts, scale } = question;
  const odd = scale.doubles
    ? `count(*) FILTER (CAST(CAST(${numeric} AS DECIMAL(18,${scale.places})) AS DOUBLE) <> ${numeric})`
    : "0";
  const keys = texts.length > 0 ? `${keysOf(texts)}, ` : "";
  for (const { offset, center } of exactWays(question)) {
    const sql = `SELECT ${keys}count(*) AS rows, count(${numeric}) AS n, CAST(sum(${offset}) AS VARCHAR) AS s, CAST(sum(${offset} * ${offset}) AS VARCHAR) AS q, ${odd} AS odd FROM ${from} ${groupBy(texts)}`;
    try {
      const rows = await rowsOf(connection, sql, watch);
      if (rows.some((row) => Number(row.odd) > 0)) return null;
      return rows.map((row) => ({
        keys: textKeys(row, texts),
        rows: Number(row.rows),
        n: Number(row.n),
        ...exactMoments(row, BigInt(scale.center - center)),
      }));
    } catch (error) {
      if (!(error instanceof Error) || !/Conversion|Out of Range|overflow|Could not cast/i.test(error.message))
        throw error;
    }
  }
  return null;
}

/** @param rest what is still to be taken off every value, so that means are about the centre */
function exactMoments(row: Row, rest: bigint): { readonly mean: number; readonly sumOfSquares: number } {
  if (Number(row.n) === 0) return { mean: 0, sumOfSquares: 0 };
  const n = BigInt(Number(row.n));
  const sum = scaled(String(row.s));
  const square = scaled(String(row.q));
  return {
    mean: ratioToNumber(sum.digits - n * rest * sum.scale, n * sum.scale),
    sumOfSquares: ratioToNumber(
      square.digits * n * sum.scale * sum.scale - sum.digits * sum.digits * square.scale,
      n * square.scale * sum.scale * sum.scale,
    ),
  };
}

async function doubleGroups(
  connection: DuckDBConnection,
  { from, numeric, texts, scale }: Aggregate,
  watch: Watch,
): Promise<Group[]> {
  const offset = `(CAST(${numeric} AS DOUBLE) - ${scale.center})`;
  const keys = texts.length > 0 ? `${keysOf(texts)}, ` : "";
  const rows = await rowsOf(
    connection,
    `SELECT ${keys}count(*) AS rows, count(${numeric}) AS n, fsum(${offset}) AS s, fsum(${offset} * ${offset}) AS q FROM ${from} ${groupBy(texts)}`,
    watch,
  );
  return rows.map((row) => {
    const n = Number(row.n);
    const sum = Number(row.s ?? 0);
    const mean = n === 0 ? 0 : sum / n;
    if (!Number.isFinite(mean)) throw new DataProblem("not-finite", { column: "the response" });
    return {
      keys: textKeys(row, texts),
      rows: Number(row.rows),
      n,
      mean,
      sumOfSquares: n < 2 ? 0 : Math.max(0, Number(row.q) - mean * sum),
    };
  });
}

async function sampled(
  connection: DuckDBConnection,
  question: FileQuestion,
  { from, numeric, texts, center }: Pick<Aggregate, "from" | "numeric" | "texts"> & { readonly center: number },
  watch: Watch,
): Promise<{ readonly cells: Int32Array; readonly offsets: Float64Array }> {
  const size = question.sample?.size ?? 0;
  if (size === 0) return { cells: new Int32Array(), offsets: new Float64Array() };
  const keys = texts.length > 0 ? `${keysOf(texts)}, ` : "";
  const rows = await rowsOf(
    connection,
    `SELECT ${keys}CAST(${numeric} AS DOUBLE) - ${center} AS d FROM ${from} WHERE ${numeric} IS NOT NULL ORDER BY hash(file_row_number, ${question.sample!.seed}) LIMIT ${size * 2}`,
    watch,
  );
  const kept: { readonly cell: number; readonly offset: number }[] = [];
  for (const row of rows) {
    const own = textKeys(row, texts);
    const group = cellsOfGroups(
      [{ factors: own, subject: own.at(-1) ?? null, rows: 1, n: 1, mean: 0, sumOfSquares: 0 }],
      question,
      0,
    );
    const cell = group.statistics.n.indexOf(1);
    if (cell >= 0 && kept.length < size) kept.push({ cell, offset: Number(row.d) });
  }
  return {
    cells: Int32Array.from(kept.map((row) => row.cell)),
    offsets: Float64Array.from(kept.map((row) => row.offset)),
  };
}

function scaled(text: string): { readonly digits: bigint; readonly scale: bigint } {
  const [whole, part = ""] = text.split(".");
  return { digits: BigInt(whole! + part), scale: 10n ** BigInt(part.length) };
}
