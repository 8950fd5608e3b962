import { digestOfValue } from "./digest.ts";
import type { Ledger, LedgerEntry, LedgerEvent, LedgerFacts } from "./ledger.ts";

export type ComparisonState = "planned" | "declared" | "exploratory";

/** Index of the first entry that shows data were read (rehearsals do not count), or null. */
export function firstRead(ledger: Ledger): number | null {
  return ledger.entries.find((entry) => entry.event === "read")?.index ?? null;
}

/** Index of the first entry that shows a result of the response was seen on real data, or null. */
export function firstResultSeen(ledger: Ledger): number | null {
  return ledger.entries.find((entry) => entry.event === "result" && entry.facts.seen === true)?.index ?? null;
}

const namesDigest = (entry: LedgerEntry, digest: string): boolean =>
  // `families` holds what is compared, `design` what the omnibus test rests on.
  [entry.facts.families, entry.facts.design].some(
    (commitments) =>
      Array.isArray(commitments) &&
      commitments.some((commitment) => (commitment as { digest?: unknown } | null)?.digest === digest),
  );

/**
 * State of a family, from the ledger alone: planned when a plan that holds it, just so, was sealed, opened or amended before data were
 * read; declared when it was declared or amended before any result of the response was seen; exploratory otherwise.
 *
 * @param familyDigest digest of everything that decides what the family tests and how: an edited family has another one
 */
export function stateOf(ledger: Ledger, familyDigest: string): ComparisonState {
  const read = firstRead(ledger) ?? Number.POSITIVE_INFINITY;
  const seen = firstResultSeen(ledger) ?? Number.POSITIVE_INFINITY;
  let declared = false;
  for (const entry of ledger.entries) {
    if (!namesDigest(entry, familyDigest)) continue;
    const isPlan = entry.event === "seal" || entry.event === "open" || entry.event === "amend";
    if (isPlan && entry.index < read) return "planned";
    if ((isPlan || entry.event === "declare") && entry.index < seen) declared = true;
  }
  return declared ? "declared" : "exploratory";
}

/** What an act is, apart from when it was done. */
const actDigest = ({ afterResults: _, ...facts }: LedgerFacts): string => digestOfValue(facts);

/** The first entry that recorded just this act, or null: an act done again in a re-run is still the first one. */
export function sameAct(ledger: Ledger, event: LedgerEvent, facts: LedgerFacts): LedgerEntry | null {
  const digest = actDigest(facts);
  return ledger.entries.find((entry) => entry.event === event && actDigest(entry.facts) === digest) ?? null;
}

/** Whether an act comes after results of the response were seen; one that was first done before them does not, however often it is re-run. */
export function doneAfterResults(ledger: Ledger, event: LedgerEvent, facts: LedgerFacts): boolean {
  const seen = firstResultSeen(ledger);
  if (seen === null) return false;
  const first = sameAct(ledger, event, facts);
  return first === null || first.index > seen;
}
