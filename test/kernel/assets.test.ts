import { readFileSync } from "node:fs";
import { join } from "node:path";
import { runInNewContext } from "node:vm";
import { describe, expect, it } from "vitest";
import { codeMirror5Mode, codeMirror6Mode } from "../../grammar/index.ts";
import { notebookScript } from "../../kernel/notebook-script.ts";
import { top } from "./front-ends.ts";

const asset = (name: string) => readFileSync(join(top, "kernel", "assets", name), "utf8");

describe("files for editors", () => {
  it("are fresh (node .scripts/editor-modes.mjs writes them)", () => {
    expect(asset("kernel.js")).toBe(notebookScript(codeMirror5Mode()));
    expect(asset("codemirror6-meanwise.js")).toBe(codeMirror6Mode());
  });

  it("the notebook's script defines the mode and sets it on cells already drawn", () => {
    const modes: Record<string, unknown> = {};
    const set: unknown[][] = [];
    const CodeMirror = {
      defineMode: (name: string, mode: unknown) => {
        modes[name] = mode;
      },
      defineMIME: () => {},
    };
    const cell = (type: string) => ({
      cell_type: type,
      code_mirror: { setOption: (...words: unknown[]) => set.push([type, ...words]) },
    });
    const Jupyter = { notebook: { get_cells: () => [cell("code"), cell("markdown")] } };
    let loaded: { onload: () => void } | null = null;
    runInNewContext(asset("kernel.js"), {
      CodeMirror,
      define: (names: string[], make: (...parts: unknown[]) => { onload: () => void }) => {
        expect(names[0]).toBe("codemirror/lib/codemirror");
        loaded = make(CodeMirror, Jupyter);
      },
    });
    expect(Object.keys(modes)).toEqual(["meanwise"]);
    loaded!.onload();
    expect(set).toEqual([["code", "mode", "meanwise"]]);
  });
});
