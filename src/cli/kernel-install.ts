import { cpSync, existsSync, mkdirSync, readdirSync, readFileSync, rmSync, writeFileSync } from "node:fs";
import { homedir } from "node:os";
import { join } from "node:path";
import { fileURLToPath } from "node:url";

const kernelName = "meanwise";
/** Files that an installation consists of; nothing else is ever removed. */
const ownFiles = ["kernel.json", "logo-32x32.png", "logo-64x64.png", "logo-svg.svg", "kernel.js"];

export interface InstallOptions {
  /** `--prefix DIR`: DIR/share/jupyter/kernels; otherwise the user's own data folder. */
  readonly prefix: string | null;
  readonly environment: NodeJS.ProcessEnv;
  readonly platform: NodeJS.Platform;
}

export interface InstalledKernel {
  readonly folder: string;
  readonly argv: readonly string[];
  /** Whether the program it names is still there. */
  readonly usable: boolean;
}

/** The user's data folder of the notebook front ends, per platform (Jupyter documentation, "data files"). */
export function userDataFolder(environment: NodeJS.ProcessEnv, platform: NodeJS.Platform): string {
  if (environment.JUPYTER_DATA_DIR) return environment.JUPYTER_DATA_DIR;
  if (platform === "darwin") return join(homedir(), "Library", "Jupyter");
  if (platform === "win32") return join(environment.APPDATA ?? join(homedir(), "AppData", "Roaming"), "jupyter");
  return join(environment.XDG_DATA_HOME || join(environment.HOME || homedir(), ".local", "share"), "jupyter");
}

/** The folder of this kernel's specification. */
export function specificationFolder(options: InstallOptions): string {
  const data =
    options.prefix === null
      ? userDataFolder(options.environment, options.platform)
      : join(options.prefix, "share", "jupyter");
  return join(data, "kernels", kernelName);
}

function assetsFolder(): string {
  for (const place of ["../../../kernel/assets/", "../../kernel/assets/"]) {
    const folder = fileURLToPath(new URL(place, import.meta.url));
    if (existsSync(folder)) return folder;
  }
  throw new Error("The kernel's own files are missing from this installation.");
}

/** The program that the front end starts: the built command of this installation. */
function entryFile(): string {
  const built = new URL("./main.js", import.meta.url);
  if (import.meta.url.endsWith(".js")) return fileURLToPath(built);
  return fileURLToPath(new URL("../../dist/src/cli/main.js", import.meta.url));
}

/**
 * Installs the kernel's specification.
 * @returns the folder, and whether an older installation was replaced
 */
export function installKernel(options: InstallOptions): { readonly folder: string; readonly replaced: boolean } {
  const folder = specificationFolder(options);
  const replaced = existsSync(join(folder, "kernel.json"));
  mkdirSync(folder, { recursive: true });
  const assets = assetsFolder();
  for (const file of ownFiles) {
    if (file !== "kernel.json" && existsSync(join(assets, file))) cpSync(join(assets, file), join(folder, file));
  }
  const specification = {
    argv: [process.execPath, entryFile(), "kernel", "run", "{connection_file}"],
    display_name: "Meanwise",
    language: "meanwise",
    interrupt_mode: "message",
    env: {},
    metadata: {},
  };
  writeFileSync(join(folder, "kernel.json"), `${JSON.stringify(specification, null, 2)}\n`);
  return { folder, replaced };
}

/** Removes what `installKernel` put there, and the folder only when nothing else is in it. */
export function uninstallKernel(options: InstallOptions): {
  readonly folder: string;
  readonly removed: boolean;
  readonly left: readonly string[];
} {
  const folder = specificationFolder(options);
  if (!existsSync(join(folder, "kernel.json"))) return { folder, removed: false, left: [] };
  for (const file of ownFiles) rmSync(join(folder, file), { force: true });
  const left = readdirSync(folder);
  if (left.length === 0) rmSync(folder, { recursive: true });
  return { folder, removed: true, left };
}

/** Installations in the places where front ends look. */
export function installedKernels(options: InstallOptions): InstalledKernel[] {
  const places = [userDataFolder(options.environment, options.platform)];
  if (options.prefix !== null) places.push(join(options.prefix, "share", "jupyter"));
  for (const path of (options.environment.JUPYTER_PATH ?? "").split(options.platform === "win32" ? ";" : ":"))
    if (path !== "") places.push(path);
  if (options.platform !== "win32") places.push("/usr/local/share/jupyter", "/usr/share/jupyter");
  return [...new Set(places)].flatMap((place) => {
    const folder = join(place, "kernels", kernelName);
    if (!existsSync(join(folder, "kernel.json"))) return [];
    try {
      const { argv } = JSON.parse(readFileSync(join(folder, "kernel.json"), "utf8")) as { argv: string[] };
      return [{ folder, argv, usable: argv.slice(0, 2).every((file) => existsSync(file)) }];
    } catch {
      return [{ folder, argv: [], usable: false }];
    }
  });
}
