import { describe, expect, it } from "vitest";
import { openSession, runCell, type Session } from "../../src/session/index.ts";
import { memoryHost } from "./memory-host.ts";

const data =
  "data\n  operator glove shift trial seconds\n  1 bare day 1 40.1\n  1 knit day 1 45.2\n  2 bare day 1 38.7\n  2 knit day 1 47.0\n  3 bare night 1 39.5\n  3 knit night 1 44.1\n  4 bare night 1 41.2\n  4 knit night 1 46.3";
const design =
  'response seconds in "s"\nsubjects operator\nfactor glove within operator: bare, knit\nfactor shift between operators: day, night';
const family = "family primary: each glove against bare\n  hold error 5% by holm";

/** Runs cells one after another; the last one makes the mistake. */
async function problemsOf(...cells: string[]): Promise<{
  readonly problems: readonly {
    code: string;
    message: string;
    advice: string;
    line: number;
    column: number;
    endColumn: number;
  }[];
  readonly marked: string;
  readonly before: Session;
  readonly after: Session;
}> {
  const host = memoryHost();
  host.put("bad.csv", "operator,glove,seconds\n1,bare,40.1\n1,knit,45.2s\n");
  host.put("ragged.csv", "operator,glove,seconds\n1,bare,40.1\n1,knit\n");
  host.put(
    "glove.plan.json",
    '{"plan":{"format":"meanwise plan","formatVersion":1,"statements":[],"families":[],"name":"glove","meanwise":"0.1.0"},"sealedAt":"2026-01-01T00:00:00.000Z","digest":"00"}',
  );
  let session = await openSession(host, "0.1.0");
  for (const cell of cells.slice(0, -1)) {
    const done = await runCell(session, cell, { cell: 1, host });
    expect(done.problems, cell).toEqual([]);
    session = done.session;
  }
  const last = cells.at(-1)!;
  const done = await runCell(session, last, { cell: 9, host });
  const [first] = done.problems;
  const line = first === undefined ? "" : [...last.split("\n")[first.line - 1]!];
  return {
    problems: done.problems,
    marked: first === undefined ? "" : [...line].slice(first.column - 1, first.endColumn - 1).join(""),
    before: session,
    after: done.session,
  };
}

/** What is wrong; its code; the text that is marked (null: the whole line); something the advice says. */
const mistakes: readonly (readonly [string, readonly string[], string, string | null, RegExp])[] = [
  ["level declared twice", [design, "factor glove within operator: bare, bare"], "duplicate-level", "bare", /once/],
  ["unknown unit", ["factor glove within operator: bare, knit"], "unknown-unit", "operator", /subjects operator/],
  [
    "positions that do not match",
    [design, "factor dose between operators: none, low\n  at 0, 1, 2"],
    "positions-count",
    "dose",
    /one position for each/,
  ],
  ["weights that do not sum to zero", [design, "contrast gap: knit + bare"], "weights-not-zero", "gap", /Take 2 away/],
  ["unknown level in a contrast", [design, "contrast gap: suede - bare"], "unknown-level", "suede", /Declared levels/],
  [
    "family without a method",
    [design, "family primary: each glove against bare"],
    "no-method",
    "primary",
    /hold error 5% by holm/,
  ],
  [
    "family of an unknown contrast",
    [design, "family primary: gloved\n  hold error 5% by holm"],
    "unknown-contrast",
    "gloved",
    /contrast gloved/,
  ],
  [
    "the same comparison twice",
    [design, "contrast gap: knit - bare\nfamily primary: gap, each glove against bare\n  hold error 5% by holm"],
    "duplicate-member",
    null,
    /once/,
  ],
  [
    "families that wait for each other",
    [
      design,
      `${family}\n`,
      "family later: all pairs of shift\n  hold error 5% by holm\n  after primary",
      "family primary: each glove against bare\n  hold error 5% by holm\n  after later",
    ],
    "cyclic-after",
    "later",
    /without after/,
  ],
  [
    "not worse without a direction",
    [design, "family primary: each glove against bare\n  hold error 5% by holm\n  not worse by 2"],
    "direction-unknown",
    null,
    /lower is better/,
  ],
  [
    "family error by a method of false discovery",
    [design, "family primary: each glove against bare\n  hold error 5% by bh"],
    "not-family-error",
    null,
    /false discovery/,
  ],
  ["missing file", ['read "nothing.csv"'], "missing-file", '"nothing.csv"', /bad\.csv|Data files/],
  ["unknown format", ['read "data.sav"'], "unknown-format", '"data.sav"', /\.csv/],
  ["ragged line", ['read "ragged.csv"'], "ragged-row", null, /separator/],
  [
    "number with stray text",
    ['response seconds\nsubjects operator\nfactor glove within operator: bare, knit\nread "bad.csv"', "check"],
    "stray-text",
    null,
    /in "s"/,
  ],
  [
    "exclusion of an unknown column",
    [data, 'exclude where trail = 1 because "practice"'],
    "unknown-column",
    null,
    /trial/,
  ],
  ["derive over an existing column", [data, "derive seconds = 60 / seconds"], "column-exists", null, /another name/],
  ["average over a factor", [design, data, "average seconds over glove"], "averaged-over-design", "glove", /trials/],
  ["describe before data", [design, "describe seconds by glove"], "no-data", null, /read/],
  ["describe by an unknown factor", [design, data, "describe seconds by glve"], "unknown-factor", "glve", /glove/],
  ["omnibus without a response", ["omnibus"], "no-response", null, /response/],
  ["compare an undeclared family", [design, data, "compare primry"], "unknown-family", "primry", /Declare|mean/],
  [
    "factor declared within that is between",
    ["response seconds\nsubjects operator\nfactor shift within operator: day, night", data, "omnibus"],
    "declared-within-found-between",
    null,
    /between/,
  ],
  [
    "factor declared between that is within",
    ["response seconds\nsubjects operator\nfactor glove between operators: bare, knit", data, "omnibus"],
    "declared-between-found-within",
    null,
    /within/,
  ],
  [
    "two rows for one subject and cell",
    ["response seconds\nsubjects shift\nfactor glove within shift: bare, knit", data, "omnibus"],
    "duplicate-rows",
    null,
    /average/,
  ],
  [
    "a level nobody declared",
    ["response seconds\nsubjects operator\nfactor glove within operator: bare, leather", data, "omnibus"],
    "level-without-data",
    null,
    /spelling|declaration/,
  ],
  [
    "tukey for members that are not all pairs",
    [design, "family primary: each glove against bare\n  hold error 5% by tukey", data, "compare primary"],
    "not-all-pairs",
    null,
    /holm/,
  ],
  ["open a plan that was edited", ['open plan "glove"'], "plan-changed", null, /as it was sealed/],
  ["open a plan that is not there", ['open plan "knit"'], "missing-plan", '"knit"', /glove/],
  ["seal without a family", [design, 'seal plan as "x"'], "nothing-to-seal", null, /family/],
  [
    "amend without a plan",
    [design, 'amend contrast gap: knit - bare because "asked"'],
    "no-plan-open",
    null,
    /sealed plan/,
  ],
  [
    "declare against a sealed plan",
    [design, family, 'seal plan as "x"', "family primary: each glove against bare\n  hold error 10% by holm"],
    "plan-is-sealed",
    null,
    /amend/,
  ],
  ["report before any result", [design, "report"], "nothing-to-report", null, /analyses/],
  ["report in an unknown form", [design, data, "omnibus", 'report to "x.rtf"'], "unknown-format", '"x.rtf"', /\.docx/],
  ["export what is not there", ['export omnibus to "x.csv"'], "nothing-to-export", null, /Run it first/],
  ["draw comparisons before any", [design, data, "draw comparisons"], "nothing-compared", null, /family/],
  [
    "profiles without a within factor",
    [
      "response seconds\nsubjects operator\nfactor shift between operators: day, night",
      "data\n  operator shift seconds\n  1 day 40\n  2 day 42\n  3 night 44\n  4 night 43",
      "draw profiles",
    ],
    "no-within-factor",
    null,
    /means/,
  ],
  ["planning without an expectation", [design, family, "size primary for 90% power"], "no-expectation", null, /expect/],
  [
    "an impossible correlation",
    [
      "response seconds\nsubjects operator\nfactor glove within operator: bare, knit, wool",
      family,
      "expect seconds\n  glove bare 40, knit 45, wool 47\n  spread 9, correlation -0.6\nsize primary for 90% power",
    ],
    "impossible-correlation",
    null,
    /0\.5/,
  ],
  [
    "nothing to find",
    [
      design,
      family,
      "expect seconds\n  glove bare 40, knit 40\n  spread 9, correlation 0.5\nsize primary for 90% power",
    ],
    "no-difference-expected",
    null,
    /./,
  ],
  ["help on nothing known", ["help hollm"], "unknown-topic", "hollm", /holm/],
  ["a statement that is misspelt", ["comapre primary"], "unknown-statement", "comapre", /compare/],
];

describe("each mistake has its code, its place and its advice, and nothing held is lost", () => {
  it.each(mistakes)("%s", async (_, cells, code, marked, advice) => {
    const found = await problemsOf(...cells);
    expect(found.problems.map((problem) => problem.code)).toContain(code);
    const [first] = found.problems;
    if (marked !== null) expect(found.marked).toBe(marked);
    expect(`${first!.message} ${first!.advice}`).toMatch(advice);
    expect(first!.message).not.toMatch(/undefined|NaN|\[object|Error:/);
    expect(found.after.study.ledger.entries.length).toBeGreaterThanOrEqual(found.before.study.ledger.entries.length);
    expect(found.after.study.data === null).toBe(found.before.study.data === null);
  });
});

describe("damaged cells", () => {
  const sources = [
    design,
    family,
    data,
    "omnibus",
    "compare primary",
    "describe seconds by glove, shift",
    'exclude where trial = 2 because "late"',
    "explore all pairs of glove by holm",
    "draw means of seconds by glove",
    "check",
    "average seconds over trial",
    "derive speed = 60 / seconds",
    "show design",
    "help holm",
    "contrast gap: knit - bare",
    "expect seconds\n  glove bare 40, knit 45\n  spread 9, correlation 0.5",
  ];
  it("never crash the session: a result, or a problem with its place inside the cell", {
    timeout: 120_000,
  }, async () => {
    let state = 20261201;
    const random = (below: number) => {
      state = (Math.imul(state, 1664525) + 1013904223) >>> 0;
      return Math.floor((state / 2 ** 32) * below);
    };
    const pieces = [
      "(",
      ")",
      ",",
      ":",
      "at",
      "of",
      "5%",
      '"',
      "\n",
      "\n  ",
      "-",
      "knit",
      "glove",
      "1e9",
      "0",
      "\u{1f9e4}",
      "each",
      "by",
      "where",
      "=",
      "#",
      " ",
    ];
    const host = memoryHost();
    let session = await openSession(host, "0.1.0");
    for (const cell of [design, family, data]) session = (await runCell(session, cell, { cell: 1, host })).session;
    for (let count = 0; count < 10_000; count++) {
      let text = sources[random(sources.length)]!;
      for (let change = random(3); change >= 0; change--) {
        const at = random(text.length + 1);
        const kind = random(4);
        if (kind === 0) text = text.slice(0, at) + text.slice(at + 1 + random(4));
        else if (kind === 1) text = text.slice(0, at) + pieces[random(pieces.length)]! + text.slice(at);
        else if (kind === 2) text = text.slice(0, at) + String.fromCodePoint(32 + random(400)) + text.slice(at + 1);
        else text = text.slice(0, at);
      }
      const done = await runCell(session, text, { cell: 2, host });
      const lines = text.replace(/\r\n?/g, "\n").split("\n");
      for (const problem of done.problems) {
        expect(problem.line, text).toBeGreaterThanOrEqual(1);
        expect(problem.endLine, text).toBeLessThanOrEqual(lines.length + 1);
        expect(problem.column, text).toBeGreaterThanOrEqual(1);
        expect(problem.message.length).toBeGreaterThan(0);
        expect(problem.advice.length).toBeGreaterThan(0);
      }
      // Now and then a damaged cell is a valid one that changes the study: go on from it, so that odd studies are met too.
      if (random(20) === 0) session = done.session;
      if (count % 500 === 499) {
        session = await openSession(memoryHost(), "0.1.0");
        for (const cell of [design, family, data]) session = (await runCell(session, cell, { cell: 1, host })).session;
      }
    }
  });
});
