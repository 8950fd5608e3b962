import { expect, it } from "vitest";

/** Far above what is measured on an idle machine (see the message of each run), so that only a lost order of magnitude fails. */
const boundMs = 1500;

it("the first completion and the first parse are quick", async () => {
  const begin = performance.now();
  const { complete, parseCell } = await import("../../grammar/index.ts");
  const loaded = performance.now();
  complete("compare ", 8, { families: ["primary"] });
  const completed = performance.now();
  parseCell("compare primary");
  const parsed = performance.now();
  parseCell("family p: each glove against bare\n  hold error 5% by holm");
  const warm = performance.now();
  console.info(
    `grammar: loaded in ${(loaded - begin).toFixed(0)} ms, first completion ${(completed - loaded).toFixed(1)} ms, first parse ${(parsed - completed).toFixed(1)} ms, second parse ${(warm - parsed).toFixed(1)} ms`,
  );
  expect(parsed - loaded).toBeLessThan(boundMs);
});
