import { beforeAll, describe, expect, it } from "vitest";
import {
  appendEntry,
  auditLedger,
  emptyLedger,
  headOf,
  type Ledger,
  type LedgerEntry,
  PlanError,
  readLedger,
  readPlan,
} from "../../src/record/index.ts";
import { type MemoryHost, memoryHost } from "../session/memory-host.ts";
import { analysis, invented, planning, runAll } from "./study.ts";

let ledgerText = "";
let planText = "";
let ledger: Ledger = emptyLedger;

beforeAll(async () => {
  const host = memoryHost();
  host.put("data.csv", invented());
  await runAll(host, [planning, analysis]);
  ledgerText = host.text("study.ledger.jsonl");
  planText = host.text("trial.plan.json");
  ledger = readLedger(ledgerText).ledger;
});

const codes = (text: string) =>
  auditLedger(text, { claimedHead: headOf(ledger) }).problems.map((problem) => problem.code);

/** Kinds of byte in a line, one substitute each; every byte of the file is tried. */
function substitutes(byte: string): string[] {
  if (/[0-9]/.test(byte)) return [String((Number(byte) + 1) % 10), "a"];
  if (/[a-z]/.test(byte)) return [byte.toUpperCase(), byte === "z" ? "y" : String.fromCharCode(byte.charCodeAt(0) + 1)];
  if (byte === "\n") return [" ", "\n\n{}\n"];
  return ["x", byte === " " ? "_" : " ", ""];
}

describe("tampering with a ledger is found", () => {
  it("starts from a whole record", () => {
    const found = auditLedger(ledgerText, { claimedHead: headOf(ledger), plan: readPlan(planText, "trial.plan.json") });
    expect(found.problems).toEqual([]);
    expect(found.whole).toBe(true);
    expect(ledger.entries.length).toBeGreaterThan(6);
  });

  it("at every byte, whatever kind of byte it is", () => {
    // Every third byte with one substitute in turn: over the lines, each class of byte meets each of its substitutes.
    let tried = 0;
    for (let position = 0; position < ledgerText.length; position += 3) {
      const choices = substitutes(ledgerText[position]!);
      const changed = ledgerText.slice(0, position) + choices[tried % choices.length]! + ledgerText.slice(position + 1);
      tried++;
      expect(
        auditLedger(changed, { claimedHead: headOf(ledger) }).whole,
        `byte ${position}: ${JSON.stringify(ledgerText[position])} -> ${JSON.stringify(changed[position])}`,
      ).toBe(false);
    }
    expect(tried).toBeGreaterThan(500);
  });

  it("names the entry that was changed", () => {
    const lines = ledgerText.split("\n");
    lines[3] = lines[3]!.replace(/"event":"[^"]+"/, '"event":"declare"').replace('"at":"2026', '"at":"2025');
    const found = auditLedger(lines.join("\n"));
    expect(found.problems.find((problem) => problem.code === "entry-changed")?.entry).toBe(3);
  });

  it("when a field is added that no digest covers", () => {
    expect(codes(ledgerText.replace('"event"', '"comment":"harmless","event"'))).toContain("entry-changed");
  });

  it("when an entry is removed, wherever it stood", () => {
    const lines = ledgerText.trimEnd().split("\n");
    for (const [position] of lines.entries()) {
      const rest = lines.filter((_, index) => index !== position);
      expect(auditLedger(`${rest.join("\n")}\n`, { claimedHead: headOf(ledger) }).whole, `entry ${position}`).toBe(
        false,
      );
    }
  });

  it("when two entries change places", () => {
    const lines = ledgerText.trimEnd().split("\n");
    for (let position = 1; position < lines.length; position++) {
      const turned = [...lines];
      [turned[position - 1], turned[position]] = [turned[position]!, turned[position - 1]!];
      expect(codes(`${turned.join("\n")}\n`)).toContain("entry-out-of-place");
    }
  });

  it("when the end is cut off, at every byte: by the head that the notebook names", () => {
    for (let length = 0; length < ledgerText.length; length += 7) {
      expect(auditLedger(ledgerText.slice(0, length), { claimedHead: headOf(ledger) }).whole).toBe(false);
    }
  });

  it("when everything was written anew, by a published head", () => {
    let rewritten = emptyLedger;
    let text = "";
    for (const entry of ledger.entries.filter((entry) => entry.event !== "exclude")) {
      const next = appendEntry(rewritten, entry.event, entry.facts, Date.parse(entry.at));
      rewritten = next.ledger;
      text += next.line;
    }
    expect(auditLedger(text).problems).toEqual([]);
    expect(auditLedger(text, { publishedHead: headOf(ledger) }).problems.map(({ code }) => code)).toEqual([
      "published-head-missing",
    ]);
  });

  it("when the clock ran backwards", () => {
    const first = appendEntry(emptyLedger, "session", {}, 2_000_000);
    const second = appendEntry(first.ledger, "read", {}, 1_000_000);
    const found = auditLedger(first.line + second.line);
    expect(found.problems.map(({ code, entry }) => [code, entry])).toEqual([["clock-backwards", 1]]);
    expect(found.whole).toBe(false);
  });

  it("when a state is claimed that the ledger does not bear out", () => {
    let forged = emptyLedger;
    let text = "";
    const add = (event: LedgerEntry["event"], facts: LedgerEntry["facts"]) => {
      const next = appendEntry(forged, event, facts, 1_000_000 + forged.entries.length);
      forged = next.ledger;
      text += next.line;
    };
    add("read", { source: "data.csv", digest: "1" });
    add("seal", { plan: "late", digest: "2", families: [{ name: "primary", digest: "3" }] });
    add("result", { seen: true, family: "primary", familyDigest: "3", state: "planned" });
    expect(auditLedger(text).problems.map(({ code, entry }) => [code, entry])).toEqual([["state-wrong", 2]]);
  });
});

describe("tampering with a plan file is found", () => {
  it("at every byte that means something", () => {
    for (let position = 0; position < planText.trimEnd().length; position += 3) {
      const [substitute] = substitutes(planText[position]!);
      const changed = planText.slice(0, position) + substitute! + planText.slice(position + 1);
      expect(() => readPlan(changed, "trial.plan.json"), `byte ${position}`).toThrow(PlanError);
    }
  });

  it("when a statement opens it, and nothing is lost", async () => {
    const host = memoryHost();
    host.put("data.csv", invented());
    await runAll(host, [planning]);
    const before = host.text("study.ledger.jsonl");
    host.put("trial.plan.json", planText.replace("holm", "none"));
    const { problems } = await runAll(host, ['open plan "trial"']);
    expect(problems.map(({ code, line }) => [code, line])).toEqual([["plan-changed", 1]]);
    expect(host.text("study.ledger.jsonl")).toBe(before);
  });

  it("when another plan stands in its place: it is not the one the ledger names", () => {
    const plan = readPlan(planText, "trial.plan.json");
    const { line } = appendEntry(emptyLedger, "seal", { plan: "trial", digest: "another" }, 1);
    expect(auditLedger(line, { plan }).problems.map(({ code }) => code)).toEqual(["plan-not-in-ledger"]);
  });
});

describe("data files", () => {
  const analyse = async (host: MemoryHost) => runAll(host, [analysis]);

  it("changed since the last run: said in the record", async () => {
    const host = memoryHost();
    host.put("data.csv", invented());
    await runAll(host, [planning, analysis]);
    host.put("data.csv", invented(1));
    await analyse(host);
    const found = auditLedger(host.text("study.ledger.jsonl"));
    expect(found.problems).toEqual([]);
    expect(found.deviations.map(({ code }) => code)).toContain("data-changed");
    expect(found.deviations.map(({ code }) => code)).toContain("compared-on-other-data");
  });

  it("missing: a problem with its place, and the ledger as it was", async () => {
    const host = memoryHost();
    host.put("data.csv", invented());
    await runAll(host, [planning, analysis]);
    await analyse(host);
    const before = host.text("study.ledger.jsonl");
    await analyse(host);
    expect(host.text("study.ledger.jsonl"), "running again is no new act").toBe(before);
    host.files.delete("data.csv");
    const { problems } = await analyse(host);
    expect(problems.map(({ code }) => code)).toEqual(["missing-file"]);
    expect(host.text("study.ledger.jsonl")).toBe(before);
  });
});
