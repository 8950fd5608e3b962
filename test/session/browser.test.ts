import { existsSync, mkdtempSync, readFileSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import { dirname, join } from "node:path";
import { fileURLToPath } from "node:url";
import { build } from "esbuild";
import { chromium } from "playwright-core";
import { describe, expect, it } from "vitest";
import { openSession, runCell } from "../../src/session/index.ts";
import { memoryHost } from "./memory-host.ts";

const top = join(dirname(fileURLToPath(import.meta.url)), "..", "..");
const browser = "/usr/bin/chromium";
const required = process.env.MEANWISE_REQUIRE_FRONT_ENDS === "1";

const source = `response body_mass "body mass" in "g"
subjects penguin
factor species between penguins: Adelie, Chinstrap, Gentoo
family pairs: all pairs of species
  hold error 5% by tukey
read "penguins.csv"
check
describe body_mass by species
omnibus
omnibus by welch
compare pairs
explore all pairs of species by single-step`;

/** What the page runs: the bundled core with a host that holds one file. */
const page = `import { openSession, runCell, silentWatch, HostError } from ${JSON.stringify(join(top, "src", "index.ts"))};
globalThis.meanwise = async (csv, source) => {
  const files = new Map([["penguins.csv", new TextEncoder().encode(csv)]]);
  const host = {
    readBytes: async (path) => { const found = files.get(path); if (!found) throw new HostError("missing-file", path, "missing"); return found; },
    writeBytes: async (path, bytes) => void files.set(path, bytes),
    appendLine: async () => {},
    exists: async (path) => files.has(path),
    listFiles: async () => [...files.keys()],
    now: () => 0,
    randomSeed: () => 7,
    runJobs: async () => [],
    svgToPng: async () => null,
    watch: silentWatch,
    documentName: null,
    environment: {},
  };
  const done = await runCell(await openSession(host, "0.1.0"), source, { cell: 1, host });
  return JSON.stringify({ results: done.outcomes.map((outcome) => outcome.result), problems: done.problems });
};`;

/** Engines of different age round exp and log differently in the last bit; what is built on them may differ by a few. */
const engineRounding = 1e-12;

function sameNumbers(left: unknown, right: unknown, path: string): void {
  if (typeof left === "number" && typeof right === "number") {
    expect(Math.abs(left - right), path).toBeLessThanOrEqual(
      engineRounding * Math.max(Math.abs(left), Math.abs(right)),
    );
  } else if (typeof left === "object" && left !== null && typeof right === "object" && right !== null) {
    expect(Object.keys(left), path).toEqual(Object.keys(right));
    for (const key of Object.keys(left))
      sameNumbers((left as Record<string, unknown>)[key], (right as Record<string, unknown>)[key], `${path}.${key}`);
  } else expect(left, path).toEqual(right);
}

describe.skipIf(!required && !existsSync(browser))("the portable core in a browser (needs Chromium)", () => {
  it("gives the numbers that Node gives", { timeout: 120_000 }, async () => {
    // No polyfill is offered: a Node module in the core would fail to bundle.
    const bundle = await build({
      stdin: { contents: page, resolveDir: top, loader: "ts" },
      bundle: true,
      platform: "browser",
      format: "iife",
      write: false,
      logLevel: "silent",
    });
    const csv = readFileSync(join(top, "notebooks", "penguins.csv"), "utf8");
    const folder = mkdtempSync(join(tmpdir(), "meanwise-browser-"));
    const context = await chromium.launchPersistentContext(folder, {
      executablePath: browser,
      headless: true,
      args: [
        "--no-sandbox",
        "--disable-gpu",
        "--disable-quic",
        "--no-first-run",
        "--disable-background-networking",
        "--disable-component-update",
        "--disable-sync",
      ],
    });
    try {
      const tab = await context.newPage();
      await tab.addScriptTag({ content: bundle.outputFiles[0]!.text });
      const text = await tab.evaluate(
        ([data, cell]) =>
          (globalThis as unknown as { meanwise(csv: string, source: string): Promise<string> }).meanwise(data!, cell!),
        [csv, source],
      );
      const inBrowser = JSON.parse(text) as { results: unknown[]; problems: unknown[] };
      const host = memoryHost(null);
      host.put("penguins.csv", csv);
      const here = await runCell(await openSession(host, "0.1.0"), source, { cell: 1, host });
      expect(inBrowser.problems).toEqual([]);
      sameNumbers(
        inBrowser.results,
        JSON.parse(JSON.stringify(here.outcomes.map((outcome) => outcome.result))),
        "results",
      );
      expect(inBrowser.results).toHaveLength(11);
    } finally {
      await context.close();
      rmSync(folder, { recursive: true, force: true });
    }
  });
});
