import { spawn } from "node:child_process";
import { mkdtempSync, readFileSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { fileURLToPath } from "node:url";
import { afterAll, beforeAll, expect, it } from "vitest";
import { auditLedger, readLedger } from "../../src/record/index.ts";
import { openSession, runCell } from "../../src/session/index.ts";
import { memoryHost } from "../session/memory-host.ts";
import { analysis, invented, planning, runAll } from "./study.ts";

/** The built files are what runs and is killed; `npm test` builds them first. */
const writer = fileURLToPath(new URL("./writer.mjs", import.meta.url));
let folder = "";
beforeAll(() => {
  folder = mkdtempSync(join(tmpdir(), "meanwise-crash-"));
});
afterAll(() => rmSync(folder, { recursive: true, force: true }));

/** Starts a writer; answers with the digests it told, once it ended or was killed some milliseconds after its first. */
function write(count: number, killAfter: number | null): Promise<{ told: string[]; errors: string }> {
  return new Promise((resolve) => {
    const child = spawn(process.execPath, [writer, folder, String(count)]);
    let out = "";
    let errors = "";
    let planned = false;
    child.stdout.on("data", (chunk) => {
      out += String(chunk);
      if (killAfter === null || planned) return;
      planned = true;
      setTimeout(() => child.kill("SIGKILL"), killAfter);
    });
    child.stderr.on("data", (chunk) => {
      errors += String(chunk);
    });
    child.on("close", () => resolve({ told: out.split("\n").slice(0, -1), errors }));
  });
}

const text = () => readFileSync(join(folder, "study.ledger.jsonl"), "utf8");

// All 500 with MEANWISE_KILLS=500; the everyday number keeps the suite short.
const kills = Number(process.env.MEANWISE_KILLS ?? 20);
it(`recovers everything shown after ${kills} kills at random moments`, { timeout: 900_000 }, async () => {
  const shown = new Set<string>();
  for (let kill = 0; kill < kills; kill++) {
    const { told, errors } = await write(0, (kill * 7919) % 23);
    expect(errors).toBe("");
    for (const digest of told) shown.add(digest);
    const { ledger, problems } = readLedger(text());
    expect(problems.filter(({ code }) => code !== "torn-line")).toEqual([]);
    const kept = new Set(ledger.entries.map((entry) => entry.digest));
    for (const digest of shown) expect(kept.has(digest)).toBe(true);
    if (text().length > 300_000) {
      rmSync(join(folder, "study.ledger.jsonl"));
      shown.clear();
    }
  }
});

it("two processes that write at once keep one whole chain, with every line of both", async () => {
  rmSync(join(folder, "study.ledger.jsonl"), { force: true });
  const both = await Promise.all([write(25, null), write(25, null)]);
  expect(both.map(({ errors }) => errors)).toEqual(["", ""]);
  const found = auditLedger(text());
  expect(found.problems).toEqual([]);
  const kept = found.ledger.entries.map((entry) => entry.digest);
  expect(kept).toHaveLength(50);
  expect([...both[0]!.told, ...both[1]!.told].sort()).toEqual([...kept].sort());
});

it("goes on from a file cut off at any byte: the whole lines stay, the next entry takes the torn one's place", async () => {
  const whole = memoryHost();
  whole.put("data.csv", invented());
  await runAll(whole, [planning, analysis]);
  const bytes = whole.files.get("study.ledger.jsonl")!;
  for (let length = 1; length < bytes.length; length += 11) {
    const host = memoryHost();
    host.put("data.csv", invented());
    host.files.set("study.ledger.jsonl", bytes.slice(0, length));
    // A new host's clock begins where the first one's did; here time goes on.
    for (let tick = 0; tick < 60; tick++) host.now();
    const session = await openSession(host, "test");
    const { problems } = await runCell(session, 'read "data.csv"', { cell: 1, host });
    expect(problems).toEqual([]);
    const after = host.files.get("study.ledger.jsonl")!;
    const keptLength = bytes.subarray(0, length).lastIndexOf(10) + 1;
    expect(Buffer.compare(after.subarray(0, keptLength), bytes.subarray(0, keptLength))).toBe(0);
    // A record that only its read entry follows may already hold that reading: then nothing is written, and the torn part stays torn.
    expect(auditLedger(host.text("study.ledger.jsonl")).problems.filter(({ code }) => code !== "torn-line")).toEqual(
      [],
    );
  }
});
