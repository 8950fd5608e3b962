// Calibration: the same numbers for any workers and shards; standard errors as the models room has them on the same scores.
import { existsSync } from "node:fs";
import { describe, expect, it } from "vitest";
import { computePool } from "../../src/cli/compute-pool.ts";
import type { ModelData } from "../../src/design/types.ts";
import { Interrupted } from "../../src/host/index.ts";
import { betweenContrasts, withinContrasts } from "../../src/models/index.ts";
import { contrastErrors } from "../../src/planning/contrast-errors.ts";
import { layoutOf, placedWeights } from "../../src/planning/layout.ts";
import { calibrate, mergeCalibrations, type PlanningDesign, rehearsalRows } from "../../src/planning/index.ts";
import { against, allPairs, design, factor, family, inProcess, options } from "./designs.ts";

const factors = [factor("w", 4, "within")];
const planned = design(factors, [0, 0.2, 0.5, 1], { correlation: 0.6 });
const aim = { family: family(factors, [against("w", "w1")], "holm") };
const question = { design: planned, aim, subjects: 24 };

describe("one calibration", () => {
  const studies = 5200;
  it("is the same for 1, 2 and 4 workers and for the built pool", async () => {
    const one = await calibrate(question, { ...options, studies });
    for (const workers of [2, 4])
      expect(await calibrate(question, { ...options, studies, host: inProcess(workers) })).toEqual(one);
    if (existsSync(new URL("../../dist/src/planning/simulate.js", import.meta.url))) {
      for (const workers of [1, 2, 4]) {
        const pool = computePool(workers);
        const host = { runJobs: pool.run };
        expect(await calibrate(question, { ...options, studies, host })).toEqual(one);
        await pool.close();
      }
    }
  });
  it("is the same from shards, and not from a wrong set of them", async () => {
    const whole = await calibrate(question, { ...options, studies });
    const part = (index: number, of = 3) => calibrate({ ...question, shard: { index, of } }, { ...options, studies });
    const parts = [await part(2), await part(1), await part(3)];
    expect(mergeCalibrations(parts)).toEqual(whole);
    expect(() => mergeCalibrations(parts.slice(1))).toThrow(/shard 2 of 3 is missing/);
    expect(() => mergeCalibrations([...parts, parts[0]!])).toThrow(/twice/);
    expect(() => mergeCalibrations([whole])).toThrow(/not a shard/);
    await expect(part(4)).rejects.toThrow(/no shard 4 of 3/);
  });
  it("of the omnibus is the same from shards too", async () => {
    const mixed = [factor("g", 2, "between"), factor("w", 3, "within")];
    const two = {
      design: design(mixed, [0, 0.2, 0.4, 0, 0.3, 0.9]),
      aim: { omnibus: { effects: null, error: 0.05 } },
      subjects: 20,
    };
    const whole = await calibrate(two, { ...options, studies: 2000 });
    const parts = await Promise.all(
      [1, 2].map((index) => calibrate({ ...two, shard: { index, of: 2 } }, { ...options, studies: 2000 })),
    );
    expect(mergeCalibrations(parts)).toEqual(whole);
    expect(whole.scenarios[0]!.comparisons.map((row) => row.comparison)).toEqual(["g", "w", "g x w"]);
  });
  it("keeps what was done when it is interrupted, and says how much", async () => {
    let calls = 0;
    const watch = {
      checkpoint() {
        if (++calls > 10) throw new Interrupted();
      },
      progress() {},
    };
    const stopped = await calibrate(question, { ...options, studies: 20_000, watch });
    expect(stopped.asked).toBe(20_000);
    expect(stopped.studies).toBe(4000);
    const short = await calibrate(question, { ...options, studies: 4000 });
    expect(stopped.scenarios).toEqual(short.scenarios);
    calls = 100;
    await expect(calibrate(question, { ...options, watch })).rejects.toThrow(Interrupted);
  });
  it("tells how far it has come", async () => {
    const seen: number[] = [];
    await calibrate(question, {
      ...options,
      studies,
      watch: { checkpoint() {}, progress: (done, total) => seen.push(done / total) },
    });
    expect(seen.length).toBeGreaterThan(5);
    expect(seen).toEqual([...seen].sort((a, b) => a - b));
    expect(seen.at(-1)).toBe(1);
  });
});

describe("what the procedures hold", () => {
  const between = [factor("a", 4, "between")];
  const spread = (mean: number[]) => design(between, mean);
  it("exact single-step methods hold 5% under no difference, and their intervals cover together as often as they should", async () => {
    for (const correction of ["tukey", "single-step"] as const) {
      const plan = { family: family(between, [allPairs("a")], correction) };
      const { scenarios, conclusion } = await calibrate(
        { design: spread([0, 0, 0.5, 1]), aim: plan, subjects: 40 },
        { ...options, studies: 10_000 },
      );
      const none = scenarios.find((row) => row.scenario === "no difference")!;
      const error = Math.sqrt((0.05 * 0.95) / 10_000);
      expect(Math.abs(none.familyError! - 0.05) / error).toBeLessThan(4);
      for (const row of scenarios) expect(row.coverage).toBeCloseTo(1 - none.familyError!, 12);
      expect(conclusion).toBe("holds");
    }
  });
  it("without correction six comparisons exceed it", async () => {
    const plan = { family: family(between, [allPairs("a")], "none") };
    const { scenarios, conclusion } = await calibrate(
      { design: spread([0, 0, 0.5, 1]), aim: plan, subjects: 40 },
      { ...options, studies: 4000 },
    );
    expect(scenarios[0]!.familyError).toBeGreaterThan(0.17);
    expect(conclusion).toBe("exceeds");
  });
  it("pooled errors with unequal spreads and sizes exceed it, from the data's own spreads; own errors do not", async () => {
    const observed = {
      groupSizes: [20, 20, 20, 8],
      cellMeans: [0, 0, 0, 0],
      covariances: [[[1]], [[1]], [[1]], [[25]]],
    };
    const outcomes: string[] = [];
    for (const variances of ["equal", "unequal"] as const) {
      const plan = { family: family(between, [against("a", "a4")], "holm") };
      const one = await calibrate(
        { design: { ...spread([0, 0, 0, 0]), variances }, aim: plan, observed },
        { ...options, studies: 4000 },
      );
      expect(one.scenarios[0]!.source).toBe("data");
      outcomes.push(one.conclusion);
    }
    expect(outcomes[0]).toBe("exceeds");
    expect(outcomes[1]).not.toBe("exceeds");
  });
  it("equivalence is claimed wrongly at the margin no more than its error", async () => {
    const two = [factor("a", 2, "between")];
    const plan = {
      family: family(two, [allPairs("a")], "holm", { margin: { type: "equivalence", value: 1, better: null } }),
    };
    const { scenarios } = await calibrate(
      { design: design(two, [0, 0]), aim: plan, subjects: 80 },
      { ...options, studies: 4000 },
    );
    expect(scenarios[0]!.scenario).toBe("at the margin");
    expect(Math.abs(scenarios[0]!.familyError! - 0.05)).toBeLessThan(4 * Math.sqrt((0.05 * 0.95) / 4000));
    expect(scenarios[1]!.every).toBeGreaterThan(0.9);
  });
});

describe("standard errors and df", () => {
  /** The rows of a rehearsal, laid out as the models take them. */
  function dataOf(one: PlanningDesign, subjects: number): ModelData {
    const rows = rehearsalRows({ design: one, subjects, seed: 3 });
    const labels = [...new Set(rows.subjects)];
    const codes = one.factors.map((it, f) => Int32Array.from(rows.levels, (levels) => it.levels.indexOf(levels[f]!)));
    return {
      rows: rows.responses.length,
      response: { center: 0, offsets: Float64Array.from(rows.responses) },
      factors: one.factors.map((it, f) => ({ ...it, codes: codes[f]! })),
      units: [
        {
          name: "subject",
          role: "subjects",
          nestedIn: [],
          slopes: [],
          codes: Int32Array.from(rows.subjects, (label) => labels.indexOf(label)),
          labels,
          count: labels.length,
        },
      ],
      covariates: [],
      assumptions: { variances: one.variances, covariance: one.covariance },
      cells: Int32Array.from(rows.levels, (_, row) =>
        one.factors.reduce((cell, it, f) => cell * it.levels.length + codes[f]![row]!, 0),
      ),
      cellCount: one.cellMeans.length,
    };
  }
  const mixed = [factor("g", 3, "between"), factor("w", 3, "within")];
  const mixedDesign = design(mixed, [0, 1, 2, 1, 1, 4, 0, 3, 1], { allocation: [2, 1, 1] });
  const members = [allPairs("w"), allPairs("g"), { ...against("w", "w1"), at: [{ level: "g2", factor: "g" }] }];
  const cases: [string, PlanningDesign][] = [
    ["pooled contrast scores", mixedDesign],
    ["own errors of the groups", { ...mixedDesign, variances: "unequal" }],
    ["sphericity", { ...mixedDesign, covariance: "sphericity" }],
    ["between, pooled", design([factor("g", 3, "between")], [0, 1, 2], { allocation: [2, 1, 1] })],
    [
      "between, unequal",
      design([factor("g", 3, "between")], [0, 1, 2], { allocation: [2, 1, 1], variances: "unequal" }),
    ],
  ];
  it.each(cases)("are those of the analysis: %s", (_, one) => {
    const data = dataOf(one, 24);
    const within = one.factors.length > 1;
    const { contrasts } = family(one.factors, within ? members : [allPairs("g")], "holm");
    const wanted = within
      ? withinContrasts(data, contrasts, { level: null })
      : betweenContrasts({ data, contrasts, level: null });
    const layout = layoutOf(one);
    const { groups, withinCells: width } = layout;
    const scores = Array.from({ length: groups }, () => [] as number[][]);
    const bySubject = new Map<number, { group: number; values: number[] }>();
    for (let row = 0; row < data.rows; row++) {
      const place = layout.cellOf.indexOf(data.cells[row]!);
      const held = bySubject.get(data.units[0]!.codes[row]!) ?? {
        group: Math.floor(place / width),
        values: new Array<number>(width),
      };
      held.values[place % width] = data.response.offsets[row]!;
      bySubject.set(data.units[0]!.codes[row]!, held);
    }
    for (const { group, values } of bySubject.values()) scores[group]!.push(values);
    const means = scores.map((list) =>
      Array.from({ length: width }, (__, w) => list.reduce((sum, v) => sum + v[w]!, 0) / list.length),
    );
    const own = scores.map((list, g) =>
      Array.from({ length: width * width }, (__, at) =>
        list.reduce(
          (sum, v) =>
            sum +
            (v[Math.floor(at / width)]! - means[g]![Math.floor(at / width)]!) *
              (v[at % width]! - means[g]![at % width]!),
          0,
        ),
      ),
    );
    const errors = contrastErrors(
      layout,
      contrasts.map((contrast) => placedWeights(layout, contrast.weights)),
    );
    const blank = () => new Float64Array(contrasts.length);
    const evidence = { deviations: blank(), standardErrors: blank(), df: blank() };
    const study = {
      sizes: Int32Array.from(scores, (list) => list.length),
      means: Float64Array.from(means.flat()),
      products: Float64Array.from(own[0]!, (__, at) => own.reduce((sum, list) => sum + list[at]!, 0)),
      ownProducts: Float64Array.from(own.flat()),
      df: bySubject.size - groups,
      whole: true,
    };
    errors.fill(study, evidence);
    const correlation = errors.correlation();
    for (const i of contrasts.keys()) {
      expect(evidence.deviations[i]).toBeCloseTo(wanted.estimates[i]!, 11);
      expect(evidence.standardErrors[i]! / wanted.standardErrors[i]!).toBeCloseTo(1, 11);
      expect(evidence.df[i]! / wanted.df[i]!).toBeCloseTo(1, 10);
      for (const j of contrasts.keys()) expect(correlation[i]![j]).toBeCloseTo(wanted.correlation[i]![j]!, 10);
    }
    expect(errors.shared ? errors.commonDf(study.df) : null).toBe(wanted.commonDf);
  });
});

describe("rehearsals", () => {
  it("have the expected moments, shapes included, and the same rows for the same seed", () => {
    for (const shape of ["normal", "skewed", "heavy tails"] as const) {
      const one = design(factors, [10, 12, 15, 20], { correlation: 0.6, shape, cellSpread: [2, 2, 2, 4] });
      const rows = rehearsalRows({ design: one, subjects: 8000, seed: 4 });
      expect(rehearsalRows({ design: one, subjects: 30, seed: 4 })).toEqual(
        rehearsalRows({ design: one, subjects: 30, seed: 4 }),
      );
      const column = (level: string) => rows.responses.filter((_, row) => rows.levels[row]![0] === level);
      const first = column("w1");
      const last = column("w4");
      const mean = (list: number[]) => list.reduce((sum, value) => sum + value, 0) / list.length;
      const centred = (list: number[]) => list.map((value) => value - mean(list));
      const a = centred(first);
      const b = centred(last);
      const product = (x: number[], y: number[]) => mean(x.map((value, i) => value * y[i]!));
      expect(Math.abs(mean(first) - 10)).toBeLessThan((5 * 2) / Math.sqrt(8000));
      expect(Math.abs(Math.sqrt(product(b, b)) / 4 - 1)).toBeLessThan(0.08);
      expect(Math.abs(product(a, b) / Math.sqrt(product(a, a) * product(b, b)) - 0.6)).toBeLessThan(0.04);
      const skewness = mean(a.map((value) => value ** 3)) / product(a, a) ** 1.5;
      if (shape === "skewed") expect(skewness).toBeGreaterThan(0.6);
    }
  });
  it("lose subjects and values as expected", () => {
    const one = design(factors, [1, 2, 3, 4], { dropout: 0.2, missing: 0.1 });
    const rows = rehearsalRows({ design: one, subjects: 4000, seed: 9 });
    expect(Math.abs(rows.responses.length / 16_000 - 0.72)).toBeLessThan(0.03);
    expect(Math.abs(new Set(rows.subjects).size / 4000 - 0.8 * (1 - 0.1 ** 4))).toBeLessThan(0.03);
  });
  it("on log scale give positive responses", () => {
    const rows = rehearsalRows({ design: design(factors, [1, 2, 3, 4], { scale: "log" }), subjects: 50, seed: 1 });
    expect(Math.min(...rows.responses)).toBeGreaterThan(0);
  });
});
