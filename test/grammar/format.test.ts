import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { formatCell, formatStatement, parseCell } from "../../grammar/index.ts";
import { catalogue } from "../../grammar/statements/index.ts";
import { only, withoutSpans } from "./places.ts";
import { randomFrom, statementText, verbsWithSyntax } from "./sentences.ts";

/** What a random sentence may get wrong although its words stand in a right order. */
const meaning = new Set([
  "number-range",
  "said-twice",
  "levels-per-value",
  "value-expected",
  "condition-expected",
  "nested-too-deeply",
]);

describe("the formatter", () => {
  it.each([...catalogue])("settles the example of %s and keeps its meaning", (_, { example }) => {
    const statement = only(example);
    const settled = formatStatement(statement);
    expect(withoutSpans(only(settled))).toEqual(withoutSpans(statement));
    expect(formatStatement(only(settled))).toBe(settled);
  });

  it("gives back every statement that the syntax can make", () => {
    const counted = new Map<string, number>();
    fc.assert(
      fc.property(fc.nat(), (seed) => {
        const random = randomFrom(seed);
        const verb = verbsWithSyntax[random(verbsWithSyntax.length)]!;
        const text = statementText(verb, random);
        if (text.length > 2000) return;
        const { problems, statements } = parseCell(text);
        if (problems.length > 0) {
          // The build of `expect` asks for a comma where a number of digits could also be a level.
          const excused = (code: string) => meaning.has(code) || (code === "missing-comma" && text.includes("expect "));
          expect(
            problems.map(({ code }) => code).filter((code) => !excused(code)),
            text,
          ).toEqual([]);
          return;
        }
        const settled = formatStatement(statements[0]!);
        const again = parseCell(settled);
        expect(again.problems, settled).toEqual([]);
        expect(withoutSpans(again.statements), settled).toEqual(withoutSpans(statements));
        expect(formatStatement(again.statements[0]!)).toBe(settled);
        counted.set(verb, (counted.get(verb) ?? 0) + 1);
      }),
      { numRuns: 5000 },
    );
    // The property is not empty: every verb came through whole, many times.
    for (const verb of verbsWithSyntax) expect(counted.get(verb) ?? 0, verb).toBeGreaterThan(20);
  });

  it("keeps comments and blank lines, and settles a cell once and for all", () => {
    const text = `# head

subjects   operator # who


factor f   within operator: a,b # levels
  # how they lie
  at 1,2
  ordered # in order
# tail
compar x # broken
data
  a   b
  # in rows
  10 "x y"   # first
  2 ""
`;
    const settled = formatCell(text);
    expect(settled).toBe(`# head

subjects operator # who

factor f within operator: a, b # levels
  # how they lie
  at 1, 2
  ordered # in order
# tail
compar x # broken
data
  a  b
  # in rows
  10 "x y" # first
  2  ""
`);
    expect(formatCell(settled)).toBe(settled);
  });

  it("loses no comment, whatever stands around it", () => {
    fc.assert(
      fc.property(fc.array(fc.nat(), { minLength: 1, maxLength: 5 }), (seeds) => {
        const text = seeds
          .map((seed, index) => {
            const random = randomFrom(seed);
            const statement = statementText(verbsWithSyntax[random(verbsWithSyntax.length)]!, random);
            if (statement.length > 500) return "check";
            const lines = statement.split("\n").map((line, at) => `${line} # ${index}.${at}`);
            return lines
              .flatMap((line, at) => (random(3) === 0 ? [line, `  # own ${index}.${at}`] : [line]))
              .join("\n");
          })
          .join("\n");
        const comments = (cell: string) =>
          parseCell(cell)
            .comments.map((comment) => comment.text)
            .sort();
        const settled = formatCell(text);
        expect(comments(settled)).toEqual(comments(text));
        expect(withoutSpans(parseCell(settled).statements)).toEqual(withoutSpans(parseCell(text).statements));
      }),
      { numRuns: 500 },
    );
  });
});
