/**
 * What each correction really holds, by simulation: family error under no difference and under some differences, the false discovery rate,
 * and the joint coverage of intervals. 20,000 studies for each design and truth; the table is test/calibration/families.md.
 */
import {
  type CorrectionName,
  type Decider,
  type FamilyProblem,
  familyDecider,
  type GatedFamily,
  gatekeep,
  holdFamily,
  jointLevel,
} from "../../src/families/index.ts";
import { silentWatch } from "../../src/host/index.ts";
import {
  type Design,
  designs,
  type Estimates,
  estimate,
  generator,
  normals,
  ownP,
  rearrangedStatistics,
  simulate,
} from "./studies.ts";

const studies = 20_000;
const perJob = 2_000;
const error = 0.05;
/** A multiple of 20, so that the levels of 5% fall on whole numbers of arrangements (Westfall & Young 1993). */
const arrangements = 200;
const graphShares = {
  weights: [0.5, 0.5, 0],
  passes: [
    [0, 0.5, 0.5],
    [0.5, 0, 0.5],
    [0, 1, 0],
  ],
};

/** Differences of five standard deviations are found nearly always, so that the error is that of the true null hypotheses left. */
const truths = [
  { name: "no difference", means: [0, 0, 0, 0] },
  { name: "one differs", means: [0, 0, 0, 5] },
  { name: "two pairs", means: [0, 0, 5, 5] },
] as const;

interface FamilyKind {
  readonly name: string;
  readonly shape: "all pairs" | "against one";
  readonly sides: "two-sided" | "upper";
  readonly methods: readonly CorrectionName[];
  /** Limits are looked at in each study (they depend on the decisions); else joint coverage is that of the one critical value. */
  readonly stepLimits: boolean;
}

const kinds: readonly FamilyKind[] = [
  {
    name: "all pairs",
    shape: "all pairs",
    sides: "two-sided",
    methods: [
      "none",
      "bonferroni",
      "sidak",
      "holm",
      "hochberg",
      "hommel",
      "shaffer",
      "tukey",
      "games-howell",
      "scheffe",
      "single-step",
      "step-down",
      "resampling",
      "fixed sequence",
      "fallback",
      "bh",
      "by",
    ],
    stepLimits: false,
  },
  {
    name: "each against one",
    shape: "against one",
    sides: "two-sided",
    methods: ["none", "bonferroni", "holm", "hochberg", "hommel", "dunnett", "single-step", "step-down", "graph"],
    stepLimits: false,
  },
  {
    name: "each against one, one-sided",
    shape: "against one",
    sides: "upper",
    methods: [
      "none",
      "bonferroni",
      "holm",
      "hochberg",
      "hommel",
      "dunnett",
      "step-down",
      "fixed sequence",
      "fallback",
      "graph",
    ],
    stepLimits: true,
  },
];

function weightsOf(shape: FamilyKind["shape"]): number[][] {
  const pairs = [];
  for (let i = 0; i < 4; i++) for (let j = i + 1; j < 4; j++) pairs.push([j, i] as const);
  return pairs
    .filter(([, i]) => shape === "all pairs" || i === 0)
    .map(([j, i]) => [0, 1, 2, 3].map((k) => (k === j ? 1 : k === i ? -1 : 0)));
}

function problemOf(kind: FamilyKind, design: Design, it: Estimates): FamilyProblem {
  const weights = weightsOf(kind.shape);
  return {
    ...it,
    names: weights.map((_, i) => `c${i}`),
    p: weights.map(() => 1),
    commonDf: design.pooled ? it.df[0]! : null,
    sides: kind.sides,
    margin: null,
    error,
    shape: { kind: kind.shape, means: 4, repeated: false, within: !design.between },
    weights,
    graph: weights.length === 3 ? graphShares : null,
    resamples: { count: 1, exact: false, fill: () => undefined },
    seed: 1,
    watch: silentWatch,
  };
}

/** Methods that make a claim for a design: resampling and scheffe only for equal spreads, ranges by error term. */
function claims(name: CorrectionName, design: Design): boolean {
  if (name === "games-howell") return design.between && !design.pooled;
  if (name === "tukey" || name === "scheffe" || name === "dunnett") return design.pooled;
  if (name === "resampling") return design.pooled;
  return true;
}

interface Count {
  readonly key: string;
  wrong: number;
  falseShare: number;
  every: number;
  covered: number;
  coverageStudies: number;
}
interface Job {
  readonly design: number;
  readonly truth: number;
  readonly from: number;
  readonly count: number;
}

/** Methods whose intervals hold together at one critical value: all cover exactly when nothing is rejected against the truth. */
const oneCritical: readonly CorrectionName[] = [
  "bonferroni",
  "sidak",
  "tukey",
  "games-howell",
  "scheffe",
  "single-step",
  "dunnett",
];

function simulateChunk({ design: d, truth: t, from, count }: Job): readonly Count[] {
  const design = designs[d]!;
  const means = truths[t]!.means.map((mean) => (mean > 0 ? mean * Math.max(...design.spreads) : 0));
  const counts = new Map<string, Count>();
  const countOf = (key: string) => {
    const known = counts.get(key) ?? { key, wrong: 0, falseShare: 0, every: 0, covered: 0, coverageStudies: 0 };
    counts.set(key, known);
    return known;
  };
  const prepared = kinds.map((kind) => {
    const weights = weightsOf(kind.shape);
    // The correlation of a pooled design depends on the sizes only; any data give it.
    const template = problemOf(kind, design, estimate(design, simulate(design, means, normals(generator(1))), weights));
    const methods = kind.methods.filter((name) => claims(name, design));
    return {
      kind,
      weights,
      truth: weights.map((row) => row.reduce((sum, w, g) => sum + w * means[g]!, 0)),
      methods: methods.map((name) => ({ name, decide: familyDecider(name, template) })),
      level: jointLevel(template),
    };
  });

  for (let study = from; study < from + count; study++) {
    // One stream for each study, whatever the chunk it falls in.
    const uniform = generator((d * 16 + t) * 1_000_003 + study);
    const values = simulate(design, means, normals(uniform));
    for (const { kind, weights, truth, methods, level } of prepared) {
      const it = estimate(design, values, weights);
      const p = ownP(
        it,
        kind.sides,
        truth.map(() => 0),
      );
      const own = design.pooled ? {} : { correlation: it.correlation };
      const isNull = truth.map((value) => (kind.sides === "upper" ? value <= 0 : value === 0));
      const shifted = { p: ownP(it, kind.sides, truth), df: it.df, ...own };
      const problem = problemOf(kind, design, it);
      for (const { name, decide } of methods) {
        const tally = countOf(`${kind.name} | ${name}`);
        const resamples = name === "resampling" ? resamplesOf(design, values, weights, it, uniform) : null;
        const rejected = decide({ p, df: it.df, ...own, ...(resamples === null ? {} : { resamples }) });
        if (study < from + 2 && name !== "resampling") checkWhole(name, { ...problem, p }, rejected, study);
        const wrong = rejected.filter((is, i) => is && isNull[i]).length;
        if (wrong > 0) tally.wrong++;
        const all = rejected.filter(Boolean).length;
        tally.falseShare += all === 0 ? 0 : wrong / all;
        if (rejected.every((is, i) => is || isNull[i])) tally.every++;
        if (oneCritical.includes(name)) {
          tally.coverageStudies++;
          if (!decide(shifted).some(Boolean)) tally.covered++;
        } else if (kind.stepLimits && name === "step-down") {
          if (design.pooled) {
            tally.coverageStudies++;
            if (stepDownCovers(rejected, truth, shifted.p, level)) tally.covered++;
          }
        } else if (kind.stepLimits && !withoutJointLimits.includes(name)) {
          const answer = holdFamily(name, { ...problem, p });
          tally.coverageStudies++;
          if (answer.lower.every((low, i) => low === null || low < truth[i]!)) tally.covered++;
        }
      }
    }
    gates(design, values, means, countOf);
    equivalence(design, values, means, countOf);
  }
  return [...counts.values()];
}

/** The fast decisions must be those of the whole answer. */
function checkWhole(name: CorrectionName, problem: FamilyProblem, rejected: readonly boolean[], study: number): void {
  const whole = holdFamily(name, problem).rejected;
  if (whole.some((is, i) => is !== rejected[i]))
    throw new Error(`${name}, study ${study}: decided ${rejected}, held ${whole}, p ${problem.p}`);
}

const withoutJointLimits: readonly CorrectionName[] = ["none", "hochberg", "hommel"];

/**
 * Whether the one-sided limits of step-down cover: in own p against the truth, as the critical values of a fixed joint law are p levels.
 */
function stepDownCovers(
  rejected: readonly boolean[],
  truth: readonly number[],
  shiftedP: readonly number[],
  level: (rows: readonly number[]) => number,
): boolean {
  const rows = rejected.map((_, i) => i);
  const left = rows.filter((i) => !rejected[i]);
  const at = level(left.length === 0 ? rows : left);
  // A limit on zero leaves zero out: the claim is "above zero".
  return rows.every((i) => {
    if (left.length === 0) return truth[i]! > 0 && shiftedP[i]! > at;
    return rejected[i] ? truth[i]! > 0 : shiftedP[i]! > at;
  });
}

/** The observed statistics first, then random arrangements. */
function resamplesOf(
  design: Design,
  values: readonly Float64Array[],
  weights: readonly (readonly number[])[],
  it: Estimates,
  uniform: () => number,
): NonNullable<FamilyProblem["resamples"]> {
  const next = rearrangedStatistics(design, values, weights, uniform);
  return {
    count: arrangements,
    exact: false,
    fill: (index, into) => {
      if (index > 0) next(into);
      else for (let i = 0; i < into.length; i++) into[i] = it.estimates[i]! / it.standardErrors[i]!;
    },
  };
}

/** A primary family and one after it: the error is that of both families together. */
function gates(
  design: Design,
  values: readonly Float64Array[],
  means: readonly number[],
  countOf: (key: string) => Count,
): void {
  const kind = kinds[0]!;
  const weights = weightsOf("all pairs");
  const it = estimate(design, values, weights);
  const problem = {
    ...problemOf(kind, design, it),
    p: ownP(
      it,
      "two-sided",
      weights.map(() => 0),
    ),
    resamples: null,
  };
  const truth = weights.map((row) => row.reduce((sum, w, g) => sum + w * means[g]!, 0));
  const part = (
    name: string,
    correction: CorrectionName,
    rows: readonly number[],
    after: GatedFamily["after"],
  ): GatedFamily => {
    const cut = <T>(values: readonly T[]) => rows.map((i) => values[i]!);
    return {
      name,
      correction,
      after,
      problem: {
        ...problem,
        shape: { ...problem.shape, kind: "free" },
        names: cut(problem.names),
        estimates: cut(problem.estimates),
        standardErrors: cut(problem.standardErrors),
        df: cut(problem.df),
        p: cut(problem.p),
        weights: cut(problem.weights),
        correlation: cut(problem.correlation!).map(cut),
        graph: null,
      },
    };
  };
  // The last mean against the others first, so that "one differs" opens the gate and leaves three true null hypotheses behind it.
  const [first, second] = [
    [2, 4, 5],
    [0, 1, 3],
  ];
  for (const any of [false, true]) {
    const families = [
      part("first", any ? "bonferroni" : "holm", first, null),
      part("second", "holm", second, { family: "first", any }),
    ];
    const rejected = gatekeep(families).flatMap(({ answer }) => answer.rejected);
    const rows = [...first, ...second];
    const wrong = rejected.filter((is, k) => is && truth[rows[k]!] === 0).length;
    const tally = countOf(
      `two families | ${any ? "bonferroni, then holm after any of it" : "holm, then holm after it"}`,
    );
    if (wrong > 0) tally.wrong++;
    const all = rejected.filter(Boolean).length;
    tally.falseShare += all === 0 ? 0 : wrong / all;
    if (rejected.every((is, k) => is || truth[rows[k]!] === 0)) tally.every++;
  }
}

/** Equivalence of each with one, where every true difference lies on a margin or far inside it: claims on the margin are false. */
function equivalence(
  design: Design,
  values: readonly Float64Array[],
  means: readonly number[],
  countOf: (key: string) => Count,
): void {
  if (means.every((mean) => mean === 0)) return;
  const kind: FamilyKind = { ...kinds[1]!, name: "equivalence with one" };
  const weights = weightsOf("against one");
  const it = estimate(design, values, weights);
  const value = Math.max(...means);
  const truth = weights.map((row) => row.reduce((sum, w, g) => sum + w * means[g]!, 0));
  const problem: FamilyProblem = {
    ...problemOf(kind, design, it),
    margin: { type: "equivalence", value, better: null },
    p: it.estimates.map((estimate_, i) =>
      Math.max(
        ...[value - estimate_, value + estimate_].map(
          (distance) =>
            ownP(
              { ...it, estimates: it.estimates.map(() => distance) },
              "upper",
              truth.map(() => 0),
            )[i]!,
        ),
      ),
    ),
  };
  for (const name of ["bonferroni", "holm"] as const) {
    const tally = countOf(`${kind.name} | ${name}`);
    const { rejected, lower, upper } = holdFamily(name, problem);
    const isFalse = (i: number) => Math.abs(truth[i]!) >= value;
    const wrong = rejected.filter((is, i) => is && isFalse(i)).length;
    const all = rejected.filter(Boolean).length;
    if (wrong > 0) tally.wrong++;
    tally.falseShare += all === 0 ? 0 : wrong / all;
    if (rejected.every((is, i) => is || isFalse(i))) tally.every++;
    tally.coverageStudies++;
    // A limit on the margin leaves the margin out where the claim is made: the claim is "inside".
    if (truth.every((it_, i) => lower[i]! <= it_ && it_ <= upper[i]! && !(rejected[i] && isFalse(i)))) tally.covered++;
  }
  for (const name of ["single-step", "step-down"] as const) {
    const decide = equivalenceDeciders.get(`${design.name} ${name}`);
    if (decide === undefined) continue;
    const tally = countOf(`${kind.name} | ${name}`);
    const rejected = decide({ p: problem.p });
    if (rejected.some((is, i) => is && Math.abs(truth[i]!) >= value)) tally.wrong++;
    if (rejected.every((is, i) => is || Math.abs(truth[i]!) >= value)) tally.every++;
  }
}

/** Joint laws under a margin are those of the sizes; kept between the studies of a worker. */
const equivalenceDeciders = new Map<string, Decider>();
for (const design of designs.filter(({ pooled }) => pooled)) {
  const weights = weightsOf("against one");
  const any = estimate(design, simulate(design, [0, 0, 0, 0], normals(generator(1))), weights);
  const template = {
    ...problemOf(kinds[1]!, design, any),
    margin: { type: "equivalence", value: 5, better: null } as const,
  };
  for (const name of ["single-step", "step-down"] as const)
    equivalenceDeciders.set(`${design.name} ${name}`, familyDecider(name, template));
}

/** For the runner's workers. */
export const tasks = { simulateChunk };

type Parallel = (task: string, inputs: readonly Job[]) => Promise<readonly (readonly Count[])[]>;

const percent = (share: number) => (100 * share).toFixed(2);

export async function run(parallel: Parallel): Promise<string> {
  const jobs: Job[] = [];
  for (let design = 0; design < designs.length; design++)
    for (let truth = 0; truth < truths.length; truth++)
      for (let from = 0; from < studies; from += perJob) jobs.push({ design, truth, from, count: perJob });
  const answers = await parallel("simulateChunk", jobs);
  const totals = new Map<string, Count>();
  for (const [k, job] of jobs.entries())
    for (const part of answers[k]!) {
      const key = `${designs[job.design]!.name} | ${truths[job.truth]!.name} | ${part.key}`;
      const sum = totals.get(key) ?? {
        ...part,
        key,
        wrong: 0,
        falseShare: 0,
        every: 0,
        covered: 0,
        coverageStudies: 0,
      };
      for (const field of ["wrong", "falseShare", "every", "covered", "coverageStudies"] as const)
        sum[field] += part[field];
      totals.set(key, sum);
    }

  const monteCarlo = Math.sqrt((error * (1 - error)) / studies);
  const bound = error + 3 * monteCarlo;
  const lines: string[] = [];
  const above: string[] = [];
  const keys = new Set(
    [...totals.keys()].map((key) =>
      key
        .split(" | ")
        .filter((_, i) => i !== 1)
        .join(" | "),
    ),
  );
  for (const key of keys) {
    const [design, family, method] = key.split(" | ") as [string, string, string];
    const cells = truths.map(({ name }) => totals.get([design, name, family, method].join(" | ")));
    const holds = ["bh", "by"].includes(method) ? "falseShare" : "wrong";
    const shares = cells.map((cell) => (cell === undefined ? null : cell[holds] / studies));
    const coverage = cells.flatMap((cell) =>
      cell !== undefined && cell.coverageStudies > 0 ? [cell.covered / cell.coverageStudies] : [],
    );
    const worst = Math.max(...shares.map((share) => share ?? 0));
    if (method !== "none" && (worst > bound || coverage.some((share) => share < 1 - bound)))
      above.push(`${design}: ${family}, ${method}`);
    lines.push(
      `| ${design} | ${family} | ${method} | ${shares.map((share) => (share === null ? "" : percent(share))).join(" | ")} | ${
        coverage.length === 0 ? "" : percent(Math.min(...coverage))
      } | ${cells
        .slice(1)
        .map((cell) => (cell === undefined ? "" : percent(cell.every / studies)))
        .join(" | ")} |`,
    );
  }
  return `# Error that each correction holds

Simulated: ${studies.toLocaleString("en")} studies for each design and truth, normal errors, four means, error held 5%. Made by \`npm run calibration\`; do not edit.

- Share of studies, in percent, with at least one false rejection in the family; for \`bh\` and \`by\` the mean share of false ones among the rejections.
  \`none\` holds nothing and shows what is to be held.
- Monte Carlo standard error at 5% is ${percent(monteCarlo)}; above ${percent(bound)} (three of them) would be an excess.
- Coverage: share of studies, the lowest over the truths, in which all limits of the family cover; empty where the limits are each comparison's own.
- Every: share of studies in which everything that differs was found (large differences, so mostly a check that they were).
- Designs: balanced 4 x 8 and unbalanced 5, 7, 10, 18, pooled error; unequal variances 7, 9, 12, 16 with spreads 3, 2, 1.5, 1, each comparison its own
  error and df; within 12 subjects, spreads 1, 1.5, 2, 3, correlations that decay, contrast scores.
- Resampling with ${arrangements} random arrangements in each study.

${above.length === 0 ? "No method exceeds its stated error, and no joint coverage falls short, by more than Monte Carlo error." : `Beyond Monte Carlo error: ${above.join("; ")}.`}

| design | family | method | ${truths.map(({ name }) => name).join(" | ")} | coverage | every, ${truths[1].name} | every, ${truths[2].name} |
| --- | --- | --- | ${truths.map(() => "---:").join(" | ")} | ---: | ---: | ---: |
${lines.join("\n")}
`;
}
