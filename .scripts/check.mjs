// Types, lint and format, import direction: the checks that need no run of the program.
import { spawnSync } from "node:child_process";
import { dirname, join } from "node:path";
import { fileURLToPath } from "node:url";

const top = join(dirname(fileURLToPath(import.meta.url)), "..");
const tool = (...path) => join(top, "node_modules", ...path);
const checks = [
  ["types", [tool("typescript", "bin", "tsc"), "-p", join(top, "tsconfig.json")]],
  ["lint and format", [tool("@biomejs", "biome", "bin", "biome"), "ci", "--error-on-warnings", "."]],
  ["import direction", [tool("vitest", "vitest.mjs"), "run", "test/imports.test.ts"]],
];
let failed = 0;
for (const [name, words] of checks) {
  const outcome = spawnSync(process.execPath, words, { cwd: top, stdio: "inherit" });
  console.log(`${outcome.status === 0 ? "ok    " : "FAILED"} ${name}`);
  if (outcome.status !== 0) failed++;
}
process.exit(failed === 0 ? 0 : 1);
