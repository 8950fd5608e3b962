import { formatStatement, parseCell, type Statement } from "../../grammar/index.ts";
import { type Host, HostError } from "../host/index.ts";
import {
  appendEntry,
  canonicalJson,
  digestOfValue,
  headOf,
  type Ledger,
  type LedgerEvent,
  type LedgerFacts,
  type LedgerProblem,
  readLedger,
  sameAct,
} from "../record/index.ts";
import type { Note, Problem, Result } from "../results/index.ts";
import { designCommitment, familyCommitments } from "./commitment.ts";
import type { Context, Handler, Outcome } from "./handler.ts";
import { handlers } from "./handlers/index.ts";
import { problemAt, problemOf } from "./place.ts";
import { SessionProblem } from "./problem.ts";
import { emptyStudy, type Study } from "./study.ts";

/** A running session: the study as a value, and where its ledger is kept. */
export interface Session {
  readonly study: Study;
  /** Null when there is no document to keep it beside, or it cannot be written. */
  readonly ledgerPath: string | null;
  /** Length in bytes of the ledger file as this session knows it. */
  readonly ledgerLength: number;
  readonly ledgerProblems: readonly LedgerProblem[];
  readonly version: string;
}

export interface StatementOutcome {
  readonly statement: Statement;
  readonly text: string;
  readonly result: Result | null;
  readonly problem: Problem | null;
}

export interface CellOutcome {
  readonly session: Session;
  readonly outcomes: readonly StatementOutcome[];
  readonly problems: readonly Problem[];
}

export interface RunOptions {
  readonly cell: number;
  readonly host: Host;
  /** Told of each result as it comes; `last` says whether the cell ends with it. */
  readonly onResult?: (outcome: StatementOutcome, last: boolean, study: Study) => Promise<void> | void;
}

/** File name of the ledger beside a document. */
export const ledgerPathOf = (documentName: string): string =>
  `${documentName.replace(/\.(ipynb|mwise)$/i, "")}.ledger.jsonl`;

/** Length in bytes of the lines that are whole: what stands after the last end of a line was cut off in writing. */
const wholeBytes = (bytes: Uint8Array): number => bytes.lastIndexOf(10) + 1;

const readBytesOf = async (host: Host, path: string): Promise<Uint8Array> =>
  (await host.exists(path)) ? host.readBytes(path) : new Uint8Array();

/**
 * Opens a session: reads the ledger beside the document, where there is one, so that what was seen before stays seen.
 * A line cut off by a crash was never shown; the next entry takes its place.
 */
export async function openSession(host: Host, version: string): Promise<Session> {
  if (host.documentName === null)
    return { study: emptyStudy, ledgerPath: null, ledgerLength: 0, ledgerProblems: [], version };
  const path = ledgerPathOf(host.documentName);
  const bytes = await readBytesOf(host, path);
  const { ledger, problems } = readLedger(new TextDecoder().decode(bytes));
  return {
    study: { ...emptyStudy, ledger },
    ledgerPath: path,
    ledgerLength: wholeBytes(bytes),
    ledgerProblems: problems,
    version,
  };
}

/**
 * The session with what other sessions on the same document wrote meanwhile: what one of them saw is seen for all.
 * @throws SessionProblem "ledger-replaced" when the file no longer begins with what this session wrote or read
 */
async function caughtUp(session: Session, host: Host): Promise<Session> {
  const { ledgerPath: path, study } = session;
  if (path === null) return session;
  const bytes = await readBytesOf(host, path);
  const length = wholeBytes(bytes);
  if (length === session.ledgerLength) return session;
  const { ledger } = readLedger(new TextDecoder().decode(bytes.subarray(0, length)));
  const [shorter, longer] =
    ledger.entries.length < study.ledger.entries.length ? [ledger, study.ledger] : [study.ledger, ledger];
  if (!shorter.entries.every((entry, index) => entry.digest === longer.entries[index]!.digest)) {
    throw new SessionProblem(
      "ledger-replaced",
      `The ledger "${path}" is no longer the one that this session began with: another file took its place, or it was edited.`,
      "Put the ledger back from a copy, or start the session again to go on with the file as it is; meanwise audit says what is wrong with it.",
    );
  }
  if (longer === ledger) return { ...session, study: { ...study, ledger }, ledgerLength: length };
  // The file lost entries that this session holds: they are written again, so that nothing shown is lost.
  const whole = new TextEncoder().encode(study.ledger.entries.map((entry) => `${canonicalJson(entry)}\n`).join(""));
  await host.writeBytes(path, whole);
  return { ...session, ledgerLength: whole.length };
}

/** What makes a ledger's line the same happening again: running a cell twice is not testing twice. */
function alreadyRecorded(ledger: Ledger, event: LedgerEvent, facts: LedgerFacts): boolean {
  if (event === "read") {
    // Other data read in between make the same reading a new one.
    const last = ledger.entries.filter((entry) => entry.event === "read").at(-1);
    return last !== undefined && digestOfValue(last.facts) === digestOfValue(facts);
  }
  return event !== "report" && event !== "export" && sameAct(ledger, event, facts) !== null;
}

interface Written {
  readonly session: Session;
  readonly notes: readonly Note[];
}

/**
 * Appends entries, flushed before anything is shown. A ledger that cannot be written is said once and kept in memory.
 * @throws HostError "file-grew" when another session wrote first
 */
async function record(session: Session, events: NonNullable<Outcome["events"]>, host: Host): Promise<Written> {
  let { study, ledgerPath, ledgerLength } = session;
  const notes: Note[] = [];
  for (const { event, facts } of events) {
    if (alreadyRecorded(study.ledger, event, facts)) continue;
    const { ledger, line } = appendEntry(study.ledger, event, facts, host.now());
    if (ledgerPath !== null) {
      try {
        await host.appendLine(ledgerPath, line, ledgerLength);
        ledgerLength += new TextEncoder().encode(line).length;
      } catch (error) {
        if (!(error instanceof HostError) || error.code === "file-grew") throw error;
        notes.push({ code: "ledger-not-kept", facts: { reason: error.message } });
        ledgerPath = null;
      }
    }
    study = { ...study, ledger };
  }
  return { session: { ...session, study, ledgerPath, ledgerLength }, notes };
}

/** Declarations that changed what families commit to are themselves entries of the ledger. */
function commitmentEvents(before: Study, after: Study, text: string): NonNullable<Outcome["events"]> {
  if (before.declarations === after.declarations) return [];
  const known = new Set(familyCommitments(before).map((family) => family.digest));
  const families = familyCommitments(after).filter((family) => !known.has(family.digest));
  const design = after.response !== null && after.factors.length > 0 ? designCommitment(after) : null;
  const designChanged =
    design !== null && (before.response === null || designCommitment(before).digest !== design.digest);
  if (families.length === 0 && !designChanged) return [];
  return [{ event: "declare", facts: { statement: text, families, design: designChanged ? [design] : [] } }];
}

function withNotes(result: Result, notes: readonly Note[]): Result {
  if (notes.length === 0) return result;
  return result.kind === "picture"
    ? { ...result, picture: { ...result.picture, notes: [...result.picture.notes, ...notes] } }
    : { ...result, notes: [...result.notes, ...notes] };
}

/** Results kept for report and export; messages and help are not. */
const kept = new Set<Result["kind"]>([
  "omnibus",
  "comparisons",
  "describe",
  "check",
  "picture",
  "power",
  "size",
  "detectable",
  "calibration",
]);

/** Another session may write between reading the ledger and adding to it; then the statement is computed anew from what it wrote. */
const attempts = 8;

async function runStatement(
  session: Session,
  statement: Statement,
  context: Context,
): Promise<{ readonly session: Session; readonly result: Result }> {
  for (let attempt = 1; ; attempt++) {
    try {
      return await runOnce(await caughtUp(session, context.host), statement, context);
    } catch (error) {
      if (!(error instanceof HostError) || error.code !== "file-grew" || attempt === attempts) throw error;
    }
  }
}

async function runOnce(
  session: Session,
  statement: Statement,
  context: Context,
): Promise<{ readonly session: Session; readonly result: Result }> {
  const handler = handlers[statement.kind] as Handler<Statement["kind"]>;
  const outcome = await handler(statement as never, session.study, context);
  const planning = outcome.study.plan !== session.study.plan || statement.kind === "amend";
  const events = [
    ...(planning ? [] : commitmentEvents(session.study, outcome.study, context.text)),
    ...(outcome.events ?? []),
  ];
  const first =
    session.study.ledger.entries.length === 0 && events.length > 0
      ? [
          {
            event: "session" as const,
            facts: { meanwise: session.version, document: context.host.documentName, ...context.host.environment },
          },
        ]
      : [];
  const fingerprinted = events.map((entry) =>
    entry.event === "result"
      ? { ...entry, facts: { ...entry.facts, kind: outcome.result.kind, numbers: digestOfValue(outcome.result) } }
      : entry,
  );
  const written = await record({ ...session, study: outcome.study }, [...first, ...fingerprinted], context.host);
  const result = withNotes(outcome.result, written.notes);
  const { study } = written.session;
  const results = kept.has(result.kind)
    ? [...study.results, { cell: context.cell, statement: statement.kind, text: context.text, result }]
    : study.results;
  return { session: { ...written.session, study: { ...study, results } }, result };
}

/**
 * Runs a cell. None of its statements runs when any of them fails to parse; a statement that fails stops the cell, and what ran
 * before it stays.
 * @throws only what is a mistake of the program's own
 */
export async function runCell(session: Session, source: string, options: RunOptions): Promise<CellOutcome> {
  const parsed = parseCell(source);
  if (parsed.problems.length > 0) {
    return {
      session,
      outcomes: [],
      problems: parsed.problems.map((problem) => problemAt(options.cell, problem.span, problem)),
    };
  }
  let current = session;
  const outcomes: StatementOutcome[] = [];
  for (const [index, statement] of parsed.statements.entries()) {
    const text = formatStatement(statement);
    const context: Context = { host: options.host, cell: options.cell, text, version: session.version };
    try {
      options.host.watch.checkpoint();
      const done = await runStatement(current, statement, context);
      current = done.session;
      const outcome = { statement, text, result: done.result, problem: null };
      outcomes.push(outcome);
      await options.onResult?.(outcome, index === parsed.statements.length - 1, current.study);
    } catch (error) {
      const problem = problemOf(error, statement, options.cell);
      outcomes.push({ statement, text, result: null, problem });
      return { session: current, outcomes, problems: [problem] };
    }
  }
  return { session: current, outcomes, problems: [] };
}

export { headOf };
