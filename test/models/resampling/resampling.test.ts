import { readFileSync } from "node:fs";
import { describe, expect, it } from "vitest";
import type { Contrast } from "../../../src/design/types.ts";
import { Interrupted, silentWatch } from "../../../src/host/index.ts";
import {
  bcaInterval,
  betweenContrasts,
  bootstrapContrasts,
  contrastResamples,
  factorialAnalysis,
  friedmanAnalysis,
  kruskalWallisAnalysis,
  labelArrangements,
  midRanks,
  permutationOmnibus,
  repeatedMeasuresAnalysis,
  signArrangements,
  withinContrasts,
} from "../../../src/models/index.ts";
import { factorData, groupData } from "../between/between-data.ts";
import { expectClose } from "../between/close.ts";
import { modelData } from "../within/model-data.ts";

const fixtures = JSON.parse(readFileSync(new URL("fixtures/resampling.json", import.meta.url), "utf8")) as {
  readonly oneWay: { groups: number[][]; p: number; arrangements: number };
  readonly twoWay: { a: number[]; b: number[]; y: number[]; f: number; p: number; arrangements: number };
  readonly blocks: { block: number[]; treatment: number[]; y: number[]; f: number; p: number; arrangements: number };
  readonly signs: { table: number[][]; t: number; p: number };
  readonly twoGroups: { groups: number[][]; t: number; p: number };
  readonly bca: { values: number[]; replicates: number[]; lower: number; upper: number };
};

const options = { mostExact: 200_000, resamples: 4999, seed: 11, watch: silentWatch };
const drawn = { ...options, mostExact: 0 };

const dataOf = (groups: readonly (readonly number[])[]) =>
  groupData(
    groups.flatMap((values, group) => values.map(() => `g${group}`)),
    groups.flat(),
  );

/** A subjects x cells table as a study with one or two within factors. */
function withinData(table: readonly (readonly number[])[], levels: readonly number[]) {
  const cells = table[0]!.length;
  const rows = table.flatMap((line, subject) => line.map((value, cell) => ({ subject, cell, value })));
  return modelData({
    response: rows.map((row) => row.value),
    factors: levels.map((count, index) => {
      const after = levels.slice(index + 1).reduce((product, value) => product * value, 1);
      return {
        name: "fg"[index]!,
        within: true,
        codes: rows.map((row) => Math.floor((row.cell % cells) / after) % count),
      };
    }),
    units: { subject: rows.map((row) => row.subject) },
  });
}

describe("arrangements", () => {
  it("are enumerated once each, the observed one first, never across strata", () => {
    const labels = Int32Array.from([2, 0, 1, 0, 5, 5, 7]);
    const strata = Int32Array.from([0, 0, 0, 0, 1, 1, 1]);
    const all = labelArrangements(labels, strata, options);
    expect([all.count, all.exact]).toEqual([12 * 3, true]);
    const target = new Int32Array(7);
    const seen = new Set<string>();
    for (let index = 0; index < all.count; index++) {
      all.fill(index, target);
      if (index === 0) expect(target).toEqual(labels);
      expect(Array.from(target.subarray(4)).sort()).toEqual([5, 5, 7]);
      seen.add(target.join());
    }
    expect(seen.size).toBe(36);
  });
  it("drawn ones are even (4 labels in 24 orders, chi-square with 23 df below its 99.9% point 49.73)", () => {
    const labels = Int32Array.from([0, 1, 2, 3]);
    const some = labelArrangements(labels, new Int32Array(4), { ...drawn, resamples: 24_000 });
    const counts = new Map<string, number>();
    const target = new Int32Array(4);
    for (let index = 1; index < some.count; index++) {
      some.fill(index, target);
      counts.set(target.join(), (counts.get(target.join()) ?? 0) + 1);
    }
    expect(counts.size).toBe(24);
    expect([...counts.values()].reduce((sum, count) => sum + (count - 1000) ** 2 / 1000, 0)).toBeLessThan(49.73);
  });
  it("of signs are all there", () => {
    const all = signArrangements(5, options);
    const target = new Int32Array(5);
    const seen = new Set<string>();
    for (let index = 0; index < all.count; index++) {
      all.fill(index, target);
      seen.add(target.join());
    }
    expect(seen.size).toBe(32);
  });
});

describe("omnibus by rearranging", () => {
  it("one factor: all arrangements as SciPy counts them", () => {
    const { groups, p, arrangements } = fixtures.oneWay;
    const effect = permutationOmnibus(dataOf(groups), options).effects[0]!;
    expect([effect.exact, effect.resamples, effect.form]).toEqual([true, arrangements, "subjects"]);
    expectClose(effect.p, p, 1e-12);
  });
  it("two factors: a shuffled within the levels of b, as brute force", () => {
    const { a, b, y, f, p, arrangements } = fixtures.twoWay;
    const data = factorData({ a: a.map(String), b: b.map(String) }, y);
    const effects = permutationOmnibus(data, options).effects;
    expectClose(effects[0]!.value, f, 1e-10);
    expectClose(effects[0]!.p, p, 1e-12);
    expect(effects[0]!.resamples).toBe(arrangements);
    expect(effects[2]!.form).toBe("residuals");
    const analysis = factorialAnalysis({ data, factors: data.factors });
    for (const [index, effect] of effects.entries())
      expectClose(effect.value, analysis.effects[index]!.value!, 1e-10, effect.effect);
  });
  it("blocks: treatments shuffled within blocks, F with blocks in the model, as brute force", () => {
    const { block, treatment, y, f, p, arrangements } = fixtures.blocks;
    const data = factorData({ treatment: treatment.map(String) }, y, { blocks: block.map(String) });
    const effect = permutationOmnibus(data, options).effects[0]!;
    expectClose(effect.value, f, 1e-10);
    expect(effect.resamples).toBe(arrangements);
    expectClose(effect.p, p, 1e-12);
  });
  it("on ranks it gives the exact p of Kruskal-Wallis and of Friedman, which are counted another way", () => {
    const groups = [
      [3.1, 4.7, 1.2],
      [5.9, 4.7, 8.8, 6.1],
      [7.3, 2.2],
    ];
    const data = dataOf(groups);
    const ranked = { ...data, response: { center: 0, offsets: midRanks(data.response.offsets) } };
    expectClose(permutationOmnibus(ranked, options).effects[0]!.p, kruskalWallisAnalysis(data).effects[0]!.p!, 1e-12);
    const table = [
      [1, 3, 2],
      [1, 2, 3],
      [2, 3, 1],
      [1, 3, 2],
      [1.5, 3, 1.5],
    ];
    const effect = permutationOmnibus(withinData(table, [3]), options).effects[0]!;
    const friedman = friedmanAnalysis({ scores: Float64Array.from(table.flat()), subjects: 5, cells: 3 }).effects[0]!;
    expect([effect.exact, effect.resamples]).toEqual([true, 6 ** 5]);
    expectClose(effect.p, friedman.p!, 1e-12);
  });
  it("within factors that interact: signs of the subjects' scores, as brute force; F as in repeated measures", () => {
    const { table, t, p } = fixtures.signs;
    const data = withinData(table, [2, 2]);
    const effects = permutationOmnibus(data, options).effects;
    expect(effects[2]!.form).toBe("signs");
    expectClose(effects[2]!.value, t ** 2, 1e-10);
    expectClose(effects[2]!.p, p, 1e-12);
    const analysis = repeatedMeasuresAnalysis(data);
    for (const [index, effect] of effects.entries())
      expectClose(effect.value, analysis.effects[index]!.value!, 1e-10, effect.effect);
  });
  it("a mixed design: F as in repeated measures, every p within (0, 1]", () => {
    const rows = Array.from({ length: 24 }, (_, row) => ({ subject: Math.floor(row / 3), cell: row % 3 }));
    const data = modelData({
      response: rows.map(({ subject, cell }) => ((subject * 31 + cell * 17) % 13) + cell * (subject < 3 ? 3 : 1)),
      factors: [
        { name: "g", within: false, codes: rows.map(({ subject }) => (subject < 3 ? 0 : 1)) },
        { name: "f", within: true, codes: rows.map(({ cell }) => cell) },
      ],
      units: { subject: rows.map(({ subject }) => subject) },
    });
    const effects = permutationOmnibus(data, { ...options, resamples: 999, mostExact: 10_000 }).effects;
    expect(effects.map((effect) => effect.form)).toEqual(["subjects", "conditions within subjects", "subjects"]);
    const analysis = repeatedMeasuresAnalysis(data);
    for (const [index, effect] of effects.entries()) {
      expect(effect.effect).toBe(analysis.effects[index]!.effect);
      expectClose(effect.value, analysis.effects[index]!.value!, 1e-9, effect.effect);
      expect(effect.p!).toBeGreaterThan(0);
      expect(effect.p!).toBeLessThanOrEqual(1);
    }
    // Eight subjects in groups of three and five: 56 ways.
    expect([effects[0]!.exact, effects[0]!.resamples]).toEqual([true, 56]);
  });
  it("drawn arrangements agree with the enumeration within four Monte Carlo errors", () => {
    const data = dataOf(fixtures.oneWay.groups);
    const effect = permutationOmnibus(data, drawn).effects[0]!;
    expect([effect.exact, effect.resamples]).toEqual([false, 4999]);
    expect(Math.abs(effect.p! - fixtures.oneWay.p)).toBeLessThan(4 * effect.monteCarloError!);
  });
  it("can be interrupted", () => {
    const watch = {
      checkpoint: () => {
        throw new Interrupted();
      },
      progress: () => {},
    };
    expect(() => permutationOmnibus(dataOf(fixtures.oneWay.groups), { ...options, watch })).toThrow(Interrupted);
  });
  it("covariates and groups of one are errors", () => {
    const data = factorData({ a: ["x", "x", "y", "y"] }, [1, 2, 3, 5], { covariates: { c: [1, 3, 2, 2] } });
    expect(() => permutationOmnibus(data, options)).toThrow(
      expect.objectContaining({ code: "resampling-with-covariates" }),
    );
    expect(() => permutationOmnibus(dataOf([[1], [2], [3]]), options)).toThrow(
      expect.objectContaining({ code: "no-error-df" }),
    );
  });
});

describe("comparisons by rearranging", () => {
  const share = (found: { count: number; fill: (index: number, target: Float64Array) => void }, at = 0, width = 1) => {
    const target = new Float64Array(width);
    found.fill(0, target);
    const observed = Math.abs(target[at]!);
    let reached = 0;
    for (let index = 0; index < found.count; index++) {
      found.fill(index, target);
      if (Math.abs(target[at]!) >= observed * (1 - 1e-10)) reached++;
    }
    return reached / found.count;
  };
  it("two groups: the exact permutation t test as SciPy's", () => {
    const { groups, t, p } = fixtures.twoGroups;
    const contrast: Contrast = { name: "b - a", weights: Float64Array.from([-1, 1]) };
    const found = contrastResamples(dataOf(groups), [contrast], options);
    const target = new Float64Array(1);
    found.fill(0, target);
    expectClose(target[0], t, 1e-11);
    expect([found.exact, found.count]).toEqual([true, 462]);
    expectClose(share(found), p, 1e-12);
  });
  it("the first arrangement has the comparisons' own t: between (equal and unequal variances), within, mixed", () => {
    const weights = [
      [-1, 1, 0],
      [-1, 0, 1],
      [-0.5, -0.5, 1],
    ];
    const contrasts = weights.map((list, index) => ({ name: `c${index}`, weights: Float64Array.from(list) }));
    const target = new Float64Array(3);
    const between = dataOf([
      [1, 2, 5, 3],
      [4, 4.5, 7],
      [2, 9, 8, 5, 5],
    ]);
    for (const variances of ["equal", "unequal"] as const) {
      const data = { ...between, assumptions: { ...between.assumptions, variances } };
      const wanted = betweenContrasts({ data, contrasts });
      contrastResamples(data, contrasts, drawn).fill(0, target);
      for (let index = 0; index < 3; index++) {
        expectClose(target[index], wanted.estimates[index]! / wanted.standardErrors[index]!, 1e-11, variances);
      }
    }
    const within = withinData(
      [
        [1, 2, 4],
        [2, 2, 5],
        [3, 5, 4],
        [2, 4, 4.5],
      ],
      [3],
    );
    const wanted = withinContrasts(within, contrasts);
    const found = contrastResamples(within, contrasts, drawn);
    found.fill(0, target);
    for (let index = 0; index < 3; index++) {
      expectClose(target[index], wanted.estimates[index]! / wanted.standardErrors[index]!, 1e-11, "within");
    }
    expect(found.notes.at(-1)!.facts.what).toBe("conditions within subjects");
  });
  it("a comparison at one level of another factor keeps to that factor's levels", () => {
    const a = ["x", "x", "y", "y", "x", "x", "y", "y"];
    const b = ["p", "p", "p", "p", "q", "q", "q", "q"];
    const data = factorData({ a, b }, [1, 2, 4, 6, 100, 103, 101, 108]);
    // Cells x p, x q, y p, y q.
    const contrast: Contrast = { name: "y - x at p", weights: Float64Array.from([-1, 0, 1, 0]) };
    const found = contrastResamples(data, [contrast], options);
    expect([found.exact, found.count]).toEqual([true, 36]);
    // Within p: 1, 2 against 4, 6 is the most extreme split, two-sided; the error is pooled over p and q, so q's splits matter too.
    const target = new Float64Array(1);
    found.fill(0, target);
    expectClose(target[0], 3.5 / Math.sqrt(((0.5 + 2 + 4.5 + 24.5) / 4) * 1), 1e-12);
  });
  it("never gives a number that is not one", () => {
    const contrast: Contrast = { name: "b - a", weights: Float64Array.from([-1, 1]) };
    const found = contrastResamples(
      dataOf([
        [1, 1],
        [2, 2],
      ]),
      [contrast],
      options,
    );
    const target = new Float64Array(1);
    for (let index = 0; index < found.count; index++) {
      found.fill(index, target);
      expect(Number.isFinite(target[0]!)).toBe(true);
    }
  });
});

describe("bootstrap", () => {
  it("bias-corrected and accelerated limits as SciPy's from the same replicates", () => {
    const { values, replicates, lower, upper } = fixtures.bca;
    const mean = values.reduce((sum, value) => sum + value, 0) / values.length;
    const influence = values.map((value) => value - mean);
    const found = bcaInterval({ observed: mean, replicates, influence, level: 0.95 });
    expectClose(found.lower, lower, 1e-9);
    expectClose(found.upper, upper, 1e-9);
  });
  it("of a comparison of groups comes near the t interval where values are even", () => {
    const scores = Array.from({ length: 60 }, (_, index) => ((index * 37) % 61) / 10);
    const data = dataOf([scores, scores.map((value) => value + 2)]);
    const contrast: Contrast = { name: "b - a", weights: Float64Array.from([-1, 1]) };
    const [interval] = bootstrapContrasts(data, [contrast], {
      level: 0.95,
      resamples: 4999,
      seed: 11,
      watch: silentWatch,
    });
    const wanted = betweenContrasts({ data, contrasts: [contrast] });
    const half = 1.98 * wanted.standardErrors[0]!;
    expectClose(interval!.estimate, 2, 1e-12);
    expect(Math.abs(interval!.lower - (2 - half))).toBeLessThan(0.1 * half);
    expect(Math.abs(interval!.upper - (2 + half))).toBeLessThan(0.1 * half);
  });
  it("equal values in both groups are an error", () => {
    const contrast: Contrast = { name: "b - a", weights: Float64Array.from([-1, 1]) };
    expect(() =>
      bootstrapContrasts(
        dataOf([
          [1, 1],
          [2, 2],
        ]),
        [contrast],
        { level: 0.95, resamples: 200, seed: 1, watch: silentWatch },
      ),
    ).toThrow(expect.objectContaining({ code: "zero-variance" }));
  });
});
