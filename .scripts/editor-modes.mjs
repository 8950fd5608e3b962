// Writes the editors' highlighting modes from the grammar: node .scripts/editor-modes.mjs (after a build). A test holds the files to it.
import { writeFileSync } from "node:fs";
import { codeMirror5Mode, codeMirror6Mode } from "../dist/grammar/index.js";
import { notebookScript } from "../dist/kernel/notebook-script.js";

const assets = new URL("../kernel/assets/", import.meta.url);
writeFileSync(new URL("kernel.js", assets), notebookScript(codeMirror5Mode()));
writeFileSync(new URL("codemirror6-meanwise.js", assets), codeMirror6Mode());
