import { readFileSync } from "node:fs";
import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { classifyTokens, codeMirror5Mode, codeMirror6Mode } from "../../grammar/index.ts";
import { catalogue } from "../../grammar/statements/index.ts";
import { randomFrom, statementText, verbsWithSyntax } from "./sentences.ts";

interface Stream {
  pos: number;
  sol(): boolean;
  match(pattern: RegExp): RegExpMatchArray | null;
}
interface Mode {
  token(stream: Stream): string | null;
}

/** The editor's stream over one line, as both of its generations give it to a mode. */
function streamOver(line: string): Stream {
  const stream: Stream = {
    pos: 0,
    sol: () => stream.pos === 0,
    match(pattern) {
      const found = line.slice(stream.pos).match(pattern);
      if (found === null || found.index !== 0) return null;
      stream.pos += found[0].length;
      return found;
    },
  };
  return stream;
}

function tokensOf(mode: Mode, text: string): { start: number; end: number; kind: string }[] {
  const found: { start: number; end: number; kind: string }[] = [];
  let offset = 0;
  for (const line of text.split("\n")) {
    const stream = streamOver(line);
    while (stream.pos < line.length) {
      const start = stream.pos;
      const kind = mode.token(stream);
      expect(stream.pos).toBeGreaterThan(start);
      if (kind !== null) found.push({ start: offset + start, end: offset + stream.pos, kind });
    }
    offset += line.length + 1;
  }
  return found;
}

const modes: Record<string, Mode> = {};
{
  const box: { exports: (editor: unknown) => void } = { exports: () => {} };
  new Function("module", codeMirror5Mode())(box);
  box.exports({
    defineMode: (name: string, make: () => Mode) => {
      modes[`version 5, ${name}`] = make();
    },
    defineMIME: () => {},
  });
  modes["version 6, meanwise"] = new Function(
    `${codeMirror6Mode().replace("export const meanwise =", "return")}`,
  )() as Mode;
}

const editorNames: Record<string, string> = {
  verb: "keyword",
  method: "builtin",
  word: "atom",
  name: "variable",
  number: "number",
  string: "string",
  comment: "comment",
  mark: "operator",
  wrong: "error",
};

/** Neighbouring wrong characters may be cut differently; everything else must agree to the character. */
const comparable = (tokens: readonly { start: number; end: number; kind: string }[]) =>
  tokens.reduce<{ start: number; end: number; kind: string }[]>((joined, token) => {
    const last = joined.at(-1);
    if (last?.kind === "error" && token.kind === "error" && last.end === token.start) last.end = token.end;
    else joined.push({ ...token });
    return joined;
  }, []);

function expectAgreement(mode: Mode, text: string): void {
  const real = classifyTokens(text).map(({ start, end, kind }) => ({ start, end, kind: editorNames[kind]! }));
  expect(comparable(tokensOf(mode, text)), text).toEqual(comparable(real));
}

describe.each(["version 5, meanwise", "version 6, meanwise"])(
  "the mode for the editor's %s agrees with the lexer",
  (name) => {
    it("on every example and notebook", () => {
      for (const { example } of catalogue.values()) expectAgreement(modes[name]!, example);
      for (const file of ["glove-plan", "glove-analysis"]) {
        expectAgreement(modes[name]!, readFileSync(`notebooks/${file}.mwise`, "utf8"));
      }
    });
    it("on random statements", () => {
      fc.assert(
        fc.property(fc.nat(), (seed) => {
          const random = randomFrom(seed);
          expectAgreement(
            modes[name]!,
            statementText(verbsWithSyntax[random(verbsWithSyntax.length)]!, random).slice(0, 1000),
          );
        }),
        { numRuns: 500 },
      );
    });
    it("on texts of any printable characters", () => {
      const character = fc.constantFrom(..."ab_é日😀019.%eE+-*/^=<>!≠:,()\"'#@“” \t\n\u0301\u00a0");
      fc.assert(
        fc.property(fc.string({ unit: character, maxLength: 40 }), (text) => expectAgreement(modes[name]!, text)),
        { numRuns: 3000 },
      );
    });
  },
);

it("verbs count only at the margin", () => {
  expect(classifyTokens("compare compare\n  compare").map(({ kind }) => kind)).toEqual(["verb", "word", "word"]);
});
