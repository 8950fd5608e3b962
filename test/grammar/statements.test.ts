import { readFileSync } from "node:fs";
import { describe, expect, it } from "vitest";
import { parseCell, sameUnit } from "../../grammar/index.ts";
import { only, withoutSpans } from "./places.ts";

const name = (text: string, quoted = false) => ({ text, quoted });
const number = (text: string, value: number) => ({ text, value });

/** Every form of the language's design, and what it means. */
const forms: readonly (readonly [string, object])[] = [
  [
    'study "Gloves"\n  caution "Careful."',
    { kind: "study", title: name("Gloves", true), caution: name("Careful.", true) },
  ],
  [
    'response seconds "assembly time" in "s", lower is better',
    {
      kind: "response",
      name: name("seconds"),
      label: name("assembly time", true),
      unit: name("s", true),
      better: "lower",
      scale: "linear",
    },
  ],
  ['response turbidity in "NTU", on log scale', { kind: "response", label: null, better: null, scale: "log" }],
  ["response score\n  higher is better\n  on log scale", { kind: "response", better: "higher", scale: "log" }],
  ["subjects operator", { kind: "subjects", name: name("operator"), nestedIn: [], slopes: [] }],
  [
    "subjects animal nested in litter in herd\n  slopes age, weight",
    { nestedIn: [name("litter"), name("herd")], slopes: [name("age"), name("weight")] },
  ],
  ["items passage", { kind: "items", name: name("passage") }],
  ["blocks batch", { kind: "blocks", name: name("batch") }],
  [
    "factor glove within operator: bare, nitrile, knit, leather",
    {
      kind: "factor",
      varies: "within",
      unit: name("operator"),
      betweenUnit: null,
      ordered: false,
      measured: false,
      positions: null,
      reference: null,
    },
  ],
  ["factor shift between operators: day, night", { varies: "between", unit: name("operators") }],
  [
    "factor font within reader between passages: serif, sans",
    { varies: "within", unit: name("reader"), betweenUnit: name("passages") },
  ],
  [
    "factor dose between tanks: none, low, mid, high\n  at 0, 10, 40, -1.5\n  ordered\n  reference low\n  measured",
    {
      levels: ["none", "low", "mid", "high"].map((each) => name(each)),
      positions: [number("0", 0), number("10", 10), number("40", 40), number("-1.5", -1.5)],
      ordered: true,
      reference: name("low"),
      measured: true,
    },
  ],
  [
    "factor f between u: none, mean, open, data, omnibus, at",
    { levels: ["none", "mean", "open", "data", "omnibus", "at"].map((each) => name(each)) },
  ],
  [
    'factor dose between tanks: 0, 10, 20.5, "7 mg"',
    { levels: [name("0"), name("10"), name("20.5"), name("7 mg", true)] },
  ],
  ["factor f within u: a,\n  b,\n  c", { levels: [name("a"), name("b"), name("c")] }],
  ["covariate age", { kind: "covariate", varies: null, unit: null, centred: true }],
  ["covariate age within operator, not centred", { varies: "within", unit: name("operator"), centred: false }],
  [
    "contrast gloved: mean(nitrile, knit, leather) - bare",
    {
      kind: "contrast",
      expression: {
        type: "arithmetic",
        operator: "-",
        left: {
          type: "mean",
          of: ["nitrile", "knit", "leather"].map((each) => ({ type: "level", level: name(each), factor: null })),
        },
        right: { type: "level", level: name("bare"), factor: null },
      },
    },
  ],
  [
    "contrast gap: (leather - bare at night) - (leather - bare at day of shift)",
    {
      expression: {
        left: { type: "at", at: [{ level: name("night"), factor: null }] },
        right: { type: "at", at: [{ level: name("day"), factor: name("shift") }] },
      },
    },
  ],
  [
    "contrast c: weights a -3, b -1, c 1, d 3",
    { expression: { type: "weights", weights: [{ weight: number("-3", -3) }, {}, {}, { level: name("d") }] } },
  ],
  [
    "contrast c: mean - open at mean",
    { expression: { type: "at", operand: { left: { type: "level", level: name("mean") } } } },
  ],
  [
    "family primary: each glove against bare\n  hold error 5% by single-step",
    {
      kind: "family",
      members: [{ type: "each against level", factor: name("glove"), level: name("bare"), at: [] }],
      hold: { rate: number("5%", 0.05), method: "single-step", holds: "family" },
      sides: "two-sided",
      after: null,
    },
  ],
  [
    "family f: a, each seed against mean, all pairs of g at day, neighbours of h at each s, trend of d: linear, quadratic, b\n  hold false discovery 1/20 by bh",
    {
      members: [
        { type: "contrast", name: name("a") },
        { type: "each against mean" },
        { type: "all pairs", at: [{ level: name("day"), factor: null }] },
        { type: "neighbours", at: [{ each: name("s") }] },
        { type: "trend", degrees: [1, 2] },
        { type: "contrast", name: name("b") },
      ],
      hold: { rate: number("1/20", 0.05), method: "bh", holds: "false discovery" },
    },
  ],
  ["family f: each dose against 0", { members: [{ level: name("0") }], hold: null }],
  [
    "family f: each diet against hay at each age\n  one-sided upper\n  after any of g",
    { members: [{ at: [{ each: name("age") }] }], sides: "upper", after: { family: name("g"), any: true } },
  ],
  ["family f: a\n  margin 2.5", { margin: { type: "equivalence", value: number("2.5", 2.5) } }],
  ["family f: a\n  not worse by 1.5", { margin: { type: "not worse", value: number("1.5", 1.5) } }],
  [
    "family f: da, db, dd\n  hold error 5% by graph\n  weights da 1/2, db 1/2, dd 0\n  pass da to db 1/2, da to dd 1/2",
    {
      hold: { method: "graph" },
      weights: [{ member: name("da") }, {}, { weight: number("0", 0) }],
      passes: [{ from: name("da"), to: name("db"), share: number("1/2", 0.5) }, {}],
    },
  ],
  ["family f: a\n  hold error 5% by fixed sequence", { hold: { method: "fixed sequence" } }],
  ["family f: a\n  hold error 5% by games-howell", { hold: { method: "games-howell" } }],
  ...["equal variances", "unequal variances", "sphericity", "compound symmetry", "unstructured"].map(
    (what) => [`assume ${what}`, { kind: "assume", what }] as const,
  ),
  [
    "expect seconds\n  glove bare 41, nitrile 43\n  glove by shift bare day -1, bare night 2\n  spread 9, correlation 0.6",
    {
      means: [
        { factors: [name("glove")], values: [{ levels: [name("bare")], value: number("41", 41) }, {}] },
        {
          factors: [name("glove"), name("shift")],
          values: [{ levels: [name("bare"), name("day")], value: number("-1", -1) }, {}],
        },
      ],
      spread: { common: number("9", 9), byLevel: null },
      correlation: [number("0.6", 0.6)],
    },
  ],
  [
    "expect y\n  dose 0 41, 10 43\n  spread dose 0 3, 10 4\n  correlation 0.6, 0.5, 0.4\n  dropout 10%\n  missing 5%\n  shape heavy tails\n  allocation dose 2:1\n  cost 12 per subject",
    {
      means: [{ values: [{ levels: [name("0")], value: number("41", 41) }, { levels: [name("10")] }] }],
      spread: { common: null, byLevel: { values: [{ levels: [name("0")] }, {}] } },
      correlation: [{}, {}, {}],
      dropout: number("10%", 0.1),
      missing: number("5%", 0.05),
      shape: "heavy tails",
      allocation: { factor: name("dose"), shares: [number("2", 2), number("1", 1)] },
      cost: number("12", 12),
    },
  ],
  [
    "size primary for 90% power on every comparison",
    { kind: "size", aim: { family: name("primary") }, power: number("90%", 0.9), goal: "every" },
  ],
  ["size omnibus for 90% power", { aim: { family: null } }],
  [
    "size primary for 80% power on any comparison, cost 12 per subject, with 5000 studies, seed 3",
    { goal: "any", cost: number("12", 12), studies: number("5000", 5000), seed: number("3", 3) },
  ],
  ["power of omnibus with 60 subjects", { kind: "power", aim: { family: null }, subjects: [number("60", 60)] }],
  [
    "power of primary with 20, 40, 60 subjects, allocation 2:1:1",
    { subjects: [{}, {}, {}], allocation: { factor: null, shares: [{}, {}, {}] } },
  ],
  ["detectable primary with 24 subjects for 80% power on each comparison", { kind: "detectable", goal: "each" }],
  ["rehearse with 24 subjects, seed 7", { kind: "rehearse", subjects: number("24", 24), seed: number("7", 7) }],
  [
    "calibrate primary with 20000 studies",
    { kind: "calibrate", studies: number("20000", 20000), basis: null, shard: null },
  ],
  [
    "calibrate omnibus with 100 studies, seed 4, from data, shard 2 of 8, subjects 30",
    { aim: { family: null }, basis: "data", shard: { index: number("2", 2), of: number("8", 8) } },
  ],
  ['read "x.csv"', { kind: "read", path: name("x.csv", true), table: null }],
  [
    'read "x.xlsx"\n  sheet "Trials"\n  rename "Op No." to operator\n  rename b to c\n  fold bare, nitrile, knit into seconds by glove\n  missing "NA", "-"\n  decimal comma\n  separator ";"\n  encoding "latin-1"',
    {
      sheet: name("Trials", true),
      renames: [{ from: name("Op No.", true), to: name("operator") }, {}],
      folds: [{ columns: [{}, {}, {}], response: name("seconds"), factor: name("glove") }],
      missing: [name("NA", true), name("-", true)],
      decimal: "comma",
    },
  ],
  [
    'read table "trials" from "postgresql://db/lab"',
    { table: name("trials", true), path: name("postgresql://db/lab", true) },
  ],
  [
    'data\n  a "b c"\n  1 ""\n  # between\n  x/2 3.5kg # behind',
    {
      kind: "data",
      rows: [
        [name("a"), name("b c", true)],
        [name("1"), name("", true)],
        [name("x/2"), name("3.5kg")],
      ],
    },
  ],
  [
    "derive speed = 60 / seconds",
    {
      kind: "derive",
      expression: { type: "arithmetic", operator: "/", left: { value: 60 }, right: { type: "name", name: "seconds" } },
    },
  ],
  ["derive x = -a^2", { expression: { type: "negate", operand: { operator: "^" } } }],
  [
    "derive x = if a > 3 and not b is missing then log of a else missing",
    {
      expression: {
        type: "choice",
        condition: { type: "and", right: { type: "not", operand: { type: "is missing" } } },
        // biome-ignore lint/suspicious/noThenProperty: never awaited
        then: { type: "function", function: "log" },
        otherwise: { type: "missing" },
      },
    },
  ],
  ['derive x = "Time (s)" * 2', { expression: { left: { type: "name", name: "Time (s)" } } }],
  [
    'exclude where trial = 1 because "practice trial, excluded in the plan"',
    {
      kind: "exclude",
      condition: { type: "compare", operator: "=" },
      reason: name("practice trial, excluded in the plan", true),
    },
  ],
  [
    'exclude where glove = "dark roast" or t between 1 and 2 and op not among 3, x\n  because "r"',
    {
      condition: {
        type: "or",
        left: { right: { type: "string", value: "dark roast" } },
        right: { type: "and", right: { type: "among", negated: true } },
      },
    },
  ],
  ["average seconds over trial", { kind: "average", over: [name("trial")], by: "mean" }],
  ["average seconds over trial, day by median", { over: [{}, {}], by: "median" }],
  ...["data", "design", "plan", "families", "ledger", "settings"].map(
    (what) => [`show ${what}`, { kind: "show", what }] as const,
  ),
  ["check", { kind: "check" }],
  ["describe", { kind: "describe", response: null, by: [], quartiles: false }],
  [
    "describe seconds by glove, shift with median and quartiles",
    { response: name("seconds"), by: [name("glove"), name("shift")], quartiles: true },
  ],
  ["describe by glove", { response: null, by: [name("glove")] }],
  ["draw means by glove", { what: "means", response: null, by: [name("glove")] }],
  ['amend family primary: a, b because "r"', { change: { members: [{}, {}] }, reason: name("r", true) }],
  ["omnibus", { kind: "omnibus", method: null, effects: null, marginality: false }],
  ...["multilevel model", "variance analysis", "welch", "brown-forsythe", "ranks", "resampling", "multivariate"].map(
    (method) => [`omnibus by ${method}`, { method }] as const,
  ),
  ["omnibus of glove, glove with shift", { effects: [[name("glove")], [name("glove"), name("shift")]] }],
  ["omnibus respecting marginality", { marginality: true }],
  [
    "omnibus of glove by multilevel model degrees by satterthwaite, with 999 bootstrap studies, seed 1",
    { degrees: "satterthwaite", bootstrap: number("999", 999) },
  ],
  ["omnibus by resampling, with 9999 resamples", { resamples: number("9999", 9999) }],
  ["compare primary", { kind: "compare", family: name("primary"), beside: false }],
  ["compare primary beside other methods", { beside: true }],
  ["explore all pairs of glove by holm", { kind: "explore", method: "holm", rate: null, holds: "family" }],
  ["explore gloved, shift_gap", { members: [{}, {}], method: null }],
  [
    "explore all pairs of g by bh, hold false discovery 10%\n  one-sided lower\n  beside other methods",
    { rate: number("10%", 0.1), holds: "false discovery", sides: "lower", beside: true },
  ],
  ["explore all pairs of g by by", { method: "by", holds: "false discovery" }],
  ["draw means of seconds by glove, shift", { kind: "draw", what: "means", response: name("seconds"), by: [{}, {}] }],
  ["draw profiles", { what: "profiles", response: null }],
  ["draw distributions of s by g", { what: "distributions" }],
  ["draw residuals", { what: "residuals" }],
  ["draw comparisons primary", { what: "comparisons", family: name("primary"), omnibus: false }],
  [
    "draw power of primary from 8 to 60 subjects",
    { what: "power", family: name("primary"), from: number("8", 8), to: number("60", 60) },
  ],
  ["draw power of omnibus", { what: "power", family: null, omnibus: true, from: null }],
  ["draw passing", { what: "passing" }],
  ["draw calibration of primary", { what: "calibration", family: name("primary") }],
  ['seal plan as "glove"', { kind: "seal", name: name("glove", true) }],
  ['open plan "glove"', { kind: "open", name: name("glove", true) }],
  [
    'amend family primary: each glove against bare\n  hold error 5% by holm\n  because "r"',
    { kind: "amend", change: { kind: "family", hold: { method: "holm" } }, reason: name("r", true) },
  ],
  ['amend contrast x: a - b because "r"', { change: { kind: "contrast" } }],
  ['amend expect y\n  glove a 1\n  because "r"', { change: { kind: "expect", means: [{}] } }],
  ['amend drop contrast x because "r"', { change: { kind: "drop", what: "contrast", name: name("x") } }],
  ['amend covariate age within because "r"', { change: { varies: "within", unit: null } }],
  ["report", { kind: "report", path: null }],
  ['report to "x.docx"', { path: name("x.docx", true) }],
  ["audit", { kind: "audit", head: null }],
  ['audit with head "ab12"', { head: name("ab12", true) }],
  ['export comparisons primary to "x.csv"', { kind: "export", what: "comparisons", name: name("primary") }],
  ...[
    "comparisons",
    "omnibus",
    "description",
    "check",
    "data",
    "picture",
    "power",
    "size",
    "detectable",
    "calibration",
    "ledger",
    "plan",
  ].map((what) => [`export ${what} to "x.json"`, { what, name: null }] as const),
  ["set digits 3", { kind: "set", setting: { name: "digits", value: number("3", 3) } }],
  ["set seed 12", { setting: { name: "seed" } }],
  ["set interval 95%", { setting: { name: "interval", value: number("95%", 0.95) } }],
  ["set resamples 9999", { setting: { name: "resamples" } }],
  ["set studies 20000", { setting: { name: "studies" } }],
  ["set show adjusted p", { setting: { name: "show", what: "adjusted p" } }],
  ["set show thresholds", { setting: { what: "thresholds" } }],
  ...["pooled spread", "average spread", "control spread", "difference spread"].map(
    (value) => [`set standardiser ${value}`, { setting: { name: "standardiser", value } }] as const,
  ),
  ["help", { kind: "help", topic: null }],
  ["help single-step", { topic: { text: "single-step" } }],
  ["help fixed sequence", { topic: { text: "fixed sequence" } }],
];

describe("every form of the language", () => {
  it.each(forms)("%s", (text, wanted) => {
    expect(withoutSpans(only(text))).toMatchObject(wanted);
  });
});

describe("scripts", () => {
  it.each(["glove-plan", "glove-analysis"])("%s parses whole", (file) => {
    const { problems, statements } = parseCell(readFileSync(`notebooks/${file}.mwise`, "utf8"));
    expect(problems).toEqual([]);
    expect(statements.length).toBeGreaterThan(10);
  });

  it("read the same with any line end, with a byte order mark and with no-break spaces", () => {
    const text = 'factor f within u: a, b\n  ordered # why\n\nread "x.csv"\n  missing "NA"\n';
    const plain = parseCell(text);
    for (const other of [
      text.replaceAll("\n", "\r\n"),
      text.replaceAll("\n", "\r"),
      `\ufeff${text}`,
      text.replaceAll("  ", "\u00a0\t"),
      text.replaceAll(" within ", "\u00a0within\u202f"),
    ]) {
      const found = parseCell(other);
      expect(found.problems).toEqual([]);
      expect(withoutSpans(found.statements)).toEqual(withoutSpans(plain.statements));
      expect(withoutSpans(found.comments)).toEqual(withoutSpans(plain.comments));
    }
  });

  it("give every name its own place, columns in code points", () => {
    const text = 'factor 😀x between ops: "🙂", b';
    const found = parseCell(text);
    expect(found.problems[0]).toMatchObject({
      code: "strange-character",
      span: { start: 7, end: 9, column: 8, endColumn: 9 },
    });
    const statement = only('contrast g: "🙂" - bare');
    expect(statement).toMatchObject({
      expression: { right: { level: { span: { start: 19, end: 23, line: 1, column: 19, endColumn: 23 } } } },
    });
  });
});

describe("sameUnit", () => {
  it.each([
    ["operator", "operator", true],
    ["operators", "operator", true],
    ["batches", "batch", true],
    ["colonies", "colony", true],
    ["days", "day", true],
    ["operator", "operators", false],
    ["cats", "dog", false],
  ])("%s means %s: %s", (written, declared, same) => {
    expect(sameUnit(written, declared)).toBe(same);
  });
});
