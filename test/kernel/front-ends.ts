import { execFileSync, spawnSync } from "node:child_process";
import { existsSync, mkdtempSync } from "node:fs";
import { tmpdir } from "node:os";
import { dirname, join } from "node:path";
import { fileURLToPath } from "node:url";

export const top = join(dirname(fileURLToPath(import.meta.url)), "..", "..");
export const built = join(top, "dist", "src", "cli", "main.js");
const python = "/usr/bin/python3";

/** Whether front-end tests must run (in CI) rather than be skipped where their packages are missing. */
export const required = process.env.MEANWISE_REQUIRE_FRONT_ENDS === "1";

/** Whether Debian's Python can import these modules. */
export function hasPython(...modules: string[]): boolean {
  if (!existsSync(python)) return false;
  return (
    spawnSync(python, ["-c", modules.map((name) => `import ${name}`).join("\n")], { stdio: "ignore" }).status === 0
  );
}

/** A data folder of the notebook front ends with this kernel installed, of the test's own. */
export function installedFor(): NodeJS.ProcessEnv {
  const folder = mkdtempSync(join(tmpdir(), "meanwise jupyter "));
  const environment: NodeJS.ProcessEnv = {
    ...process.env,
    JUPYTER_DATA_DIR: join(folder, "data"),
    JUPYTER_RUNTIME_DIR: join(folder, "runtime"),
    JUPYTER_CONFIG_DIR: join(folder, "config"),
    IPYTHONDIR: join(folder, "ipython"),
  };
  delete environment.JPY_SESSION_NAME;
  execFileSync(process.execPath, [built, "kernel", "install"], { env: environment, stdio: "ignore" });
  return environment;
}

export function runPython(
  words: readonly string[],
  environment: NodeJS.ProcessEnv,
  folder: string,
  timeoutMs = 200_000,
): { readonly status: number | null; readonly text: string } {
  const done = spawnSync(python, words, { env: environment, cwd: folder, encoding: "utf8", timeout: timeoutMs });
  return { status: done.status, text: `${done.stdout}\n${done.stderr}` };
}
