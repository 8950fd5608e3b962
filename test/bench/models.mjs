// Speed of the multilevel models: `npm run bench -- models`, or node test/bench/models.mjs. Prints seconds and, for rows, the growth exponent.
import { mkdtempSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import { dirname, join } from "node:path";
import { fileURLToPath, pathToFileURL } from "node:url";
import { build } from "esbuild";

const top = join(dirname(fileURLToPath(import.meta.url)), "..", "..");

async function models() {
  const place = mkdtempSync(join(tmpdir(), "meanwise-bench-"));
  const outfile = join(place, "models.mjs");
  try {
    await build({
      entryPoints: [join(top, "src", "models", "index.ts")],
      bundle: true,
      platform: "node",
      target: "node20",
      format: "esm",
      outfile,
      logLevel: "warning",
    });
    return await import(pathToFileURL(outfile).href);
  } finally {
    rmSync(place, { recursive: true, force: true });
  }
}

/** Normal numbers from a fixed seed (mulberry32 and Box-Muller), for inputs only. */
function normals(seed) {
  let state = seed >>> 0;
  const uniform = () => {
    state = (state + 0x6d2b79f5) >>> 0;
    let t = state;
    t = Math.imul(t ^ (t >>> 15), t | 1);
    t ^= t + Math.imul(t ^ (t >>> 7), t | 61);
    return ((t ^ (t >>> 14)) >>> 0) / 4294967296;
  };
  return () => Math.sqrt(-2 * Math.log(1 - uniform())) * Math.cos(2 * Math.PI * uniform());
}

function modelData({ response, levels, codes, units, covariate }) {
  return {
    rows: response.length,
    response: { center: 0, offsets: response },
    factors: [
      {
        name: "condition",
        levels: Array.from({ length: levels }, (_, level) => `c${level}`),
        varies: "within",
        unit: "person",
        betweenUnit: null,
        ordered: false,
        positions: null,
        reference: null,
        measured: false,
        codes,
      },
    ],
    units: units.map(({ name, role, codes: own, count }) => ({
      name,
      role,
      nestedIn: [],
      slopes: [],
      codes: own,
      labels: [],
      count,
    })),
    covariates: covariate === undefined ? [] : [{ name: "age", varies: "within", centred: true, values: covariate, center: 0 }],
    assumptions: { variances: "equal", covariance: "compound symmetry" },
    cells: codes,
    cellCount: levels,
  };
}

/** Rows in subjects, four conditions; `uneven` gives each subject and condition its own number of rows. */
function randomIntercept(rows, subjects, { uneven = false, covariate = false } = {}) {
  const normal = normals(7);
  const response = new Float64Array(rows);
  const codes = new Int32Array(rows);
  const person = new Int32Array(rows);
  const age = new Float64Array(rows);
  const own = Float64Array.from({ length: subjects }, () => 2 * normal());
  for (let row = 0; row < rows; row++) {
    const subject = row % subjects;
    const turn = Math.floor(row / subjects);
    codes[row] = uneven ? Math.floor(4 * Math.abs(Math.sin(row * 12.9898) * 43758.5453 % 1)) : turn % 4;
    person[row] = subject;
    age[row] = normal();
    response[row] = own[subject] + codes[row] * 0.1 + normal() + 0.2 * age[row];
  }
  return modelData({
    response,
    levels: 4,
    codes,
    units: [{ name: "person", role: "subjects", codes: person, count: subjects }],
    covariate: covariate ? age : undefined,
  });
}

function crossed(subjects, items, withinTerms) {
  const normal = normals(11);
  const rows = subjects * items;
  const response = new Float64Array(rows);
  const codes = new Int32Array(rows);
  const person = new Int32Array(rows);
  const item = new Int32Array(rows);
  const ofPerson = Float64Array.from({ length: subjects }, () => 3 * normal());
  const ofItem = Float64Array.from({ length: items }, () => 2 * normal());
  const personCell = Float64Array.from({ length: subjects * 4 }, () => 1.5 * normal());
  const itemCell = Float64Array.from({ length: items * 4 }, () => normal());
  for (let row = 0; row < rows; row++) {
    person[row] = Math.floor(row / items);
    item[row] = row % items;
    codes[row] = (person[row] + item[row]) % 4;
    response[row] =
      ofPerson[person[row]] +
      ofItem[item[row]] +
      (withinTerms ? personCell[person[row] * 4 + codes[row]] + itemCell[item[row] * 4 + codes[row]] : 0) +
      5 * normal();
  }
  const data = modelData({
    response,
    levels: 4,
    codes,
    units: [
      { name: "person", role: "subjects", codes: person, count: subjects },
      { name: "item", role: "items", codes: item, count: items },
    ],
  });
  return { ...data, assumptions: { variances: "equal", covariance: withinTerms ? null : "compound symmetry" } };
}

const seconds = (work) => {
  const started = performance.now();
  work();
  return (performance.now() - started) / 1000;
};

export async function run() {
  const { multilevelOmnibus, repeatedMeasuresAnalysis, withinContrasts } = await models();
  const lines = [];
  const say = (line) => {
    lines.push(line);
    console.log(line);
  };
  const full = { intervalLevel: 0.95 };
  const tests = { intervalLevel: null };
  // Warm up: the first fit compiles.
  multilevelOmnibus(randomIntercept(2000, 50), full);

  for (const [title, options, answer] of [
    ["random intercept, balanced", {}, full],
    ["random intercept, uneven counts", { uneven: true }, full],
    ["random intercept and a covariate of its own in every row", { covariate: true }, tests],
  ]) {
    let before = null;
    for (const rows of [10_000, 100_000, 1_000_000]) {
      const data = randomIntercept(rows, rows / 100, options);
      const time = seconds(() => multilevelOmnibus(data, answer));
      const growth = before === null ? "" : `, growth exponent ${Math.log10(time / before).toFixed(2)}`;
      say(`${title}: ${rows} rows, ${rows / 100} subjects: ${time.toFixed(3)} s${growth}`);
      before = time;
    }
  }
  {
    const data = randomIntercept(100_000, 1000, { covariate: true });
    const slopes = { ...data, units: data.units.map((unit) => ({ ...unit, slopes: ["age"] })) };
    say(`intercept and slope that go together: 100000 rows, 1000 subjects: ${seconds(() => multilevelOmnibus(slopes, tests)).toFixed(3)} s`);
  }
  for (const [title, data, answer] of [
    ["200 subjects x 100 items, intercepts, Kenward-Roger and likelihood ratio", crossed(200, 100, false), tests],
    ["the same with intervals of the components", crossed(200, 100, false), full],
    ["the same with unit-by-condition terms, no intervals", crossed(200, 100, true), tests],
  ]) {
    say(`${title}: ${data.rows} rows: ${seconds(() => multilevelOmnibus(data, answer)).toFixed(3)} s`);
  }
  {
    const data = randomIntercept(96, 24);
    const pair = (plus, minus) => ({
      name: `${plus} - ${minus}`,
      weights: Float64Array.from({ length: 4 }, (_, cell) => (cell === plus ? 1 : cell === minus ? -1 : 0)),
    });
    const contrasts = [pair(1, 0), pair(2, 0), pair(3, 0)];
    const studies = 5000;
    const within = seconds(() => {
      for (let study = 0; study < studies; study++) withinContrasts(data, contrasts, { level: null });
    });
    const repeated = seconds(() => {
      for (let study = 0; study < studies; study++) repeatedMeasuresAnalysis(data, { level: null });
    });
    say(`per study of 24 subjects x 4 conditions: contrast scores ${((1e6 * within) / studies).toFixed(0)} us, repeated measures ${((1e6 * repeated) / studies).toFixed(0)} us`);
  }
  return lines.join("\n");
}

if (process.argv[1] !== undefined && import.meta.url === pathToFileURL(process.argv[1]).href) await run();
