import { spawnSync } from "node:child_process";
import { cpSync, mkdirSync, mkdtempSync, readFileSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { fileURLToPath } from "node:url";
import { afterAll, beforeAll, describe, expect, it, vi } from "vitest";
import { recordCommand } from "../../src/cli/audit.ts";
import { formatCommand } from "../../src/cli/format.ts";
import { helpCommand } from "../../src/cli/help.ts";
import { reportCommand } from "../../src/cli/report.ts";
import { runCommand } from "../../src/cli/run.ts";

/** The built command is what runs; `npm test` builds it first. */
const command = fileURLToPath(new URL("../../dist/src/cli/main.js", import.meta.url));
const notebooks = fileURLToPath(new URL("../../notebooks", import.meta.url));
let folder = "";
const at = (name: string) => join(folder, name);
const read = (name: string) => readFileSync(at(name), "utf8");

/** The command as a person runs it: a process of its own. */
function spawned(...words: string[]) {
  const { status, stdout, stderr } = spawnSync(process.execPath, [command, ...words], {
    cwd: folder,
    encoding: "utf8",
  });
  return { status, stdout, stderr };
}

const commands: Readonly<Record<string, (words: readonly string[]) => Promise<number>>> = {
  run: runCommand,
  report: reportCommand,
  audit: (words) => recordCommand("audit", words),
  verify: (words) => recordCommand("verify", words),
  format: formatCommand,
  help: helpCommand,
};

/** The same command in this process, which saves the seconds of a start; file names are taken from the test's folder. */
async function meanwise(name: string, ...words: string[]) {
  let stdout = "";
  let stderr = "";
  const out = vi.spyOn(process.stdout, "write").mockImplementation((text) => {
    stdout += String(text);
    return true;
  });
  const err = vi.spyOn(process.stderr, "write").mockImplementation((text) => {
    stderr += String(text);
    return true;
  });
  try {
    const placed = words.map((word) => (/\.(mwise|ipynb|jsonl?|html|pdf)$/.test(word) ? at(word) : word));
    return { status: await commands[name]!(placed), stdout, stderr };
  } finally {
    out.mockRestore();
    err.mockRestore();
  }
}

const notebookOf = (cells: readonly string[]) =>
  JSON.stringify({
    cells: cells.map((source) => ({
      cell_type: "code",
      source,
      metadata: {},
      outputs: [],
      execution_count: null,
    })),
    metadata: {},
    nbformat: 4,
    nbformat_minor: 4,
  });

const declared = 'response minutes in "min"\nsubjects reader\nfactor lamp between reader: warm, cool, daylight';
const rows = `data
  reader lamp minutes
  1 warm 2.1
  2 warm 2.6
  3 warm 1.9
  4 cool 2.8
  5 cool 3.1
  6 cool 2.5
  7 daylight 3.6
  8 daylight 3.3
  9 daylight 4.1`;

beforeAll(() => {
  folder = mkdtempSync(join(tmpdir(), "meanwise-command-"));
});
afterAll(() => rmSync(folder, { recursive: true, force: true }));

describe("run", () => {
  it("writes results as data: exactly the promised fields, plain JSON, exit 0", async () => {
    writeFileSync(at("good.mwise"), `${declared}\n${rows}\nomnibus\nexplore all pairs of lamp by holm\n`);
    const ran = spawned("run", "good.mwise", "--json", "good.json", "--html", "good.html", "--quiet");
    expect(ran).toEqual({ status: 0, stdout: "", stderr: "" });
    const text = read("good.json");
    expect(text).not.toMatch(/NaN|Infinity/);
    const data = JSON.parse(text);
    expect(Object.keys(data)).toEqual(["meanwise", "results", "errors"]);
    expect(data.errors).toEqual([]);
    const [omnibus] = data.results.filter((result: { kind: string }) => result.kind === "omnibus");
    expect(omnibus).toMatchObject({ cell: 1, statement: "omnibus" });
    // F by hand: group means 2.2, 2.8, 11/3; sums of squares 3.2689 between (2 df), 0.7867 within (6 df); exact fractions.
    const values = [
      [2.1, 2.6, 1.9],
      [2.8, 3.1, 2.5],
      [3.6, 3.3, 4.1],
    ];
    const mean = (list: readonly number[]) => list.reduce((sum, value) => sum + value, 0) / list.length;
    const grand = mean(values.flat());
    const between = values.reduce((sum, list) => sum + list.length * (mean(list) - grand) ** 2, 0);
    const within = values.flatMap((list) => list.map((value) => (value - mean(list)) ** 2)).reduce((a, b) => a + b, 0);
    expect(omnibus.effects[0].value).toBeCloseTo(between / 2 / (within / 6), 10);
    expect(read("good.html")).toMatch(/^<!doctype html>/i);
  });

  it("reports every mistake of a script that cannot be read, with places, exit 1", async () => {
    writeFileSync(at("bad.mwise"), "respnse minutes\nsubjects reader\nfactr lamp between reader: warm, cool\n");
    const ran = await meanwise("run", "bad.mwise", "--json", "bad.json");
    expect(ran.status).toBe(1);
    expect(ran.stderr).toContain("^");
    const { errors, results } = JSON.parse(read("bad.json"));
    expect(results).toEqual([]);
    expect(errors.map((error: { line: number }) => error.line)).toEqual([1, 3]);
    for (const error of errors)
      expect(Object.keys(error).sort()).toEqual(
        ["advice", "cell", "code", "column", "endColumn", "endLine", "line", "message"].sort(),
      );
  });

  it("stops a script at the first statement that fails, and runs a notebook's later cells", async () => {
    writeFileSync(at("stops.mwise"), `${declared}\nread "nowhere.csv"\n${rows}\nomnibus\n`);
    const script = await meanwise("run", "stops.mwise", "--json", "stops.json");
    expect(script.status).toBe(1);
    const told = JSON.parse(read("stops.json"));
    expect(told.errors.map((error: { code: string }) => error.code)).toEqual(["missing-file"]);
    expect(told.results.some((result: { kind: string }) => result.kind === "omnibus")).toBe(false);
    writeFileSync(at("goes-on.ipynb"), notebookOf([declared, 'read "nowhere.csv"', rows, "omnibus"]));
    const notebook = await meanwise("run", "goes-on.ipynb", "--json", "goes-on.json");
    expect(notebook.status).toBe(1);
    expect(notebook.stderr).toContain("Cell 2");
    const later = JSON.parse(read("goes-on.json"));
    expect(later.errors.map((error: { cell: number }) => error.cell)).toEqual([2]);
    expect(later.results.some((result: { kind: string; cell: number }) => result.kind === "omnibus")).toBe(true);
  });

  it("answers wrong use with one reason and exit 2", async () => {
    for (const words of [
      ["run"],
      ["run", "nowhere.mwise"],
      ["run", "good.mwise", "--jsn", "x"],
      ["run", "good.mwise", "--json"],
      ["run", "good.mwise", "bad.mwise"],
      ["rum", "good.mwise"],
      ["audit", "nowhere.ledger.jsonl"],
      ["verify", "good.mwise"],
      ["report", "good.mwise", "--to", "report.pdf"],
    ]) {
      const ran = words[0] === "rum" ? spawned(...words) : await meanwise(...(words as [string, ...string[]]));
      expect(ran.status, words.join(" ")).toBe(2);
      expect(ran.stderr, words.join(" ")).toMatch(/^meanwise: /);
      expect(ran.stderr, words.join(" ")).not.toMatch(/\n\s+at /);
    }
  });
});

describe("a notebook that proves itself", () => {
  beforeAll(async () => {
    writeFileSync(
      at("study.csv"),
      rows
        .split("\n")
        .slice(1)
        .map((row) => row.trim().replace(/ /g, ","))
        .join("\n"),
    );
    writeFileSync(
      at("study.ipynb"),
      notebookOf([
        `${declared}\nfamily primary: all pairs of lamp\n  hold error 5% by holm`,
        'seal plan as "study"',
        'read "study.csv"',
        "omnibus",
        "compare primary",
      ]),
    );
    expect((await meanwise("run", "study.ipynb", "--notebook", "run.ipynb", "--quiet")).status).toBe(0);
    mkdirSync(at("elsewhere"));
    cpSync(at("run.ipynb"), at("elsewhere/shared.ipynb"));
  });

  it("is a notebook of format 4.5 with outputs", async () => {
    const notebook = JSON.parse(read("run.ipynb"));
    expect([notebook.nbformat, notebook.nbformat_minor]).toEqual([4, 5]);
    expect(notebook.metadata.kernelspec.name).toBe("meanwise");
    expect(notebook.metadata.language_info.file_extension).toBe(".mwise");
    const ids = notebook.cells.map((cell: { id: string }) => cell.id);
    expect(new Set(ids).size).toBe(ids.length);
    for (const id of ids) expect(id).toMatch(/^[a-zA-Z0-9-_]{1,64}$/);
    const last = notebook.cells.at(-1);
    expect(last.execution_count).toBe(5);
    const [output] = last.outputs;
    expect(output.data["text/plain"]).toBeDefined();
    expect(output.data["text/html"]).toBeDefined();
  });

  it("can be audited from the file alone", async () => {
    const ran = await meanwise("audit", "elsewhere/shared.ipynb");
    expect(ran.status, ran.stdout).toBe(0);
    const head = /Head digest: ([0-9a-f]{64})/.exec(ran.stdout)![1]!;
    expect((await meanwise("audit", "elsewhere/shared.ipynb", "--head", head)).status).toBe(0);
    expect((await meanwise("audit", "elsewhere/shared.ipynb", "--head", "0".repeat(64))).status).toBe(1);
  });

  it("names the entry that was changed, and the end that was cut off", async () => {
    const notebook = JSON.parse(read("run.ipynb"));
    const kept = notebook.metadata.meanwise.record.ledger;
    const line = kept[2];
    kept[2] = line.replace(/"at":"\d{4}/, '"at":"2001');
    writeFileSync(at("changed.ipynb"), JSON.stringify(notebook));
    const changed = await meanwise("audit", "changed.ipynb");
    expect(changed.status).toBe(1);
    expect(changed.stdout).toContain("Entry 2");
    kept[2] = line;
    kept.pop();
    writeFileSync(at("cut.ipynb"), JSON.stringify(notebook));
    expect((await meanwise("audit", "cut.ipynb")).status).toBe(1);
  });

  it("is verified: every number again, and the first cell that differs named", async () => {
    const same = await meanwise("verify", "run.ipynb");
    expect(same.status, same.stdout).toBe(0);
    expect(same.stdout).toContain("to the last bit");
    const notebook = JSON.parse(read("run.ipynb"));
    const recorded = notebook.metadata.meanwise.results.find(
      (entry: { result: { kind: string } }) => entry.result.kind === "omnibus",
    );
    recorded.result.effects[0].value += 1e-12;
    writeFileSync(at("forged.ipynb"), JSON.stringify(notebook));
    const forged = await meanwise("verify", "forged.ipynb");
    expect(forged.status).toBe(1);
    expect(forged.stdout).toContain("Cell 4 differs");
    notebook.metadata.meanwise.version = "0.0.1";
    writeFileSync(at("older.ipynb"), JSON.stringify(notebook));
    expect((await meanwise("verify", "older.ipynb")).status).toBe(0);
    writeFileSync(at("study.csv"), read("study.csv").replace("4.1", "4.2"));
    const other = await meanwise("verify", "run.ipynb");
    expect(other.status).toBe(1);
    expect(other.stdout).toMatch(/Cell 3 differs/);
  });
});

describe("the demo of a study that did not go as planned", () => {
  it("reports its amendment, its late exclusion and its exploratory comparison", async () => {
    cpSync(join(notebooks, "late-change.mwise"), at("late-change.mwise"));
    const ran = await meanwise("run", "late-change.mwise", "--json", "late.json");
    expect(ran.status, ran.stderr).toBe(0);
    const states = JSON.parse(read("late.json")).results.flatMap((result: { kind: string; state: string }) =>
      result.kind === "comparisons" ? [result.state] : [],
    );
    expect(states).toEqual(["planned", "planned", "exploratory"]);
    const text = read("late-change-report.html")
      .replace(/<[^>]*>/g, " ")
      .replace(/\s+/g, " ");
    expect(text).toContain("The plan was amended before results were seen");
    expect(text).toContain("the comparison of neutral and cool had been forgotten");
    expect(text).toContain("This exclusion came after results had been seen");
    expect(text).toContain("Exploratory: not committed to before results were seen");
    const audit = await meanwise("audit", "late-change.ledger.jsonl");
    expect(audit.status).toBe(0);
    for (const said of ["The plan was amended", "Rows were excluded after results", "2 different states of the data"])
      expect(audit.stdout).toContain(said);
    // Dropping the rows' exclusion again, and running anew, hides nothing.
    writeFileSync(at("late-change.mwise"), read("late-change.mwise").replace(/exclude where.*\n/, ""));
    expect((await meanwise("run", "late-change.mwise", "--quiet")).status).toBe(0);
    expect((await meanwise("audit", "late-change.ledger.jsonl")).stdout).toContain("Rows were excluded after results");
  });
});

describe("format and help", () => {
  it("--check looks only; format settles, once and for all", async () => {
    writeFileSync(at("loose.mwise"), 'response   minutes in "min"\n');
    expect((await meanwise("format", "loose.mwise", "--check")).status).toBe(1);
    expect((await meanwise("format", "loose.mwise")).status).toBe(0);
    expect(read("loose.mwise")).toBe('response minutes in "min"\n');
    expect((await meanwise("format", "loose.mwise", "--check")).status).toBe(0);
  });
  it("help answers for a statement, and suggests for a slip", async () => {
    expect((await meanwise("help", "compare")).stdout).toContain("compare primary");
    expect((await meanwise("help", "xyzzy")).status).toBe(2);
  });
});
