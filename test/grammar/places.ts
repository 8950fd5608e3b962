import { expect } from "vitest";
import { type ParsedCell, type Problem, parseCell, type Statement } from "../../grammar/index.ts";

/** The same value without places, for comparing what two texts mean. */
export function withoutSpans<T>(value: T): unknown {
  if (Array.isArray(value)) return value.map(withoutSpans);
  if (typeof value !== "object" || value === null) return value;
  return Object.fromEntries(
    Object.entries(value)
      .filter(([key]) => key !== "span")
      .map(([key, inner]) => [key, withoutSpans(inner)]),
  );
}

/** The only statement of a text that has no mistakes. */
export function only(text: string): Statement {
  const { statements, problems } = parseCell(text);
  expect(problems, text).toEqual([]);
  expect(statements).toHaveLength(1);
  return statements[0]!;
}

/** Takes `<|` and `|>` out of a text and gives the place they marked. */
export function marked(text: string): { text: string; start: number; end: number } {
  const start = text.indexOf("<|");
  const end = text.indexOf("|>") - 2;
  return { text: text.replace("<|", "").replace("|>", ""), start, end };
}

/** The first problem of a marked text stands where the marks are. */
export function expectProblem(
  markedText: string,
  wanted: { code: string; message?: string; advice?: string },
): Problem {
  const { text, start, end } = marked(markedText);
  const { problems } = parseCell(text);
  expect(problems.length, `${text} has a problem`).toBeGreaterThan(0);
  const found = problems[0]!;
  expect(found).toMatchObject(wanted);
  expect([found.span.start, found.span.end]).toEqual([start, end]);
  return found;
}

/** Every place lies in the text, and its line and column say the same as its offset. */
export function expectSoundPlaces(text: string, { problems, statements, comments }: ParsedCell): void {
  for (const { span } of [...problems, ...statements, ...comments]) {
    expect(span.start).toBeGreaterThanOrEqual(0);
    expect(span.end).toBeGreaterThanOrEqual(span.start);
    expect(span.end).toBeLessThanOrEqual(text.length);
    const before = text
      .slice(0, span.start)
      .replace(/^\ufeff/, "")
      .split(/\r\n|\n|\r/);
    expect([span.line, span.column]).toEqual([before.length, [...before.at(-1)!].length + 1]);
  }
}
