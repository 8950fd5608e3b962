import { formatStatement, parseCell, type Statement } from "../../grammar/index.ts";
import { type Host, HostError } from "../host/index.ts";
import {
  appendEntry,
  digestOfValue,
  emptyLedger,
  headOf,
  type Ledger,
  type LedgerEvent,
  type LedgerFacts,
  type LedgerProblem,
  readLedger,
} from "../record/index.ts";
import type { Note, Problem, Result } from "../results/index.ts";
import { designCommitment, familyCommitments } from "./commitment.ts";
import type { Context, Handler, Outcome } from "./handler.ts";
import { handlers } from "./handlers/index.ts";
import { problemAt, problemOf } from "./place.ts";
import { emptyStudy, type Study } from "./study.ts";

/** A running session: the study as a value, and where its ledger is kept. */
export interface Session {
  readonly study: Study;
  /** Null when there is no document to keep it beside, or it cannot be written. */
  readonly ledgerPath: string | null;
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

/**
 * Opens a session: reads the ledger beside the document, where there is one, so that what was seen before stays seen.
 * A line cut off by a crash is taken off the file; it was never shown.
 */
export async function openSession(host: Host, version: string): Promise<Session> {
  if (host.documentName === null) return { study: emptyStudy, ledgerPath: null, ledgerProblems: [], version };
  const path = ledgerPathOf(host.documentName);
  let ledger: Ledger = emptyLedger;
  let problems: readonly LedgerProblem[] = [];
  if (await host.exists(path)) {
    const text = new TextDecoder().decode(await host.readBytes(path));
    const found = readLedger(text);
    ledger = found.ledger;
    problems = found.problems;
    if (found.wholeLength < text.length)
      await host.writeBytes(path, new TextEncoder().encode(text.slice(0, found.wholeLength)));
  }
  return { study: { ...emptyStudy, ledger }, ledgerPath: path, ledgerProblems: problems, version };
}

/** What makes a ledger's line the same happening again: running a cell twice is not testing twice. */
function alreadyRecorded(ledger: Ledger, event: LedgerEvent, facts: LedgerFacts): boolean {
  if (
    event !== "declare" &&
    event !== "result" &&
    event !== "open" &&
    event !== "seal" &&
    event !== "exclude" &&
    event !== "change data"
  )
    return false;
  const digest = digestOfValue(facts);
  const same = ledger.entries.filter((entry) => entry.event === event && digestOfValue(entry.facts) === digest).at(-1);
  if (same === undefined) return false;
  if (event === "exclude" || event === "change data") {
    // The same exclusion on data read anew is the same act only while nothing else was read since.
    const lastRead = ledger.entries.filter((entry) => entry.event === "read").at(-1);
    return lastRead === undefined || lastRead.index < same.index;
  }
  return true;
}

interface Written {
  readonly session: Session;
  readonly notes: readonly Note[];
}

/** Appends entries, flushed before anything is shown. A ledger that cannot be written is said once and kept in memory. */
async function record(session: Session, events: NonNullable<Outcome["events"]>, host: Host): Promise<Written> {
  let { study, ledgerPath } = session;
  const notes: Note[] = [];
  for (const { event, facts } of events) {
    if (alreadyRecorded(study.ledger, event, facts)) continue;
    const { ledger, line } = appendEntry(study.ledger, event, facts, host.now());
    if (ledgerPath !== null) {
      try {
        await host.appendLine(ledgerPath, line);
      } catch (error) {
        if (!(error instanceof HostError)) throw error;
        notes.push({ code: "ledger-not-kept", facts: { reason: error.message } });
        ledgerPath = null;
      }
    }
    study = { ...study, ledger };
  }
  return { session: { ...session, study, ledgerPath }, notes };
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

async function runStatement(
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
