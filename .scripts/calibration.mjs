// Runs every test/calibration/*.ts: long simulations that show what the methods really hold. Each exports `run(parallel)`, which gives back
// Markdown; it is printed and written beside the source as NAME.md. With names as arguments only those run: npm run calibration -- families
import { mkdtempSync, readdirSync, rmSync, writeFileSync } from "node:fs";
import { availableParallelism, tmpdir } from "node:os";
import { basename, dirname, join } from "node:path";
import { fileURLToPath, pathToFileURL } from "node:url";
import { isMainThread, parentPort, Worker, workerData } from "node:worker_threads";
import { build } from "esbuild";

/** A worker answers jobs for one bundle: the exported `tasks[task](input)`. */
async function serve() {
  const { tasks } = await import(workerData.bundle);
  parentPort.on("message", ({ id, task, input }) => parentPort.postMessage({ id, output: tasks[task](input) }));
}

/** Runs the inputs of one task on all cores; answers in the order of the inputs. */
function parallelOn(bundle) {
  return (task, inputs) =>
    new Promise((resolve, reject) => {
      const outputs = new Array(inputs.length);
      let next = 0;
      let done = 0;
      const workers = Array.from({ length: Math.min(availableParallelism(), inputs.length) }, () => {
        const worker = new Worker(fileURLToPath(import.meta.url), { workerData: { bundle } });
        const send = () => next < inputs.length && worker.postMessage({ id: next, task, input: inputs[next++] });
        worker.on("message", ({ id, output }) => {
          outputs[id] = output;
          process.stderr.write(`\r${++done} of ${inputs.length} `);
          if (done === inputs.length) {
            process.stderr.write("\r");
            for (const one of workers) one.terminate();
            resolve(outputs);
          } else send();
        });
        worker.on("error", reject);
        send();
        return worker;
      });
      if (inputs.length === 0) resolve(outputs);
    });
}

async function main() {
  const folder = join(dirname(fileURLToPath(import.meta.url)), "..", "test", "calibration");
  const asked = process.argv.slice(2);
  const sources = readdirSync(folder).filter((file) => file.endsWith(".ts") && !file.endsWith(".test.ts"));
  const place = mkdtempSync(join(tmpdir(), "meanwise-calibration-"));
  try {
    for (const source of sources) {
      const name = basename(source, ".ts");
      if (asked.length > 0 && !asked.includes(name)) continue;
      const outfile = join(place, `${name}.mjs`);
      await build({
        entryPoints: [join(folder, source)],
        bundle: true,
        platform: "node",
        target: "node20",
        format: "esm",
        outfile,
        logLevel: "warning",
      });
      const bundle = pathToFileURL(outfile).href;
      const started = performance.now();
      const module = await import(bundle);
      if (typeof module.run !== "function") continue;
      const markdown = await module.run(parallelOn(bundle));
      if (typeof markdown === "string") {
        writeFileSync(join(folder, `${name}.md`), markdown);
        console.log(markdown);
      }
      console.error(`${name}: ${((performance.now() - started) / 1000).toFixed(0)} s`);
    }
  } finally {
    rmSync(place, { recursive: true, force: true });
  }
}

if (isMainThread) await main();
else await serve();
