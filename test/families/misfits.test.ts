import { describe, expect, it } from "vitest";
import {
  type CorrectionName,
  FamilyProblemError,
  type FamilyProblem,
  holdFamily,
  misfits,
  misfitWords,
} from "../../src/families/index.ts";
import { problemOf } from "./problems.ts";

/** The error that a family gets, checked to have words that read as sentences. */
function answerOf(
  name: CorrectionName,
  fields: Parameters<typeof problemOf>[0],
): { code: string; fitting: readonly string[] } {
  try {
    holdFamily(name, problemOf(fields));
  } catch (error) {
    if (!(error instanceof FamilyProblemError)) throw error;
    for (const text of [error.message, error.advice]) {
      expect(text).toMatch(/[.]$/);
      expect(text).not.toMatch(/undefined|NaN|\[object/);
    }
    return { code: error.code, fitting: error.misfit.fitting };
  }
  return { code: "fits", fitting: [] };
}
const codeOf = (name: CorrectionName, fields: Parameters<typeof problemOf>[0]) => answerOf(name, fields).code;
const shape = (kind: FamilyProblem["shape"]["kind"], more: Partial<FamilyProblem["shape"]> = {}) => ({
  kind,
  means: 4,
  repeated: false,
  within: false,
  ...more,
});
const estimates = [1, 2, 3];

describe("families that no method can hold", () => {
  it("no member", () => expect(codeOf("holm", { estimates: [] })).toBe("empty-family"));
  it("one name twice", () => expect(codeOf("holm", { estimates, names: ["a", "b", "a"] })).toBe("duplicate-members"));
  it("one comparison under two names, also with its sign turned or scaled", () => {
    const weights = (second: number[]) => [[1, -1, 0], second, [0, 1, -1]];
    expect(codeOf("holm", { estimates, weights: weights([1, -1, 0]) })).toBe("duplicate-members");
    expect(codeOf("holm", { estimates, weights: weights([-1, 1, 0]) })).toBe("duplicate-members");
    expect(codeOf("holm", { estimates, weights: weights([0.5, -0.5, 0]) })).toBe("duplicate-members");
    expect(codeOf("holm", { estimates, weights: weights([1, 0, -1]) })).toBe("fits");
    // Up and down are two claims.
    expect(codeOf("holm", { estimates, sides: "upper", weights: weights([-1, 1, 0]) })).toBe("fits");
  });
  it("not worse without a direction", () => {
    const margin = { type: "not worse", value: 1, better: null } as const;
    expect(codeOf("holm", { estimates, p: [0.1, 0.2, 0.3], margin })).toBe("margin-needs-direction");
  });
  it("a family of one is held, and said to be one", () => {
    const answer = holdFamily("holm", problemOf({ estimates: [2.5] }));
    expect(answer.notes.map(({ code }) => code)).toContain("family-of-one");
    expect(answer.adjustedP).toEqual(answer.p);
  });
});

describe("methods that do not fit their members", () => {
  const correlation = [
    [1, 0.5, 0.5],
    [0.5, 1, 0.5],
    [0.5, 0.5, 1],
  ];
  it("tukey and games-howell want all pairs", () => {
    for (const name of ["tukey", "games-howell"] as const) {
      const { code, fitting } = answerOf(name, { estimates, correlation, commonDf: 20, shape: shape("against one") });
      expect(code).toBe("not-all-pairs");
      expect(fitting).toEqual(expect.arrayContaining(["holm", "dunnett", "single-step", "step-down"]));
      expect(fitting).not.toContain("none");
      expect(fitting).not.toContain("bh");
    }
    expect(codeOf("tukey", { estimates, commonDf: 20, shape: shape("all pairs", { means: 3, repeated: true }) })).toBe(
      "not-all-pairs",
    );
  });
  it("dunnett wants each against one", () =>
    expect(codeOf("dunnett", { estimates, correlation, commonDf: 20, shape: shape("all pairs", { means: 3 }) })).toBe(
      "not-against-one",
    ));
  it("within subjects without a common error, single-step, step-down, holm and resampling are offered", () => {
    const resamples = { count: 100, exact: false, fill: () => undefined };
    const within = { estimates, correlation, commonDf: null, resamples };
    for (const [name, kind, means] of [
      ["tukey", "all pairs", 3],
      ["dunnett", "against one", 4],
    ] as const) {
      const { code, fitting } = answerOf(name, { ...within, shape: shape(kind, { means, within: true }) });
      expect(code).toBe("within-needs-common-error");
      expect(fitting).toEqual(expect.arrayContaining(["single-step", "step-down", "holm", "resampling"]));
      expect(fitting).not.toContain("games-howell");
    }
    expect(codeOf("games-howell", { ...within, shape: shape("all pairs", { means: 3, within: true }) })).toBe(
      "within-subjects",
    );
  });
  it("unequal variances want games-howell, equal ones tukey", () => {
    const pairs = { estimates, correlation, shape: shape("all pairs", { means: 3 }) };
    const unequal = answerOf("tukey", { ...pairs, commonDf: null });
    expect(unequal.code).toBe("between-needs-common-error");
    expect(unequal.fitting).toContain("games-howell");
    const equal = answerOf("games-howell", { ...pairs, commonDf: 20 });
    expect(equal.code).toBe("needs-own-errors");
    expect(equal.fitting).toContain("tukey");
  });
  it("one-sided claims and margins", () => {
    const pairs = { estimates, correlation, commonDf: 20, shape: shape("all pairs", { means: 3 }) };
    for (const name of ["tukey", "scheffe", "sidak", "shaffer"] as const)
      expect(
        codeOf(name, {
          ...pairs,
          sides: "upper",
          weights: [
            [1, -1, 0],
            [1, 0, -1],
            [0, 1, -1],
          ],
        }),
      ).toBe("two-sided-only");
    const margin = { type: "equivalence", value: 2, better: null } as const;
    expect(codeOf("tukey", { ...pairs, margin })).toBe("no-margin");
    expect(codeOf("resampling", { ...pairs, margin })).toBe("no-margin");
    expect(codeOf("scheffe", { ...pairs, margin: { type: "not worse", value: 2, better: "higher" } })).toBe("no-shift");
    const six = {
      estimates: [1, 2, 3, 4, 5, 6],
      correlation: [1, 2, 3, 4, 5, 6].map((i) => [1, 2, 3, 4, 5, 6].map((j) => (i === j ? 1 : 0.2))),
    };
    expect(codeOf("single-step", { ...six, commonDf: 20, margin })).toBe("margin-too-many");
  });
  it("missing pieces", () => {
    expect(codeOf("single-step", { estimates })).toBe("no-correlation");
    expect(codeOf("shaffer", { estimates })).toBe("no-contrast-weights");
    expect(codeOf("resampling", { estimates })).toBe("no-resamples");
    for (const name of ["dunn", "conover", "nemenyi"] as const) expect(codeOf(name, { estimates })).toBe("needs-ranks");
    expect(codeOf("dunn", { estimates, ranks: true })).toBe("fits");
  });
  it("relations too many to enumerate: all pairs of 11 means are 678,570 sets (Bell number, recalled)", () => {
    const weights: number[][] = [];
    for (let i = 0; i < 11; i++)
      for (let j = i + 1; j < 11; j++)
        weights.push(Array.from({ length: 11 }, (_, k) => (k === i ? 1 : k === j ? -1 : 0)));
    expect(codeOf("shaffer", { estimates: weights.map((_, i) => i), weights })).toBe("too-many-relations");
  });
});

describe("shares that cannot be", () => {
  const passes = [
    [0, 0.5, 0.5],
    [1, 0, 0],
    [0, 0, 0],
  ];
  const weights = [0.5, 0.5, 0];
  const code = (graph: FamilyProblem["graph"]) => codeOf("graph", { estimates, graph });
  it("each has its own answer", () => {
    expect(code({ weights, passes })).toBe("fits");
    expect(code(null)).toBe("no-weights");
    expect(code({ weights: [0.5, 0.5], passes })).toBe("weights-count");
    expect(code({ weights: [0.5, 0.25, 0], passes })).toBe("weights-not-one");
    expect(code({ weights: [1.5, -0.5, 0], passes })).toBe("weight-outside");
    expect(code({ weights, passes: passes.slice(1) })).toBe("passes-count");
    expect(
      code({
        weights,
        passes: [
          [0.1, 0.4, 0.5],
          [1, 0, 0],
          [0, 0, 0],
        ],
      }),
    ).toBe("pass-to-itself");
    expect(
      code({
        weights,
        passes: [
          [0, 0.6, 0.5],
          [1, 0, 0],
          [0, 0, 0],
        ],
      }),
    ).toBe("passes-over-one");
    expect(
      code({
        weights,
        passes: [
          [0, -0.5, 0.5],
          [1, 0, 0],
          [0, 0, 0],
        ],
      }),
    ).toBe("pass-outside");
    expect(codeOf("fallback", { estimates, graph: { weights: [0.5, 0.2, 0.2], passes: [] } })).toBe("weights-not-one");
  });
  it("thirds written with twelve digits are thirds", () =>
    expect(code({ weights: [0.333333333333, 0.333333333333, 0.333333333334], passes })).toBe("fits"));
});

describe("the list of misfits", () => {
  it("has words for every code that read as sentences with no facts missing", () => {
    const facts = {
      method: "holm",
      first: "a",
      second: "b",
      comparisons: 3,
      most: 5,
      weights: 2,
      comparison: "a",
      value: 2,
      sum: 0.9,
      from: "a",
      to: "b",
      family: "f",
      after: "g",
      circle: ["f", "g", "f"],
      error: 0.05,
      otherError: 0.01,
    };
    for (const code of Object.keys(misfits)) {
      const { message, advice } = misfitWords({ code, facts, fitting: ["holm", "bonferroni"] });
      for (const text of [message, advice]) expect(text).toMatch(/^["A-Za-z].*[.]$/);
      expect(`${message} ${advice}`).not.toMatch(/undefined|NaN|\[object/);
    }
  });
});
