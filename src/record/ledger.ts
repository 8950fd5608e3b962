import { canonicalJson, digestOf } from "./digest.ts";

export type LedgerEvent =
  | "session"
  | "declare"
  | "seal"
  | "open"
  | "amend"
  | "read"
  | "rehearse"
  | "change data"
  | "exclude"
  | "result"
  | "report"
  | "export";

export type LedgerFacts = Readonly<Record<string, unknown>>;

/** One line of the ledger: what happened, when, and the digest of the line before it. */
export interface LedgerEntry {
  /** From 0, one more than the line before. */
  readonly index: number;
  /** ISO 8601, UTC. */
  readonly at: string;
  readonly event: LedgerEvent;
  readonly facts: LedgerFacts;
  /** Digest of the entry before; 64 zeros for the first. */
  readonly previous: string;
  /** SHA-256 of the canonical JSON of the entry without this field. */
  readonly digest: string;
}

export interface Ledger {
  readonly entries: readonly LedgerEntry[];
}

export interface LedgerProblem {
  readonly entry: number | null;
  readonly code: string;
  readonly message: string;
  readonly advice: string;
}

export const emptyLedger: Ledger = { entries: [] };

const firstPrevious = "0".repeat(64);

/** Digest of the last entry: publish it, and even a wholly rewritten ledger is found out. Null when there is none. */
export function headOf(ledger: Ledger): string | null {
  return ledger.entries.at(-1)?.digest ?? null;
}

function digestOfEntry(entry: Omit<LedgerEntry, "digest">): string {
  const { index, at, event, facts, previous } = entry;
  return digestOf(canonicalJson({ index, at, event, facts, previous }));
}

/**
 * The ledger with one more entry, and the line to append to the file.
 * @param at milliseconds since 1970 (from the host's clock)
 */
export function appendEntry(
  ledger: Ledger,
  event: LedgerEvent,
  facts: LedgerFacts,
  at: number,
): { readonly ledger: Ledger; readonly line: string; readonly entry: LedgerEntry } {
  const open = {
    index: ledger.entries.length,
    at: new Date(at).toISOString(),
    event,
    facts,
    previous: headOf(ledger) ?? firstPrevious,
  };
  const entry: LedgerEntry = { ...open, digest: digestOfEntry(open) };
  return { ledger: { entries: [...ledger.entries, entry] }, line: `${canonicalJson(entry)}\n`, entry };
}

function isEntry(value: unknown): value is LedgerEntry {
  if (typeof value !== "object" || value === null) return false;
  const entry = value as Record<string, unknown>;
  return (
    typeof entry["index"] === "number" &&
    typeof entry["at"] === "string" &&
    typeof entry["event"] === "string" &&
    typeof entry["facts"] === "object" &&
    entry["facts"] !== null &&
    typeof entry["previous"] === "string" &&
    typeof entry["digest"] === "string"
  );
}

/** What is wrong with a chain of entries, entry by entry. Empty when it is whole. */
export function chainProblems(entries: readonly LedgerEntry[]): LedgerProblem[] {
  const problems: LedgerProblem[] = [];
  for (const [position, entry] of entries.entries()) {
    const before = entries[position - 1];
    if (entry.digest !== digestOfEntry(entry)) {
      problems.push({
        entry: position,
        code: "entry-changed",
        message: `Entry ${position} (${entry.event}) does not match its own digest: it was changed after it was written.`,
        advice: "Compare with a copy kept elsewhere; what follows it cannot be trusted from this file alone.",
      });
    }
    if (entry.index !== position) {
      problems.push({
        entry: position,
        code: "entry-out-of-place",
        message: `Entry ${position} carries the number ${entry.index}: an entry was removed, added or moved.`,
        advice: "Compare with a copy kept elsewhere.",
      });
    }
    if (entry.previous !== (before?.digest ?? firstPrevious)) {
      problems.push({
        entry: position,
        code: "chain-broken",
        message: `Entry ${position} (${entry.event}) does not follow the entry before it.`,
        advice: "An entry between them was changed, removed or moved; compare with a copy kept elsewhere.",
      });
    }
    if (before !== undefined && Date.parse(entry.at) < Date.parse(before.at)) {
      problems.push({
        entry: position,
        code: "clock-backwards",
        message: `Entry ${position} is dated ${entry.at}, before the entry it follows (${before.at}).`,
        advice: "The computer's clock was set back, or the ledger was not written in this order.",
      });
    }
  }
  return problems;
}

/**
 * Reads a ledger file.
 *
 * A last line that was cut off in writing is dropped and said ("torn-line"): it was never shown. Anything else that is not an
 * entry is a problem of the record, and the entries around it are kept.
 */
export function readLedger(text: string): {
  readonly ledger: Ledger;
  readonly problems: readonly LedgerProblem[];
  /** Length in UTF-16 units of the part of the file that is whole; the rest is a torn line to cut off before appending. */
  readonly wholeLength: number;
} {
  const entries: LedgerEntry[] = [];
  const problems: LedgerProblem[] = [];
  let start = 0;
  let line = 0;
  while (start < text.length) {
    const end = text.indexOf("\n", start);
    const content = text.slice(start, end < 0 ? text.length : end);
    line++;
    let value: unknown = null;
    try {
      value = JSON.parse(content);
    } catch {
      value = null;
    }
    if (isEntry(value) && end >= 0) {
      if (canonicalJson(value) !== content) {
        problems.push({
          entry: entries.length,
          code: "entry-changed",
          message: `Entry ${entries.length} (${value.event}) does not stand as this program writes it: something was added to it, or it was written anew.`,
          advice: "Compare with a copy kept elsewhere.",
        });
      }
      entries.push(value);
    } else if (end < 0) {
      problems.push({
        entry: entries.length,
        code: "torn-line",
        message: `The last line of the ledger was cut off while it was being written (line ${line}).`,
        advice: "Nothing that was shown is lost: a result is shown only after its line is complete.",
      });
      return { ledger: { entries }, problems: [...problems, ...chainProblems(entries)], wholeLength: start };
    } else if (content.trim() !== "") {
      problems.push({
        entry: entries.length,
        code: "not-an-entry",
        message: `Line ${line} of the ledger is not an entry.`,
        advice: "The file was edited; compare with a copy kept elsewhere.",
      });
    }
    start = end + 1;
  }
  return { ledger: { entries }, problems: [...problems, ...chainProblems(entries)], wholeLength: text.length };
}
