import { closeSync, openSync, readSync, statSync } from "node:fs";
import type { Watch } from "../../host/index.ts";
import type { Note } from "../../results/index.ts";
import { unknownColumn } from "../build.ts";
import { asNumbers, columnNamed } from "../columns.ts";
import { readDelimited } from "../delimited.ts";
import { nearestValues } from "../numbers.ts";
import { DataProblem, type DataProblemCode } from "../problem.ts";
import { separatorNamed, separatorOf } from "../separators.ts";
import type { Table } from "../types.ts";
import { assembled } from "./assembled.ts";
import type { ChunkAnswer, KernelPlan } from "./chunk-kernel.ts";
import type { Part, WorkerPlan } from "./chunk-job.ts";
import { fileProblem, type PartsRead, readInOrder, readParts } from "./part-readers.ts";
import { resolvedConditions, resolvedExpression } from "./resolved-names.ts";
import type { CellAnswer, FileQuestion } from "./question.ts";
import { steppedTable } from "./table-kernel.ts";

/** Bytes at the front that settle header, separator, decimal sign, centre and places. */
const sampleBytes = 1 << 20;
/** A part is about this long: long enough to be worth a message, short enough to be spread evenly and interrupted soon. */
const usualPartBytes = 1 << 22;
const partMargin = 1 << 16;
/** Integers of a value are kept below 2^52. */
const largestInteger = 2 ** 52;

function frontOf(path: string): { readonly bytes: Uint8Array; readonly size: number } {
  try {
    const { size } = statSync(path);
    const file = openSync(path, "r");
    try {
      const bytes = new Uint8Array(Math.min(size, sampleBytes));
      const length = readSync(file, bytes, 0, bytes.length, 0);
      return { bytes: bytes.subarray(0, length), size };
    } finally {
      closeSync(file);
    }
  } catch (error) {
    throw fileProblem(error, path);
  }
}

/** Where the first record that is not blank ends, and how many lines that takes. */
function headerEnd(
  bytes: Uint8Array,
  start: number,
): { readonly from: number; readonly end: number; readonly lines: number } {
  let lines = 0;
  let from = start;
  let quoted = false;
  let filled = false;
  for (let position = start; position < bytes.length; position++) {
    const code = bytes[position]!;
    if (code === 34) quoted = !quoted;
    if (code > 32) filled = true;
    if (code !== 10 || quoted) continue;
    lines++;
    if (filled) return { from, end: position + 1, lines };
    from = position + 1;
  }
  return { from, end: bytes.length, lines };
}

interface Front {
  /** The first rows, as a small table. */
  readonly table: Table;
  readonly notes: readonly Note[];
  readonly header: Uint8Array;
  readonly dataStart: number;
  /** Lines in front of the data. */
  readonly lines: number;
  readonly separator: number;
  readonly decimal: "." | ",";
  readonly names: readonly string[];
}

function readFront(question: FileQuestion, bytes: Uint8Array, whole: boolean): Front {
  const bom = bytes[0] === 0xef && bytes[1] === 0xbb && bytes[2] === 0xbf ? 3 : 0;
  if ((bytes[0] === 0xff && bytes[1] === 0xfe) || (bytes[0] === 0xfe && bytes[1] === 0xff) || bytes.includes(0))
    throw new DataProblem("encoding-not-streamed");
  const announced = /^sep=([,;\t|])\r?\n/i.exec(String.fromCharCode(...bytes.subarray(bom, bom + 8)));
  const start = bom + (announced?.[0].length ?? 0);
  const named = question.separator ?? announced?.[1] ?? (question.format === "tsv" ? "\t" : undefined);
  const separator = named === undefined ? separatorOf(bytes.subarray(start)) : separatorNamed(named);
  const { from, end, lines } = headerEnd(bytes, start);
  const last = whole ? bytes.length : bytes.lastIndexOf(10) + 1;
  const { table, notes } = readDelimited(bytes.subarray(start, Math.max(last, start)), {
    separator: String.fromCharCode(separator),
    decimal: question.decimal ?? null,
    missing: new Set(question.missing ?? []),
    renames: question.rename ?? [],
  });
  const said: Note[] = [];
  if (named === undefined && separator !== 44)
    said.push({
      code: "separator-detected",
      facts: { separator: { 59: "semicolon", 9: "tab", 124: "bar" }[separator] ?? "sign" },
    });
  const comma = notes.some((note) => note.code === "decimal-comma-detected");
  return {
    table,
    notes: [...said, ...notes],
    header: bytes.subarray(from, end),
    dataStart: end,
    lines: lines + (announced === null ? 0 : 1),
    separator,
    decimal: question.decimal ?? (comma ? "," : "."),
    names: table.columns.map((column) => column.name),
  };
}

/** Centre and decimal places from the first rows: good for speed and for the last digit, never for the meaning. */
function scaleOf(
  table: Table,
  response: string,
): { readonly center: number; readonly places: number; readonly mostPlaces: number } {
  const column = asNumbers(columnNamed(table, response), table.sourceRows);
  const valueAt = nearestValues(column);
  let low = Number.POSITIVE_INFINITY;
  let high = Number.NEGATIVE_INFINITY;
  for (let row = 0; row < table.rows; row++) {
    const value = valueAt(row);
    if (value < low) low = value;
    if (value > high) high = value;
  }
  if (low > high) return { center: 0, places: 0, mostPlaces: 15 };
  const center = Math.round(low / 2 + high / 2);
  const size = Math.max(Math.abs(low), Math.abs(high));
  const range = high - low;
  // Where a constant part dwarfs the variation its digits are needed, whatever it costs.
  const base = (size <= 1000 * range ? size : range) * 2 || 1;
  const mostPlaces = Math.max(0, Math.min(22, Math.floor(Math.log10(largestInteger / base))));
  return { center, places: Math.min(column.decimals ?? mostPlaces, mostPlaces), mostPlaces };
}

function needColumns(question: FileQuestion, names: readonly string[]): void {
  const wanted = [question.response, ...question.factors.map((factor) => factor.name), question.subject ?? null];
  const known = [...names, ...(question.derive ?? []).map((step) => step.name)];
  for (const name of wanted) if (name !== null && !known.includes(name)) throw unknownColumn(name, known);
}

/** Parts that must be read again in order: a value in quotes holds line ends, and a cut fell into it. */
function cutWrongly(answers: readonly ChunkAnswer[], dataEnd: number, partBytes: number): boolean {
  for (const [index, answer] of answers.entries()) {
    if (answer.problem?.code === "open-quote" && answer.begin + partBytes < dataEnd) return true;
    if (answer.problem !== null) return false;
    const next = answers[index + 1];
    if (next !== undefined && next.begin !== answer.end) return true;
  }
  return false;
}

function refuse(answers: readonly ChunkAnswer[], linesInFront: number): void {
  let line = linesInFront + 1;
  for (const { problem, lines } of answers) {
    if (problem !== null) {
      const row = typeof problem.facts.row === "number" ? { row: problem.facts.row + line } : {};
      throw new DataProblem(problem.code as DataProblemCode, { ...problem.facts, ...row });
    }
    line += lines;
  }
}

/**
 * Counts, means and sums of squares by cell of a delimited file of any size, read once, on all cores. Memory does not
 * grow with the rows, only with subjects. Every sum is exact, so that the number of threads does not show in it.
 *
 * @throws DataProblem with the line of the file; HostError "missing-file", "unreadable-file"; Interrupted
 */
export async function delimitedCells(question: FileQuestion, watch: Watch): Promise<CellAnswer> {
  const { bytes, size } = frontOf(question.path);
  if (size === 0) throw new DataProblem("empty-file");
  const front = readFront(question, bytes, bytes.length === size);
  needColumns(question, front.names);
  const derive = (question.derive ?? []).map((step) => ({
    name: step.name,
    expression: resolvedExpression(step.expression, front.names),
  }));
  const known = [...front.names, ...derive.map((step) => step.name)];
  const exclude = resolvedConditions(question.exclude ?? [], known);
  const stepped = derive.length > 0 ? steppedTable(front.table, { derive, exclude: [] }).table : front.table;
  const original = originalNames(front.names, question.rename ?? []);
  const kernel: KernelPlan = {
    separator: front.separator,
    point: front.decimal === "," ? 44 : 46,
    header: front.names,
    response: question.response,
    factors: question.factors.map(({ name, levels }) => ({ name, levels })),
    subject: question.subject ?? null,
    missing: question.missing ?? [],
    ...scaleOf(stepped, question.response),
    sample: question.sample ?? { size: 0, seed: 0 },
  };
  const plan: WorkerPlan = {
    path: question.path,
    kernel,
    table:
      derive.length + exclude.length === 0
        ? null
        : {
            header: headerLine(original, front.separator),
            separator: String.fromCharCode(front.separator),
            decimal: front.decimal,
            rename: question.rename ?? [],
            derive,
            exclude,
          },
    dataStart: front.dataStart,
    dataEnd: size,
  };
  const read = await readAll(plan, question, watch);
  refuse(read.answers, front.lines);
  const answer = assembled(read, kernel, front.lines);
  if (answer.rows === 0) throw new DataProblem("header-only");
  return { ...answer, notes: [...front.notes, ...answer.notes] };
}

async function readAll(plan: WorkerPlan, question: FileQuestion, watch: Watch): Promise<PartsRead> {
  const partBytes = question.partBytes ?? usualPartBytes;
  const parts: Part[] = [];
  for (let from = plan.dataStart; from < plan.dataEnd; from += partBytes)
    parts.push({
      from,
      to: Math.min(from + partBytes, plan.dataEnd),
      aligned: from === plan.dataStart,
      margin: partMargin,
    });
  if (parts.length === 0) throw new DataProblem("header-only");
  const { threads, workerFile } = question;
  const read = await readParts(plan, parts, { threads, workerFile, watch });
  return cutWrongly(read.answers, plan.dataEnd, partBytes) ? readInOrder(plan, partBytes * 4, watch) : read;
}

function originalNames(
  names: readonly string[],
  rename: readonly { readonly from: string; readonly to: string }[],
): string[] {
  return names.map((name) => rename.find(({ to }) => to === name)?.from ?? name);
}

/** The header in one line of its own, so that lines can be counted whatever the file's header looks like. */
function headerLine(names: readonly string[], separator: number): Uint8Array {
  const quoted = names.map((name) => `"${name.replaceAll('"', '""').replace(/[\r\n]+/g, " ")}"`);
  return new TextEncoder().encode(`${quoted.join(String.fromCharCode(separator))}\n`);
}
