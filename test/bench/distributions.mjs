// Speed of the distributions of one variable: node test/bench/distributions.mjs. Prints ns per call, and SciPy's (vectorised, same inputs) where python3 has it.
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
  format: "esm",
  outfile,
  logLevel: "warning",
});
const numeric = await import(pathToFileURL(outfile).href);
rmSync(place, { recursive: true, force: true });

const point = (i) => 0.01 + (i % 4000) / 1000;
const share = (i) => ((i % 4999) + 1) / 10000;
/** name, our call, calls, SciPy's expression over x (points) or p (shares), calls there */
const cases = [
  ["normal upper tail", (i) => numeric.normalUpperTail(point(i)), 2e6, "stats.norm.sf(x)"],
  ["normal upper quantile", (i) => numeric.normalUpperQuantile(share(i)), 2e6, "stats.norm.isf(p)"],
  ["t two-sided tail, df 27", (i) => numeric.tTwoSidedTail(point(i), 27), 1e6, "2 * stats.t.sf(x, 27)"],
  ["t two-sided tail, df 1000", (i) => numeric.tTwoSidedTail(point(i), 1000), 1e6, "2 * stats.t.sf(x, 1000)"],
  ["F upper tail, df 3, 96", (i) => numeric.fUpperTail(point(i), 3, 96), 1e6, "stats.f.sf(x, 3, 96)"],
  ["chi-square upper tail, df 4", (i) => numeric.chiSquareUpperTail(point(i), 4), 1e6, "stats.chi2.sf(x, 4)"],
  ["t upper quantile, df 27", (i) => numeric.tUpperQuantile(share(i), 27), 2e5, "stats.t.isf(p, 27)"],
  ["F upper quantile, df 3, 96", (i) => numeric.fUpperQuantile(share(i), 3, 96), 2e5, "stats.f.isf(p, 3, 96)"],
  ["noncentral t upper tail", (i) => numeric.noncentralTUpperTail(point(i), 20, 2.5), 2e4, "stats.nct.sf(x, 20, 2.5)"],
  ["noncentral F upper tail", (i) => numeric.noncentralFUpperTail(point(i), 3, 96, 10), 5e4, "stats.ncf.sf(x, 3, 96, 10)"],
];

function nanoseconds(call, calls) {
  let sum = 0;
  for (let i = 0; i < calls / 5; i++) sum += call(i);
  const start = performance.now();
  for (let i = 0; i < calls; i++) sum += call(i);
  const taken = ((performance.now() - start) * 1e6) / calls;
  if (Number.isNaN(sum)) throw new Error("a call gave NaN");
  return taken;
}

function scipyNanoseconds() {
  const program = `
import time, numpy as np
from scipy import stats
i = np.arange(8000)
x = 0.01 + (i % 4000) / 1000
p = ((i % 4999) + 1) / 10000
for f in [${cases.map(([, , , expression]) => `lambda: ${expression}`).join(", ")}]:
    f()
    start = time.perf_counter(); rounds = 0
    while time.perf_counter() - start < 0.2:
        f(); rounds += 1
    print((time.perf_counter() - start) / rounds / len(i) * 1e9)
`;
  const answer = spawnSync("python3", ["-c", program], { encoding: "utf8" });
  return answer.status === 0 ? answer.stdout.trim().split("\n").map(Number) : null;
}

const scipy = scipyNanoseconds();
console.log(`${"".padEnd(32)}${"ours".padStart(10)}${"SciPy".padStart(10)}${"ratio".padStart(8)}   (ns per call)`);
for (const [k, [name, call, calls]] of cases.entries()) {
  const ours = nanoseconds(call, calls);
  const theirs = scipy?.[k];
  const right = theirs === undefined ? "" : theirs.toFixed(0).padStart(10) + (theirs / ours).toFixed(1).padStart(8);
  console.log(name.padEnd(32) + ours.toFixed(0).padStart(10) + right);
}
