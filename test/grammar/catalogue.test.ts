import { describe, expect, it } from "vitest";
import {
  complete,
  helpTopics,
  hover,
  languageWords,
  parseCell,
  referencePage,
  statementsByGroup,
} from "../../grammar/index.ts";
import { rules } from "../../grammar/rules.ts";
import { catalogue } from "../../grammar/statements/index.ts";
import { partsOf, type Syntax } from "../../grammar/syntax.ts";

/** Everything directly or deeply inside a syntax, rules not followed. */
const within = (syntax: Syntax): Syntax[] => [syntax, ...partsOf(syntax).flatMap(within)];
const everySyntax = [
  ...[...catalogue.values()].map(({ syntax }) => syntax),
  ...Object.values(rules).map(({ syntax }) => syntax),
].flatMap(within);

describe.each([...catalogue])("the description of %s", (verb, description) => {
  it("has help, an example that parses to its own kind, and a form", () => {
    expect(description.verb).toBe(verb);
    expect(description.help).toMatch(/^[A-Z].*\.$/);
    const { statements, problems } = parseCell(description.example);
    expect(problems).toEqual([]);
    expect(statements.map(({ kind }) => kind)).toEqual([verb]);
  });
  it("has a line of help for each clause", () => {
    for (const syntax of within(description.syntax)) {
      if (syntax.type !== "clauses") continue;
      for (const option of syntax.options) expect(option.type === "part" ? option.help : "").toMatch(/^[A-Z].*\.$/);
    }
  });
  it("is a topic of help, stands in the reference page, and answers to hover", () => {
    expect(helpTopics().get(verb)?.sections[0]?.lines).toContain(description.help);
    expect(referencePage()).toContain(`### ${verb}\n`);
    expect(referencePage()).toContain(description.example);
    expect(hover(description.example, 1)).toMatchObject({ title: verb, example: description.example });
  });
  it("is offered at the margin", () => {
    expect(complete(verb.slice(0, 2), 2).items).toContainEqual({
      text: verb,
      type: "statement",
      signature: description.help,
    });
  });
});

describe("the catalogue", () => {
  it("names only rules and statements that exist", () => {
    for (const syntax of everySyntax) {
      if (syntax.type === "rule") expect(Object.keys(rules)).toContain(syntax.rule);
      if (syntax.type === "statement") expect([...catalogue.keys()]).toContain(syntax.verb);
    }
  });
  it("puts every statement into one group", () => {
    expect(statementsByGroup().flatMap(({ lines }) => lines)).toHaveLength(catalogue.size);
  });
  it("has every one of its words in the language, and nothing else", () => {
    const words = new Set<string>(catalogue.keys());
    for (const syntax of everySyntax) {
      if (syntax.type === "phrase") for (const { kind, text } of syntax.pieces) if (kind === "word") words.add(text);
    }
    expect(new Set(languageWords)).toEqual(words);
  });
  it("has examples in the general topics that parse", () => {
    for (const { sections } of helpTopics().values()) {
      for (const { example } of sections)
        if (example !== null) expect(parseCell(example).problems, example).toEqual([]);
    }
  });
});

describe("every fixed phrase of an example is offered where it stands", () => {
  // More sentences than the examples, so that every clause comes up.
  const more = [
    "factor f between u: a, b\n  at 1, 2\n  ordered\n  reference a\n  measured",
    "family f: a\n  hold false discovery 5% by bh\n  one-sided lower\n  after any of g\n  not worse by 2\n  margin 2\n  weights a 1\n  pass a to b 1",
    "expect y\n  spread 2\n  correlation 0.2\n  dropout 5%\n  missing 5%\n  shape heavy tails\n  allocation 2:1\n  cost 3 per subject",
    "omnibus by multilevel model degrees by kenward-roger\n  with 99 bootstrap studies\n  seed 3",
    "explore neighbours of f at each g by fixed sequence, beside other methods",
    "calibrate omnibus with 10 studies\n  from data\n  shard 1 of 2",
    'amend drop contrast x\n  because "r"',
    "derive x = if a is not missing and b among 1, 2 then log of a else missing",
    "describe y by f with median and quartiles",
    "set standardiser difference spread",
    "size omnibus for 90% power on any comparison, cost 2 per subject",
  ];
  it.each([...[...catalogue.values()].map(({ example }) => example), ...more])("%s", (text) => {
    for (const match of text.matchAll(/[a-z]+(?:-[a-z]+)*/g)) {
      const word = match[0];
      const inside = (text.slice(0, match.index).split("\n").at(-1)!.match(/"/g) ?? []).length % 2 === 1;
      const title = hover(text, match.index)?.title;
      // Hover tells which phrase a word belongs to; only the beginnings of phrases are looked for.
      if (inside || title === undefined || !title.startsWith(word) || match.index === 0) continue;
      const before = text.slice(0, match.index);
      if (!/[\s:(]$/.test(before) || title.startsWith("factor ") || title.startsWith("level ")) continue;
      expect(
        complete(before, before.length).items.map((item) => item.text),
        `${before}|${title}`,
      ).toContain(title);
    }
  });
});
