import { strFromU8, unzipSync } from "fflate";
import { describe, expect, it } from "vitest";
import { buildReport, renderReport, type ReportFacts, standingCaution } from "../../../src/present/index.ts";
import type { Result } from "../../../src/results/index.ts";
import * as glove from "../glove.ts";

/** A picture of one pixel stands in, where only the place of pictures matters. */
const pixel = Uint8Array.from(
  atob("iVBORw0KGgoAAAANSUhEUgAAAAEAAAABCAYAAAAfFcSJAAAADUlEQVR42mNk+M9QDwADhgGAWjR9awAAAABJRU5ErkJggg=="),
  (sign) => sign.charCodeAt(0),
);
const host = { svgToPng: async () => pixel };
/** Enough to have a table, sentences and a picture. */
const few: Result[] = [glove.primary, { kind: "picture", picture: glove.comparisonsPictureOf(glove.primary) }];
const text = async (facts: ReportFacts, format: "html" | "md") =>
  new TextDecoder().decode(await renderReport(buildReport(facts), format, host));
const titles = (facts: ReportFacts) => buildReport(facts).sections.map((section) => section.title);
const words = (facts: ReportFacts) => JSON.stringify(buildReport(facts));

describe("the report", () => {
  it("tells the study in the order of a paper", () => {
    expect(titles(glove.facts)).toEqual([
      "Caution",
      "Design",
      "Planning",
      "Participants, data and exclusions",
      "Checks",
      "Description",
      "Omnibus test",
      "Planned comparisons",
      "Exploratory comparisons",
      "Does the procedure hold its error here?",
      "Deviations from the plan",
      "Methods",
      "References",
      "Record",
    ]);
  });

  it("always carries the standing caution, also with nothing else to tell, and the study's own", () => {
    const bare = { ...glove.facts, results: [], caution: null, plan: null, data: null, deviations: [], amendments: [] };
    expect(words(bare)).toContain(standingCaution);
    expect(titles(bare)).toEqual([
      "Caution",
      "Design",
      "Participants, data and exclusions",
      "Deviations",
      "Methods",
      "Record",
    ]);
    expect(words(glove.facts)).toContain("hand-protection rules");
  });

  it("says in its banner which comparisons are of which state", () => {
    expect(buildReport(glove.facts).banner).toEqual([
      `The plan "glove" was sealed on 2026-03-02T09:14:00Z (SHA-256 ${"0f".repeat(32)}).`,
      "Comparisons: 5 \u25a0\u00a0planned, 6 \u25cb\u00a0exploratory.",
      "1 deviation from the plan: see below.",
    ]);
    expect(buildReport({ ...glove.facts, plan: null }).banner[0]).toContain(
      "no comparison in this report counts as planned",
    );
  });

  it("never mixes exploratory results into the planned part", () => {
    const document = buildReport(glove.facts);
    const planned = JSON.stringify(document.sections.find((section) => section.id === "planned"));
    const exploratory = JSON.stringify(document.sections.find((section) => section.id === "exploratory"));
    expect(planned).not.toContain("exploratory");
    expect(exploratory).toContain("It suggests what to test next; it confirms nothing.");
    expect(exploratory).not.toContain('"primary\\"');
  });

  it("leaves out what was tried on simulated data once real data are held, and marks it all while they are simulated", () => {
    const rehearsed: Result[] = [
      {
        ...glove.primary,
        family: "tried",
        state: "rehearsal",
        rows: glove.primary.rows.map((row) => ({ ...row, state: "rehearsal" })),
      },
    ];
    expect(words({ ...glove.facts, results: [...rehearsed, ...glove.results] })).not.toContain("tried");
    const simulated = { ...glove.facts, data: { ...glove.facts.data!, rehearsal: true, seed: 7 }, results: rehearsed };
    expect(buildReport(simulated).banner[0]).toContain("REHEARSAL: the data are simulated");
    expect(words(simulated)).toContain("tried");
  });

  it("says so when a family was compared again with another outcome", () => {
    const again = { ...glove.primary, rows: glove.primary.rows.map((row) => ({ ...row, p: row.p / 2 })) };
    expect(words({ ...glove.facts, results: [glove.primary, again] })).toContain("2 different outcomes");
    expect(words({ ...glove.facts, results: [glove.primary, glove.primary] })).not.toContain("different outcomes");
  });

  it("prints the references of the methods used, and of no other", () => {
    const list = (facts: ReportFacts) =>
      JSON.stringify(buildReport(facts).sections.find((section) => section.id === "references"));
    expect(list(glove.facts)).toContain("Kenward, M. G.");
    expect(list(glove.facts)).toContain("Holm, S. (1979)");
    expect(list(glove.facts)).not.toContain("Welch, B. L. (1951)");
    expect(list(glove.facts)).not.toContain("Hommel");
    expect(list({ ...glove.facts, results: [glove.equivalence] })).toContain("Schuirmann");
  });

  it("writes the design as sentences, for factors within and between, recorded and assigned", () => {
    const design = (facts: Partial<ReportFacts>) =>
      (
        buildReport({ ...glove.facts, ...facts }).sections.find((section) => section.id === "design")!.blocks[0] as {
          text: string;
        }
      ).text;
    expect(design({})).toBe(
      "The response was assembly time (s), for which lower is better. Glove (bare, nitrile, knit and leather) and shift (day and night) were varied within each operator. The unit of sampling was the operator.",
    );
    expect(
      design({
        response: glove.turbidity,
        units: [
          { name: "fish", role: "subjects", nestedIn: ["tank"] },
          { name: "assay", role: "items", nestedIn: [] },
        ],
        factors: [
          { name: "diet", levels: ["hay", "mix"], varies: "between", unit: "tank", measured: false },
          { name: "sex", levels: ["f", "m"], varies: "between", unit: "fish", measured: true },
        ],
        covariates: [{ name: "weight", varies: "between" }],
        assumptions: { variances: "unequal", covariance: null },
      }),
    ).toBe(
      "The response was turbidity (NTU). Diet (hay and mix) was varied between tanks. Sex (f and m) was recorded, not assigned: differences between its levels need not be effects of it. The unit of sampling was the fish, each within one tank. Assays were a second unit of sampling, crossed with the first. Weight was a covariate, and means were adjusted for it. The analysis was on the logarithm of the response; results are given back as ratios of geometric means. Variances were not assumed to be equal.",
    );
  });

  it("tells participants and every exclusion with its reason, rule, cells and whether results had been seen", () => {
    const told = words(glove.facts);
    expect(told).toContain("24 operators with 192 observations entered the analysis.");
    expect(told).toContain(
      '1 row: glove tore (exclude where operator = \\"o7\\"). By cell: knit, night: 1. This exclusion came after results had been seen.',
    );
  });
});

describe("as a page", () => {
  it("holds everything itself: no script, no address to fetch, pictures inside", async () => {
    const page = await text(glove.facts, "html");
    expect(page).toMatch(/^<!doctype html>/);
    expect(page).not.toMatch(/<script|<link|src=|@import|url\((?!#)/);
    expect(
      [...page.matchAll(/https?:\/\/[^"\s<)]+/g)].every(([address]) => address.startsWith("http://www.w3.org/")),
    ).toBe(true);
    const ids = [...page.matchAll(/\bid="([^"]+)"/g)].map((found) => found[1]!);
    expect(new Set(ids).size).toBe(ids.length);
    for (const [, target] of page.matchAll(/href="#([^"]+)"/g)) expect(ids).toContain(target);
    expect(page.match(/<figure>/g)).toHaveLength(9);
    expect(page.match(/Table \d+\. /g)!.length).toBeGreaterThanOrEqual(15);
  });

  it("keeps hostile titles and names as text", async () => {
    const name = '</title><script>alert("1")</script>';
    const page = await text({ ...glove.facts, results: [glove.primary], title: name, caution: name }, "html");
    expect(page).not.toContain("<script");
  });
});

describe("as Markdown", () => {
  it("numbers tables and figures, and holds the pictures", async () => {
    const page = await text(glove.facts, "md");
    expect(page).toMatch(/^# Glove type and assembly time\n/);
    expect(page.match(/^!\[Figure \d+\]\(data:image\/png;base64,/gm)).toHaveLength(9);
    for (const line of page.split("\n")) if (line.startsWith("|")) expect(line).toMatch(/\|$/);
  });

  it("tells its pictures in words where the host draws none", async () => {
    const page = new TextDecoder().decode(
      await renderReport(buildReport({ ...glove.facts, results: few }), "md", { svgToPng: async () => null }),
    );
    expect(page).not.toContain("data:image");
    expect(page).toContain("**Figure 1.**");
  });
});

describe("as a word processor's document", () => {
  it("is a package with tables, captions, pictures and their alternative texts", async () => {
    const files = unzipSync(await renderReport(buildReport(glove.facts), "docx", host));
    const document = strFromU8(files["word/document.xml"]!);
    const numbered = buildReport(glove.facts).sections.flatMap((section) => section.blocks);
    const tables = numbered.filter((block) => block.type === "table").length;
    // A wide table stands in parts under one caption; each part repeats its head on every page.
    expect(document.match(/>Table \d+\. </g)).toHaveLength(tables);
    expect(document.match(/<w:tbl>/g)!.length).toBeGreaterThanOrEqual(tables);
    expect(document.match(/<w:tblHeader\/>/g)).toHaveLength(document.match(/<w:tbl>/g)!.length);
    expect(document.match(/<pic:pic /g)).toHaveLength(9);
    expect(Object.keys(files).some((name) => /^word\/media\/.+\.png$/.test(name))).toBe(true);
    expect(document.match(/descr="[^"]{20,}/g)!.length).toBeGreaterThanOrEqual(9);
    expect(document).toContain(standingCaution.replace(/'/g, "&apos;").slice(0, 40));
    expect(document).not.toContain('lineRule="exact"');
  });

  it("stays well-formed with hostile names, and goes without pictures where the host draws none", async () => {
    const name = '<w:p>&"\u0007\ud800</w:t>';
    const files = unzipSync(
      await renderReport(buildReport({ ...glove.facts, results: few, title: name, caution: name }), "docx", {
        svgToPng: async () => null,
      }),
    );
    const document = strFromU8(files["word/document.xml"]!);
    // Tags open and close in order: a parser of nothing but tags finds its way to the end.
    const open: string[] = [];
    for (const [, close, tag, whole] of document.matchAll(/<(\/?)([\w:]+)[^<>]*?(\/?)>/g)) {
      if (close === "/") expect(open.pop()).toBe(tag);
      else if (whole !== "/") open.push(tag!);
    }
    expect(open).toEqual([]);
    expect(document).not.toContain("\u0007");
    expect(Object.keys(files).some((file) => file.endsWith(".png"))).toBe(false);
  });
});
