import { describe, expect, it } from "vitest";
import { openSession, runCell } from "../../src/session/index.ts";
import { typedTable } from "../../src/data/index.ts";
import type { Result } from "../../src/results/index.ts";
import { type MemoryHost, memoryHost } from "./memory-host.ts";

/** A small generator for invented data: the same every time. */
function noise(seed: number): () => number {
  let state = seed;
  return () => {
    state = (Math.imul(state, 1664525) + 1013904223) >>> 0;
    // Sum of four uniforms: bell-shaped enough for data that only have to be analysable.
    let sum = 0;
    for (let index = 0; index < 4; index++) {
      state = (Math.imul(state, 1664525) + 1013904223) >>> 0;
      sum += state / 2 ** 32;
    }
    return sum - 2;
  };
}

function csv(rows: readonly (readonly (string | number)[])[]): string {
  return `${rows.map((row) => row.join(",")).join("\n")}\n`;
}

/** Invented: doses between tanks, wetness of coolant, breeds within herds, fonts by passages. */
function files(host: MemoryHost): void {
  const next = noise(7);
  const tanks: (string | number)[][] = [["tank", "dose", "coolant", "weight", "turbidity"]];
  for (let tank = 1; tank <= 48; tank++) {
    const dose = ["none", "low", "mid", "high"][tank % 4]!;
    const coolant = ["wet", "dry"][Math.floor(tank / 4) % 2]!;
    const weight = 50 + 5 * next();
    tanks.push([tank, dose, coolant, weight.toFixed(2), (20 + 3 * (tank % 4) + 0.2 * weight + 4 * next()).toFixed(2)]);
  }
  host.put("tanks.csv", csv(tanks));
  const animals: (string | number)[][] = [["herd", "animal", "diet", "age", "gain"]];
  for (let herd = 1; herd <= 8; herd++) {
    const level = 3 * next();
    for (let animal = 1; animal <= 4; animal++) {
      for (const age of ["young", "old"]) {
        animals.push([
          herd,
          animal,
          herd % 2 === 0 ? "hay" : "silage",
          age,
          (30 + level + (age === "old" ? 4 : 0) + 2 * next()).toFixed(2),
        ]);
      }
    }
  }
  host.put("animals.csv", csv(animals));
  const reading: (string | number)[][] = [["reader", "passage", "font", "pace"]];
  for (let reader = 1; reader <= 10; reader++) {
    const own = 10 * next();
    for (let passage = 1; passage <= 6; passage++) {
      reading.push([
        reader,
        passage,
        passage % 2 === 0 ? "serif" : "plain",
        (200 + own + 4 * passage + 8 * next()).toFixed(1),
      ]);
    }
  }
  host.put("reading.csv", csv(reading));
  const wide: (string | number)[][] = [["Op No.", "bare", "nitrile", "knit", "shift"]];
  for (let operator = 1; operator <= 14; operator++) {
    const own = 6 * next();
    wide.push([
      operator,
      (41 + own + 3 * next()).toFixed(1),
      operator === 5 ? "NA" : (43 + own + 3 * next()).toFixed(1),
      (47 + own + 3 * next()).toFixed(1),
      operator % 2 === 0 ? "day" : "night",
    ]);
  }
  host.put("wide.csv", csv(wide));
}

const tankDesign = `response turbidity "turbidity" in "NTU", lower is better
subjects tank
factor dose between tanks: none, low, mid, high
  at 0, 10, 40, 100
  ordered
  reference none
factor coolant between tanks: wet, dry
`;
const gloveDesign = `response seconds in "s", lower is better
subjects operator
factor glove within operator: bare, nitrile, knit
`;
const readGloves = `read "wide.csv"
  rename "Op No." to operator
  fold bare, nitrile, knit into seconds by glove
  missing "NA"
`;

async function run(
  source: string,
  name = "forms.mwise",
): Promise<{ results: Result[]; problems: readonly { code: string; message: string }[]; host: MemoryHost }> {
  const host = memoryHost(name);
  files(host);
  const session = await openSession(host, "0.1.0");
  const done = await runCell(session, source, { cell: 1, host });
  return {
    results: done.outcomes.flatMap((outcome) => (outcome.result === null ? [] : [outcome.result])),
    problems: done.problems,
    host,
  };
}

/** No NaN, no infinity, no typed array, nothing undefined where the interface has a field. */
function plain(value: unknown, path = "result"): void {
  if (typeof value === "number") expect(Number.isFinite(value), path).toBe(true);
  else if (ArrayBuffer.isView(value)) throw new Error(`${path} is a typed array`);
  else if (typeof value === "object" && value !== null)
    for (const [key, inner] of Object.entries(value)) plain(inner, `${path}.${key}`);
}

const scripts: readonly (readonly [string, string, Result["kind"]])[] = [
  [
    "all pairs by tukey",
    `${tankDesign}family f: all pairs of dose\n  hold error 5% by tukey\nread "tanks.csv"\ncompare f`,
    "comparisons",
  ],
  [
    "each against one by dunnett",
    `${tankDesign}family f: each dose against none\n  hold error 5% by dunnett\nread "tanks.csv"\ncompare f`,
    "comparisons",
  ],
  [
    "one-sided dunnett",
    `${tankDesign}family f: each dose against none\n  hold error 5% by dunnett\n  one-sided upper\nread "tanks.csv"\ncompare f`,
    "comparisons",
  ],
  [
    "neighbours by holm",
    `${tankDesign}family f: neighbours of dose\n  hold error 5% by holm\nread "tanks.csv"\ncompare f`,
    "comparisons",
  ],
  [
    "each against mean by single-step",
    `${tankDesign}family f: each dose against mean\n  hold error 5% by single-step\nread "tanks.csv"\ncompare f`,
    "comparisons",
  ],
  [
    "trend by bonferroni",
    `${tankDesign}family f: trend of dose: linear, quadratic\n  hold error 5% by bonferroni\nread "tanks.csv"\ncompare f`,
    "comparisons",
  ],
  [
    "at a level",
    `${tankDesign}family f: each dose against none at wet of coolant\n  hold error 5% by hochberg\nread "tanks.csv"\ncompare f`,
    "comparisons",
  ],
  [
    "at each level",
    `${tankDesign}family f: each dose against none at each coolant\n  hold error 5% by hommel\nread "tanks.csv"\ncompare f`,
    "comparisons",
  ],
  [
    "contrast with at",
    `${tankDesign}contrast gap: (high - none at wet) - (high - none at dry)\nfamily f: gap\n  hold error 5% by none\nread "tanks.csv"\ncompare f`,
    "comparisons",
  ],
  [
    "contrast by weights",
    `${tankDesign}contrast slope: weights none -3, low -1, mid 1, high 3\nfamily f: slope\n  hold error 5% by holm\nread "tanks.csv"\ncompare f`,
    "comparisons",
  ],
  [
    "sidak, beside other methods",
    `${tankDesign}family f: all pairs of dose\n  hold error 5% by sidak\nread "tanks.csv"\ncompare f beside other methods`,
    "comparisons",
  ],
  [
    "shaffer",
    `${tankDesign}family f: all pairs of dose\n  hold error 5% by shaffer\nread "tanks.csv"\ncompare f`,
    "comparisons",
  ],
  [
    "scheffe",
    `${tankDesign}family f: all pairs of dose\n  hold error 5% by scheffe\nread "tanks.csv"\ncompare f`,
    "comparisons",
  ],
  [
    "games-howell",
    `${tankDesign}family f: all pairs of dose\n  hold error 5% by games-howell\nread "tanks.csv"\ncompare f`,
    "comparisons",
  ],
  [
    "step-down",
    `${tankDesign}family f: all pairs of dose\n  hold error 5% by step-down\nread "tanks.csv"\ncompare f`,
    "comparisons",
  ],
  [
    "resampling",
    `${tankDesign}set resamples 199\nfamily f: each dose against none\n  hold error 5% by resampling\nread "tanks.csv"\ncompare f`,
    "comparisons",
  ],
  [
    "false discovery",
    `${tankDesign}family f: all pairs of dose\n  hold false discovery 5% by bh\nread "tanks.csv"\ncompare f`,
    "comparisons",
  ],
  [
    "fixed sequence",
    `${tankDesign}contrast da: high - none\ncontrast db: mid - none\nfamily f: da, db\n  hold error 5% by fixed sequence\nread "tanks.csv"\ncompare f`,
    "comparisons",
  ],
  [
    "fallback with weights",
    `${tankDesign}contrast da: high - none\ncontrast db: mid - none\ncontrast dd: low - none\nfamily f: da, db, dd\n  hold error 5% by fallback\n  weights da 1/2, db 1/4, dd 1/4\nread "tanks.csv"\ncompare f`,
    "comparisons",
  ],
  [
    "graph",
    `${tankDesign}contrast da: high - none\ncontrast db: mid - none\ncontrast dd: low - none\nfamily f: da, db, dd\n  hold error 5% by graph\n  weights da 1/2, db 1/2, dd 0\n  pass da to db 1/2, da to dd 1/2, db to da 1/2, db to dd 1/2, dd to da 1/2, dd to db 1/2\nread "tanks.csv"\ncompare f`,
    "comparisons",
  ],
  [
    "after",
    `${tankDesign}contrast da: high - none\nfamily p: da\n  hold error 5% by holm\nfamily f: all pairs of coolant\n  hold error 5% by holm\n  after p\nread "tanks.csv"\ncompare f`,
    "comparisons",
  ],
  [
    "after any of",
    `${tankDesign}contrast da: high - none\ncontrast db: mid - none\nfamily p: da, db\n  hold error 5% by holm\nfamily f: all pairs of coolant\n  hold error 5% by holm\n  after any of p\nread "tanks.csv"\ncompare f`,
    "comparisons",
  ],
  [
    "equivalence",
    `${tankDesign}family f: all pairs of coolant\n  hold error 5% by holm\n  margin 2.5\nread "tanks.csv"\ncompare f`,
    "comparisons",
  ],
  [
    "not worse",
    `${tankDesign}family f: each dose against none\n  hold error 5% by bonferroni\n  not worse by 1.5\nread "tanks.csv"\ncompare f`,
    "comparisons",
  ],
  [
    "log scale",
    `response turbidity in "NTU", on log scale\nsubjects tank\nfactor dose between tanks: none, low, mid, high\nfamily f: each dose against none\n  hold error 5% by dunnett\nread "tanks.csv"\ncompare f`,
    "comparisons",
  ],
  [
    "unequal variances",
    `${tankDesign}assume unequal variances\nfamily f: each dose against none\n  hold error 5% by holm\nread "tanks.csv"\ncompare f`,
    "comparisons",
  ],
  [
    "dunn",
    `response turbidity\nsubjects tank\nfactor dose between tanks: none, low, mid, high\nfamily f: all pairs of dose\n  hold error 5% by dunn\nread "tanks.csv"\ncompare f`,
    "comparisons",
  ],
  [
    "covariate",
    `${tankDesign}covariate weight\nfamily f: each dose against none\n  hold error 5% by dunnett\nread "tanks.csv"\nomnibus\ncompare f`,
    "comparisons",
  ],
  ["omnibus factorial", `${tankDesign}read "tanks.csv"\nomnibus`, "omnibus"],
  ["omnibus respecting marginality", `${tankDesign}read "tanks.csv"\nomnibus respecting marginality`, "omnibus"],
  ["omnibus of effects", `${tankDesign}read "tanks.csv"\nomnibus of dose, dose with coolant`, "omnibus"],
  ["omnibus by resampling", `${tankDesign}set resamples 199\nread "tanks.csv"\nomnibus by resampling`, "omnibus"],
  [
    "omnibus by ranks",
    `response turbidity\nsubjects tank\nfactor dose between tanks: none, low, mid, high\nread "tanks.csv"\nomnibus by ranks`,
    "omnibus",
  ],
  [
    "omnibus by welch",
    `response turbidity\nsubjects tank\nfactor dose between tanks: none, low, mid, high\nread "tanks.csv"\nomnibus by welch`,
    "omnibus",
  ],
  [
    "omnibus by brown-forsythe",
    `response turbidity\nsubjects tank\nfactor dose between tanks: none, low, mid, high\nread "tanks.csv"\nomnibus by brown-forsythe`,
    "omnibus",
  ],
  ["within, a cell missing", `${gloveDesign}${readGloves}omnibus`, "omnibus"],
  [
    "within, multilevel contrasts",
    `${gloveDesign}family f: each glove against bare\n  hold error 5% by single-step\n${readGloves}compare f`,
    "comparisons",
  ],
  [
    "within, sphericity and tukey",
    `${gloveDesign}assume sphericity\nfamily f: all pairs of glove\n  hold error 5% by tukey\n${readGloves}exclude where operator = 5 because "a cell is missing"\ncompare f`,
    "comparisons",
  ],
  [
    "within, complete",
    `${gloveDesign}${readGloves}exclude where operator = 5 because "a cell is missing"\nomnibus`,
    "omnibus",
  ],
  [
    "within, variance analysis",
    `${gloveDesign}${readGloves}exclude where operator = 5 because "a cell is missing"\nomnibus by variance analysis`,
    "omnibus",
  ],
  [
    "within, by ranks",
    `${gloveDesign}${readGloves}exclude where operator = 5 because "a cell is missing"\nomnibus by ranks`,
    "omnibus",
  ],
  ["within, unstructured", `${gloveDesign}assume unstructured\n${readGloves}omnibus`, "omnibus"],
  [
    "mixed",
    `${gloveDesign}factor shift between operators: day, night\n${readGloves}exclude where operator = 5 because "a cell is missing"\nomnibus`,
    "omnibus",
  ],
  [
    "nested",
    `response gain\nsubjects animal nested in herd\nfactor diet between herds: hay, silage\nfactor age within animal: young, old\nread "animals.csv"\nomnibus`,
    "omnibus",
  ],
  [
    "nested, comparisons at each",
    `response gain\nsubjects animal nested in herd\nfactor diet between herds: hay, silage\nfactor age within animal: young, old\nfamily f: each diet against hay at each age\n  hold error 5% by holm\nread "animals.csv"\ncompare f`,
    "comparisons",
  ],
  [
    "items",
    `response pace\nsubjects reader\nitems passage\nfactor font within reader between passages: plain, serif\nread "reading.csv"\nomnibus`,
    "omnibus",
  ],
  ["explore with false discovery", `${tankDesign}read "tanks.csv"\nexplore all pairs of dose by bh`, "comparisons"],
  [
    "describe with quartiles",
    `${tankDesign}read "tanks.csv"\ndescribe turbidity by dose, coolant with median and quartiles`,
    "describe",
  ],
  ["check", `${tankDesign}read "tanks.csv"\ncheck`, "check"],
  [
    "derive and condition",
    `${tankDesign}read "tanks.csv"\nderive clear = if turbidity < 30 then 1 else 0\nexclude where weight > 200 or dose = none and coolant is missing because "sensor fault"\ncheck`,
    "check",
  ],
  [
    "size of the omnibus",
    `${tankDesign}expect turbidity\n  dose none 20, low 21, mid 23, high 26\n  spread 4\nsize omnibus for 90% power`,
    "size",
  ],
  [
    "power of the omnibus",
    `${tankDesign}expect turbidity\n  dose none 20, low 21, mid 23, high 26\n  spread 4\npower of omnibus with 40, 80 subjects`,
    "power",
  ],
  [
    "detectable",
    `${tankDesign}family f: each dose against none\n  hold error 5% by bonferroni\nexpect turbidity\n  dose none 20, low 21, mid 23, high 26\n  spread 4\ndetectable f with 80 subjects for 80% power on each comparison`,
    "detectable",
  ],
  [
    "rehearsed comparison",
    `${tankDesign}family f: each dose against none\n  hold error 5% by holm\nexpect turbidity\n  dose none 20, low 21, mid 23, high 26\n  spread 4\nrehearse with 40 subjects, seed 3\ncompare f`,
    "comparisons",
  ],
];

describe("the settled forms run as they stand", () => {
  it.each(scripts)("%s", async (_, source, kind) => {
    const { results, problems } = await run(source);
    expect(problems).toEqual([]);
    expect(results.at(-1)!.kind).toBe(kind);
    for (const result of results) plain(result);
  });
});

describe("states", () => {
  const declared = `${tankDesign}family f: each dose against none\n  hold error 5% by holm\n`;
  const lastState = async (...cells: string[]) => {
    const host = memoryHost();
    files(host);
    let session = await openSession(host, "0.1.0");
    let state = "";
    for (const [index, cell] of cells.entries()) {
      const done = await runCell(session, cell, { cell: index + 1, host });
      expect(done.problems).toEqual([]);
      session = done.session;
      const last = done.outcomes.at(-1)?.result;
      if (last?.kind === "comparisons") state = last.state;
    }
    return { state, session };
  };
  it("is planned when sealed before reading", async () => {
    expect((await lastState(declared, 'seal plan as "p"', 'read "tanks.csv"', "compare f")).state).toBe("planned");
  });
  it("is declared when declared before results, unsealed", async () => {
    expect((await lastState(declared, 'read "tanks.csv"', "compare f")).state).toBe("declared");
  });
  it("is exploratory when declared after results", async () => {
    expect(
      (
        await lastState(
          tankDesign,
          'read "tanks.csv"',
          "omnibus",
          "family f: each dose against none\n  hold error 5% by holm",
          "compare f",
        )
      ).state,
    ).toBe("exploratory");
  });
  it("is exploratory when edited after results, and declared again when put back", async () => {
    const edited = "family f: each dose against none\n  hold error 10% by holm";
    expect((await lastState(declared, 'read "tanks.csv"', "compare f", edited, "compare f")).state).toBe("exploratory");
    const back = "family f: each dose against none\n  hold error 5% by holm";
    expect((await lastState(declared, 'read "tanks.csv"', "compare f", edited, back, "compare f")).state).toBe(
      "declared",
    );
  });
  it("records a repeated cell once", async () => {
    const { session } = await lastState(declared, 'read "tanks.csv"', "compare f", "compare f", "compare f");
    expect(session.study.ledger.entries.filter((entry) => entry.event === "result")).toHaveLength(1);
  });
  it("keeps what was seen before, in a session opened anew", async () => {
    const host = memoryHost();
    files(host);
    const first = await openSession(host, "0.1.0");
    await runCell(first, `${tankDesign}read "tanks.csv"\nomnibus`, { cell: 1, host });
    const again = await openSession(host, "0.1.0");
    const done = await runCell(again, `${declared}read "tanks.csv"\ncompare f`, { cell: 1, host });
    expect((done.outcomes.at(-1)!.result as { state: string }).state).toBe("exploratory");
  });
});

describe("a database table", () => {
  const bulk = {
    async readDatabase() {
      return typedTable([
        ["tank", "dose", "cloud"],
        ["1", "none", "20.1"],
        ["2", "none", "21.3"],
        ["3", "low", "23.9"],
        ["4", "low", "24.4"],
      ]);
    },
  };
  const source =
    'response turbidity\nsubjects tank\nfactor dose between tanks: none, low\nread table "trials" from "postgresql://lab/records"\n  rename cloud to turbidity\nomnibus';
  it("is read like a file, and its source recorded", async () => {
    const host = { ...memoryHost(), bulk };
    const done = await runCell(await openSession(host, "0.1.0"), source, { cell: 1, host });
    expect(done.problems).toEqual([]);
    expect(done.session.study.ledger.entries.find((entry) => entry.event === "read")!.facts.source).toBe(
      'table "trials" from postgresql://lab/records',
    );
  });
  it("needs a host that reaches databases", async () => {
    const { problems } = await run(source);
    expect(problems.map((problem) => problem.code)).toEqual(["no-database"]);
  });
});
