// Joint distributions and simulation against SciPy on the same inputs: npm run bench numeric. Processor time on both sides, so that a busy machine
// slows neither unfairly; where there is no SciPy only our times are printed. Exit code 1 when a target of the project is missed.
import { spawnSync } from "node:child_process";
import { mkdtempSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import { dirname, join } from "node:path";
import { fileURLToPath, pathToFileURL } from "node:url";
import { build } from "esbuild";

const top = join(dirname(fileURLToPath(import.meta.url)), "..", "..");
const place = mkdtempSync(join(tmpdir(), "meanwise-bench-"));
const outfile = join(place, "numeric.mjs");
await build({
  entryPoints: [join(top, "src", "numeric", "index.ts")],
  bundle: true,
  platform: "node",
  target: "node20",
  format: "esm",
  outfile,
  logLevel: "warning",
});
const numeric = await import(pathToFileURL(outfile).href);
rmSync(place, { recursive: true, force: true });

/** Processor milliseconds of this process. */
function clock() {
  const { user, system } = process.cpuUsage();
  return (user + system) / 1000;
}

function scipy(script, input) {
  const { OPENBLAS_CORETYPE: _, OPENBLAS_L2_SIZE: __, ...env } = process.env;
  const found = spawnSync("/usr/bin/python3", ["-c", `import json, sys, time\ninput = json.load(sys.stdin)\n${script}`], {
    input: JSON.stringify(input),
    encoding: "utf8",
    env,
    maxBuffer: 1e8,
  });
  if (found.status !== 0) {
    if (found.stderr) console.log(`  (no SciPy figures: ${found.stderr.trim().split("\n").at(-1)})`);
    return null;
  }
  return JSON.parse(found.stdout);
}

let missed = false;
/** One line: name, our time, theirs, ratio against its target. */
function line(name, ours, theirs, unit, target, agreement = "") {
  const ratio = theirs === null ? null : theirs / ours;
  if (ratio !== null && target !== null && ratio < target) missed = true;
  const figure = (value) => (value === null ? "-" : `${value.toPrecision(3)} ${unit}`);
  const shown = ratio === null ? "" : `${ratio.toFixed(ratio < 100 ? 1 : 0)} times`;
  const aim = target === null || ratio === null ? "" : `  target ${target}: ${ratio >= target ? "met" : "MISSED"}`;
  console.log(`  ${name.padEnd(66)} ${figure(ours).padStart(12)} ${figure(theirs).padStart(12)}  ${shown}${aim}${agreement}`);
}

console.log(`  ${"processor time".padEnd(66)} ${"ours".padStart(12)} ${"SciPy".padStart(12)}`);

// --- Studentized range ---
{
  const cases = [];
  for (const means of [3, 4, 6, 10, 20]) for (const df of [5, 12, 36, 96, 240]) for (const q of [2.5, 4.1, 6.3]) cases.push([q, means, df]);
  let start = clock();
  for (const [q, means, df] of cases) numeric.studentizedRangeUpperTail(q, means, df);
  const cold = ((clock() - start) * 1000) / cases.length;
  let calls = 0;
  let sum = 0;
  const round = () => {
    for (const [q, means, df] of cases) sum += numeric.studentizedRangeUpperTail(q + 1e-9 * (calls++ % 1000), means, df);
  };
  for (let i = 0; i < 300; i++) round();
  calls = 0;
  start = clock();
  for (let i = 0; i < 500; i++) round();
  const ours = ((clock() - start) * 1000) / calls;
  const theirs = scipy(
    `
from scipy.stats import studentized_range
studentized_range.sf(3.0, 3, 10)
t = time.process_time()
p = [float(studentized_range.sf(*case)) for case in input]
print(json.dumps({"time": (time.process_time() - t) / len(input) * 1e6, "p": p}))
`,
    cases,
  );
  let worst = 0;
  if (theirs !== null) {
    for (const [i, [q, means, df]] of cases.entries()) {
      worst = Math.max(worst, Math.abs(numeric.studentizedRangeUpperTail(q, means, df) - theirs.p[i]));
    }
  }
  const agreement = theirs === null ? "" : `; largest difference ${worst.toExponential(1)}`;
  line("studentized range tail, 75 arguments, per call", ours, theirs?.time ?? null, "us", 200, agreement);
  line("  the same when each number of means is met for the first time", cold, theirs?.time ?? null, "us", null);
  if (!(sum > 0)) throw new Error("nothing was computed");
}

// --- All pairs of ten groups ---
{
  const stream = numeric.randomStream(7, "bench", 0);
  const groups = Array.from({ length: 10 }, (_, i) => Array.from({ length: 12 }, () => stream.normal() + 0.15 * i));
  const table = () => {
    const means = groups.map((group) => group.reduce((a, b) => a + b, 0) / group.length);
    let within = 0;
    for (const [i, group] of groups.entries()) for (const value of group) within += (value - means[i]) ** 2;
    const df = 10 * 12 - 10;
    const standardError = Math.sqrt(within / df / 12);
    const rows = [];
    const critical = numeric.studentizedRangeUpperQuantile(0.05, 10, df) * standardError;
    for (let i = 0; i < 10; i++) {
      for (let j = 0; j < i; j++) {
        const difference = means[i] - means[j];
        const p = numeric.studentizedRangeUpperTail(Math.abs(difference) / standardError, 10, df);
        rows.push({ difference, p, lower: difference - critical, upper: difference + critical });
      }
    }
    return rows;
  };
  let start = clock();
  const first = table();
  const cold = clock() - start;
  for (let i = 0; i < 200; i++) table();
  start = clock();
  for (let i = 0; i < 200; i++) table();
  const ours = (clock() - start) / 200;
  const theirs = scipy(
    `
from scipy.stats import tukey_hsd
tukey_hsd(*input[:3])
t = time.process_time()
found = tukey_hsd(*input)
print(json.dumps({"time": (time.process_time() - t) * 1e3, "p": found.pvalue.tolist()}))
`,
    groups,
  );
  let worst = 0;
  if (theirs !== null) {
    let row = 0;
    for (let i = 0; i < 10; i++) for (let j = 0; j < i; j++) worst = Math.max(worst, Math.abs(first[row++].p - theirs.p[i][j]));
  }
  const agreement = theirs === null ? "" : `; largest difference ${worst.toExponential(1)}`;
  line("all 45 pairs of 10 groups: p (ours: and simultaneous intervals)", ours, theirs?.time ?? null, "ms", 200, agreement);
  line("  the same the first time", cold, theirs?.time ?? null, "ms", null);
}

// --- Six-dimensional rectangles ---
{
  const stream = numeric.randomStream(8, "bench", 0);
  const random = () => {
    const rows = Array.from({ length: 6 }, () => Array.from({ length: 7 }, () => stream.normal()));
    const product = rows.map((a) => rows.map((b) => a.reduce((sum, value, k) => sum + value * b[k], 0)));
    return product.map((row, i) => row.map((value, j) => (i === j ? 1 : value / Math.sqrt(product[i][i] * product[j][j]))));
  };
  const serial = Array.from({ length: 6 }, (_, i) => Array.from({ length: 6 }, (_, j) => 0.7 ** Math.abs(i - j)));
  const cases = [
    { correlation: serial, upper: [0.5, 0.5, 0.5, 0.5, 0.5, 0.5] },
    { correlation: serial, upper: [2, 1.5, 2, 2.5, 2, 2] },
    { correlation: random(), upper: [1, 1.2, 0.8, 1.5, 1, 0.9] },
    { correlation: random(), upper: [2, 2.1, 1.9, 2.2, 2.4, 2] },
  ];
  const repeats = 12;
  const theirs = scipy(
    `
import numpy as np
from scipy.stats import multivariate_normal
out = []
for case in input:
    c, u = np.array(case["correlation"]), np.array(case["upper"])
    multivariate_normal.cdf(u, cov=c)
    t = time.process_time()
    values = [float(multivariate_normal.cdf(u, cov=c)) for _ in range(${repeats})]
    out.append({"time": (time.process_time() - t) / ${repeats} * 1e3, "values": values})
print(json.dumps(out))
`,
    cases,
  );
  const ask = ({ correlation, upper }, df, absoluteError, seed) =>
    numeric.multivariateTProbability({ lower: upper.map(() => -Infinity), upper, correlation, df, absoluteError, seed, mostEvaluations: 1e7 });
  const rootMeanSquare = (values, truth) => Math.sqrt(values.reduce((sum, value) => sum + (value - truth) ** 2, 0) / values.length);
  for (const df of [Infinity, 20]) {
    let ourTime = 0;
    let theirTime = 0;
    let ourError = 0;
    let theirError = 0;
    for (const [k, one] of cases.entries()) {
      const truth = (ask(one, df, 3e-7, 101).probability + ask(one, df, 3e-7, 102).probability) / 2;
      // for t the same error is asked as SciPy reaches for the normal of the same correlation
      const normalTruth = df === Infinity ? truth : (ask(one, Infinity, 3e-7, 101).probability + ask(one, Infinity, 3e-7, 102).probability) / 2;
      const goal = theirs === null ? 3e-6 : rootMeanSquare(theirs[k].values, normalTruth);
      let asked = 8 * goal;
      for (;;) {
        const start = clock();
        const values = Array.from({ length: repeats }, (_, seed) => ask(one, df, asked, seed + 1).probability);
        const time = (clock() - start) / repeats;
        const error = rootMeanSquare(values, truth);
        if (error <= goal) {
          ourTime += time;
          ourError += error / cases.length;
          break;
        }
        asked /= 1.5;
      }
      if (theirs !== null) {
        theirTime += theirs[k].time;
        theirError += goal / cases.length;
      }
    }
    const name = df === Infinity ? "6-dimensional normal, 4 rectangles, at no larger error" : "6-dimensional t (df 20), against SciPy's normal";
    const agreement = theirs === null ? "" : `; errors ${ourError.toExponential(1)}, ${theirError.toExponential(1)}`;
    line(name, ourTime / cases.length, theirs === null ? null : theirTime / cases.length, "ms", 5, agreement);
  }
}

// --- Simulated one-way studies ---
{
  const studies = 100000;
  const groups = 4;
  const size = 25;
  const values = new Float64Array(groups * size);
  const means = new Float64Array(groups);
  const simulate = (count) => {
    let rejected = 0;
    for (let study = 0; study < count; study++) {
      numeric.randomStream(1, "bench", study).fillNormals(values);
      let grand = 0;
      for (let g = 0; g < groups; g++) {
        let sum = 0;
        for (let i = g * size; i < (g + 1) * size; i++) sum += values[i];
        means[g] = sum / size;
        grand += sum;
      }
      grand /= groups * size;
      let between = 0;
      let within = 0;
      for (let g = 0; g < groups; g++) {
        const mean = means[g];
        between += (mean - grand) ** 2;
        for (let i = g * size; i < (g + 1) * size; i++) {
          const deviation = values[i] - mean;
          within += deviation * deviation;
        }
      }
      const f = (size * between) / (groups - 1) / (within / (groups * (size - 1)));
      if (numeric.fUpperTail(f, groups - 1, groups * (size - 1)) <= 0.05) rejected++;
    }
    return rejected / count;
  };
  simulate(20000);
  let rate = 0;
  let ours = Infinity;
  // the fastest of three, on both sides
  for (let round = 0; round < 3; round++) {
    const start = clock();
    rate = simulate(studies);
    ours = Math.min(ours, clock() - start);
  }
  const theirs = scipy(
    `
import numpy as np
from scipy import stats
def simulate(studies, seed):
    x = np.random.default_rng(seed).standard_normal((studies, 4, 25))
    means = x.mean(axis=2)
    between = 25 * ((means - means.mean(axis=1, keepdims=True)) ** 2).sum(axis=1) / 3
    within = x.var(axis=2, ddof=1).mean(axis=1)
    return float((stats.f.sf(between / within, 3, 96) <= 0.05).mean())
simulate(20000, 0)
times = []
for seed in range(3):
    t = time.process_time()
    rate = simulate(${studies}, seed)
    times.append(time.process_time() - t)
print(json.dumps({"time": min(times) * 1e3, "rate": rate}))
`,
    null,
  );
  const agreement = theirs === null ? "" : `; rejected ${rate}, ${theirs.rate.toFixed(5)}`;
  line("100,000 one-way studies of 4 x 25, p of each", ours, theirs?.time ?? null, "ms", 1, agreement);
}
process.exitCode = missed ? 1 : 0;
