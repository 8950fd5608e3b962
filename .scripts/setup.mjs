// Sets a fresh clone up: packages, then a build when a source is newer than the last one. Safe to run at any time.
import { spawnSync } from "node:child_process";
import { existsSync, readdirSync, statSync } from "node:fs";
import { dirname, join } from "node:path";
import { fileURLToPath } from "node:url";

const top = join(dirname(fileURLToPath(import.meta.url)), "..");
const [major, minor] = process.versions.node.split(".").map(Number);
if (major < 20 || (major === 20 && minor < 19)) {
  console.error(`Meanwise needs Node 20.19 or newer; this is ${process.versions.node}.`);
  process.exit(1);
}

function run(command, words) {
  const outcome = spawnSync(command, words, {
    cwd: top,
    stdio: ["ignore", "inherit", "inherit"],
    shell: process.platform === "win32",
  });
  if (outcome.status !== 0) process.exit(outcome.status ?? 1);
}

const modified = (path) => (existsSync(path) ? statSync(path).mtimeMs : 0);

function newest(folder) {
  let latest = 0;
  for (const entry of readdirSync(folder, { withFileTypes: true })) {
    const path = join(folder, entry.name);
    latest = Math.max(latest, entry.isDirectory() ? newest(path) : modified(path));
  }
  return latest;
}

// npm writes this file inside node_modules whenever it has made it match the lock file.
const installed = join(top, "node_modules", ".package-lock.json");
if (
  modified(installed) < modified(join(top, "package-lock.json")) ||
  !existsSync(join(top, "node_modules", "typescript"))
) {
  console.log("Installing packages (once) ...");
  run("npm", ["ci", "--no-audit", "--no-fund", "--loglevel=error"]);
}

const built = join(top, "dist", "src", "cli", "main.js");
const sources = ["grammar", "src", "kernel"].map((folder) => newest(join(top, folder)));
if (modified(built) < Math.max(...sources, modified(join(top, "tsconfig.build.json")))) {
  console.log("Building ...");
  run(process.execPath, [
    join(top, "node_modules", "typescript", "bin", "tsc"),
    "-p",
    join(top, "tsconfig.build.json"),
  ]);
  run(process.execPath, [join(top, ".scripts", "bundle-kernel.mjs")]);
}
