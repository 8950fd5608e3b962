import { describe, expect, it } from "vitest";
import {
  type CorrectionName,
  FamilyProblemError,
  type GatedFamily,
  gatekeep,
  holdFamily,
  passing,
} from "../../src/families/index.ts";
import { closedAdjustedP, problemOf, randomP, subsets, testRandom } from "./problems.ts";

function family(
  name: string,
  correction: CorrectionName,
  p: readonly number[],
  after: GatedFamily["after"] = null,
  fields: Parameters<typeof problemOf>[0] = {},
): GatedFamily {
  return { name, correction, problem: problemOf({ p, names: p.map((_, i) => `${name}${i + 1}`), ...fields }), after };
}
const allOf = (name: string) => ({ family: name, any: false });
const anyOf = (name: string) => ({ family: name, any: true });

function codeOf(work: () => unknown): string {
  try {
    work();
  } catch (error) {
    if (error instanceof FamilyProblemError) {
      expect(error.message).not.toBe("");
      expect(error.advice).not.toBe("");
      return error.code;
    }
    throw error;
  }
  return "no error";
}

describe("after F", () => {
  it("opens only when all of F is rejected, and then with the full error", () => {
    const second = [0.02, 0.03];
    const [first, open] = gatekeep([family("a", "holm", [0.01, 0.04]), family("b", "holm", second, allOf("a"))]);
    expect(first!.answer.rejected).toEqual([true, true]);
    expect(open!.open).toBe(true);
    expect(open!.answer.threshold).toEqual(holdFamily("holm", problemOf({ p: second })).threshold);
    // 0.04 is carried over: at an error below it the gate would be closed.
    expect(open!.answer.adjustedP).toEqual([0.04, 0.04]);

    const [, closed] = gatekeep([family("a", "holm", [0.01, 0.06]), family("b", "holm", [1e-9, 1e-9], allOf("a"))]);
    expect(closed!.open).toBe(false);
    expect(closed!.answer.rejected).toEqual([false, false]);
    expect(closed!.answer.threshold).toEqual([null, null]);
    expect(closed!.answer.adjustedP).toEqual([0.06, 0.06]);
    expect(closed!.answer.intervals).toBe("none");
  });

  it("equals the graph of the table (serial gate then Holm pair: Bretz et al. 2009), also in any order of the list", () => {
    const random = testRandom(41);
    for (let k = 0; k < 500; k++) {
      const p = randomP(random, 3);
      const families = [family("b", "holm", p.slice(1), allOf("a")), family("a", "none", [p[0]!])];
      const gate = gatekeep(families);
      const graph = holdFamily(
        "graph",
        problemOf({
          p,
          graph: {
            weights: [1, 0, 0],
            passes: [
              [0, 0.5, 0.5],
              [0, 0, 1],
              [0, 1, 0],
            ],
          },
        }),
      );
      const found = [...gate[1]!.answer.adjustedP, ...gate[0]!.answer.adjustedP];
      for (const [i, value] of graph.adjustedP.entries()) expect(found[i]!).toBeCloseTo(value, 12);
    }
  });

  it("waits along a chain", () => {
    const chain = (last: number) =>
      gatekeep([
        family("c", "none", [0.001], allOf("b")),
        family("b", "bonferroni", [0.001, last], allOf("a")),
        family("a", "none", [0.03]),
      ]).map(({ open }) => open);
    expect(chain(0.02)).toEqual([true, true, true]);
    expect(chain(0.03)).toEqual([false, true, true]);
  });

  it("carries over on the scale of the family's own error", () => {
    const [, b] = gatekeep([family("a", "none", [0.03]), family("b", "none", [1e-6], allOf("a"), { error: 0.01 })]);
    expect(b!.open).toBe(true);
    expect(b!.answer.rejected).toEqual([true]);
    expect(b!.answer.adjustedP[0]!).toBeCloseTo(0.006, 12);
  });
});

describe("after any of F", () => {
  it("passes on what was rejected: the table's parallel gate, 2 then 3 (Bretz et al. 2009)", () => {
    const p = [0.01, 0.02, 0.03, 0.004, 0.005];
    const gate = gatekeep([family("a", "bonferroni", p.slice(0, 2)), family("b", "holm", p.slice(2), anyOf("a"))]);
    const wanted = [0.02, 0.04, 0.04, 0.024, 0.024];
    const found = gate.flatMap(({ answer }) => answer.adjustedP);
    for (const [i, value] of wanted.entries()) expect(found[i]!).toBeCloseTo(value, 14);
    expect(gate.map(({ open }) => open)).toEqual([true, true]);
  });

  it("is closed while nothing has been passed on", () => {
    const [, b] = gatekeep([family("a", "bonferroni", [0.03, 0.5]), family("b", "holm", [1e-9], anyOf("a"))]);
    expect(b!.open).toBe(false);
    expect(b!.answer.threshold).toEqual([null]);
  });

  it("after a family of Holm's steps, passes on only when all is rejected, as `after F` does", () => {
    const random = testRandom(42);
    for (let k = 0; k < 300; k++) {
      const p = randomP(random, 5);
      const build = (gate: GatedFamily["after"]) => [
        family("a", "holm", p.slice(0, 3)),
        family("b", "fallback", p.slice(3), gate),
      ];
      const any = gatekeep(build(anyOf("a")));
      const all = gatekeep(build(allOf("a")));
      for (const f of [0, 1])
        for (const [i, value] of all[f]!.answer.adjustedP.entries())
          expect(any[f]!.answer.adjustedP[i]!, `case ${k}, p ${p}`).toBeCloseTo(value, 12);
    }
  });

  it("is the closure of Bonferroni tests whose shares pass through the families (2,000 random cases, 3 families)", () => {
    const random = testRandom(43);
    const all = subsets(6);
    for (let k = 0; k < 2000; k++) {
      const p = randomP(random, 6);
      const first = (["bonferroni", "holm", "fixed sequence", "fallback"] as const)[k % 4]!;
      const gate = gatekeep([
        family("a", first, p.slice(0, 2)),
        family("b", "holm", p.slice(2, 4), anyOf("a")),
        family("c", "bonferroni", p.slice(4), anyOf("a")),
      ]);
      // Shares of an intersection, told in words: what of family a is rejected keeps its share inside a by a's method while a stands, and leaves
      // half to b and half to c; inside b it goes to whoever stands, inside c it stays with whoever was given it.
      const local = (rows: readonly number[]) => {
        const stands = (i: number) => rows.includes(i);
        const share = [0, 0, 0, 0, 0, 0];
        const start = first === "fixed sequence" ? [1, 0] : [0.5, 0.5];
        let out = 0;
        for (const i of [0, 1]) {
          const other = 1 - i;
          const toOther = first === "holm" || ((first === "fixed sequence" || first === "fallback") && i === 0);
          if (stands(i)) share[i]! += start[i]!;
          else if (toOther && stands(other)) share[other]! += start[i]!;
          else out += start[i]!;
        }
        const inB = [2, 3].filter(stands);
        for (const i of inB) share[i]! += out / 2 / inB.length;
        for (const i of [4, 5]) if (stands(i)) share[i]! += out / 4;
        return Math.min(1, ...rows.map((i) => (share[i]! > 0 ? p[i]! / share[i]! : Number.POSITIVE_INFINITY)));
      };
      const wanted = closedAdjustedP(p, local, all);
      const found = gate.flatMap(({ answer }) => answer.adjustedP);
      for (const [i, value] of wanted.entries())
        if (Math.abs(found[i]! - value) > 1e-11 * value)
          expect.fail(`case ${k}, ${first}, p ${p}: row ${i} is ${found[i]}, the closure says ${value}`);
    }
  });
});

describe("one-sided families that pass error", () => {
  it("have joint limits that agree with every decision", () => {
    const random = testRandom(44);
    for (let k = 0; k < 300; k++) {
      const one = (name: string, correction: CorrectionName, after: GatedFamily["after"]) => {
        const estimates = [0, 1, 2].map(() => 7 * (random() - 0.3));
        const problem = problemOf({ estimates, names: estimates.map((_, i) => `${name}${i}`), sides: "upper" });
        return { name, correction, problem, after };
      };
      const gate = gatekeep([one("a", "bonferroni", null), one("b", "holm", anyOf("a"))]);
      for (const { answer } of gate) {
        expect(answer.intervals).toBe("simultaneous");
        for (const [i, rejected] of answer.rejected.entries())
          expect((answer.lower[i] ?? Number.NEGATIVE_INFINITY) >= 0, `case ${k}`).toBe(rejected);
      }
    }
  });
});

describe("families in the wrong place", () => {
  it("each have their own answer", () => {
    const p = [0.01, 0.2];
    const code = (...families: GatedFamily[]) => codeOf(() => gatekeep(families));
    expect(code(family("a", "holm", p, allOf("a")))).toBe("after-itself");
    expect(code(family("a", "holm", p, allOf("x")))).toBe("after-unknown");
    expect(code(family("a", "holm", p, allOf("b")), family("b", "holm", p, allOf("a")))).toBe("after-cyclic");
    expect(
      code(family("a", "holm", p, allOf("b")), family("b", "holm", p, allOf("c")), family("c", "holm", p, allOf("b"))),
    ).toBe("after-cyclic");
    expect(code(family("a", "holm", p), family("a", "holm", p))).toBe("duplicate-families");
    expect(code(family("a", "hommel", p), family("b", "holm", p, anyOf("a")))).toBe("after-any-not-passing");
    expect(code(family("a", "holm", p), family("b", "hochberg", p, anyOf("a")))).toBe("after-any-not-passing");
    expect(code(family("a", "holm", p), family("b", "holm", p, anyOf("a"), { error: 0.01 }))).toBe("after-any-error");
  });
});

describe("passing", () => {
  it("shows first shares, where they go, and gates of whole families", () => {
    const picture = passing([
      family("a", "bonferroni", [0.5, 0.5]),
      family("b", "holm", [0.5, 0.5], anyOf("a")),
      family("c", "sidak", [0.5, 0.5], allOf("b")),
    ]);
    expect(picture.nodes.map(({ name, weight }) => [name, weight])).toEqual([
      ["a1", 0.5],
      ["a2", 0.5],
      ["b1", 0],
      ["b2", 0],
      ["c", 1],
    ]);
    expect(picture.passes).toContainEqual({ from: "a1", to: "b2", share: 0.5 });
    expect(picture.passes).toContainEqual({ from: "b1", to: "b2", share: 1 });
    expect(picture.passes).toContainEqual({ from: "b", to: "c", share: 1, gate: true });
    for (const { name } of picture.nodes) {
      const out = picture.passes.filter(({ from, gate }) => from === name && gate !== true);
      expect(out.reduce((sum, { share }) => sum + share, 0)).toBeLessThanOrEqual(1 + 1e-12);
    }
  });
});
