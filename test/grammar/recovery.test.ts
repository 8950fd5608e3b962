import { describe, expect, it } from "vitest";
import { parseCell } from "../../grammar/index.ts";
import { catalogue } from "../../grammar/statements/index.ts";
import { lex } from "../../grammar/tokens.ts";
import { expectSoundPlaces } from "./places.ts";

const above = "subjects operator\n";
const below = "\ncompare primary";

/** The neighbours of a broken statement are read as if it were whole, and every problem stands inside it. */
function expectNeighbours(broken: string): void {
  const text = `${above}${broken}${below}`;
  const found = parseCell(text);
  expectSoundPlaces(text, found);
  const kinds = found.statements.map(({ kind }) => kind);
  expect(kinds[0]).toBe("subjects");
  expect(kinds.at(-1)).toBe("compare");
  for (const { span } of found.problems) {
    expect(span.start).toBeGreaterThanOrEqual(above.length);
    expect(span.end).toBeLessThanOrEqual(above.length + broken.length);
  }
  expect(found.problems.length > 0 || kinds.length > 2 || broken.trim() === "").toBe(true);
}

describe.each([...catalogue])("a mistake in %s leaves its neighbours alone", (_, { example }) => {
  const { tokens } = lex(example, 0);
  const at = (index: number) => tokens[index]!.startOffset;
  const end = (index: number) => at(index) + tokens[index]!.image.length;
  const places = tokens.map((_token, index) => index);

  it("a token inserted", () => {
    for (const index of places) {
      for (const extra of [" , ", " ) ", ' "x" ', " hold "]) {
        expectNeighbours(example.slice(0, end(index)) + extra + example.slice(end(index)));
      }
    }
  });
  it("a token deleted", () => {
    for (const index of places.slice(1)) expectNeighbours(example.slice(0, at(index)) + example.slice(end(index)));
  });
  it("a token replaced", () => {
    for (const index of places) {
      for (const other of ["xyzzy", "3.5", "(", "at"]) {
        expectNeighbours(example.slice(0, at(index)) + other + example.slice(end(index)));
      }
    }
  });
  it("the rest cut off", () => {
    for (const index of places) expectNeighbours(example.slice(0, end(index)));
  });
});
