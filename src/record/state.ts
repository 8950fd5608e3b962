import type { Ledger, LedgerEntry } from "./ledger.ts";

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
