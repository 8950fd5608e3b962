import { spawnSync } from "node:child_process";
import { existsSync, mkdirSync, mkdtempSync, readdirSync, readFileSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { afterEach, beforeEach, describe, expect, it } from "vitest";
import { userDataFolder } from "../../src/cli/kernel-install.ts";
import { built } from "./front-ends.ts";

describe("meanwise kernel install, list, uninstall", () => {
  let place: string;
  let environment: NodeJS.ProcessEnv;
  beforeEach(() => {
    place = mkdtempSync(join(tmpdir(), "meanwise install "));
    environment = { PATH: process.env.PATH ?? "", HOME: place };
  });
  afterEach(() => rmSync(place, { recursive: true, force: true }));

  const kernel = (...words: string[]) =>
    spawnSync(process.execPath, [built, "kernel", ...words], { env: environment, encoding: "utf8" });

  it.skipIf(process.platform !== "linux")("for the user, in a path with a space; twice; away again", () => {
    const folder = join(place, ".local", "share", "jupyter", "kernels", "meanwise");
    const first = kernel("install");
    expect(first.stdout).toBe(`Installed the kernel into ${folder}\n`);
    expect(first.status).toBe(0);
    expect(readdirSync(folder).sort()).toEqual([
      "kernel.js",
      "kernel.json",
      "logo-32x32.png",
      "logo-64x64.png",
      "logo-svg.svg",
    ]);
    const specification = JSON.parse(readFileSync(join(folder, "kernel.json"), "utf8")) as Record<string, unknown>;
    expect(specification).toMatchObject({ display_name: "Meanwise", language: "meanwise", interrupt_mode: "message" });
    const argv = specification.argv as string[];
    expect(argv.slice(2)).toEqual(["kernel", "run", "{connection_file}"]);
    for (const file of argv.slice(0, 2)) expect(existsSync(file)).toBe(true);
    expect(kernel("install").stdout).toBe(`Replaced the kernel in ${folder}\n`);
    expect(kernel("list").stdout).toContain(`${folder}\n`);
    expect(kernel("uninstall").status).toBe(0);
    expect(existsSync(folder)).toBe(false);
    const again = kernel("uninstall");
    expect(again.status).toBe(1);
    expect(again.stderr).toContain(folder);
  });

  it("under a prefix; what is not ours stays", () => {
    const prefix = join(place, "a prefix");
    const folder = join(prefix, "share", "jupyter", "kernels", "meanwise");
    const other = join(prefix, "share", "jupyter", "kernels", "other");
    mkdirSync(other, { recursive: true });
    writeFileSync(join(other, "kernel.json"), "{}");
    expect(kernel("install", "--prefix", prefix).status).toBe(0);
    writeFileSync(join(folder, "notes.txt"), "mine");
    expect(kernel("list", "--prefix", prefix).stdout).toContain(folder);
    const gone = kernel("uninstall", "--prefix", prefix);
    expect(gone.status).toBe(0);
    expect(gone.stdout).toContain("Left in place, not ours: notes.txt");
    expect(readdirSync(folder)).toEqual(["notes.txt"]);
    expect(readdirSync(other)).toEqual(["kernel.json"]);
  });

  it("under an environment, and a clear word without one", () => {
    expect(kernel("install", "--sys-prefix").status).toBe(2);
    environment = { ...environment, VIRTUAL_ENV: join(place, "venv") };
    expect(kernel("install", "--sys-prefix").status).toBe(0);
    expect(existsSync(join(place, "venv", "share", "jupyter", "kernels", "meanwise", "kernel.json"))).toBe(true);
  });

  it("refuses what contradicts itself, and a folder that cannot be made", () => {
    expect(kernel("install", "--user", "--prefix", place).status).toBe(2);
    expect(kernel("remove").status).toBe(2);
    writeFileSync(join(place, "file"), "");
    const refused = kernel("install", "--prefix", join(place, "file"));
    expect(refused.status).toBe(1);
    expect(refused.stderr.trim().split("\n")).toHaveLength(1);
  });

  // Source: Jupyter documentation, "data files" (common folders per platform).
  it("knows each platform's folder", () => {
    expect(userDataFolder({ JUPYTER_DATA_DIR: "/d" }, "linux")).toBe("/d");
    expect(userDataFolder({ HOME: "/h" }, "linux")).toBe(join("/h", ".local", "share", "jupyter"));
    expect(userDataFolder({ HOME: "/h", XDG_DATA_HOME: "/x" }, "linux")).toBe(join("/x", "jupyter"));
    expect(userDataFolder({}, "darwin")).toMatch(/Library.Jupyter$/);
    expect(userDataFolder({ APPDATA: "/a" }, "win32")).toBe(join("/a", "jupyter"));
  });
});
