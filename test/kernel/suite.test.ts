import { cpSync, existsSync, mkdtempSync, readdirSync, readFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { describe, expect, it } from "vitest";
import { built, hasPython, installedFor, required, runPython, top } from "./front-ends.ts";

const suite = required || (existsSync(built) && hasPython("jupyter_kernel_test"));
const conversion = required || (existsSync(built) && hasPython("nbconvert", "nbclient"));

// Source: python3-jupyter-kernel-test (Debian), which checks every message against the protocol's specification.
describe.skipIf(!suite)("the protocol suite (needs python3-jupyter-kernel-test)", () => {
  it("passes with every sample that this language has", { timeout: 240_000 }, () => {
    const folder = mkdtempSync(join(tmpdir(), "meanwise suite "));
    const { status, text } = runPython([join(top, "test", "kernel", "kernel_suite.py")], installedFor(), folder);
    expect(text).toMatch(/Ran \d+ tests/);
    expect(status, text).toBe(0);
  });
});

describe.skipIf(!conversion)("notebooks (needs jupyter-nbconvert)", () => {
  it("run from top to bottom and become HTML", { timeout: 240_000 }, () => {
    const folder = mkdtempSync(join(tmpdir(), "meanwise notebooks "));
    cpSync(join(top, "notebooks"), folder, { recursive: true });
    const environment = installedFor();
    // Planning before analysis: it seals the plan that the analysis opens.
    const notebooks = readdirSync(folder)
      .filter((name) => name.endsWith(".ipynb"))
      .sort((left, right) => Number(right.includes("plan")) - Number(left.includes("plan")));
    expect(notebooks.length).toBeGreaterThanOrEqual(4);
    for (const name of notebooks) {
      const { status, text } = runPython(
        ["-m", "nbconvert", "--to", "html", "--execute", join(folder, name)],
        environment,
        folder,
      );
      expect(status, text).toBe(0);
      const page = readFileSync(join(folder, name.replace(/ipynb$/, "html")), "utf8");
      expect(page).toContain("<table");
      expect(page).not.toMatch(/Traceback|InternalError/);
    }
  });
});
