import fc from "fast-check";
import { describe, expect, it } from "vitest";
import {
  type ContrastExpression,
  contrastWeights,
  DesignError,
  type FactorDeclaration,
  monicOrthogonalPolynomial,
  spellMembers,
} from "../../src/design/index.ts";

const factor = (name: string, levels: string[], positions: number[] | null = null): FactorDeclaration => ({
  name,
  levels,
  varies: "between",
  unit: "operator",
  betweenUnit: null,
  ordered: false,
  positions,
  reference: null,
  measured: false,
});
const glove = factor("glove", ["bare", "nitrile", "knit", "leather"]);
const shift = factor("shift", ["day", "night"]);
const level = (name: string): ContrastExpression => ({ type: "level", level: name, factor: null });
const minus = (left: ContrastExpression, right: ContrastExpression): ContrastExpression => ({
  type: "arithmetic",
  operator: "-",
  left,
  right,
});
const at = (operand: ContrastExpression, ...levels: string[]): ContrastExpression => ({
  type: "at",
  operand,
  at: levels.map((name) => ({ level: name, factor: null })),
});

function codeOf(action: () => unknown): string {
  try {
    action();
  } catch (error) {
    if (error instanceof DesignError) return error.code;
    throw error;
  }
  return "no error";
}

describe("contrast weights", () => {
  it("weigh cells of the other factors equally", () => {
    const { weights } = contrastWeights([glove, shift], "x", minus(level("leather"), level("bare")));
    expect([...weights]).toEqual([-0.5, -0.5, 0, 0, 0, 0, 0.5, 0.5]);
  });
  it("take a mean over levels", () => {
    const mean: ContrastExpression = { type: "mean", of: [level("nitrile"), level("knit"), level("leather")] };
    const { weights } = contrastWeights([glove], "gloved", minus(mean, level("bare")));
    expect(weights[0]).toBeCloseTo(-1, 15);
    expect(weights[1]).toBeCloseTo(1 / 3, 15);
    expect(Math.abs(weights.reduce((sum, weight) => sum + weight, 0))).toBeLessThan(1e-15);
  });
  it("hold levels after at, and difference them", () => {
    const gap = minus(
      at(minus(level("leather"), level("bare")), "night"),
      at(minus(level("leather"), level("bare")), "day"),
    );
    expect([...contrastWeights([glove, shift], "gap", gap).weights]).toEqual([1, -1, 0, 0, 0, 0, -1, 1]);
  });
  it("say by how much weights miss zero", () => {
    expect(() => contrastWeights([glove], "x", level("bare"))).toThrow(/sum to 1, not to 0/);
    expect(codeOf(() => contrastWeights([glove], "x", level("bare")))).toBe("weights-not-zero");
  });
  it("refuse products of means, empty contrasts, unknown and doubtful levels", () => {
    const product: ContrastExpression = {
      type: "arithmetic",
      operator: "*",
      left: level("bare"),
      right: level("knit"),
    };
    expect(codeOf(() => contrastWeights([glove], "x", product))).toBe("contrast-not-linear");
    expect(codeOf(() => contrastWeights([glove], "x", minus(level("bare"), level("bare"))))).toBe("contrast-empty");
    expect(codeOf(() => contrastWeights([glove], "x", minus(level("suede"), level("bare"))))).toBe("unknown-level");
    const twin = factor("liner", ["bare", "cotton"]);
    expect(codeOf(() => contrastWeights([glove, twin], "x", minus(level("knit"), level("bare"))))).toBe(
      "ambiguous-level",
    );
  });
});

describe("members", () => {
  const none = new Map<string, ContrastExpression>();
  it("spell out all pairs as later minus earlier", () => {
    const family = spellMembers([glove], [{ type: "all pairs", factor: "glove", at: [] }], none);
    expect(family.contrasts.map((contrast) => contrast.name)).toEqual([
      "nitrile - bare",
      "knit - bare",
      "leather - bare",
      "knit - nitrile",
      "leather - nitrile",
      "leather - knit",
    ]);
    expect(family.shape).toEqual({ kind: "all pairs", factor: "glove", means: 4, repeated: false });
  });
  it("repeat at each level and say so", () => {
    const family = spellMembers(
      [glove, shift],
      [{ type: "each against level", factor: "glove", level: "bare", at: [{ each: "shift" }] }],
      none,
    );
    expect(family.contrasts).toHaveLength(6);
    expect(family.contrasts[0]!.name).toBe("nitrile - bare at day");
    expect(family.shape.repeated).toBe(true);
  });
  it("refuse empty families and duplicates under two names", () => {
    expect(codeOf(() => spellMembers([glove], [], none))).toBe("empty-family");
    const declared = new Map([["gap", minus(level("nitrile"), level("bare"))]]);
    expect(
      codeOf(() =>
        spellMembers(
          [glove],
          [
            { type: "contrast", name: "gap", at: [] },
            { type: "each against level", factor: "glove", level: "bare", at: [] },
          ],
          declared,
        ),
      ),
    ).toBe("duplicate-member");
  });
  it("give a linear trend that is the least-squares slope per unit of position", () => {
    // Source: ordinary least squares slope sum((x - mean)(y - mean)) / sum((x - mean)^2); common practice.
    const positions = [0, 10, 40, 100];
    const dose = factor("dose", ["none", "low", "mid", "high"], positions);
    const { contrasts } = spellMembers([dose], [{ type: "trend", factor: "dose", degrees: [1, 2], at: [] }], none);
    fc.assert(
      fc.property(fc.array(fc.double({ min: -5, max: 5, noNaN: true }), { minLength: 4, maxLength: 4 }), (means) => {
        const center = 37.5;
        const slope =
          means.reduce((sum, mean, index) => sum + (positions[index]! - center) * mean, 0) /
          positions.reduce((sum, position) => sum + (position - center) ** 2, 0);
        const estimate = means.reduce((sum, mean, index) => sum + contrasts[0]!.weights[index]! * mean, 0);
        expect(estimate).toBeCloseTo(slope, 12);
      }),
    );
  });
});

describe("monic orthogonal polynomials", () => {
  it("match the tabled integers for five equal steps up to scale (common practice)", () => {
    const cubic = monicOrthogonalPolynomial([1, 2, 3, 4, 5], 3);
    const tabled = [-1, 2, 0, -2, 1];
    for (const [index, value] of tabled.entries()) expect(cubic[index]! / 1.2).toBeCloseTo(value, 12);
  });
  it("are orthogonal to every lower degree on any positions", () => {
    fc.assert(
      fc.property(fc.uniqueArray(fc.integer({ min: -20, max: 20 }), { minLength: 4, maxLength: 7 }), (positions) => {
        for (let degree = 1; degree <= 3; degree++) {
          const high = monicOrthogonalPolynomial(positions, degree);
          for (let lower = 0; lower < degree; lower++) {
            const low = monicOrthogonalPolynomial(positions, lower);
            const size = Math.hypot(...high) * Math.hypot(...low);
            expect(Math.abs(high.reduce((sum, value, index) => sum + value * low[index]!, 0)) / size).toBeLessThan(
              1e-9,
            );
          }
        }
      }),
    );
  });
});
