import { describe, expect, it } from "vitest";
import { complete, hover, isComplete, type Known } from "../../grammar/index.ts";

const known: Known = {
  response: "seconds",
  units: ["operator"],
  factors: ["glove", "shift"],
  levels: { glove: ["bare", "dark roast"], shift: ["day", "none"] },
  contrasts: ["gloved"],
  families: ["primary", "after"],
  columns: ["trial", "Op No."],
  methods: { holm: "Step-down, any dependence.", "single-step": "Joint." },
  files: ["assembly.csv"],
  plans: ["glove"],
  topics: ["members"],
  declarations: { glove: "factor glove within operator: bare, dark roast", primary: "family primary: gloved" },
};

/** `|` marks the cursor. */
function at(marked: string, others: Known = known) {
  const offset = marked.indexOf("|");
  const text = marked.replace("|", "");
  const { items, start, end } = complete(text, offset, others);
  return { items: items.map((item) => item.text), replaced: text.slice(start, end), details: items };
}

describe("completion", () => {
  it.each([
    ["fac|", ["factor"], "fac"],
    ["check\n|", ["study", "compare"], ""],
    ["compare |", ["primary", '"after"'], ""],
    ["compare pri|", ["primary"], "pri"],
    ["compare primary b|", ["beside other methods"], "b"],
    ["family p: each |", ["glove", "shift"], ""],
    ["family p: each glove against |", ["mean", "bare", '"dark roast"'], ""],
    ["family p: each glove against d|", ['"dark roast"'], "d"],
    ['family p: each glove against "d|"', ['"dark roast"'], '"d"'],
    ["family p: gl|", ["gloved"], "gl"],
    ["family p: gloved\n  |", ["hold", "one-sided", "after", "margin", "not worse by", "weights", "pass"], ""],
    ["family p: gloved\n  hold error 5% by si|", ["sidak", "single-step"], "si"],
    ["family p: gloved\n  hold error 5% by single-|", ["step"], ""],
    ["family p: gloved\n  hold |", ["error", "false discovery"], ""],
    ["family p: a at |", ["each", "bare", "day", '"none"'], ""],
    ["contrast g: (|", ["mean", "bare", "day"], ""],
    ['read "|', ['"assembly.csv"'], '"'],
    ['read "as|sem', ['"assembly.csv"'], '"as'],
    ['open plan "g|"', ['"glove"'], '"g"'],
    ["describe seconds by gl|ove, shift", ["glove"], "glove"],
    ["exclude where |", ["trial", '"Op No."', "not", "if", "log"], ""],
    ["factor f within |", ["operator"], ""],
    ["help hol|", ["holm"], "hol"],
    ["amend |", ["drop", "family", "contrast"], ""],
    // Broken further up, or not begun well: the clause is still known.
    ["family p gloved ((\n  hold error 5% by holm\n  after |", ["any of", "primary"], ""],
    ["factor f within operator: a, b\n  or|\n  reference a", ["ordered"], "or"],
  ] as const)("%s", (text, wanted, replaced) => {
    const found = at(text);
    expect(found.items).toEqual(expect.arrayContaining([...wanted]));
    expect(found.replaced).toBe(replaced);
  });

  it.each(["# a comm|", "data\n  a b\n  |", "nonsense |", 'study "x |'])("offers nothing at %s", (text) => {
    expect(at(text).items).toEqual([]);
  });

  it("offers what is typed so far only", () => {
    expect(at("compare x|").items).toEqual([]);
    expect(at("family p: each glove against |").items).not.toContain("day");
  });

  it("says what each is", () => {
    expect(at("compare pri|").details).toEqual([
      { text: "primary", type: "family", signature: "family primary: gloved" },
    ]);
    expect(at("explore gloved by hol|").details[0]!.signature).toBe("Step-down, any dependence.");
  });

  it("works without anything declared and anywhere in a text", () => {
    const text = 'factor f within u: a, "b c\n  ordered\ncompare';
    for (let offset = 0; offset <= text.length; offset++) complete(text, offset);
    expect(at("compare |", {}).items).toEqual([]);
  });
});

describe("hover", () => {
  const over = (marked: string) => hover(marked.replace("|", ""), marked.indexOf("|"), known);
  it("explains verbs, clauses, corrections and declared names", () => {
    expect(over("com|pare primary")).toMatchObject({ title: "compare", example: "compare primary" });
    expect(over("family p: a\n  one-si|ded upper")!.lines[0]).toMatch(/claim/);
    expect(over("family p: a\n  hold error 5% by ho|lm")).toMatchObject({
      title: "holm",
      lines: ["Step-down, any dependence."],
    });
    expect(over("describe seconds by glo|ve")).toMatchObject({
      title: "factor glove",
      lines: [known.declarations!.glove],
    });
    expect(over("family p: each glove against ba|re")).toMatchObject({
      title: "level bare",
      lines: ["level of glove"],
    });
    expect(over("compare primary|")).toMatchObject({ title: "family primary", span: { start: 8, end: 15 } });
  });
  it("is silent where there is nothing to say", () => {
    for (const text of ["|", "# com|ment", "compare unkn|own", "  |x", "check\n\n|"]) expect(over(text)).toBeNull();
  });
});

describe("isComplete", () => {
  it.each([
    ["", "complete"],
    ["# only a comment", "complete"],
    ["compare primary", "complete"],
    ["factor x within y: a, b", "complete"],
    ["factor x within y: a,", "incomplete"],
    ["factor x within y: a, b\n  ordered", "incomplete"],
    ["factor x within y: a, b\n  ordered\n", "complete"],
    ["family p: a", "incomplete"],
    ["family p: a\n  hold error 5% by holm\n", "complete"],
    ["contrast g: mean(a,", "incomplete"],
    ["compare", "incomplete"],
    ["exclude where a = 1", "incomplete"],
    ["data", "incomplete"],
    ["data\n  a b\n  1 2\n", "complete"],
    ["compare\n", "invalid"],
    ["comparr x", "invalid"],
    ["comparr x\ncheck", "invalid"],
    ['read "x', "invalid"],
  ])("%j is %s", (text, status) => {
    expect(isComplete(text)).toEqual({ status, indent: status === "incomplete" ? "  " : "" });
  });
});
