import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { tableOf } from "../../src/present/blocks.ts";
import { presentProblems, presentResult, presentText, resultToCsv, resultToJson } from "../../src/present/index.ts";
import { displayWidth } from "../../src/present/display-width.ts";
import { htmlTable, latexTable, markdownTable, tableResource, textForm } from "../../src/present/forms.ts";
import { escapeHtml, escapeLatex, escapeMarkdown, plainText } from "../../src/present/markup.ts";
import type { Result } from "../../src/results/index.ts";
import * as glove from "./glove.ts";

/** Names that break output when they are not escaped: markup, table signs, formulas, steering signs, wide and right-to-left script. */
const hostile = [
  "<script>alert(1)</script>",
  '"><img src=x onerror=alert(1)>',
  "a|b\\|c",
  "$x_1$ \\textbf{b} \\input{/etc/passwd} 100% #1 & {}~^",
  "`code` *bold* [link](javascript:alert(1)) ![i](x)",
  "=HYPERLINK(1)",
  "\u202eright to left\u202c \u0007 bell \u001b[31mred",
  "\u0639\u0631\u0628\u064a",
  "\u8d85\u9577\u3044\u540d\u524d",
  "\ud83d\udc69\ud83c\udffd\u200d\ud83d\udd2c",
  "two\nlines",
  "half \ud800 sign",
  "__proto__",
  "PICTURE-title",
];

/** The same result with every text in it that is a name made hostile. */
function withNames(result: Result, name: string): Result {
  const names = new Set([
    "bare",
    "nitrile - bare",
    "primary",
    "assembly time",
    "seconds",
    "assembly.csv",
    "glove",
    "operator",
    "s",
  ]);
  const changed = (value: unknown, key: string): unknown => {
    if (typeof value === "string") return names.has(value) && key !== "kind" && key !== "role" ? name : value;
    if (Array.isArray(value)) return value.map((each) => changed(each, key));
    if (typeof value === "object" && value !== null)
      return Object.fromEntries(Object.entries(value).map(([own, each]) => [own, changed(each, own)]));
    return value;
  };
  const renamed = changed(result, "") as Result;
  return renamed;
}

const tabular = glove.results.filter((result) => result.kind !== "picture" && result.kind !== "check");
const tagNames = (html: string) =>
  new Set([...html.matchAll(/<\/?([a-zA-Z][\w-]*)/g)].map((found) => found[1]!.toLowerCase()));
const allowedTags = new Set(
  "p span ul li pre code div table caption thead tbody tr th td h3 h4 h5 figure figcaption svg g path text tspan rect title desc line defs clippath".split(
    " ",
  ),
);

describe("hostile names", () => {
  it.each(hostile)("stay text in HTML: %j", async (name) => {
    for (const result of tabular) {
      const html = (await presentResult(withNames(result, name)))["text/html"]!;
      for (const tag of tagNames(html)) expect(allowedTags.has(tag), `${result.kind}: <${tag}>`).toBe(true);
      for (const [tag] of html.matchAll(/<[a-z][^<>]*>/g))
        expect(tag.replace(/"[^"]*"/g, ""), "attributes").not.toMatch(/\bon\w+|href|src/i);
      expect(html.match(/"/g)!.length % 2).toBe(0);
    }
  });

  it.each(hostile)("keep Markdown tables whole: %j", async (name) => {
    const table = tableOf(
      name,
      [{ name }, { name: "b" }],
      [
        { label: name, value: (row) => row.name, header: true },
        { label: "n", value: () => 1 },
      ],
    );
    const lines = markdownTable(table).split("\n");
    const cells = (line: string) => line.replace(/\\\\/g, "").replace(/\\\|/g, "").split("|").length;
    expect(lines.slice(2, 6).map(cells)).toEqual([4, 4, 4, 4]);
    expect(escapeMarkdown(name)).not.toMatch(/(^|[^\\])[<`*[]/);
  });

  it.each(hostile)("are no commands in LaTeX: %j", (name) => {
    const text = escapeLatex(name);
    const commands = [...text.matchAll(/\\([a-zA-Z]+)/g)].map((found) => found[1]);
    for (const command of commands)
      expect(["textbackslash", "textasciicircum", "textasciitilde", "textless", "textgreater"]).toContain(command);
    // What is left once the escapes are taken away holds no sign that LaTeX acts on.
    expect(text.replace(/\\[a-zA-Z]+\{\}|\\[{}$&#_%,]/g, "")).not.toMatch(/[\\{}$&#%^~_]/);
    expect(latexTable(tableOf(name, [{ name }], [{ label: name, value: (row) => row.name }])).match(/&/g)).toEqual(
      name.includes("&") ? ["&", "&", "&"].slice(0, (escapeLatex(name).match(/&/g) ?? []).length * 3) : null,
    );
  });

  it.each(hostile)("do not steer a terminal: %j", (name) => {
    // biome-ignore lint/suspicious/noControlCharactersInRegex: control characters are what must not be there
    const steering = /[\u0000-\u0009\u000b-\u001f\u007f\u202a-\u202e]/;
    for (const result of tabular) expect(presentText(withNames(result, name))).not.toMatch(steering);
  });

  it.each(hostile)("survive in pictures as text, in well-formed SVG: %j", async (name) => {
    for (const picture of [glove.meansPicture, glove.comparisonsPictureOf(glove.primary), glove.passingPicture]) {
      const bundle = await presentResult(withNames({ kind: "picture", picture }, name));
      const svg = bundle["image/svg+xml"]!;
      for (const tag of tagNames(svg)) expect(allowedTags.has(tag), `<${tag}>`).toBe(true);
      expect(svg).not.toMatch(/\ud800(?![\udc00-\udfff])/);
      expect(JSON.parse(JSON.stringify(bundle["application/vnd.vegalite.v5+json"]))).toBeTypeOf("object");
    }
  });

  it("never become a formula in a spreadsheet (common practice: a leading apostrophe)", () => {
    for (const start of ["=1+1", "+1", "-1+cmd", "@sum", "\t=1", "\r=1", " =1"]) {
      const csv = resultToCsv(withNames(glove.primary, start));
      for (const line of csv.split(/\r\n/))
        for (const cell of line.match(/("(?:[^"]|"")*"|[^,]*)(?:,|$)/g) ?? []) {
          const bare = cell.replace(/,$/, "").replace(/^"|"$/g, "");
          if (bare !== "" && Number.isNaN(Number(bare))) expect(bare).not.toMatch(/^\s*[=+\-@]/);
        }
    }
  });

  it("leave the escapes readable: what was escaped for HTML reads back as it was (property)", () => {
    const entities: Record<string, string> = { "&amp;": "&", "&lt;": "<", "&gt;": ">", "&quot;": '"', "&#39;": "'" };
    fc.assert(
      fc.property(fc.string({ unit: "grapheme" }), (text) => {
        const back = escapeHtml(text).replace(/&(?:amp|lt|gt|quot|#39);/g, (entity) => entities[entity]!);
        expect(back).toBe(plainText(text));
      }),
    );
  });
});

describe("text tables", () => {
  it("are aligned by what a terminal shows: every line of a table is as wide as its rule allows", () => {
    for (const name of hostile) {
      const table = tableOf(
        "t",
        [
          { name, value: 1.5 },
          { name: "b", value: -22 },
        ],
        [
          { label: "name", value: (row) => row.name, header: true },
          { label: "value", value: (row) => row.value },
        ],
      );
      const lines = textForm([{ type: "table", table }], () => "")
        .split("\n")
        .slice(2);
      const [head, rule, ...rows] = lines;
      expect(displayWidth(head!)).toBe(displayWidth(rule!));
      for (const row of rows) expect(displayWidth(row), JSON.stringify(name)).toBe(displayWidth(rule!));
    }
  });

  it("measure width by Unicode: marks 0, wide signs 2, an emoji of several signs 2 (Unicode annexes 11 and 29)", () => {
    expect(
      ["a", "\u8d85", "e\u0301", "\ud83d\udc69\ud83c\udffd\u200d\ud83d\udd2c", "\ud55c"].map(displayWidth),
    ).toEqual([1, 2, 1, 2, 2]);
  });

  it("never pass the width of the terminal unless one cell alone does", () => {
    for (const result of glove.results.filter((each) => each.kind !== "check"))
      for (const line of presentText(result).split("\n")) expect(displayWidth(line), line).toBeLessThanOrEqual(100);
  });

  it("are the golden ones", async () => {
    const texts = [...glove.results, glove.equivalence, glove.ratios, glove.oneWay].map(
      (result) => `${"=".repeat(20)} ${result.kind}\n${presentText(result)}`,
    );
    await expect(`${texts.join("\n\n")}\n`).toMatchFileSnapshot("goldens/texts.txt");
  });
});

describe("bundles", () => {
  it("of every kind hold text, HTML and Markdown, or a picture's forms", async () => {
    for (const result of glove.results) {
      const bundle = await presentResult(result, undefined, { svgToPng: async () => new Uint8Array([1, 2, 3]) });
      expect(bundle["text/plain"].length).toBeGreaterThan(10);
      expect(bundle["text/plain"]).not.toMatch(/undefined|NaN|\[object/);
      if (result.kind === "picture") {
        expect(bundle["image/svg+xml"]).toMatch(/^<svg /);
        expect(bundle["image/png"]).toBe("AQID");
        expect(bundle["application/vnd.vegalite.v5+json"]).toBeTypeOf("object");
      } else {
        expect(bundle["text/html"]).toContain("<");
        expect(bundle["text/html"]!.replace(/<svg[\s\S]*?<\/svg>/g, "")).not.toMatch(
          /<script|<style|<link|\bclass=|\bid=|background(-color)?:\s*(#|rgb|white)|[^-]color:\s*(#|rgb|black)/,
        );
        expect(bundle["text/markdown"]!.length).toBeGreaterThan(5);
      }
    }
  });

  it("name no address that a reader would fetch", async () => {
    for (const result of glove.results) {
      const bundle = await presentResult(result);
      for (const [type, content] of Object.entries(bundle)) {
        const text = typeof content === "string" ? content : JSON.stringify(content);
        const addresses = [...text.matchAll(/https?:\/\/[^"\s<)]+/g)].map((found) => found[0]);
        for (const address of addresses)
          expect(
            [
              "https://vega.github.io/schema/vega-lite/v5.json",
              "http://www.w3.org/2000/svg",
              "http://www.w3.org/1999/xlink",
            ],
            `${type}: ${address}`,
          ).toContain(address);
      }
    }
  });

  it("write tables with a caption and scopes, by inline style only", () => {
    const table = htmlTable(
      tableOf(
        "A caption",
        [{ a: "x", b: 1 }],
        [
          { label: "a", value: (row) => row.a, header: true },
          { label: "b", value: (row) => row.b },
        ],
      ),
    ).text;
    expect(table).toContain(">A caption</span></caption>");
    expect(table.match(/scope="col"/g)).toHaveLength(2);
    expect(table.match(/scope="row"/g)).toHaveLength(1);
  });

  it("carry tables as data, typed and unrounded, with the ends of intervals as fields of their own", async () => {
    const resource = (await presentResult(glove.primary))["application/vnd.dataresource+json"] as {
      schema: { fields: { name: string; type: string }[] };
      data: Record<string, unknown>[];
    };
    expect(resource.schema.fields.map((field) => field.name)).toEqual([
      "comparison",
      "estimate",
      "95% simultaneous interval, lower",
      "95% simultaneous interval, upper",
      "own p",
      "adjusted p",
      "threshold",
      "conclusion",
      "standard error",
      "df",
      "t",
      "g",
      "g, lower",
      "g, upper",
    ]);
    expect(resource.data[1]!["own p"]).toBe(glove.primary.rows[1]!.p);
    expect(resource.data[2]!["95% simultaneous interval, upper"]).toBe(glove.primary.rows[2]!.upper);
    for (const { name, type } of resource.schema.fields)
      for (const row of resource.data) if (row[name] !== null) expect(typeof row[name], name).toBe(type);
    expect(JSON.parse(resultToJson(glove.primary))).toEqual(JSON.parse(JSON.stringify(glove.primary)));
  });

  it("give repeated column names a number each", () => {
    const resource = tableResource(
      tableOf(
        "t",
        [{ a: 1 }],
        [
          { label: "n", value: (row) => row.a },
          { label: "n", value: (row) => row.a },
        ],
      ),
    ) as { data: object[] };
    expect(Object.keys(resource.data[0]!)).toEqual(["n", "n (2)"]);
  });

  it("follow the options for thresholds, adjusted p and digits", () => {
    const text = presentText(glove.primary, { digits: 1, showAdjustedP: false, showThresholds: false });
    expect(text).not.toMatch(/threshold|adjusted p {2}/i);
    expect(text).toContain("5.2");
    expect(text).not.toContain("5.20");
  });
});

describe("problems", () => {
  const problem = {
    line: 2,
    column: 18,
    endLine: 2,
    endColumn: 22,
    message: 'There is no factor "glve".',
    advice: 'Did you mean "glove"?',
  };
  it("mark their place by what a terminal shows, also after wide signs", () => {
    const { text } = presentProblems([problem], 'study "x"\ndescribe \u8d85\u8d85 by x glve');
    const [head, line, marker, advice] = text.split("\n");
    expect(head).toBe('Line 2: There is no factor "glve".');
    expect(advice).toBe('  Did you mean "glove"?');
    const points = [...line!.slice(2)];
    expect(displayWidth(marker!.slice(0, marker!.indexOf("^")))).toBe(2 + displayWidth(points.slice(0, 17).join("")));
    expect(marker!.match(/\^+/)![0]).toHaveLength(4);
  });
  it("escape the cell in HTML", () => {
    const { html } = presentProblems([{ ...problem, message: "<b>" }], "a\n<script>alert(1)</script> glve <i>");
    expect(tagNames(html)).toEqual(new Set(["pre"]));
  });
});
