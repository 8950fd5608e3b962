// Ten million rows: `npm run bench -- scale`, or node test/bench/scale.mjs [rows] [largest]. One run measures our cells from CSV and Parquet, the
// embedded engine's bare scan of the same columns, and pandas.read_csv + scipy.stats.f_oneway (Debian's python3-pandas and python3-scipy; left out
// with a word where they are missing); then the growth with the rows, and a within design of a million subjects.
import { spawnSync } from "node:child_process";
import { closeSync, existsSync, mkdtempSync, openSync, rmSync, statSync, writeSync } from "node:fs";
import { availableParallelism, tmpdir } from "node:os";
import { dirname, join } from "node:path";
import { fileURLToPath, pathToFileURL } from "node:url";

const top = join(dirname(fileURLToPath(import.meta.url)), "..", "..");
const levels = ["bare", "nitrile", "knit", "leather"];

/** A part that measures itself in a process of its own, so that its peak memory is its own. */
if (process.argv[2] === "measure") {
  const { bundle, worker, question } = JSON.parse(process.argv[3]);
  const { aggregateCells } = await import(pathToFileURL(bundle).href);
  const start = performance.now();
  const answer = await aggregateCells({ ...question, workerFile: worker }, { checkpoint() {}, progress() {} });
  const seconds = (performance.now() - start) / 1000;
  const { userCPUTime, systemCPUTime, maxRSS } = process.resourceUsage();
  const { n, mean, sumOfSquares } = answer.statistics;
  console.log(
    JSON.stringify({
      seconds,
      processorSeconds: (userCPUTime + systemCPUTime) / 1e6,
      peakMegabytes: maxRSS / 1000,
      f: oneWayF(n, mean, sumOfSquares),
      rows: answer.rows,
      subjects: answer.subjects?.labels.length ?? null,
    }),
  );
  process.exit(0);
}

function oneWayF(n, mean, squares) {
  const rows = n.reduce((sum, count) => sum + count, 0);
  const grand = n.reduce((sum, count, cell) => sum + count * mean[cell], 0) / rows;
  const between = n.reduce((sum, count, cell) => sum + count * (mean[cell] - grand) ** 2, 0);
  const within = squares.reduce((sum, value) => sum + value, 0);
  return between / (n.length - 1) / (within / (rows - n.length));
}

/** Uniform numbers from a fixed seed (mulberry32), for inputs only. */
function uniform(seed) {
  let state = seed >>> 0;
  return () => {
    state = (state + 0x6d2b79f5) >>> 0;
    let t = state;
    t = Math.imul(t ^ (t >>> 15), t | 1);
    t ^= t + Math.imul(t ^ (t >>> 7), t | 61);
    return ((t ^ (t >>> 14)) >>> 0) / 4294967296;
  };
}

/** Invented records: operator, glove, seconds. With `within`, every subject has each level once, in order of subjects. */
function generate(path, rows, subjects, within) {
  const u = uniform(7);
  const file = openSync(path, "w");
  let lines = ["operator,glove,seconds"];
  for (let row = 0; row < rows; row++) {
    const level = within ? row % 4 : Math.floor(u() * 4);
    const subject = within ? Math.floor(row / 4) : Math.floor(u() * subjects);
    const seconds = 40 + level * 0.01 + (u() + u() + u() - 1.5) * 9;
    lines.push(`p${String(subject).padStart(6, "0")},${levels[level]},${seconds.toFixed(3)}`);
    if (lines.length > 50_000) {
      writeSync(file, `${lines.join("\n")}\n`);
      lines = [];
    }
  }
  writeSync(file, lines.length > 0 ? `${lines.join("\n")}\n` : "");
  closeSync(file);
}

const rows = Number(process.argv[2] ?? 1e7);
const largest = Number(process.argv[3] ?? rows);
const place = mkdtempSync(join(tmpdir(), "meanwise-scale-"));
try {
  const { build } = await import("esbuild");
  const bundle = join(place, "bulk.mjs");
  const worker = join(place, "worker.mjs");
  for (const [entry, outfile] of [["index.ts", bundle], ["chunk-worker.ts", worker]])
    await build({
      entryPoints: [join(top, "src", "data", "node", entry)],
      bundle: true,
      platform: "node",
      target: "node20",
      format: "esm",
      outfile,
      external: ["@duckdb/node-api", "pg"],
      logLevel: "warning",
    });
  // The engine is found from here: the bundle stands in a temporary folder.
  const { symlinkSync } = await import("node:fs");
  symlinkSync(join(top, "node_modules"), join(place, "node_modules"), "dir");

  const measure = (question) => {
    const factors = [{ name: "glove", levels }];
    const input = JSON.stringify({ bundle, worker, question: { response: "seconds", factors, ...question } });
    const outcome = spawnSync(process.execPath, [fileURLToPath(import.meta.url), "measure", input], { encoding: "utf8" });
    if (outcome.status !== 0) throw new Error(outcome.stderr);
    return JSON.parse(outcome.stdout);
  };
  const say = (label, it) =>
    console.log(
      `${label.padEnd(46)} ${it.seconds.toFixed(2).padStart(7)} s ${(it.processorSeconds ?? Number.NaN).toFixed(2).padStart(7)} processor s ${it.peakMegabytes === undefined ? "" : `${it.peakMegabytes.toFixed(0)} MB`}`,
    );

  const csv = join(place, "records.csv");
  const parquet = join(place, "records.parquet");
  generate(csv, rows, 100_000, false);
  console.log(`${rows} rows, ${(statSync(csv).size / 1e6).toFixed(0)} MB, ${availableParallelism()} cores\n`);

  const { DuckDBInstance } = await import("@duckdb/node-api");
  const instance = await DuckDBInstance.create(":memory:");
  const connection = await instance.connect();
  const scan = async (source) => {
    const start = performance.now();
    const before = process.cpuUsage();
    await connection.runAndReadAll(`SELECT count(glove), count(seconds), sum(seconds) FROM ${source}`);
    const used = process.cpuUsage(before);
    return { seconds: (performance.now() - start) / 1000, processorSeconds: (used.user + used.system) / 1e6 };
  };
  const types = "{'operator': 'VARCHAR', 'glove': 'VARCHAR', 'seconds': 'DECIMAL(9,3)'}";
  await connection.run(`COPY (SELECT * FROM read_csv('${csv}', header = true, columns = ${types})) TO '${parquet}' (FORMAT parquet)`);

  const scanCsv = await scan(`read_csv('${csv}')`);
  const ours = measure({ path: csv, format: "csv" });
  const scanParquet = await scan(`'${parquet}'`);
  const oursParquet = measure({ path: parquet, format: "parquet" });
  say("bare scan of the CSV by the engine", scanCsv);
  say("our cells from the CSV", ours);
  say("bare scan of the Parquet by the engine", scanParquet);
  say("our cells from the Parquet", oursParquet);
  connection.closeSync();

  const python = "/usr/bin/python3";
  const code = `import json,sys,time,resource
try:
    import pandas, scipy.stats
except Exception as error:
    print(json.dumps({"missing": str(error)})); sys.exit()
start = time.time()
frame = pandas.read_csv(${JSON.stringify(csv)})
f = scipy.stats.f_oneway(*[group.values for _, group in frame.groupby("glove")["seconds"]]).statistic
use = resource.getrusage(resource.RUSAGE_SELF)
print(json.dumps({"seconds": time.time() - start, "processorSeconds": use.ru_utime + use.ru_stime, "peakMegabytes": use.ru_maxrss / 1000, "f": f}))`;
  const outcome = existsSync(python) ? spawnSync(python, ["-c", code], { encoding: "utf8" }) : null;
  const theirs = outcome === null || outcome.status !== 0 ? { missing: "no python3" } : JSON.parse(outcome.stdout);
  if (theirs.missing !== undefined) console.log(`pandas and SciPy are left out: ${theirs.missing}`);
  else {
    say("pandas.read_csv + scipy.stats.f_oneway", theirs);
    console.log(`\nF ${ours.f} (CSV) ${oursParquet.f} (Parquet) ${theirs.f} (SciPy, from doubles)`);
    console.log(`CSV against pandas + SciPy: ${(ours.seconds / theirs.seconds).toFixed(2)} (target 0.25)`);
  }
  console.log(`CSV against the bare scan: ${(ours.seconds / scanCsv.seconds).toFixed(2)} (target 1.3); Parquet: ${(oursParquet.seconds / scanParquet.seconds).toFixed(2)}`);

  const points = [];
  for (let size = 1e5; size <= largest * 1.01; size *= size === 1e7 ? 3 : 10) {
    const path = size === rows ? csv : join(place, `records-${size}.csv`);
    if (size !== rows) generate(path, size, 100_000, false);
    const it = size === rows ? ours : measure({ path, format: "csv" });
    points.push([size, it.processorSeconds, it.peakMegabytes]);
    if (size !== rows) rmSync(path);
  }
  console.log(`\ngrowth: ${points.map(([size, seconds, peak]) => `${size} rows ${seconds.toFixed(2)} processor s ${peak.toFixed(0)} MB`).join("; ")}`);
  const [first, last] = [points.at(-2), points.at(-1)];
  if (first !== undefined) console.log(`exponent of the last step ${(Math.log(last[1] / first[1]) / Math.log(last[0] / first[0])).toFixed(2)} (target 1.05)`);

  const within = join(place, "within.csv");
  generate(within, 4e6, 1e6, true);
  say("1,000,000 subjects within 4 levels", measure({ path: within, format: "csv", subject: "operator" }));
} finally {
  rmSync(place, { recursive: true, force: true });
}
