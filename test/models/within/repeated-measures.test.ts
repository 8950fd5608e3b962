import { readFileSync } from "node:fs";
import { describe, expect, it } from "vitest";
import { ModelError } from "../../../src/models/model-error.ts";
import { repeatedMeasuresAnalysis } from "../../../src/models/within/index.ts";
import { modelData } from "./model-data.ts";

interface Expected {
  readonly factors: readonly string[];
  readonly sumOfSquares: number;
  readonly errorSumOfSquares: number;
  readonly df1: number;
  readonly df2: number;
  readonly f: number;
  readonly p: number;
  readonly greenhouseGeisser?: number;
  readonly huynhFeldt?: number;
  readonly pGreenhouseGeisser?: number;
  readonly pHuynhFeldt?: number;
  readonly mauchly?: number | null;
  readonly multivariate?: Readonly<Record<"pillai" | "wilks" | "hotellingLawley" | "roy", number>>;
}
interface Design {
  readonly name: string;
  readonly within: Readonly<Record<string, number>>;
  readonly between: Readonly<Record<string, number>>;
  readonly response: readonly number[];
  readonly codes: Readonly<Record<string, readonly number[]>>;
  readonly subject: readonly number[];
  readonly subjects: number;
  readonly effects: readonly Expected[];
}

// Computed by test/models/within/fixtures/generate.py: least squares with subject dummies, projections, NumPy and SciPy.
const { designs }: { designs: Design[] } = JSON.parse(
  readFileSync(new URL("./fixtures/repeated-measures.json", import.meta.url), "utf8"),
);

const close = (actual: number, expected: number, relative = 1e-9) =>
  expect(Math.abs(actual - expected), `${actual} for ${expected}`).toBeLessThanOrEqual(
    relative * Math.max(Math.abs(expected), 1e-6),
  );

const dataOf = (design: Design) =>
  modelData({
    response: design.response,
    center: 100,
    factors: Object.keys(design.codes).map((name) => ({
      name,
      codes: design.codes[name]!,
      within: name in design.within,
    })),
    units: { person: design.subject },
  });

describe("repeated measures against least squares with subject dummies", () => {
  describe.each(designs)("$name", (design) => {
    const result = repeatedMeasuresAnalysis(dataOf(design));
    it("has every effect", () => expect(result.effects.length).toBe(design.effects.length));
    it.each(design.effects)("$factors", (expected) => {
      const name = expected.factors.join(" x ");
      const effect = result.effects.find((entry) => entry.effect === name)!;
      close(effect.sumOfSquares!, expected.sumOfSquares);
      close(effect.errorSumOfSquares!, expected.errorSumOfSquares);
      expect([effect.df1, effect.df2]).toEqual([expected.df1, expected.df2]);
      close(effect.value!, expected.f);
      close(effect.p!, expected.p, 1e-8);
      if (expected.greenhouseGeisser === undefined) {
        expect(effect.epsilonGreenhouseGeisser).toBeUndefined();
        return;
      }
      close(effect.epsilonGreenhouseGeisser!, expected.greenhouseGeisser);
      close(effect.epsilonHuynhFeldt!, expected.huynhFeldt!);
      close(effect.pGreenhouseGeisser!, expected.pGreenhouseGeisser!, 1e-8);
      close(effect.pHuynhFeldt!, expected.pHuynhFeldt!, 1e-8);
      const pure = expected.factors.every((factor) => factor in design.within);
      const sphericity = result.sphericity.find((entry) => entry.effect === name);
      if (pure && expected.mauchly != null) close(sphericity!.w, expected.mauchly, 1e-8);
      else expect(sphericity).toBeUndefined();
      if (expected.multivariate === undefined) {
        expect(result.multivariate.some((entry) => entry.effect === name)).toBe(false);
        return;
      }
      const criterion = (form: string) =>
        result.multivariate.find((entry) => entry.effect === name && entry.form === form)?.criterion;
      close(criterion("Pillai")!, expected.multivariate.pillai, 1e-8);
      close(criterion("Wilks")!, expected.multivariate.wilks, 1e-8);
      close(criterion("Hotelling-Lawley")!, expected.multivariate.hotellingLawley, 1e-8);
      close(criterion("Roy")!, expected.multivariate.roy, 1e-8);
    });
  });

  it("says which multivariate and sphericity tests too few subjects rule out", () => {
    const result = repeatedMeasuresAnalysis(dataOf(designs.at(-1)!));
    expect(result.notes.map((note) => note.code)).toEqual(["sphericity-not-testable", "multivariate-not-available"]);
  });
});

// Data and figures as reprinted in many textbooks; recalled, confirmed by the sums of squares coming out.
describe("published examples", () => {
  it("Winer (1971), reaction to four drugs of five persons (recalled): F = 24.76 on 3 and 12 df", () => {
    const scores = [
      [30, 28, 16, 34],
      [14, 18, 10, 22],
      [24, 20, 18, 30],
      [38, 34, 20, 44],
      [26, 28, 14, 30],
    ];
    const result = repeatedMeasuresAnalysis(
      modelData({
        response: scores.flat(),
        factors: [{ name: "drug", codes: scores.flatMap(() => [0, 1, 2, 3]), within: true }],
        units: { person: scores.flatMap((_, person) => [person, person, person, person]) },
      }),
    );
    const [drug] = result.effects;
    expect(drug!.sumOfSquares).toBeCloseTo(698.2, 8);
    expect(drug!.errorSumOfSquares).toBeCloseTo(112.8, 8);
    expect(drug!.value!.toFixed(2)).toBe("24.76");
    expect([drug!.df1, drug!.df2]).toEqual([3, 12]);
    // Five persons: person sum of squares 680.8, so the share of drugs in all variation is 698.2 / 1491.8.
    expect(drug!.generalizedEtaSquared).toBeCloseTo(698.2 / (698.2 + 680.8 + 112.8), 8);
  });

  it("O'Brien and Kaiser (1985), two between and two within factors, unequal groups (recalled)", () => {
    // Treatment (control, A, B), gender (M, F), then five hours before, after and at follow-up.
    const lines: [number, number, string][] = [
      [0, 0, "12421 32532 23244"],
      [0, 0, "44534 22353 45641"],
      [0, 0, "56577 45754 76976"],
      [0, 1, "54754 22353 44534"],
      [0, 1, "34643 67863 43643"],
      [1, 0, "78799 99:89 9:;96"],
      [1, 0, "55645 778:8 89;98"],
      [1, 1, "23532 24865 66756"],
      [1, 1, "33464 45641 54754"],
      [2, 0, "44534 67688 88978"],
      [2, 0, "33423 54754 56865"],
      [2, 0, "67863 9:;96 87:87"],
      [2, 1, "55686 46686 778:8"],
      [2, 1, "22312 56752 67863"],
      [2, 1, "22344 66797 77867"],
      [2, 1, "45754 77867 78:87"],
    ];
    const response: number[] = [];
    const codes = { treatment: [] as number[], gender: [] as number[], phase: [] as number[], hour: [] as number[] };
    const person: number[] = [];
    for (const [index, [treatment, gender, text]] of lines.entries()) {
      for (const [phase, part] of text.split(" ").entries()) {
        for (const [hour, digit] of [...part].entries()) {
          // ":" and ";" stand for 10 and 11, the characters after 9.
          response.push(digit.charCodeAt(0) - 48);
          codes.treatment.push(treatment);
          codes.gender.push(gender);
          codes.phase.push(phase);
          codes.hour.push(hour);
          person.push(index);
        }
      }
    }
    const result = repeatedMeasuresAnalysis(
      modelData({
        response,
        factors: [
          { name: "treatment", codes: codes.treatment, within: false },
          { name: "gender", codes: codes.gender, within: false, measured: true },
          { name: "phase", codes: codes.phase, within: true },
          { name: "hour", codes: codes.hour, within: true },
        ],
        units: { person },
      }),
    );
    const effect = (name: string) => result.effects.find((entry) => entry.effect === name)!;
    expect(effect("treatment").value!.toFixed(4)).toBe("3.9405");
    expect(effect("gender").value!.toFixed(4)).toBe("3.6591");
    expect(effect("treatment x gender").value!.toFixed(4)).toBe("2.8555");
    expect(effect("phase").value!.toFixed(4)).toBe("16.1329");
    expect([effect("phase").df1, effect("phase").df2]).toEqual([2, 20]);
    expect(effect("treatment x phase").value!.toFixed(4)).toBe("4.8510");
    // Recalled as 16.6856; the last digit settled by the route of fixtures/generate.py, 16.68567.
    expect(effect("hour").value!.toFixed(4)).toBe("16.6857");
    expect([effect("hour").df1, effect("hour").df2]).toEqual([4, 40]);
    expect(effect("phase").epsilonGreenhouseGeisser!.toFixed(5)).toBe("0.79953");
    expect(effect("phase").epsilonHuynhFeldt!.toFixed(5)).toBe("0.92786");
    expect(effect("hour").epsilonGreenhouseGeisser!.toFixed(5)).toBe("0.46028");
    expect(effect("hour").epsilonHuynhFeldt!.toFixed(5)).toBe("0.55928");
    const sphericity = (name: string) => result.sphericity.find((entry) => entry.effect === name)!;
    expect(sphericity("phase").w.toFixed(5)).toBe("0.74927");
    expect(sphericity("phase").p.toFixed(4)).toBe("0.2728");
    expect(sphericity("hour").w.toFixed(5)).toBe("0.06607");
  });
});

describe("repeated measures refuses", () => {
  const two = (response: number[], person: number[], codes: number[]) =>
    modelData({ response, factors: [{ name: "a", codes, within: true }], units: { person } });
  const code = (work: () => unknown) => {
    try {
      work();
    } catch (error) {
      return error instanceof ModelError ? error.code : String(error);
    }
    return "no error";
  };
  it("one subject", () =>
    expect(code(() => repeatedMeasuresAnalysis(two([1, 2], [0, 0], [0, 1])))).toBe("one-subject"));
  it("no complete subject", () =>
    expect(code(() => repeatedMeasuresAnalysis(two([1, 2], [0, 1], [0, 1])))).toBe("no-complete-subjects"));
  it("no variance", () =>
    expect(code(() => repeatedMeasuresAnalysis(two([1, 2, 1, 2, 1, 2], [0, 0, 1, 1, 2, 2], [0, 1, 0, 1, 0, 1])))).toBe(
      "zero-variance",
    ));
  it("a subject in two groups", () =>
    expect(
      code(() =>
        repeatedMeasuresAnalysis(
          modelData({
            response: [1, 2, 3, 4],
            factors: [{ name: "g", codes: [0, 1, 0, 1], within: false }],
            units: { person: [0, 0, 1, 1] },
          }),
        ),
      ),
    ).toBe("subject-in-two-groups"));
  it("groups of one", () =>
    expect(
      code(() =>
        repeatedMeasuresAnalysis(
          modelData({
            response: [1, 2, 3, 5],
            factors: [
              { name: "g", codes: [0, 0, 1, 1], within: false },
              { name: "a", codes: [0, 1, 0, 1], within: true },
            ],
            units: { person: [0, 0, 1, 1] },
          }),
        ),
      ),
    ).toBe("no-error-df"));
  it("silently dropping subjects: it says how many", () => {
    const result = repeatedMeasuresAnalysis(two([1, 2, 4, 3, 5, 9, 7], [0, 0, 1, 1, 2, 2, 3], [0, 1, 0, 1, 0, 1, 0]));
    expect(result.subjects).toBe(3);
    expect(result.notes).toContainEqual({
      code: "incomplete-subjects-left-out",
      facts: { unit: "person", leftOut: 1, of: 4, missingCells: 1 },
    });
  });
});
