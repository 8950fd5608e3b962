// Runs test/bench/*.mjs and *.ts, one after the other, each in its own process: npm run bench, or only those named: npm run bench numeric models.
// A TypeScript file is bundled first; it and a .mjs file print what they measured.
import { spawnSync } from "node:child_process";
import { mkdtempSync, readdirSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import { dirname, extname, join } from "node:path";
import { fileURLToPath } from "node:url";
import { build } from "esbuild";

const folder = join(dirname(fileURLToPath(import.meta.url)), "..", "test", "bench");
const files = readdirSync(folder)
  .filter((file) => [".mjs", ".ts"].includes(extname(file)))
  .sort();
const nameOf = (file) => file.slice(0, -extname(file).length);
const asked = process.argv.slice(2);
for (const name of asked) {
  if (!files.some((file) => nameOf(file) === name)) {
    console.error(`There is no bench "${name}". There are: ${files.map(nameOf).join(", ")}.`);
    process.exit(2);
  }
}
const place = mkdtempSync(join(tmpdir(), "meanwise-bench-"));
let failed = false;
try {
  for (const file of asked.length > 0 ? asked.map((name) => files.find((one) => nameOf(one) === name)) : files) {
    console.log(`\n${nameOf(file)}`);
    let script = join(folder, file);
    if (extname(file) === ".ts") {
      const outfile = join(place, `${nameOf(file)}.mjs`);
      await build({
        entryPoints: [script],
        bundle: true,
        platform: "node",
        target: "node20",
        format: "esm",
        outfile,
        logLevel: "warning",
      });
      script = outfile;
    }
    if (spawnSync(process.execPath, [script], { stdio: "inherit" }).status !== 0) failed = true;
  }
} finally {
  rmSync(place, { recursive: true, force: true });
}
process.exitCode = failed ? 1 : 0;
