import { readdirSync, readFileSync } from "node:fs";
import { join } from "node:path";
import { fileURLToPath } from "node:url";
import { describe, expect, it } from "vitest";
import { corrections, familyNotes } from "../../src/families/index.ts";
import { noteCodes, noteText, references } from "../../src/present/index.ts";
import { correctionReferences } from "../../src/present/references.ts";
import { reportReferenceKeys } from "../../src/present/report/methods.ts";
import { correctionCodes } from "../../src/present/sentences/words.ts";

const source = fileURLToPath(new URL("../../src/", import.meta.url));
const files = (readdirSync(source, { recursive: true }) as string[])
  .filter((name) => name.endsWith(".ts"))
  .map((name) => ({ name, text: readFileSync(join(source, name), "utf8") }));

/** Codes of notes, wherever an object literal gives a code and then facts. */
const used = files
  .filter(({ name }) => !name.startsWith("present"))
  .flatMap(({ name, text }) =>
    [...text.matchAll(/code:\s*"([a-z-]+)",\s*facts:/g)].map((found) => ({ name, code: found[1]! })),
  );

describe("notes", () => {
  it("are found in the other rooms at all", () => expect(used.length).toBeGreaterThan(30));

  it("have a sentence of their own, every code that another room gives", () => {
    // Messages are sentences of another list (src/present/tables/record.ts).
    const messages = new Set(["declared", "unchanged", "replaced", "set"]);
    const missing = used.filter(({ code }) => !noteCodes.includes(code) && !messages.has(code));
    expect(missing).toEqual([]);
    for (const code of Object.keys(familyNotes)) expect(noteCodes).toContain(code);
  });

  it("stay readable when a code is unknown: its words, with its facts", () => {
    expect(noteText({ code: "new-kind-of-note", facts: { unit: "herd", count: 3, names: ["a", "b"] } })).toBe(
      "New kind of note (unit: herd; count: 3; names: a and b).",
    );
    expect(noteText({ code: "plain", facts: {} })).toBe("Plain.");
  });

  it("are whole sentences whatever facts come, also none", () => {
    for (const code of noteCodes) {
      const facts = new Proxy({}, { get: () => undefined }) as never;
      let text: string;
      try {
        text = noteText({ code, facts });
      } catch {
        // A sentence may need a list; then the list must be what it asks for.
        text = noteText({ code, facts: new Proxy({}, { get: () => ["a", "b"] }) as never });
      }
      expect(text, code).toMatch(/^["A-Z\d\u2013 ].*[\w.)"]$/s);
    }
  });
});

describe("references", () => {
  it("hold every key that a method names in its documentation or in its list of sources", () => {
    const keys = new Set(
      files.flatMap(({ text }) =>
        [...text.matchAll(/(?<![\w-])([a-z]+(?:-[a-z]+)*-(?:18|19|20)\d\d[a-z]?)(?![\w-])/g)].map((found) => found[1]!),
      ),
    );
    expect([...keys].filter((key) => references[key] === undefined)).toEqual([]);
    expect(keys.size).toBeGreaterThan(50);
  });

  it("are those of the families for each correction, which also has words of its own", () => {
    for (const [name, correction] of Object.entries(corrections)) {
      expect(correctionReferences[name], name).toEqual(correction.source);
      expect(correctionCodes).toContain(name);
    }
    expect(Object.keys(correctionReferences).sort()).toEqual(Object.keys(corrections).sort());
  });

  it("print an author, a year and a full stop each", () => {
    for (const key of [...Object.keys(references), ...reportReferenceKeys()]) {
      const year = /-(\d{4})[a-z]?$/.exec(key)![1]!;
      expect(references[key], key).toMatch(new RegExp(`^\\S.*\\(${year}\\)\\. .+\\.$`));
    }
  });
});
