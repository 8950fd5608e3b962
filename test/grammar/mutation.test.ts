import { readFileSync } from "node:fs";
import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { classifyTokens, complete, formatCell, hover, isComplete, parseCell } from "../../grammar/index.ts";
import { catalogue } from "../../grammar/statements/index.ts";
import { expectSoundPlaces } from "./places.ts";
import { type Random, randomFrom } from "./sentences.ts";

const cells = [
  ...[...catalogue.values()].map(({ example }) => example),
  readFileSync("notebooks/glove-plan.mwise", "utf8"),
  readFileSync("notebooks/glove-analysis.mwise", "utf8"),
];

/** What anybody asks about a cell: nothing throws, and every place is sound. The dearer questions are put to every third text. */
function askEverything(text: string, offset: number): void {
  const found = parseCell(text);
  expectSoundPlaces(text, found);
  if (text.length % 3 !== 0) return;
  const completions = complete(text, offset);
  expect(completions.start).toBeLessThanOrEqual(completions.end);
  expect(completions.end).toBeLessThanOrEqual(text.length);
  hover(text, offset);
  isComplete(text);
  classifyTokens(text);
  formatCell(text);
}

/** Changes bytes, so that also broken encodings, control characters and halves of characters come up. */
function mutatedBytes(text: string, random: Random): string {
  const bytes = [...Buffer.from(text, "utf8")];
  for (let change = 1 + random(6); change > 0; change--) {
    const at = random(bytes.length + 1);
    const kind = random(4);
    if (kind === 0) bytes.splice(at, 0, random(256));
    else if (kind === 1) bytes.splice(at, 1 + random(4));
    else if (kind === 2 && at < bytes.length) bytes[at] = random(2) === 0 ? random(256) : 32 + random(95);
    else {
      const from = random(bytes.length + 1);
      bytes.splice(at, 0, ...bytes.slice(from, from + random(80)));
    }
  }
  return Buffer.from(bytes).toString("utf8");
}

const fragments = [
  '"',
  "#",
  "\n",
  "\n  ",
  "\t",
  "\r\n",
  "(",
  ")",
  ",",
  ":",
  "%",
  "1/",
  "😀",
  "\u0000",
  "\ud800",
  "\ufeff",
  "\u00a0",
  "hold ",
  "because ",
  "at ",
  "each ",
  "- ",
  "^",
  "amend ",
  "if ",
  "data\n",
  "\u2028",
];

describe("ten thousand damaged cells", () => {
  it("by bytes (seed 20261201)", () => {
    const random = randomFrom(20261201);
    for (let run = 0; run < 6000; run++) {
      const text = mutatedBytes(cells[random(cells.length)]!, random);
      askEverything(text, random(text.length + 1));
    }
  });

  it("by fragments put in, lines swapped and pieces cut", () => {
    const damage = fc.tuple(
      fc.constantFrom(...cells),
      fc.array(fc.tuple(fc.nat(400), fc.constantFrom(...fragments), fc.nat(12)), { minLength: 1, maxLength: 8 }),
      fc.nat(600),
    );
    fc.assert(
      fc.property(damage, ([cell, changes, offset]) => {
        let text = cell;
        for (const [at, fragment, cut] of changes) {
          const place = at % (text.length + 1);
          text = text.slice(0, place) + fragment + text.slice(place + cut);
        }
        askEverything(text, offset % (text.length + 1));
      }),
      { numRuns: 4000 },
    );
  });

  it("of any characters at all", () => {
    fc.assert(
      fc.property(fc.string({ unit: "binary", maxLength: 60 }), fc.nat(60), (text, offset) =>
        askEverything(text, offset % (text.length + 1)),
      ),
      { numRuns: 1000 },
    );
  });
});

describe("long and deep cells", () => {
  const timed = (text: string): { ms: number; problems: number } => {
    const start = performance.now();
    const { problems } = parseCell(text);
    return { ms: performance.now() - start, problems: problems.length };
  };
  it.each([
    ["parentheses", `derive x = ${"(".repeat(50_000)}`],
    ["minus signs", `derive x = ${"-".repeat(50_000)}1`],
    ["negations", `exclude where ${"not ".repeat(50_000)}a = 1 because "x"`],
    ["choices", `derive x = ${"if a = 1 then ".repeat(20_000)}`],
    ["powers", `derive x = a${"^a".repeat(50_000)}`],
    ["calculations", `derive x = ${"log of ".repeat(50_000)}a`],
    ["sums", `derive x = a${" + a".repeat(50_000)}`],
    ["conditions", `exclude where a = 1${" and a = 1".repeat(50_000)} because "x"`],
  ])("%s are refused, not overrun", (_, text) => {
    const { ms, problems } = timed(text);
    expect(problems).toBe(1);
    expect(ms).toBeLessThan(5000);
  });

  it("just within the bounds everything works", () => {
    const deepest = `derive x = ${"(".repeat(59)}a${")".repeat(59)}`;
    const longest = `contrast c: a${" - a".repeat(999)}`;
    for (const text of [deepest, longest]) {
      expect(parseCell(text).problems).toEqual([]);
      formatCell(text);
    }
  });

  it("a list of ten thousand levels takes no longer than a list should, right or wrong", () => {
    const levels = Array.from({ length: 10_000 }, (_, index) => `level_${index}`).join(", ");
    expect(timed(`factor f within u: ${levels}`)).toMatchObject({ problems: 0 });
    const wrong = timed(`factor f within u: ${levels} extra`);
    expect(wrong.problems).toBe(1);
    expect(wrong.ms).toBeLessThan(5000);
  });
});
