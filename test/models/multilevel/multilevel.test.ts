import { describe, expect, it } from "vitest";
import { silentWatch } from "../../../src/host/index.ts";
import { ModelError } from "../../../src/models/model-error.ts";
import { multilevelContrasts, multilevelOmnibus } from "../../../src/models/multilevel/index.ts";
import { withinContrasts } from "../../../src/models/within/index.ts";
import { modelData } from "../within/model-data.ts";
import { normals, uniforms } from "./random-inputs.ts";

const code = (work: () => unknown) => {
  try {
    work();
  } catch (error) {
    return error instanceof ModelError ? error.code : String(error);
  }
  return "no error";
};

describe("published examples", () => {
  // Yates (1935), oats: six blocks of three plots (varieties), four subplots each (nitrogen). Data and analysis recalled; the
  // data are confirmed by the mean squares coming out.
  const oats = [
    [
      [111, 130, 157, 174],
      [117, 114, 161, 141],
      [105, 140, 118, 156],
    ],
    [
      [61, 91, 97, 100],
      [70, 108, 126, 149],
      [96, 124, 121, 144],
    ],
    [
      [68, 64, 112, 86],
      [60, 102, 89, 96],
      [89, 129, 132, 124],
    ],
    [
      [74, 89, 81, 122],
      [64, 103, 132, 133],
      [70, 89, 104, 117],
    ],
    [
      [62, 90, 100, 116],
      [80, 82, 94, 126],
      [63, 70, 109, 99],
    ],
    [
      [53, 74, 118, 113],
      [89, 82, 86, 104],
      [97, 99, 119, 121],
    ],
  ];
  const response: number[] = [];
  const variety: number[] = [];
  const nitrogen: number[] = [];
  const plot: number[] = [];
  const block: number[] = [];
  for (const [b, plots] of oats.entries()) {
    for (const [v, subplots] of plots.entries()) {
      for (const [n, value] of subplots.entries()) {
        response.push(value);
        variety.push(v);
        nitrogen.push(n);
        plot.push(3 * b + v);
        block.push(b);
      }
    }
  }

  it("Yates's split plot: F 1.49 on 2 and 10, 37.69 on 3 and 45, 0.30 on 6 and 45 df (recalled)", () => {
    const result = multilevelOmnibus(
      modelData({
        response,
        factors: [
          { name: "variety", codes: variety, within: false },
          { name: "nitrogen", codes: nitrogen, within: true },
        ],
        units: { plot, block },
        blocks: ["block"],
      }),
    );
    const effect = (name: string) => result.effects.find((entry) => entry.effect === name)!;
    expect(effect("variety").value!.toFixed(2)).toBe("1.49");
    expect(effect("variety").df2!).toBeCloseTo(10, 6);
    expect(effect("nitrogen").value!.toFixed(2)).toBe("37.69");
    expect(effect("nitrogen").df2!).toBeCloseTo(45, 6);
    expect(effect("variety x nitrogen").value!.toFixed(2)).toBe("0.30");
    // Mean squares 3175.1 (blocks), 601.3 (plots) and 177.1 (subplots), recalled: (3175.06 - 601.33) / 12 and (601.33 - 177.08) / 4.
    const variance = (unit: string) => result.components.find((entry) => entry.unit === unit)!.variance;
    expect(variance("residual").toFixed(1)).toBe("177.1");
    expect(variance("plot")).toBeCloseTo((601.33 - 177.08) / 4, 1);
    expect(variance("block")).toBeCloseTo((3175.06 - 601.33) / 12, 1);
  });

  it("travel times in six rails (Devore; Pinheiro & Bates 2000, recalled): sd 24.805 between, 4.0208 within", () => {
    const rails = [
      [55, 53, 54],
      [26, 37, 32],
      [78, 91, 85],
      [92, 100, 96],
      [49, 51, 50],
      [80, 85, 83],
    ];
    const result = multilevelOmnibus(
      modelData({
        response: rails.flat(),
        factors: [],
        units: { rail: rails.flatMap((_, rail) => [rail, rail, rail]) },
      }),
    );
    expect(result.components[0]!.sd.toFixed(3)).toBe("24.805");
    expect(result.components[1]!.sd.toFixed(4)).toBe("4.0208");
    expect((-result.deviance / 2).toFixed(2)).toBe("-61.09");
    expect(result.effects).toEqual([]);
  });
});

/** Twelve subjects, three conditions, some cells missing. */
function incomplete(seed: number, options: { readonly constant?: number } = {}) {
  const normal = normals(seed);
  const response: number[] = [];
  const person: number[] = [];
  const a: number[] = [];
  for (let s = 0; s < 12; s++) {
    const own = 3 * normal();
    for (let level = 0; level < 3; level++) {
      const value = own + level + normal();
      if ((s * 3 + level) % 7 === 3) continue;
      response.push(value + (options.constant ?? 0));
      person.push(s);
      a.push(level);
    }
  }
  return modelData({
    response,
    center: options.constant ?? 0,
    factors: [{ name: "a", codes: a, within: true }],
    units: { person },
  });
}

describe("profile intervals", () => {
  it("rise by the chi-square quantile at both ends: checked by fitting with the variance held there", () => {
    const result = multilevelOmnibus(incomplete(3));
    const [person, residual] = result.components;
    for (const component of [person!, residual!]) {
      expect(component.lower!).toBeLessThan(component.variance);
      expect(component.upper!).toBeGreaterThan(component.variance);
    }
    const [icc] = result.intraclassCorrelation;
    expect(icc!.value).toBeCloseTo(person!.variance / (person!.variance + residual!.variance), 10);
    expect(icc!.lower!).toBeLessThan(icc!.value);
    expect(icc!.upper!).toBeGreaterThan(icc!.value);
    // Dense second route: the restricted likelihood of two variances on a fine search.
    const data = incomplete(3);
    const deviance = (between: number, within: number) => denseDeviance(data, between, within);
    const profile = (between: number) =>
      minimise((log) => deviance(between, Math.exp(log)), Math.log(residual!.variance));
    const best = deviance(person!.variance, residual!.variance);
    for (const end of [person!.lower!, person!.upper!]) expect(profile(end) - best).toBeCloseTo(3.841458820694124, 4);
    const share = (rho: number) =>
      minimise(
        (log) => deviance(rho * Math.exp(log), (1 - rho) * Math.exp(log)),
        Math.log(person!.variance + residual!.variance),
      );
    for (const end of [icc!.lower!, icc!.upper!]) expect(share(end) - best).toBeCloseTo(3.841458820694124, 4);
  });
});

/** -2 log restricted likelihood of a random-intercept model, written out over all rows. */
function denseDeviance(data: ReturnType<typeof incomplete>, between: number, within: number): number {
  const n = data.rows;
  const v = Array.from({ length: n }, (_, i) =>
    Array.from(
      { length: n },
      (__, j) => (data.units[0]!.codes[i] === data.units[0]!.codes[j] ? between : 0) + (i === j ? within : 0),
    ),
  );
  const p = data.cellCount;
  const right = Array.from({ length: n }, (_, i) => [
    ...Array.from({ length: p }, (__, cell) => (data.cells[i] === cell ? 1 : 0)),
    data.response.offsets[i]!,
  ]);
  const logV = gauss(v, right);
  const x = (i: number, k: number) => (data.cells[i] === k ? 1 : 0);
  const a = Array.from({ length: p }, (_, k) =>
    Array.from({ length: p }, (__, l) => sum(n, (i) => x(i, k) * right[i]![l]!)),
  );
  const b = Array.from({ length: p }, (_, k) => [sum(n, (i) => x(i, k) * right[i]![p]!)]);
  const yy = sum(n, (i) => data.response.offsets[i]! * right[i]![p]!);
  const keep = b.map(([value]) => value!);
  const logA = gauss(a, b);
  return logV + logA + yy - keep.reduce((total, value, k) => total + value * b[k]![0]!, 0);
}
const sum = (n: number, term: (i: number) => number) =>
  Array.from({ length: n }, (_, i) => term(i)).reduce((s, v) => s + v, 0);
/** Gaussian elimination: right becomes the solution, the log determinant comes back. */
function gauss(matrix: number[][], right: number[][]): number {
  let log = 0;
  for (let k = 0; k < matrix.length; k++) {
    log += Math.log(matrix[k]![k]!);
    for (let i = 0; i < matrix.length; i++) {
      if (i === k) continue;
      const factor = matrix[i]![k]! / matrix[k]![k]!;
      for (let j = k; j < matrix.length; j++) matrix[i]![j]! -= factor * matrix[k]![j]!;
      for (let j = 0; j < right[0]!.length; j++) right[i]![j]! -= factor * right[k]![j]!;
    }
  }
  for (let k = 0; k < matrix.length; k++) right[k] = right[k]!.map((value) => value / matrix[k]![k]!);
  return log;
}
/** Golden-section minimum around a start. */
function minimise(height: (x: number) => number, start: number): number {
  let [low, high] = [start - 4, start + 4];
  const ratio = (Math.sqrt(5) - 1) / 2;
  for (let step = 0; step < 80; step++) {
    const left = high - ratio * (high - low);
    const right = low + ratio * (high - low);
    if (height(left) < height(right)) high = right;
    else low = left;
  }
  return height((low + high) / 2);
}

describe("multilevel models", () => {
  it("do not move under shift and follow scale", () => {
    const plain = multilevelOmnibus(incomplete(5), { intervalLevel: null });
    const shifted = multilevelOmnibus(incomplete(5, { constant: 1e9 }), { intervalLevel: null });
    expect(shifted.effects[0]!.value! / plain.effects[0]!.value!).toBeCloseTo(1, 5);
    const data = incomplete(5);
    const scaled = multilevelOmnibus(
      { ...data, response: { center: 0, offsets: data.response.offsets.map((value) => 1e-6 * value) } },
      { intervalLevel: null },
    );
    expect(scaled.effects[0]!.value! / plain.effects[0]!.value!).toBeCloseTo(1, 8);
    expect(scaled.effects[0]!.df2! / plain.effects[0]!.df2!).toBeCloseTo(1, 8);
    expect(scaled.components[0]!.variance / plain.components[0]!.variance).toBeCloseTo(1e-12, 18);
  });

  it("give the contrast scores' paired t between two complete conditions", () => {
    const normal = normals(9);
    const response = Array.from(
      { length: 20 },
      (_, row) => 5 * Math.sin(Math.floor(row / 2) * 7) + (row % 2) + normal(),
    );
    const data = modelData({
      response,
      factors: [{ name: "a", codes: response.map((_, row) => row % 2), within: true }],
      units: { person: response.map((_, row) => Math.floor(row / 2)) },
    });
    const contrast = [{ name: "1 - 0", weights: Float64Array.from([-1, 1]) }];
    const multilevel = multilevelContrasts(data, contrast);
    const scores = withinContrasts(data, contrast);
    expect(multilevel.standardErrors[0]! / scores.standardErrors[0]!).toBeCloseTo(1, 8);
    expect(multilevel.df[0]).toBeCloseTo(9, 6);
    const [effect] = multilevelOmnibus(data, { intervalLevel: null }).effects;
    expect(effect!.value! / (scores.estimates[0]! / scores.standardErrors[0]!) ** 2).toBeCloseTo(1, 8);
  });

  it("name what empty cells leave untestable", () => {
    const data = modelData({
      response: [1, 2, 4, 3, 5, 5, 2, 8, 9, 7],
      factors: [
        { name: "g", codes: [0, 0, 0, 0, 1, 1, 1, 0, 0, 1], within: false },
        { name: "a", codes: [0, 1, 0, 1, 0, 0, 0, 0, 1, 0], within: true },
      ],
      units: { person: [0, 0, 1, 1, 2, 3, 4, 5, 5, 6] },
    });
    const result = multilevelOmnibus(data, { intervalLevel: null, likelihoodRatio: false });
    expect(result.effects).toEqual([]);
    expect(
      result.notes.filter((note) => note.code === "effect-not-estimable").map((note) => note.facts.effect),
    ).toEqual(["g", "a", "g x a"]);
    expect(code(() => multilevelContrasts(data, [{ name: "x", weights: Float64Array.from([0, 0, -1, 1]) }]))).toBe(
      "empty-cell",
    );
  });

  it("refuse one subject, exact fits, dependent covariates and units of one row", () => {
    const rows = { person: [0, 0, 1, 1, 2, 2] };
    const a = { name: "a", codes: [0, 1, 0, 1, 0, 1], within: true };
    expect(
      code(() =>
        multilevelOmnibus(
          modelData({ response: [1, 2], factors: [{ ...a, codes: [0, 1] }], units: { person: [0, 0] } }),
        ),
      ),
    ).toBe("one-subject");
    expect(code(() => multilevelOmnibus(modelData({ response: [1, 2, 1, 2, 1, 2], factors: [a], units: rows })))).toBe(
      "zero-variance",
    );
    expect(code(() => multilevelOmnibus(modelData({ response: [1, 2, 3, 4, 7, 8], factors: [a], units: rows })))).toBe(
      "zero-residual",
    );
    const twice = { response: [1, 2, 3, 6, 7, 8], factors: [a], units: rows, covariates: { z: [0, 1, 0, 1, 0, 1] } };
    expect(code(() => multilevelOmnibus(modelData(twice)))).toBe("rank-deficient");
    expect(
      code(() =>
        multilevelOmnibus(
          modelData({
            response: [1, 2, 3, 5],
            factors: [{ name: "g", codes: [0, 0, 1, 1], within: false }],
            units: { person: [0, 1, 2, 3] },
          }),
        ),
      ),
    ).toBe("no-random-unit");
  });

  it("stop when asked", () => {
    let calls = 0;
    const watch = {
      ...silentWatch,
      checkpoint() {
        calls++;
        if (calls > 5) throw new Error("stopped");
      },
    };
    expect(() => multilevelOmnibus(incomplete(3), { watch })).toThrow("stopped");
  });
});

describe("parametric bootstrap", () => {
  const options = {
    intervalLevel: null,
    bootstrap: { studies: 199, seed: 11 },
  };
  it("gives the exact test of balanced data: close to the F test, where chi-square is too small", () => {
    const normal = normals(21);
    const response = Array.from(
      { length: 24 },
      (_, row) => 2 * Math.sin(Math.floor(row / 4) * 5) + 0.55 * (row % 4) + normal(),
    );
    const data = modelData({
      response,
      factors: [{ name: "a", codes: response.map((_, row) => row % 4), within: true }],
      units: { person: response.map((_, row) => Math.floor(row / 4)) },
    });
    const [effect] = multilevelOmnibus(data, options).effects;
    const ratio = effect!.likelihoodRatio!;
    expect(ratio.bootstrapStudies).toBe(199);
    // Three standard errors of 199 studies.
    const error = 3 * Math.sqrt((effect!.p! * (1 - effect!.p!)) / 199);
    expect(Math.abs(ratio.bootstrapP! - effect!.p!)).toBeLessThan(error + 0.01);
    expect(ratio.p).toBeLessThan(effect!.p!);
  });
  it("gives the same p again from the same seed", () => {
    const first = multilevelOmnibus(incomplete(3), { ...options, bootstrap: { ...options.bootstrap, studies: 19 } });
    const again = multilevelOmnibus(incomplete(3), { ...options, bootstrap: { ...options.bootstrap, studies: 19 } });
    expect(again.effects).toEqual(first.effects);
    expect(first.effects[0]!.likelihoodRatio!.bootstrapP).toBeGreaterThan(0);
  });
});

describe("the search", () => {
  const kinds = ["unstructured, trials kept", "slopes", "crossed"] as const;
  it.each(kinds)("comes to an end on small ragged data, on the boundary or not: %s", (kind) => {
    const failed: string[] = [];
    for (let seed = 1; seed <= 25; seed++) {
      const uniform = uniforms(seed);
      const normal = normals(seed + 1000);
      const subjects = 5 + Math.floor(8 * uniform());
      const levels = 2 + Math.floor(2 * uniform());
      const rows = {
        response: [] as number[],
        a: [] as number[],
        person: [] as number[],
        item: [] as number[],
        x: [] as number[],
      };
      for (let person = 0; person < subjects; person++) {
        const [own, slope] = [3 * uniform() * normal(), uniform() * normal()];
        for (let a = 0; a < levels; a++) {
          const trials = kind === "crossed" ? 1 : 2 + Math.floor(2 * uniform());
          for (let trial = 0; trial < trials; trial++) {
            const x = normal();
            rows.response.push(own + (kind === "slopes" ? slope * x : 0) + normal() * (1 + a * uniform()));
            rows.a.push(a);
            rows.person.push(person);
            rows.item.push((person + a + trial) % 5);
            rows.x.push(x);
          }
        }
      }
      const data = modelData({
        response: rows.response,
        factors: [{ name: "a", codes: rows.a, within: true }],
        units: kind === "crossed" ? { person: rows.person, item: rows.item } : { person: rows.person },
        items: ["item"],
        covariance: kind === "unstructured, trials kept" ? "unstructured" : null,
        ...(kind === "slopes" ? { covariates: { x: rows.x }, slopes: { person: ["x"] } } : {}),
      });
      try {
        const { effects } = multilevelOmnibus(data, { intervalLevel: null });
        for (const { p } of effects) if (!(p !== null && p >= 0 && p <= 1)) failed.push(`${seed}: p ${p}`);
      } catch (error) {
        failed.push(`${seed}: ${error instanceof ModelError ? error.code : String(error)}`);
      }
    }
    expect(failed).toEqual([]);
  });
});
