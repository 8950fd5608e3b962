// What `expect` says, and every way in which a plan can be impossible (the list of the issue). Arithmetic worked by hand.
import { describe, expect, it } from "vitest";
import {
  detectableFor,
  type Expectation,
  expectedDesign,
  PlanningError,
  type PlannedDeclaration,
  powerOf,
  sizeFor,
} from "../../src/planning/index.ts";
import { against, allPairs, design, factor, family, options } from "./designs.ts";

const glove = factor("glove", ["bare", "knit", "leather"], "within");
const shift = factor("shift", ["day", "night"], "between");
const declaration: PlannedDeclaration = {
  units: [{ name: "operator", role: "subjects", nestedIn: [], slopes: [] }],
  factors: [glove, shift],
  scale: "linear",
  variances: "equal",
  covariance: null,
};
const byLevel = (factors: string[], ...values: [string, number][]) => ({
  factors,
  values: values.map(([levels, value]) => ({ levels: levels.split(" "), value })),
});
const said: Expectation = {
  means: [byLevel(["glove"], ["bare", 41], ["knit", 46], ["leather", 51])],
  spread: { common: 9, byLevel: null },
  correlation: [0.6],
  dropout: null,
  missing: null,
  shape: null,
  allocation: null,
  cost: null,
};

/** The error of what is not possible. */
async function refused(work: () => unknown): Promise<PlanningError> {
  try {
    await work();
  } catch (error) {
    if (error instanceof PlanningError) return error;
    throw error;
  }
  throw new Error("was not refused");
}

describe("expected means", () => {
  it("of one factor stand in every level of the other", () => {
    expect(expectedDesign(declaration, said).cellMeans).toEqual([41, 41, 46, 46, 51, 51]);
  });
  it("of two factors add up around their common mean", () => {
    const means = [said.means[0]!, byLevel(["shift"], ["day", 44], ["night", 48])];
    expect(expectedDesign(declaration, { ...said, means }).cellMeans).toEqual([39, 43, 44, 48, 49, 53]);
  });
  it("of crossed factors stand as given, in any order of the factors", () => {
    const means = [
      byLevel(
        ["shift", "glove"],
        ["day bare", 1],
        ["night bare", 2],
        ["day knit", 3],
        ["night knit", 4],
        ["night leather", 6],
        ["day leather", 5],
      ),
    ];
    expect(expectedDesign(declaration, { ...said, means }).cellMeans).toEqual([1, 2, 3, 4, 5, 6]);
  });
  it("and spreads by level", () => {
    const spread = { common: null, byLevel: byLevel(["shift"], ["day", 5], ["night", 8]) };
    expect(expectedDesign(declaration, { ...said, spread }).cellSpread).toEqual([5, 8, 5, 8, 5, 8]);
  });
  it("with allocation to one of two between factors", () => {
    const site = factor("site", 2, "between");
    const factors = [shift, site];
    const means = [byLevel(["shift"], ["day", 1], ["night", 2])];
    const allocation = { factor: "shift", shares: [2, 1] };
    const found = expectedDesign({ ...declaration, factors }, { ...said, means, correlation: null, allocation });
    expect(found.allocation).toEqual([2, 2, 1, 1]);
  });
});

describe("an expectation that cannot be", () => {
  const cases: [string, string, Partial<Expectation> | null, RegExp][] = [
    ["nothing expected", "no-expectation", null, /expect/],
    ["no means", "no-expectation", { means: [] }, /expect/],
    ["unknown level", "unknown-level", { means: [byLevel(["glove"], ["silk", 1])] }, /"bare"/],
    ["unknown factor", "unknown-factor", { means: [byLevel(["hand"], ["left", 1])] }, /"glove"/],
    ["a level left out", "incomplete-cells", { means: [byLevel(["glove"], ["bare", 1], ["knit", 2])] }, /every level/],
    ["a level twice", "repeated-cell", { means: [byLevel(["shift"], ["day", 1], ["day", 2])] }, /once/],
    ["no spread", "no-spread", { spread: null }, /spread 9/],
    ["a spread of zero", "no-spread", { spread: { common: 0, byLevel: null } }, /above zero/],
    ["no correlation", "no-correlation", { correlation: null }, /correlation 0.6/],
    ["a correlation of one", "impossible-correlation", { correlation: [1] }, /below 1/],
    ["a common one too low", "impossible-correlation", { correlation: [-0.6] }, /above -0.5 and below 1/],
    ["too few entries", "correlation-count", { correlation: [0.5, 0.5] }, /row by row/],
    ["everyone lost", "share-out-of-range", { dropout: 1 }, /less than 100%/],
    ["shares for no level", "allocation-count", { allocation: { factor: "shift", shares: [1, 2, 3] } }, /each level/],
    ["allocation within", "allocation-count", { allocation: { factor: "glove", shares: [1, 2, 3] } }, /between/],
  ];
  it.each(cases)("%s", async (_, code, change, advice) => {
    const error = await refused(() => expectedDesign(declaration, change === null ? null : { ...said, ...change }));
    expect(error.code).toBe(code);
    expect(error.advice).toMatch(advice);
  });

  it("a pattern of correlations: the answer is the allowed range", async () => {
    // With r21 = 0.9 and r31 = 0.9, r32 must lie above 0.81 - (1 - 0.81) = 0.62 (determinant of a 3 x 3 correlation matrix).
    const error = await refused(() => expectedDesign(declaration, { ...said, correlation: [0.9, 0.9, -0.5] }));
    expect(error.code).toBe("impossible-correlation");
    expect(error.advice).toContain("conditions 3 and 2 between 0.62");
    expect(expectedDesign(declaration, { ...said, correlation: [0.9, 0.9, 0.63] }).correlation).toHaveLength(3);
  });

  it("subjects nested in something larger", async () => {
    const units = [{ name: "animal", role: "subjects" as const, nestedIn: ["herd"], slopes: [] }];
    expect((await refused(() => expectedDesign({ ...declaration, units }, said))).code).toBe("design-not-planned");
  });
});

describe("a plan that cannot be", () => {
  const factors = [factor("a", 3, "between")];
  const planned = design(factors, [0, 0, 1]);
  const aim = { family: family(factors, [against("a", "a1")], "holm") };
  it("power at or below the error", async () => {
    for (const target of [0.05, 0.01, 1]) {
      const error = await refused(() => sizeFor({ design: planned, aim, target, goal: "any" }, options));
      expect(error.code).toBe("power-not-above-error");
    }
  });
  it("a comparison without a difference, by name", async () => {
    for (const goal of ["every", "each"] as const) {
      const error = await refused(() => sizeFor({ design: planned, aim, target: 0.8, goal }, options));
      expect(error.code).toBe("no-difference-expected");
      expect(error.about).toBe(aim.family.contrasts[0]!.name);
    }
    expect(
      (await sizeFor({ design: planned, aim, target: 0.8, goal: "any" }, { ...options, studies: 1000 })).subjects,
    ).toBeGreaterThan(20);
  });
  it("a one-sided claim against the expectation", async () => {
    const wrong = { family: family([factor("a", 2, "between")], [allPairs("a")], "holm", { sides: "lower" }) };
    const two = design([factor("a", 2, "between")], [0, 1]);
    const other = { family: { ...wrong.family, sides: "upper" as const } };
    const codes: string[] = [];
    for (const one of [wrong, other]) {
      try {
        await sizeFor({ design: two, aim: one, target: 0.8, goal: "each" }, options);
        codes.push("sized");
      } catch (error) {
        codes.push((error as PlanningError).code);
      }
    }
    expect(codes.sort()).toEqual(["no-difference-expected", "sized"]);
  });
  it("an omnibus test without any difference", async () => {
    const flat = design(factors, [2, 2, 2]);
    const error = await refused(() =>
      powerOf({ design: flat, aim: { omnibus: { effects: null, error: 0.05 } }, subjects: [30] }, options),
    );
    expect(error.code).toBe("no-difference-expected");
    const named = { omnibus: { effects: [["a"]], error: 0.05 } };
    const size = await refused(() => sizeFor({ design: flat, aim: named, target: 0.8, goal: "omnibus" }, options));
    expect(size.code).toBe("no-difference-expected");
    // Without a difference the test has the power of its error.
    const power = await powerOf({ design: flat, aim: named, subjects: [30] }, options);
    expect(power.points[0]!.power).toBeCloseTo(0.05, 10);
  });
  it("more than a million subjects", async () => {
    const tiny = design(factors, [0, 0.0005, 0.001]);
    const one = { family: family(factors, [against("a", "a1")], "bonferroni") };
    expect((await refused(() => sizeFor({ design: tiny, aim: one, target: 0.8, goal: "each" }, options))).code).toBe(
      "too-many-subjects",
    );
    const omnibus = { omnibus: { effects: null, error: 0.05 } };
    expect(
      (await refused(() => sizeFor({ design: tiny, aim: omnibus, target: 0.8, goal: "omnibus" }, options))).code,
    ).toBe("too-many-subjects");
  });
  it("too few subjects, goals that do not fit, studies that are none", async () => {
    expect((await refused(() => powerOf({ design: planned, aim, subjects: [5] }, options))).code).toBe(
      "too-few-subjects",
    );
    expect((await refused(() => sizeFor({ design: planned, aim, target: 0.8, goal: "omnibus" }, options))).code).toBe(
      "goal-not-for-omnibus",
    );
    expect(
      (await refused(() => powerOf({ design: planned, aim, subjects: [30] }, { ...options, studies: 3 }))).code,
    ).toBe("studies-out-of-range");
    const margin = { family: { ...aim.family, margin: { type: "equivalence" as const, value: 2, better: null } } };
    const question = { design: planned, aim: margin, subjects: 30, target: 0.8, goal: "any" as const };
    expect((await refused(() => detectableFor(question, options))).code).toBe("design-not-planned");
  });
});

describe("sizes and detectable differences", () => {
  const factors = [factor("a", 3, "between")];
  it("one step fewer does not reach the target, also with unequal shares, dropout and cost", async () => {
    const planned = design(factors, [0, 0.5, 1], { allocation: [2, 1, 1], dropout: 0.1, cost: 20 });
    const aim = { family: family(factors, [against("a", "a1")], "dunnett") };
    for (const goal of ["every", "any", "each"] as const) {
      const size = await sizeFor({ design: planned, aim, target: 0.8, goal }, options);
      expect(size.subjects % 4).toBe(0);
      expect(size.subjectsPerGroup).toEqual([size.subjects / 2, size.subjects / 4, size.subjects / 4]);
      expect(size.enrolled).toBe(Math.ceil(size.subjects / 0.9));
      expect(size.cost).toBe(20 * size.enrolled!);
      const { points } = await powerOf({ design: planned, aim, subjects: [size.subjects - 4, size.subjects] }, options);
      const [before, at] = points.map((point) =>
        goal === "each" ? Math.min(...point.comparisons!.map((one) => one.power)) : point[goal]!,
      );
      expect(before).toBeLessThan(0.8);
      expect(at).toBeGreaterThanOrEqual(0.8);
    }
  });
  it("the detectable multiple gives the target's power", async () => {
    const aim = { family: family(factors, [against("a", "a1")], "dunnett") };
    const planned = design(factors, [0, 0.5, 1]);
    const found = await detectableFor({ design: planned, aim, subjects: 60, target: 0.8, goal: "every" }, options);
    const scaled = { ...planned, cellMeans: planned.cellMeans.map((mean) => mean * found.multiple) };
    const { points } = await powerOf({ design: scaled, aim, subjects: [60] }, options);
    expect(points[0]!.every).toBeCloseTo(0.8, 7);
    expect(found.comparisons![1]!.estimate).toBeCloseTo(found.multiple, 12);
  });
});
