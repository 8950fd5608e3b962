import { readFileSync, writeFileSync } from "node:fs";
import { Interrupted, type Host, type Watch } from "../host/index.ts";
import { presentProblems, presentResult, presentText } from "../present/index.ts";
import type { Problem, Result } from "../results/index.ts";
import {
  openSession,
  presentOptions,
  runCell,
  type Session,
  type StatementOutcome,
  type Study,
} from "../session/index.ts";
import { readArguments, UsageError, withUsage } from "./arguments.ts";
import { type Document, type DocumentCell, DocumentError, readDocument } from "./document.ts";
import { hostForDocument } from "./node-host.ts";
import { notebookOf, pageOf } from "./run-output.ts";

/** What one cell came to. */
export interface CellRun {
  readonly cell: DocumentCell;
  readonly outcomes: readonly StatementOutcome[];
  readonly problems: readonly Problem[];
}

export interface DocumentRun {
  readonly document: Document;
  readonly session: Session;
  readonly cells: readonly CellRun[];
  readonly host: Host;
}

/** The version of this installation. */
export function packageVersion(): string {
  for (const place of ["../../../package.json", "../../package.json"]) {
    try {
      return (JSON.parse(readFileSync(new URL(place, import.meta.url), "utf8")) as { version: string }).version;
    } catch {
      // Sources and the build lie at different depths; the other place has it.
    }
  }
  return "unknown";
}

/** A watch that shows progress on a terminal's last line and stops at Ctrl-C. */
export function terminalWatch(): { readonly watch: Watch; readonly clear: () => void } {
  let stopped = false;
  let shown = 0;
  const terminal = process.stderr.isTTY === true;
  process.once("SIGINT", () => {
    stopped = true;
  });
  const clear = () => {
    if (shown > 0) process.stderr.write(`\r${" ".repeat(70)}\r`);
    shown = 0;
  };
  return {
    clear,
    watch: {
      checkpoint() {
        if (stopped) throw new Interrupted();
      },
      progress(done, total, label) {
        const now = Date.now();
        if (!terminal || (now - shown < 250 && done < total)) return;
        process.stderr.write(`\r${`${label}: ${Math.floor((100 * done) / total)}%`.padEnd(70)}`);
        shown = now;
      },
    },
  };
}

/**
 * Runs a document cell by cell. A failing cell does not keep later ones from running: each tells its own mistakes.
 * @param onResult told of each result as it comes
 */
export async function runDocument(
  document: Document,
  host: Host,
  onResult: (outcome: StatementOutcome, study: Study) => void = () => {},
  onProblems: (problems: readonly Problem[], cell: DocumentCell) => void = () => {},
  onLedgerProblems: (problems: Session["ledgerProblems"]) => void = () => {},
): Promise<DocumentRun> {
  let session = await openSession(host, packageVersion());
  if (session.ledgerProblems.length > 0) onLedgerProblems(session.ledgerProblems);
  const cells: CellRun[] = [];
  for (const cell of document.cells) {
    const done = await runCell(session, cell.text, {
      cell: cell.number,
      host,
      onResult: (outcome, _, study) => onResult(outcome, study),
    });
    session = done.session;
    cells.push({ cell, outcomes: done.outcomes, problems: done.problems });
    if (done.problems.length > 0) onProblems(done.problems, cell);
    if (done.problems.some((problem) => problem.code === "interrupted")) break;
  }
  return { document, session, cells, host };
}

/** The results as other programs read them (see the contributors' guide): numbers unrounded. */
export function resultsJson(run: DocumentRun): string {
  const results = run.cells.flatMap(({ cell, outcomes }) =>
    outcomes.flatMap((outcome) =>
      outcome.result === null ? [] : [{ cell: cell.number, statement: outcome.statement.kind, ...outcome.result }],
    ),
  );
  const errors = run.cells.flatMap(({ problems }) => problems);
  return `${JSON.stringify({ meanwise: packageVersion(), results, errors }, plainValue, 2)}\n`;
}

/** JSON has no typed arrays and no infinity; the first become lists, the second null. */
export function plainValue(_: string, value: unknown): unknown {
  if (ArrayBuffer.isView(value) && !(value instanceof DataView))
    return Array.from(value as unknown as ArrayLike<number>);
  return typeof value === "number" && !Number.isFinite(value) ? null : value;
}

const shownQuietly = (result: Result): boolean => result.kind !== "message";

function write(path: string, text: string): void {
  try {
    writeFileSync(path, text);
  } catch (error) {
    throw new UsageError(`"${path}" could not be written: ${error instanceof Error ? error.message : String(error)}`);
  }
}

/** `meanwise run FILE [--json OUT] [--html OUT] [--notebook OUT] [--quiet]`. */
export async function runCommand(words: readonly string[]): Promise<number> {
  return withUsage(async () => {
    const given = readArguments(words, {
      "--json": "value",
      "--html": "value",
      "--notebook": "value",
      "--quiet": "flag",
    });
    if (given.files.length !== 1)
      throw new UsageError(
        given.files.length === 0 ? "run needs a file: meanwise run study.mwise" : "run takes one file.",
      );
    let document: Document;
    try {
      document = readDocument(given.files[0]!);
    } catch (error) {
      if (error instanceof DocumentError) throw new UsageError(error.message);
      throw error;
    }
    const quiet = given.has("--quiet");
    const { watch, clear } = terminalWatch();
    const host = hostForDocument(document.path, { watch });
    const many = document.cells.length > 1;
    const run = await runDocument(
      document,
      host,
      (outcome, study) => {
        clear();
        if (quiet || outcome.result === null || !shownQuietly(outcome.result)) return;
        process.stdout.write(
          `\u203a ${outcome.text.split("\n")[0]}\n\n${presentText(outcome.result, presentOptions(study))}\n\n`,
        );
      },
      (problems, cell) => {
        clear();
        process.stderr.write(`${many ? `Cell ${cell.number}\n` : ""}${presentProblems(problems, cell.text).text}\n\n`);
      },
      (problems) => {
        for (const { message, advice } of problems) process.stderr.write(`Ledger: ${message} ${advice}\n`);
      },
    );
    const json = given.value("--json");
    const html = given.value("--html");
    const notebook = given.value("--notebook");
    if (json !== null) write(json, resultsJson(run));
    if (html !== null) write(html, await pageOf(run));
    if (notebook !== null) write(notebook, await notebookOf(run));
    const problems = run.cells.flatMap((cell) => cell.problems);
    // 130: what a shell expects of a command that Ctrl-C stopped.
    if (problems.some((problem) => problem.code === "interrupted")) return 130;
    return problems.length > 0 ? 1 : 0;
  });
}

export { presentResult };
