import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { auditLedger } from "../../src/record/index.ts";
import type { ComparisonsResult } from "../../src/results/index.ts";
import { openSession, runCell, type Session } from "../../src/session/index.ts";
import { type MemoryHost, memoryHost } from "../session/memory-host.ts";
import { declarations, invented, runAll } from "./study.ts";

const families = [
  "family primary: all pairs of lamp\n  hold error 5% by holm",
  "family primary: all pairs of lamp\n  hold error 5% by bonferroni",
  "family primary: each lamp against warm\n  hold error 5% by holm",
] as const;

const cells = [
  ...families,
  ...families.map((family) => `amend ${family} because "a mistake was found"`),
  'amend drop family primary because "no longer of interest"',
  'seal plan as "trial"',
  'open plan "trial"',
  'read "data.csv"',
  'read "other.csv"',
  'exclude where reader = "r1" because "lamp failed"',
  'exclude where minutes > 3.4 because "too slow"',
  "describe minutes by lamp",
  "omnibus",
  "compare primary",
  "compare primary",
  "explore all pairs of lamp by holm",
  "start again",
] as const;

/** What the language promises, kept by the test from the statements alone, without the ledger. */
interface Promised {
  read: boolean;
  seen: boolean;
  /** The family as declared in this session, or null. */
  family: string | null;
  sealed: string | null;
  open: boolean;
  planned: Set<string>;
  declared: Set<string>;
  compared: Set<string>;
}

const plain = (text: string) => text.replace(/\s+/g, " ").trim();

/** One statement done: moves the promise on, and says what state a comparison should have been shown in. */
function follow(promised: Promised, text: string): string | null {
  const commit = (isPlan: boolean) => {
    if (promised.family === null) return;
    if (isPlan && !promised.read) promised.planned.add(promised.family);
    if (!promised.seen) promised.declared.add(promised.family);
  };
  const statement = plain(text);
  if (statement.startsWith("family")) {
    promised.family = statement;
    commit(false);
  } else if (statement.startsWith("amend drop")) promised.family = null;
  else if (statement.startsWith("amend")) {
    const after = plain(statement.replace(/^amend/, "").replace(/because .*$/, ""));
    const changes = after !== promised.family;
    promised.family = after;
    if (changes) commit(true);
  } else if (statement.startsWith("seal")) {
    promised.sealed ??= promised.family;
    promised.open = true;
    commit(true);
  } else if (statement.startsWith("open")) {
    if (!promised.open) {
      promised.family = promised.sealed;
      commit(true);
    }
    promised.open = true;
  } else if (statement.startsWith("read")) promised.read = true;
  else if (/^(describe|omnibus|compare|explore)/.test(statement)) {
    const family = promised.family ?? "";
    const state = statement.startsWith("explore")
      ? "exploratory"
      : promised.planned.has(family)
        ? "planned"
        : promised.declared.has(family)
          ? "declared"
          : "exploratory";
    promised.seen = true;
    if (statement.startsWith("compare")) promised.compared.add(family);
    return /^(compare|explore)/.test(statement) ? state : null;
  }
  return null;
}

const fresh = (): MemoryHost => {
  const host = memoryHost();
  host.put("data.csv", invented());
  host.put("other.csv", invented(1));
  return host;
};
const ledgerOf = (host: MemoryHost) => (host.files.has("study.ledger.jsonl") ? host.text("study.ledger.jsonl") : "");

describe("random histories of cells", () => {
  it("never turn exploratory into planned, never lose a line, never hide a dropped comparison", async () => {
    let compared = 0;
    let runs = 0;
    await fc.assert(
      fc.asyncProperty(fc.array(fc.constantFrom(...cells), { minLength: 8, maxLength: 40 }), async (history) => {
        runs++;
        const host = fresh();
        const promised: Promised = {
          read: false,
          seen: false,
          family: null,
          sealed: null,
          open: false,
          planned: new Set(),
          declared: new Set(),
          compared: new Set(),
        };
        let session: Session = (await runAll(host, [declarations])).session;
        let before = ledgerOf(host);
        for (const cell of history) {
          if (cell === "start again") {
            session = await openSession(host, "test");
            // A plan may only be opened where nothing else is declared; after that the declarations are its own.
            promised.family = null;
            promised.open = false;
            const opened = await runCell(session, 'open plan "trial"', { cell: 1, host });
            session = opened.session;
            for (const { result, text } of opened.outcomes) if (result !== null) follow(promised, text);
            if (opened.problems.length > 0) session = (await runAll(host, [declarations], session)).session;
            before = ledgerOf(host);
            continue;
          }
          const done = await runCell(session, cell, { cell: 1, host });
          session = done.session;
          for (const { result, text } of done.outcomes) {
            if (result === null) continue;
            const state = follow(promised, text);
            if (state === null) continue;
            compared++;
            expect((result as ComparisonsResult).state, `${cell} in ${JSON.stringify(history)}`).toBe(state);
          }
          const after = ledgerOf(host);
          expect(after.startsWith(before), "the ledger only grows").toBe(true);
          before = after;
        }
        const found = auditLedger(ledgerOf(host));
        expect(found.problems.filter(({ code }) => code !== "empty-ledger")).toEqual([]);
        // Whatever was committed to and never compared is named, once results were seen, as dropped, changed or amended away.
        const named = new Set(found.deviations.map(({ code }) => code));
        const owed = [...promised.planned, ...promised.declared].filter((family) => !promised.compared.has(family));
        if (promised.seen && owed.length > 0) {
          expect(
            [
              "planned-family-not-compared",
              "declared-family-dropped",
              "family-changed",
              "amended",
              "amended-after-results",
            ].some((code) => named.has(code as never)),
            JSON.stringify(history),
          ).toBe(true);
        }
        // A sealed commitment that stands and was never compared makes the record incomplete.
        const missing = found.deviations.filter(({ incomplete }) => incomplete);
        if (missing.length > 0) expect(found.whole).toBe(false);
      }),
      { numRuns: 400 },
    );
    expect(compared).toBeGreaterThan(runs / 3);
  }, 60_000);

  it("re-running a cell is not a new test; a changed cell is", async () => {
    const host = fresh();
    const { session } = await runAll(host, [declarations, families[0], 'read "data.csv"', "compare primary"]);
    const before = ledgerOf(host);
    const again = await runAll(host, ["compare primary", "compare primary"], session);
    expect(ledgerOf(host)).toBe(before);
    expect(again.results.map((result) => (result as ComparisonsResult).state)).toEqual(["declared", "declared"]);
    const changed = await runAll(host, [families[1], "compare primary"], again.session);
    expect(changed.results.flatMap((result) => (result.kind === "comparisons" ? [result.state] : []))).toEqual([
      "exploratory",
    ]);
    expect(ledgerOf(host).length).toBeGreaterThan(before.length);
    const codes = auditLedger(ledgerOf(host)).deviations.map(({ code, facts }) => [code, facts.afterResults ?? null]);
    expect(codes).toContainEqual(["family-changed", true]);
  });

  it("running a whole notebook again adds nothing and accuses of nothing", async () => {
    const host = fresh();
    const notebook = [
      declarations,
      families[0],
      'seal plan as "trial"',
      'read "data.csv"',
      'exclude where reader = "r1" because "lamp failed"',
      `amend ${families[2]} because "a mistake was found"`,
      "omnibus",
      "compare primary",
    ];
    await runAll(host, notebook);
    const before = ledgerOf(host);
    await runAll(host, notebook);
    await runAll(host, notebook);
    expect(ledgerOf(host)).toBe(before);
    expect(auditLedger(before).deviations.map(({ code }) => code)).toEqual(["amended"]);
  });

  it("a rehearsal never counts as data", async () => {
    const host = fresh();
    const expectation = "expect minutes\n  lamp warm 2, cool 2.4, daylight 2.8\n  spread 0.4";
    const { results } = await runAll(host, [
      declarations,
      families[0],
      expectation,
      "rehearse with 12 subjects, seed 7",
      "compare primary",
      'seal plan as "trial"',
      'read "data.csv"',
      "compare primary",
    ]);
    expect(results.flatMap((result) => (result.kind === "comparisons" ? [result.state] : []))).toEqual([
      "rehearsal",
      "planned",
    ]);
  });
});

describe("two sessions on one notebook", () => {
  it("see what the other saw, and keep one whole chain", async () => {
    const host = fresh();
    const first = (await runAll(host, [declarations, families[0]])).session;
    const second = (await runAll(host, [declarations])).session;
    const seen = await runAll(host, ['read "data.csv"', "compare primary"], first);
    expect(seen.results.at(-1)).toMatchObject({ state: "declared" });
    const late = await runAll(host, [families[2], 'read "data.csv"', "compare primary"], second);
    expect(late.results.at(-1)).toMatchObject({ state: "exploratory" });
    await runAll(host, ["omnibus"], seen.session);
    expect(auditLedger(ledgerOf(host)).problems).toEqual([]);
  });

  it("write again what a vanished ledger held, and refuse one that was exchanged", async () => {
    const host = fresh();
    const { session } = await runAll(host, [declarations, families[0], 'read "data.csv"', "compare primary"]);
    const before = ledgerOf(host);
    host.files.delete("study.ledger.jsonl");
    const restored = await runAll(host, ["omnibus"], session);
    expect(restored.problems).toEqual([]);
    expect(ledgerOf(host).startsWith(before)).toBe(true);
    const other = fresh();
    await runAll(other, [declarations, families[1], 'read "other.csv"']);
    host.put("study.ledger.jsonl", ledgerOf(other));
    const refused = await runAll(host, ["describe minutes by lamp"], restored.session);
    expect(refused.problems.map(({ code }) => code)).toEqual(["ledger-replaced"]);
    expect(ledgerOf(host)).toBe(ledgerOf(other));
  });
});
