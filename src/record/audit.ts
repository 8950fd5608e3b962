import { canonicalJson } from "./digest.ts";
import { headOf, type Ledger, type LedgerEntry, type LedgerProblem, readLedger } from "./ledger.ts";
import { PlanError, readPlan, type PlannedFamily, type SealedPlan } from "./plan.ts";
import { firstRead, firstResultSeen, stateOf } from "./state.ts";

/** A departure from the plan, or something a reader should know about how the results came about. */
export interface Deviation {
  readonly code:
    | "planned-family-not-compared"
    | "declared-family-dropped"
    | "declared-after-results"
    | "family-changed"
    | "amended"
    | "amended-after-results"
    | "excluded-after-results"
    | "plan-opened-after-reading"
    | "data-read-again"
    | "data-changed"
    | "compared-on-other-data"
    | "no-plan";
  readonly entry: number | null;
  readonly facts: Readonly<Record<string, string | number | boolean | null>>;
  /** True where the record lacks something that the commitment called for. */
  readonly incomplete: boolean;
}

const text = (value: unknown): string => (typeof value === "string" ? value : "");

/** Families named by an entry's facts. */
function familiesOf(entry: LedgerEntry): PlannedFamily[] {
  const families = entry.facts.families;
  if (!Array.isArray(families)) return [];
  return families.filter(
    (family): family is PlannedFamily =>
      typeof family === "object" &&
      family !== null &&
      typeof family.name === "string" &&
      typeof family.digest === "string",
  );
}

/** Digests of families that were compared on real data, whole. */
function compared(ledger: Ledger): Set<string> {
  const digests = new Set<string>();
  for (const entry of ledger.entries) {
    if (entry.event === "result" && entry.facts.seen === true && typeof entry.facts.familyDigest === "string")
      digests.add(entry.facts.familyDigest);
  }
  return digests;
}

/**
 * Everything in a ledger that departs from commitment first, results after: what was planned and never compared, declared and dropped,
 * changed or amended, excluded late, read twice. An empty list is a clean history.
 */
export function deviationsOf(ledger: Ledger): Deviation[] {
  const deviations: Deviation[] = [];
  const seen = firstResultSeen(ledger);
  const read = firstRead(ledger);
  const done = compared(ledger);
  const lastByName = new Map<string, { digest: string; entry: LedgerEntry; planned: boolean }>();
  const comparedOn = new Map<string, Set<string>>();
  let planEntry: LedgerEntry | null = null;
  let lastSource: { source: string; digest: string } | null = null;
  for (const entry of ledger.entries) {
    const after = seen !== null && entry.index > seen;
    if (entry.event === "seal" || entry.event === "open") {
      planEntry ??= entry;
      if (entry.event === "open" && read !== null && entry.index > read && planEntry === entry) {
        deviations.push({
          code: "plan-opened-after-reading",
          entry: entry.index,
          facts: { plan: text(entry.facts.plan) },
          incomplete: false,
        });
      }
    }
    if (entry.event === "amend") {
      deviations.push({
        code: after ? "amended-after-results" : "amended",
        entry: entry.index,
        facts: { statement: text(entry.facts.statement), reason: text(entry.facts.reason) },
        incomplete: false,
      });
    }
    if (entry.event === "exclude" && after) {
      deviations.push({
        code: "excluded-after-results",
        entry: entry.index,
        facts: {
          statement: text(entry.facts.statement),
          reason: text(entry.facts.reason),
          rows: Number(entry.facts.rows ?? 0),
        },
        incomplete: false,
      });
    }
    if (entry.event === "read") {
      const now = { source: text(entry.facts.source), digest: text(entry.facts.digest) };
      if (lastSource !== null && lastSource.digest !== now.digest) {
        deviations.push({
          code: lastSource.source === now.source ? "data-changed" : "data-read-again",
          entry: entry.index,
          facts: { source: now.source, before: lastSource.source, afterResults: after },
          incomplete: false,
        });
      }
      lastSource = now;
    }
    if (entry.event === "result" && entry.facts.seen === true && typeof entry.facts.familyDigest === "string") {
      const states = comparedOn.get(entry.facts.familyDigest) ?? new Set();
      const data = text(entry.facts.data);
      if (states.size > 0 && !states.has(data)) {
        deviations.push({
          code: "compared-on-other-data",
          entry: entry.index,
          facts: { family: text(entry.facts.family), times: states.size + 1 },
          incomplete: false,
        });
      }
      comparedOn.set(entry.facts.familyDigest, states.add(data));
    }
    // A family dropped by an amendment is told by that amendment, with its reason; it is no longer owed.
    if (entry.event === "amend" && Array.isArray(entry.facts.dropped)) {
      for (const name of entry.facts.dropped) lastByName.delete(text(name));
    }
    const planned = entry.event === "seal" || entry.event === "open" || entry.event === "amend";
    if (!planned && entry.event !== "declare") continue;
    for (const family of familiesOf(entry)) {
      const before = lastByName.get(family.name);
      if (before !== undefined && before.digest !== family.digest) {
        if (entry.event === "declare") {
          deviations.push({
            code: "family-changed",
            entry: entry.index,
            facts: { family: family.name, afterResults: after },
            incomplete: false,
          });
        }
      } else if (before === undefined && after) {
        deviations.push({
          code: "declared-after-results",
          entry: entry.index,
          facts: { family: family.name },
          incomplete: false,
        });
      }
      lastByName.set(family.name, { digest: family.digest, entry, planned: planned || (before?.planned ?? false) });
    }
  }
  // Only once results were seen can a family be missing: before that, the work is simply not done yet.
  if (seen !== null) {
    for (const [name, { digest, entry, planned }] of lastByName) {
      if (done.has(digest)) continue;
      deviations.push({
        code: planned ? "planned-family-not-compared" : "declared-family-dropped",
        entry: entry.index,
        facts: { family: name },
        incomplete: planned,
      });
    }
    if (planEntry === null) deviations.push({ code: "no-plan", entry: null, facts: {}, incomplete: false });
  }
  return deviations;
}

export interface Audit {
  readonly ledger: Ledger;
  readonly head: string | null;
  /** Nothing broken and nothing missing. */
  readonly whole: boolean;
  readonly problems: readonly LedgerProblem[];
  readonly deviations: readonly Deviation[];
}

/** What a shared notebook carries in its metadata, so that the file alone can be audited. */
export interface EmbeddedRecord {
  readonly format: "meanwise record";
  readonly formatVersion: 1;
  readonly ledger: readonly string[];
  readonly head: string | null;
  readonly plan: SealedPlan | null;
}

/** The record to embed: every line of the ledger just as it stands in the file. */
export function embedRecord(ledger: Ledger, plan: SealedPlan | null): EmbeddedRecord {
  return {
    format: "meanwise record",
    formatVersion: 1,
    ledger: ledger.entries.map((entry) => canonicalJson(entry)),
    head: headOf(ledger),
    plan,
  };
}

export function isEmbeddedRecord(value: unknown): value is EmbeddedRecord {
  if (typeof value !== "object" || value === null) return false;
  const record = value as Partial<EmbeddedRecord>;
  return (
    record.format === "meanwise record" &&
    Array.isArray(record.ledger) &&
    record.ledger.every((line) => typeof line === "string")
  );
}

/**
 * Audits a ledger.
 * @param ledgerText the ledger's lines
 * @param plan the plan beside it, where one is kept: it must be the one that the ledger names
 * @param publishedHead a head digest kept or published elsewhere: it must stand in the chain
 */
export function auditLedger(
  ledgerText: string,
  options: {
    readonly plan?: SealedPlan | null;
    readonly publishedHead?: string | null;
    readonly claimedHead?: string | null;
  } = {},
): Audit {
  const { ledger, problems } = readLedger(ledgerText);
  const found = [...problems];
  const { plan, publishedHead, claimedHead } = options;
  if (ledger.entries.length === 0 && found.length === 0) {
    found.push({
      entry: null,
      code: "empty-ledger",
      message: "The ledger has no entry.",
      advice: "Nothing was recorded, or everything was removed.",
    });
  }
  if (claimedHead !== undefined && claimedHead !== null && claimedHead !== headOf(ledger)) {
    found.push({
      entry: ledger.entries.length,
      code: "entries-missing",
      message:
        "The ledger does not end with the entry that the notebook names as its last: entries were removed from its end, or added.",
      advice: "Compare with a copy kept elsewhere.",
    });
  }
  if (
    publishedHead !== undefined &&
    publishedHead !== null &&
    !ledger.entries.some((entry) => entry.digest === publishedHead)
  ) {
    found.push({
      entry: null,
      code: "published-head-missing",
      message:
        "The published head digest is not the digest of any entry: this ledger is not the one whose head was published, or it was rewritten.",
      advice: "Ask for the ledger that the published digest belongs to.",
    });
  }
  if (plan !== undefined && plan !== null) {
    try {
      readPlan(canonicalJson(plan), plan.plan.name);
    } catch (error) {
      if (!(error instanceof PlanError)) throw error;
      found.push({ entry: null, code: error.code, message: error.message, advice: error.advice });
    }
    const named = ledger.entries.some(
      (entry) => (entry.event === "seal" || entry.event === "open") && entry.facts.digest === plan.digest,
    );
    if (!named) {
      found.push({
        entry: null,
        code: "plan-not-in-ledger",
        message: `The plan "${plan.plan.name}" is not the one that the ledger sealed or opened.`,
        advice: "Use the plan file whose digest the ledger names.",
      });
    }
  }
  for (const entry of ledger.entries) {
    const claimed = entry.facts.state;
    const familyDigest = entry.facts.familyDigest;
    if (
      entry.event !== "result" ||
      typeof claimed !== "string" ||
      typeof familyDigest !== "string" ||
      claimed === "rehearsal"
    )
      continue;
    const before: Ledger = { entries: ledger.entries.slice(0, entry.index) };
    const computed = stateOf(before, familyDigest);
    if (computed !== claimed) {
      found.push({
        entry: entry.index,
        code: "state-wrong",
        message: `Entry ${entry.index} shows its comparisons as ${claimed}; by the ledger they are ${computed}.`,
        advice: "The entry was not written by this program as it stands, or was changed.",
      });
    }
  }
  const deviations = deviationsOf(ledger);
  const serious = found.filter((problem) => problem.code !== "torn-line");
  return {
    ledger,
    head: headOf(ledger),
    whole: serious.length === 0 && !deviations.some((deviation) => deviation.incomplete),
    problems: found,
    deviations,
  };
}
