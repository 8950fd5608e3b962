// The demo: the glove study (invented data) from planning to report, in a copy of notebooks/ that may be thrown away.
import { spawnSync } from "node:child_process";
import { cpSync, rmSync } from "node:fs";
import { dirname, join } from "node:path";
import { fileURLToPath } from "node:url";

const top = join(dirname(fileURLToPath(import.meta.url)), "..");
const out = join(top, "out");
rmSync(out, { recursive: true, force: true });
cpSync(join(top, "notebooks"), out, { recursive: true });
for (const notebook of ["glove-plan.ipynb", "glove-analysis.ipynb"]) {
  console.log(`\n===== ${notebook} =====\n`);
  const words = [
    join(top, "dist", "src", "cli", "main.js"),
    "run",
    join(out, notebook),
    "--notebook",
    join(out, notebook),
  ];
  const { status } = spawnSync(process.execPath, words, { stdio: ["ignore", "inherit", "inherit"] });
  if (status !== 0) process.exit(status ?? 1);
}
console.log(`\nThe report: ${join(out, "glove-analysis-report.html")}`);
