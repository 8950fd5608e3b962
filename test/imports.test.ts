import { readdirSync, readFileSync } from "node:fs";
import { dirname, join, relative, resolve } from "node:path";
import { fileURLToPath } from "node:url";
import { describe, expect, it } from "vitest";

const top = join(dirname(fileURLToPath(import.meta.url)), "..");

/** What each room may import, beside itself. The order of the keys is the direction of flow. */
const mayImport: Readonly<Record<string, readonly string[]>> = {
  grammar: [],
  "src/host": [],
  "src/results": [],
  "src/numeric": ["src/host"],
  "src/data": ["src/host", "src/results", "src/numeric", "src/design"],
  "src/design": ["src/host", "src/results", "src/numeric", "src/data"],
  "src/models": ["src/host", "src/results", "src/numeric", "src/data", "src/design"],
  "src/families": ["src/host", "src/results", "src/numeric"],
  "src/planning": ["src/host", "src/results", "src/numeric", "src/data", "src/design", "src/models", "src/families"],
  "src/record": ["src/host", "src/results"],
  "src/session": [
    "grammar",
    "src/host",
    "src/results",
    "src/numeric",
    "src/data",
    "src/design",
    "src/models",
    "src/families",
    "src/planning",
    "src/record",
    "src/present",
  ],
  "src/present": ["src/host", "src/results", "src/numeric"],
};

/** Pairs where only types may cross against the flow: plain shapes, nothing that runs. */
const typesOnly = new Set(["src/data -> src/design"]);

const roomOf = (path: string) => {
  const parts = path.split("/");
  return parts[0] === "src" && parts.length > 2 ? parts.slice(0, 2).join("/") : parts[0]!;
};

function sources(folder: string): string[] {
  return readdirSync(join(top, folder), { withFileTypes: true }).flatMap((entry) => {
    const path = `${folder}/${entry.name}`;
    if (entry.isDirectory()) return sources(path);
    return entry.name.endsWith(".ts") ? [path] : [];
  });
}

interface Import {
  readonly file: string;
  readonly target: string;
  readonly type: boolean;
}

function importsOf(file: string): Import[] {
  const text = readFileSync(join(top, file), "utf8");
  const pattern = /^\s*(?:import|export)\s+(type\s+)?(?:[^"';]*?\sfrom\s+)?"([^"]+)"|import\(\s*"([^"]+)"\s*\)/gms;
  return [...text.matchAll(pattern)].map((match) => ({
    file,
    target: match[2] ?? match[3]!,
    type: match[1] !== undefined,
  }));
}

const all = [...sources("grammar"), ...sources("src"), ...sources("kernel")].flatMap(importsOf);

describe("import direction", () => {
  it("finds imports at all", () => expect(all.length).toBeGreaterThan(100));

  it("points from later rooms of the flow to earlier ones", () => {
    const wrong: string[] = [];
    for (const { file, target, type } of all) {
      if (!target.startsWith(".")) continue;
      const from = roomOf(file);
      const to = roomOf(relative(top, resolve(join(top, dirname(file)), target)));
      const allowed = mayImport[from];
      if (from === to || allowed === undefined) continue;
      if (!allowed.includes(to) || (typesOnly.has(`${from} -> ${to}`) && !type))
        wrong.push(`${file} imports ${target}`);
    }
    expect(wrong).toEqual([]);
  });

  it("enters another room through its door or its types", () => {
    const wrong: string[] = [];
    for (const { file, target } of all) {
      if (!target.startsWith(".")) continue;
      const path = relative(top, resolve(join(top, dirname(file)), target));
      if (roomOf(file) === roomOf(path) || !(roomOf(path) in mayImport)) continue;
      if (!/\/(index|types|ast|domain-error|tasks)\.ts$/.test(`/${path}`)) wrong.push(`${file} imports ${target}`);
    }
    expect(wrong).toEqual([]);
  });

  it("keeps Node modules out of the portable core", () => {
    const nodeOnly = /^(node:|zeromq|@duckdb\/|@resvg\/|pg$|fs$|path$|worker_threads$)/;
    const wrong = all.filter(
      ({ file, target }) => nodeOnly.test(target) && !/^(kernel|src\/cli|src\/data\/node)\//.test(file),
    );
    expect(wrong.map(({ file, target }) => `${file} imports ${target}`)).toEqual([]);
  });

  it("keeps src/data/node out of the portable core", () => {
    const wrong = all.filter(
      ({ file, target }) => /data\/node|\.\/node\//.test(target) && !/^(kernel|src\/cli|src\/data\/node)\//.test(file),
    );
    expect(wrong.map(({ file, target }) => `${file} imports ${target}`)).toEqual([]);
  });
});
