/**
 * Type I error of the within-subject, mixed and multilevel defaults: studies without any difference, small, with covariances that
 * are not spherical, unequal groups, missing cells and crossed units. Invented, no real data. `npm run calibration -- models`
 */
import type { ModelData } from "../../src/design/types.ts";
import {
  multilevelContrasts,
  multilevelOmnibus,
  repeatedMeasuresAnalysis,
  withinContrasts,
} from "../../src/models/index.ts";
import { tTwoSidedTail } from "../../src/numeric/index.ts";
import { generator, normals } from "./studies.ts";

const studiesPerDesign = 10_000;
const perJob = 250;

type Covariance = "spherical" | "decaying" | "growing";

interface Design {
  readonly name: string;
  readonly kind: "within" | "mixed" | "two within" | "trials" | "items" | "nested";
  /** Subjects per group. */
  readonly sizes: readonly number[];
  readonly cells: number;
  readonly covariance: Covariance;
  /** Share of rows taken out at random. */
  readonly missing: number;
  readonly assume?: "unstructured";
  readonly studies?: number;
}

const designs: readonly Design[] = [
  {
    name: "4 conditions, 8 subjects, spherical",
    kind: "within",
    sizes: [8],
    cells: 4,
    covariance: "spherical",
    missing: 0,
  },
  {
    name: "4 conditions, 8 subjects, correlation decays with distance",
    kind: "within",
    sizes: [8],
    cells: 4,
    covariance: "decaying",
    missing: 0,
  },
  {
    name: "4 conditions, 8 subjects, spread grows fourfold",
    kind: "within",
    sizes: [8],
    cells: 4,
    covariance: "growing",
    missing: 0,
  },
  {
    name: "4 conditions, 20 subjects, spread grows fourfold",
    kind: "within",
    sizes: [20],
    cells: 4,
    covariance: "growing",
    missing: 0,
  },
  {
    name: "4 conditions, 10 subjects, spherical, 15% of cells missing",
    kind: "within",
    sizes: [10],
    cells: 4,
    covariance: "spherical",
    missing: 0.15,
  },
  {
    name: "4 conditions, 10 subjects, decaying, 15% missing",
    kind: "within",
    sizes: [10],
    cells: 4,
    covariance: "decaying",
    missing: 0.15,
  },
  {
    name: "3 conditions, 12 subjects, growing, 15% missing, assume unstructured",
    kind: "within",
    sizes: [12],
    cells: 3,
    covariance: "growing",
    missing: 0.15,
    assume: "unstructured",
  },
  {
    name: "3 conditions x 2 groups of 6, spherical",
    kind: "mixed",
    sizes: [6, 6],
    cells: 3,
    covariance: "spherical",
    missing: 0,
  },
  {
    name: "3 conditions x 2 groups of 4 and 9, decaying",
    kind: "mixed",
    sizes: [4, 9],
    cells: 3,
    covariance: "decaying",
    missing: 0,
  },
  {
    name: "3 conditions x 2 groups of 5 and 8, spherical, 15% missing",
    kind: "mixed",
    sizes: [5, 8],
    cells: 3,
    covariance: "spherical",
    missing: 0.15,
  },
  {
    name: "2 x 3 conditions, 10 subjects",
    kind: "two within",
    sizes: [10],
    cells: 6,
    covariance: "spherical",
    missing: 0,
  },
  {
    name: "2 x 3 conditions, 10 subjects, 10% missing",
    kind: "two within",
    sizes: [10],
    cells: 6,
    covariance: "spherical",
    missing: 0.1,
  },
  {
    name: "3 conditions, 8 subjects, 1 to 4 trials kept",
    kind: "trials",
    sizes: [8],
    cells: 3,
    covariance: "spherical",
    missing: 0,
  },
  {
    name: "3 conditions, 9 subjects x 12 items, counterbalanced",
    kind: "items",
    sizes: [9],
    cells: 3,
    covariance: "spherical",
    missing: 0,
  },
  {
    name: "3 diets between 9 herds of 2 to 5 animals, 1 to 2 weighings",
    kind: "nested",
    sizes: [9],
    cells: 3,
    covariance: "spherical",
    missing: 0,
  },
];

interface Rows {
  readonly response: number[];
  readonly codes: Record<string, number[]>;
  readonly units: Record<string, number[]>;
}

function cellNoise(design: Design, normal: () => number): number[] {
  const { cells, covariance } = design;
  const noise = Array.from({ length: cells }, () => normal());
  if (covariance === "growing") return noise.map((value, cell) => value * (1 + (3 * cell) / (cells - 1)));
  if (covariance === "decaying") {
    for (let cell = 1; cell < cells; cell++) noise[cell] = 0.8 * noise[cell - 1]! + 0.6 * noise[cell]!;
  }
  return noise;
}

function drawRows(design: Design, uniform: () => number, normal: () => number): Rows {
  const rows: Rows = { response: [], codes: { a: [], b: [], g: [] }, units: { person: [], other: [] } };
  const push = (value: number, a: number, b: number, g: number, person: number, other: number) => {
    if (uniform() < design.missing) return;
    rows.response.push(value);
    rows.codes.a!.push(a);
    rows.codes.b!.push(b);
    rows.codes.g!.push(g);
    rows.units.person!.push(person);
    rows.units.other!.push(other);
  };
  if (design.kind === "nested") {
    let animal = 0;
    for (let herd = 0; herd < design.sizes[0]!; herd++) {
      const ofHerd = normal();
      const animals = 2 + Math.floor(4 * uniform());
      for (let k = 0; k < animals; k++, animal++) {
        const own = ofHerd + normal();
        const times = 1 + Math.floor(2 * uniform());
        for (let t = 0; t < times; t++) push(own + normal(), herd % 3, 0, 0, animal, herd);
      }
    }
    return rows;
  }
  if (design.kind === "items") {
    const items = 12;
    const ofItem = Array.from({ length: items }, () => [normal(), 0.7 * normal(), 0.7 * normal(), 0.7 * normal()]);
    for (let s = 0; s < design.sizes[0]!; s++) {
      const own = [1.5 * normal(), normal(), normal(), normal()];
      for (let item = 0; item < items; item++) {
        const a = (s + item) % 3;
        push(own[0]! + own[a + 1]! + ofItem[item]![0]! + ofItem[item]![a + 1]! + 1.5 * normal(), a, 0, 0, s, item);
      }
    }
    return rows;
  }
  let person = 0;
  for (const [g, size] of design.sizes.entries()) {
    for (let s = 0; s < size; s++, person++) {
      const own = 1.5 * normal();
      const noise = cellNoise(design, normal);
      const ofA = [normal(), normal()];
      const ofB = [normal(), normal(), normal()];
      for (let cell = 0; cell < design.cells; cell++) {
        if (design.kind === "two within") {
          push(
            own + ofA[cell % 2]! + ofB[Math.floor(cell / 2)]! + noise[cell]!,
            cell % 2,
            Math.floor(cell / 2),
            g,
            person,
            0,
          );
          continue;
        }
        const trials = design.kind === "trials" ? 1 + Math.floor(4 * uniform()) : 1;
        for (let trial = 0; trial < trials; trial++) {
          push(own + noise[cell]! + (design.kind === "trials" ? 1.5 * normal() : 0), cell, 0, g, person, 0);
        }
      }
    }
  }
  return rows;
}

function laidOut(design: Design, rows: Rows): ModelData {
  const factor = (name: string, levels: number, within: boolean) => ({
    name,
    levels: Array.from({ length: levels }, (_, level) => `${name}${level}`),
    varies: within ? ("within" as const) : ("between" as const),
    unit: "person",
    betweenUnit: null,
    ordered: false,
    positions: null,
    reference: null,
    measured: false,
    codes: Int32Array.from(rows.codes[name]!),
  });
  const factors =
    design.kind === "two within"
      ? [factor("a", 2, true), factor("b", 3, true)]
      : design.kind === "mixed"
        ? [factor("g", 2, false), factor("a", design.cells, true)]
        : [factor("a", design.kind === "nested" ? 3 : design.cells, design.kind !== "nested")];
  const unit = (name: string, role: "subjects" | "items" | "blocks", from: readonly number[]) => {
    const number = new Map<number, number>();
    const codes = Int32Array.from(from, (own) => {
      if (!number.has(own)) number.set(own, number.size);
      return number.get(own)!;
    });
    return { name, role, nestedIn: [], slopes: [], codes, labels: [], count: number.size };
  };
  const cells = new Int32Array(rows.response.length);
  for (const { codes, levels } of factors)
    for (let row = 0; row < cells.length; row++) cells[row] = cells[row]! * levels.length + codes[row]!;
  return {
    rows: rows.response.length,
    response: { center: 0, offsets: Float64Array.from(rows.response) },
    factors,
    units: [
      unit("person", "subjects", rows.units.person!),
      ...(design.kind === "items" ? [unit("item", "items", rows.units.other!)] : []),
      ...(design.kind === "nested" ? [unit("herd", "blocks", rows.units.other!)] : []),
    ],
    covariates: [],
    assumptions: { variances: "equal", covariance: design.assume ?? null },
    cells,
    cellCount: factors.reduce((count, { levels }) => count * levels.length, 1),
  };
}

interface Tally {
  /** Per test: rejections at 5%, studies in which it gave an answer. */
  readonly [test: string]: { rejected: number; answered: number };
}

function study(design: Design, index: number, tally: Record<string, { rejected: number; answered: number }>): void {
  const uniform = generator(0x5eed + 7919 * index + 104729 * designs.indexOf(design));
  const data = laidOut(design, drawRows(design, uniform, normals(uniform)));
  const count = (test: string, p: number | null | undefined) => {
    tally[test] ??= { rejected: 0, answered: 0 };
    if (p === null || p === undefined) return;
    tally[test].answered++;
    if (p < 0.05) tally[test].rejected++;
  };
  const multilevel = multilevelOmnibus(data, { intervalLevel: null });
  for (const { effect, p, likelihoodRatio } of multilevel.effects) {
    count(`${effect}: multilevel F, Kenward-Roger`, p);
    count(`${effect}: likelihood ratio`, likelihoodRatio?.p);
  }
  const contrasts = pairs(data);
  const complete = design.missing === 0 && ["within", "mixed", "two within"].includes(design.kind);
  if (complete) {
    for (const effect of repeatedMeasuresAnalysis(data, { level: null }).effects) {
      count(`${effect.effect}: repeated measures, no correction`, effect.p);
      if (effect.epsilonGreenhouseGeisser === undefined || effect.df1 === 1) continue;
      count(`${effect.effect}: Greenhouse-Geisser`, effect.pGreenhouseGeisser);
      count(`${effect.effect}: Huynh-Feldt`, effect.pHuynhFeldt);
    }
  }
  const estimates = complete ? withinContrasts(data, contrasts) : multilevelContrasts(data, contrasts);
  for (const [at, contrast] of contrasts.entries()) {
    const t = estimates.estimates[at]! / estimates.standardErrors[at]!;
    count(
      `${contrast.name}: ${complete ? "contrast scores" : "multilevel comparison"}`,
      tTwoSidedTail(t, estimates.df[at]!),
    );
  }
}

/** The first and last level of factor a, each the mean of its cells; and between the groups where there are some. */
function pairs(data: ModelData) {
  const difference = (name: string) => {
    const factor = data.factors.find((own) => own.name === name)!;
    const position = data.factors.indexOf(factor);
    const stride = data.factors.slice(position + 1).reduce((product, { levels }) => product * levels.length, 1);
    const last = factor.levels.length - 1;
    const each = factor.levels.length / data.cellCount;
    const weights = Float64Array.from({ length: data.cellCount }, (_, cell) => {
      const level = Math.floor(cell / stride) % factor.levels.length;
      return level === last ? each : level === 0 ? -each : 0;
    });
    return { name: `${factor.levels[last]} - ${factor.levels[0]}`, weights };
  };
  return data.factors.map(({ name }) => difference(name));
}

export const tasks = {
  studies(input: { design: number; from: number; count: number }): Tally {
    const tally: Record<string, { rejected: number; answered: number }> = {};
    for (let index = input.from; index < input.from + input.count; index++) {
      try {
        study(designs[input.design]!, index, tally);
      } catch (error) {
        const code = `no answer: ${(error as { code?: string }).code ?? String(error)}`;
        tally[code] ??= { rejected: 0, answered: 0 };
        tally[code].answered++;
      }
    }
    return tally;
  },
};

type Parallel = (task: "studies", inputs: readonly unknown[]) => Promise<readonly Tally[]>;

export async function run(parallel: Parallel): Promise<string> {
  const inputs = designs.flatMap((design, index) =>
    Array.from({ length: (design.studies ?? studiesPerDesign) / perJob }, (_, job) => ({
      design: index,
      from: job * perJob,
      count: perJob,
    })),
  );
  const answers = await parallel("studies", inputs);
  const lines = [
    "# What the within-subject, mixed and multilevel defaults hold",
    "",
    `Share of ${studiesPerDesign.toLocaleString("en")} simulated studies without any difference in which each test rejected at 5%. Monte Carlo error (one standard error): 0.22 points.`,
    "Written by `npm run calibration -- models`; invented data, fixed seeds. Marked are shares more than three standard errors from 5%.",
    "",
    "| design | test | rejected | |",
    "| --- | --- | ---: | --- |",
  ];
  for (const [index, design] of designs.entries()) {
    const total: Record<string, { rejected: number; answered: number }> = {};
    for (const [job, answer] of answers.entries()) {
      if (inputs[job]!.design !== index) continue;
      for (const [test, { rejected, answered }] of Object.entries(answer)) {
        total[test] ??= { rejected: 0, answered: 0 };
        total[test].rejected += rejected;
        total[test].answered += answered;
      }
    }
    for (const [test, { rejected, answered }] of Object.entries(total).sort(([left], [right]) =>
      left < right ? -1 : 1,
    )) {
      if (test.startsWith("no answer")) {
        lines.push(`| ${design.name} | ${test} | ${answered} studies | |`);
        continue;
      }
      const share = rejected / answered;
      const error = Math.sqrt((0.05 * 0.95) / answered);
      const mark = share > 0.05 + 3 * error ? "too often" : share < 0.05 - 3 * error ? "too seldom" : "";
      lines.push(`| ${design.name} | ${test} | ${(100 * share).toFixed(1)}% | ${mark} |`);
    }
  }
  return `${lines.join("\n")}\n`;
}
