// Speed of planning: node test/bench/planning.mjs. Simulated studies per second of each design in one process and on all cores, and the same
// simulation in NumPy (vectorised over studies: normal scores drawn whole, means, variances, t, p by SciPy, Holm), where python3 has them.
import { spawnSync } from "node:child_process";
import { mkdtempSync, rmSync, writeFileSync } from "node:fs";
import { availableParallelism, tmpdir } from "node:os";
import { dirname, join } from "node:path";
import { fileURLToPath, pathToFileURL } from "node:url";
import { Worker } from "node:worker_threads";
import { build } from "esbuild";

const top = join(dirname(fileURLToPath(import.meta.url)), "..", "..");
const place = mkdtempSync(join(tmpdir(), "meanwise-bench-"));
const outfile = join(place, "planning.mjs");
await build({
  stdin: {
    contents: `export * from "./src/planning/index.ts"; export { spellMembers } from "./src/design/index.ts";`,
    resolveDir: top,
    loader: "ts",
  },
  bundle: true,
  platform: "node",
  format: "esm",
  outfile,
  logLevel: "warning",
});
const planning = await import(pathToFileURL(outfile).href);

const cores = availableParallelism();
const workerFile = join(place, "worker.mjs");
writeFileSync(
  workerFile,
  `import { parentPort } from "node:worker_threads"; import { runTask } from "./planning.mjs";
parentPort.on("message", ({ at, job }) => parentPort.postMessage({ at, value: runTask(job.task, job.input) }));`,
);
const workers = Array.from({ length: cores }, () => new Worker(workerFile));
function onWorkers(jobs) {
  return new Promise((resolve) => {
    const answers = new Array(jobs.length);
    let next = 0;
    let done = 0;
    const give = (worker) => {
      if (next < jobs.length) worker.postMessage({ at: next, job: jobs[next++] });
    };
    for (const worker of workers) {
      worker.removeAllListeners("message");
      worker.on("message", ({ at, value }) => {
        answers[at] = value;
        if (++done === jobs.length) resolve(answers);
        else give(worker);
      });
      give(worker);
    }
  });
}
const watch = { checkpoint() {}, progress() {} };
const alone = { runJobs: async (jobs) => jobs.map((job) => planning.runTask(job.task, job.input)) };
const together = { runJobs: onWorkers };

const factor = (name, count, varies) => ({
  name,
  levels: Array.from({ length: count }, (_, i) => `${name}${i + 1}`),
  varies,
  unit: "subject",
  betweenUnit: null,
  ordered: false,
  positions: null,
  reference: null,
  measured: false,
});
function question(name, varies, levels, subjects, member, correction, shape = "normal") {
  const factors = [factor("f", levels, varies)];
  const spelled = planning.spellMembers(factors, [member], new Map());
  const cellMeans = Array.from({ length: levels }, (_, i) => 0.3 * i);
  return {
    name,
    varies,
    levels,
    subjects,
    numpy: correction === "holm" && shape === "normal" ? spelled.contrasts.map((one) => [...one.weights]) : null,
    design: {
      factors,
      scale: "linear",
      variances: "equal",
      covariance: null,
      cellMeans,
      cellSpread: cellMeans.map(() => 1),
      correlation: 0.6,
      shape,
      dropout: 0,
      missing: 0,
      allocation: varies === "between" ? cellMeans.map(() => 1) : [1],
      cost: null,
      unit: "subject",
    },
    aim: {
      family: {
        name: "primary",
        contrasts: spelled.contrasts,
        shape: spelled.shape,
        meansWeights: spelled.meansWeights,
        correction,
        error: 0.05,
        sides: "two-sided",
        margin: null,
        graph: null,
        after: null,
      },
    },
  };
}
const against = { type: "each against level", factor: "f", level: "f1", at: [] };
const pairs = { type: "all pairs", factor: "f", at: [] };
const questions = [
  question("within 4 x 24, against one, holm", "within", 4, 24, against, "holm"),
  question("within 4 x 24, against one, single-step", "within", 4, 24, against, "single-step"),
  question("within 4 x 24, against one, step-down", "within", 4, 24, against, "step-down"),
  question("within 4 x 24, skewed, holm", "within", 4, 24, against, "holm", "skewed"),
  question("between 4 x 10, all pairs, holm", "between", 4, 40, pairs, "holm"),
  question("between 4 x 10, all pairs, tukey", "between", 4, 40, pairs, "tukey"),
  question("between 4 x 10, against one, dunnett", "between", 4, 40, against, "dunnett"),
];

const studies = 20000;
const program = `
import json, sys, time
import numpy as np
from scipy import stats
for q in json.load(open(sys.argv[1])):
    k, n, W = q["levels"], q["subjects"], np.array(q["weights"])
    def run(studies=${studies}):
        rng = np.random.Generator(np.random.Philox(7))
        rejected = np.zeros(3)
        if q["varies"] == "within":
            L = np.linalg.cholesky(0.4 * np.eye(k) + 0.6)
            scores = rng.standard_normal((studies, n, k)) @ (L.T @ W.T)
            deviation, se, df = scores.mean(1), scores.std(1, ddof=1) / np.sqrt(n), n - 1
        else:
            scores = rng.standard_normal((studies, k, n // k))
            mean, ms = scores.mean(2), scores.var(2, ddof=1).mean(1)
            deviation, se, df = mean @ W.T, np.sqrt(ms[:, None] * (W ** 2).sum(1) / (n // k)), n - k
        for s, means in enumerate([np.zeros(k), 0.3 * np.arange(k), 0.15 * np.arange(k)]):
            p = 2 * stats.t.sf(np.abs((deviation + W @ means) / se), df)
            order = np.sort(p, 1) * np.arange(p.shape[1], 0, -1)
            rejected[s] = (np.maximum.accumulate(order, 1) <= 0.05).any(1).mean()
        return rejected
    run(1000)
    taken = []
    for _ in range(3):
        start = time.perf_counter(); run(); taken.append(time.perf_counter() - start)
    print(json.dumps(min(taken)))
`;
function numpySeconds() {
  const asked = questions.filter((one) => one.numpy !== null);
  const file = join(place, "questions.json");
  writeFileSync(
    file,
    JSON.stringify(asked.map(({ varies, levels, subjects, numpy }) => ({ varies, levels, subjects, weights: numpy }))),
  );
  const run = spawnSync("python3", ["-c", program, file], { encoding: "utf8" });
  if (run.status !== 0) return new Map();
  const seconds = run.stdout.trim().split("\n").map(Number);
  return new Map(asked.map((one, i) => [one.name, seconds[i]]));
}

async function seconds(one, host) {
  const options = { host, watch, seed: 7 };
  await planning.calibrate(one, { ...options, studies: 2000 });
  let best = Number.POSITIVE_INFINITY;
  for (let round = 0; round < 3; round++) {
    const start = performance.now();
    await planning.calibrate(one, { ...options, studies });
    best = Math.min(best, (performance.now() - start) / 1000);
  }
  return best;
}

const numpy = numpySeconds();
console.log(`calibration of ${studies} studies, all scenarios; studies per second, best of three; ${cores} cores`);
for (const one of questions) {
  const single = await seconds(one, alone);
  const all = await seconds(one, together);
  const other = numpy.get(one.name);
  const ratio = other === undefined ? "" : `   NumPy ${other.toFixed(2)} s, ratio ${(other / all).toFixed(1)}`;
  console.log(
    `${one.name.padEnd(42)} one process ${Math.round(studies / single)
      .toString()
      .padStart(8)}   all cores ${Math.round(studies / all)
      .toString()
      .padStart(8)}   ${all.toFixed(2)} s${ratio}`,
  );
}
await Promise.all(workers.map((worker) => worker.terminate()));
rmSync(place, { recursive: true, force: true });
