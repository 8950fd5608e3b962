/**
 * The report and notebook fragments before axe-core in Chromium, light and dark, wide and narrow. Skipped where there is no Chromium,
 * required with MEANWISE_REQUIRE_FRONT_ENDS=1; MEANWISE_CHROMIUM names another program than the one on the search path.
 */
import { existsSync, mkdtempSync, readFileSync, rmSync } from "node:fs";
import { createRequire } from "node:module";
import { tmpdir } from "node:os";
import { delimiter, join } from "node:path";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import type { BrowserContext } from "playwright-core";
import { buildReport, presentResult, renderReport } from "../../../src/present/index.ts";
import * as glove from "../glove.ts";

const names = ["chromium", "chromium-browser", "google-chrome"];
const program =
  process.env.MEANWISE_CHROMIUM ??
  (process.env.PATH ?? "")
    .split(delimiter)
    .flatMap((folder) => names.map((name) => join(folder, name)))
    .find(existsSync);
const required = process.env.MEANWISE_REQUIRE_FRONT_ENDS === "1";
if (program === undefined && !required)
  console.warn("No Chromium on the search path: accessibility is not checked here.");

interface Violation {
  readonly id: string;
  readonly nodes: readonly { readonly html: string; readonly failureSummary?: string }[];
}

describe.skipIf(program === undefined && !required)("accessibility (axe-core)", () => {
  let context: BrowserContext;
  let folder: string;
  beforeAll(async () => {
    const { chromium } = await import("playwright-core");
    folder = mkdtempSync(join(tmpdir(), "meanwise-axe-"));
    context = await chromium.launchPersistentContext(folder, {
      executablePath: program!,
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
  });
  afterAll(async () => {
    await context?.close();
    if (folder !== undefined) rmSync(folder, { recursive: true, force: true });
  });

  const axe = readFileSync(createRequire(import.meta.url).resolve("axe-core/axe.min.js"), "utf8");
  async function violations(html: string, scheme: "light" | "dark", width: number): Promise<string[]> {
    const page = await context.newPage();
    try {
      await page.setViewportSize({ width, height: 900 });
      await page.emulateMedia({ colorScheme: scheme });
      await page.setContent(html);
      await page.evaluate(axe);
      const found = await page.evaluate(() =>
        // What is drawn inside a picture stands for nothing by itself: the picture has one role, title and description.
        (globalThis as unknown as { axe: { run(context: object): Promise<{ violations: Violation[] }> } }).axe.run({
          exclude: [["svg > *"]],
        }),
      );
      return found.violations.map(
        (each) =>
          `${each.id}: ${each.nodes
            .slice(0, 2)
            .map((node) => `${node.html.slice(0, 200)} ${node.failureSummary ?? ""}`)
            .join(" | ")}`,
      );
    } finally {
      await page.close();
    }
  }

  const report = renderReport(buildReport(glove.facts), "html", { svgToPng: async () => null }).then((bytes) =>
    new TextDecoder().decode(bytes),
  );

  it("finds no violation in the report, in a light wide and a dark narrow window", async () => {
    for (const [scheme, width] of [
      ["light", 1200],
      ["dark", 400],
    ] as const)
      expect(await violations(await report, scheme, width), `${scheme} ${width}`).toEqual([]);
  });

  it("finds no violation in what notebooks show of every result, on the page colours of a light and a dark theme", async () => {
    const fragments: string[] = [];
    for (const result of glove.results) fragments.push((await presentResult(result))["text/html"] ?? "");
    for (const [scheme, ground, text] of [
      ["light", "#ffffff", "#111111"],
      ["dark", "#111111", "#eeeeee"],
    ] as const) {
      const page = `<!doctype html><html lang="en"><head><title>Cells</title></head><body style="background:${ground};color:${text}"><main><h1>Notebook</h1><h2>Cells</h2>${fragments.join("\n")}</main></body></html>`;
      expect(await violations(page, scheme, 1000), scheme).toEqual([]);
    }
  });

  it("never makes the page itself scroll sideways, at 1200 and at 400 pixels", async () => {
    const page = await context.newPage();
    for (const width of [1200, 400]) {
      await page.setViewportSize({ width, height: 900 });
      await page.setContent(await report);
      expect(await page.evaluate(() => document.documentElement.scrollWidth)).toBeLessThanOrEqual(width);
    }
    await page.close();
  });
});
