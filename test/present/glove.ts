/** An invented study, for the tests of this room only: kinds of glove and the time that an assembly takes. No measurement was ever made. */
import type {
  CalibrationResult,
  CheckResult,
  ComparisonRow,
  ComparisonsResult,
  DataResult,
  DescribeResult,
  LedgerResult,
  MeansPicture,
  OmnibusResult,
  PassingPicture,
  PlanResult,
  PowerPicture,
  PowerResult,
  ProfilesPicture,
  ResidualsPicture,
  ResponseFacts,
  Result,
  SizeResult,
  DetectableResult,
  DistributionsPicture,
} from "../../src/results/index.ts";
import type { ReportFacts } from "../../src/present/index.ts";

export const seconds: ResponseFacts = {
  name: "seconds",
  label: "assembly time",
  unit: "s",
  better: "lower",
  scale: "linear",
};
export const turbidity: ResponseFacts = { name: "turbidity", label: null, unit: "NTU", better: null, scale: "log" };
export const gloves = ["bare", "nitrile", "knit", "leather"] as const;
export const shifts = ["day", "night"] as const;

/** Invented values without a random generator: an additive congruence, good enough to look at. */
export function wave(index: number, salt: number): number {
  let total = 0;
  for (let part = 1; part <= 4; part++)
    total += ((index * 7919 + salt * 104_729 + part * 1299 * (index + 3)) % 1009) / 1009;
  return (total - 2) * 1.7;
}

const gloveMeans = { bare: 41.2, nitrile: 43.1, knit: 46.4, leather: 52.3 } as const;

export const row = (comparison: string, more: Partial<ComparisonRow> = {}): ComparisonRow => ({
  comparison,
  state: "planned",
  estimate: 1.9,
  standardError: 0.84,
  df: 23,
  statistic: 2.2619047619047619,
  p: 0.03346,
  adjustedP: 0.0669,
  threshold: 0.0163,
  lower: -0.27,
  upper: 4.07,
  rejected: false,
  effectSize: { name: "g", value: 0.4465, lower: 0.0339, upper: 0.8502 },
  ...more,
});

export const primary: ComparisonsResult = {
  kind: "comparisons",
  family: "primary",
  state: "planned",
  response: seconds,
  correction: "single-step",
  holds: "family-wise error",
  error: 0.05,
  sides: "two-sided",
  margin: null,
  intervalLevel: 0.95,
  intervals: "simultaneous",
  after: null,
  errorTerm: "contrast scores",
  rows: [
    row("nitrile - bare"),
    row("knit - bare", {
      estimate: 5.2,
      standardError: 0.91,
      statistic: 5.714285714285714,
      p: 0.0000081,
      adjustedP: 0.0000242,
      lower: 2.92,
      upper: 7.48,
      rejected: true,
      effectSize: { name: "g", value: 1.1281, lower: 0.6122, upper: 1.6319 },
    }),
    row("leather - bare", {
      estimate: 11.1,
      standardError: 1.12,
      statistic: 9.910714285714286,
      p: 9.2e-10,
      adjustedP: 2.7e-9,
      lower: 8.3,
      upper: 13.9,
      rejected: true,
      effectSize: { name: "g", value: 1.9563, lower: 1.2514, upper: 2.6489 },
    }),
  ],
  notes: [{ code: "joint-normal-scores", facts: {} }],
};

export const secondary: ComparisonsResult = {
  ...primary,
  family: "secondary",
  correction: "holm",
  intervals: "individual",
  after: { family: "primary", open: true },
  rows: [
    row("gloved", {
      estimate: 6.07,
      standardError: 0.71,
      statistic: 8.549,
      p: 1.3e-8,
      adjustedP: 2.6e-8,
      threshold: 0.025,
      lower: 4.36,
      upper: 7.77,
      rejected: true,
    }),
    row("shift_gap", {
      estimate: -0.4,
      standardError: 1.31,
      statistic: -0.305,
      p: 0.7628,
      adjustedP: 0.7628,
      threshold: 0.05,
      lower: -3.11,
      upper: 2.31,
      effectSize: null,
    }),
  ],
  notes: [{ code: "limits-at-threshold", facts: {} }],
};

export const explored: ComparisonsResult = {
  ...primary,
  family: null,
  state: "exploratory",
  correction: "holm",
  intervals: "individual",
  rows: [
    "nitrile - bare",
    "knit - bare",
    "leather - bare",
    "knit - nitrile",
    "leather - nitrile",
    "leather - knit",
  ].map((comparison, index) =>
    row(comparison, {
      state: "exploratory",
      estimate: [1.9, 5.2, 11.1, 3.3, 9.2, 5.9][index]!,
      standardError: [0.84, 0.91, 1.12, 0.88, 1.05, 0.98][index]!,
      p: [0.03346, 0.0000081, 9.2e-10, 0.00098, 1.1e-8, 0.0000035][index]!,
      adjustedP: [0.03346, 0.0000243, 5.5e-9, 0.00196, 5.5e-8, 0.000014][index]!,
      threshold: [0.05, 0.0167, 0.0083, 0.025, 0.01, 0.0125][index]!,
      lower: [0.16, 2.5, 8.0, 1.1, 6.1, 2.9][index]!,
      upper: [3.64, 7.9, 14.2, 5.5, 12.3, 8.9][index]!,
      rejected: true,
    }),
  ),
  beside: [
    {
      correction: "holm",
      declared: true,
      adjustedP: [0.03346, 0.0000243, 5.5e-9, 0.00196, 5.5e-8, 0.000014],
      rejected: [true, true, true, true, true, true],
    },
    {
      correction: "bonferroni",
      declared: false,
      adjustedP: [0.2, 0.0000486, 5.5e-9, 0.00588, 6.6e-8, 0.000021],
      rejected: [false, true, true, true, true, true],
    },
    {
      correction: "dunnett",
      declared: false,
      adjustedP: [null, null, null, null, null, null],
      rejected: [null, null, null, null, null, null],
      unfit: "it needs one control",
    },
  ],
  notes: [],
};

export const equivalence: ComparisonsResult = {
  ...primary,
  family: "same hands",
  correction: "holm",
  margin: { type: "equivalence", value: 2.5 },
  intervalLevel: 0.9,
  intervals: "individual",
  rows: [
    row("nitrile - bare", {
      estimate: 0.4,
      lower: -1.1,
      upper: 1.9,
      p: 0.011,
      adjustedP: 0.022,
      rejected: true,
      equivalence: { margin: 2.5, lowerP: 0.0012, upperP: 0.011, equivalent: true },
    }),
    row("knit - bare", {
      estimate: 1.6,
      lower: -0.2,
      upper: 3.4,
      p: 0.18,
      adjustedP: 0.18,
      rejected: false,
      equivalence: { margin: 2.5, lowerP: 0.0001, upperP: 0.18, equivalent: false },
    }),
  ],
  notes: [],
};

export const ratios: ComparisonsResult = {
  ...primary,
  family: "filters",
  response: turbidity,
  correction: "dunnett",
  errorTerm: "pooled",
  rows: [
    row("fine sand - none", {
      estimate: Math.log(0.62),
      standardError: 0.11,
      df: 28,
      lower: Math.log(0.47),
      upper: Math.log(0.82),
      p: 0.0003,
      adjustedP: 0.0009,
      rejected: true,
      effectSize: null,
    }),
    row("coarse sand - none", {
      estimate: Math.log(0.94),
      standardError: 0.11,
      df: 28,
      lower: Math.log(0.71),
      upper: Math.log(1.24),
      p: 0.58,
      adjustedP: 0.88,
      rejected: false,
      effectSize: null,
    }),
  ],
  notes: [],
};

export const omnibus: OmnibusResult = {
  kind: "omnibus",
  method: "multilevel",
  response: seconds,
  state: "planned",
  effects: [
    {
      effect: "glove",
      method: "multilevel",
      statistic: "F",
      value: 41.8231,
      df1: 3,
      df2: 69,
      p: 1.8e-15,
      likelihoodRatio: { statistic: 74.213, df: 3, p: 5.3e-16 },
    },
    {
      effect: "shift",
      method: "multilevel",
      statistic: "F",
      value: 1.0421,
      df1: 1,
      df2: 23,
      p: 0.318,
      likelihoodRatio: { statistic: 1.09, df: 1, p: 0.2965 },
    },
    {
      effect: "glove x shift",
      method: "multilevel",
      statistic: "F",
      value: 0.6112,
      df1: 3,
      df2: 69,
      p: 0.6101,
      likelihoodRatio: { statistic: 1.87, df: 3, p: 0.5999 },
    },
    {
      effect: "glove",
      method: "repeated measures",
      statistic: "F",
      value: 41.8231,
      df1: 3,
      df2: 69,
      p: 1.8e-15,
      sumOfSquares: 1741.2,
      meanSquare: 580.4,
      errorSumOfSquares: 957.6,
      errorMeanSquare: 13.878,
      epsilonGreenhouseGeisser: 0.8123,
      epsilonHuynhFeldt: 0.9132,
      pGreenhouseGeisser: 7.2e-13,
      pHuynhFeldt: 2.9e-14,
      partialEtaSquared: 0.645,
      partialEtaSquaredInterval: [0.512, 0.719],
      generalizedEtaSquared: 0.214,
    },
    {
      effect: "shift",
      method: "repeated measures",
      statistic: "F",
      value: 1.0421,
      df1: 1,
      df2: 23,
      p: 0.318,
      sumOfSquares: 12.1,
      partialEtaSquared: 0.043,
      partialEtaSquaredInterval: [0, 0.241],
      generalizedEtaSquared: 0.002,
    },
    {
      effect: "glove x shift",
      method: "repeated measures",
      statistic: "F",
      value: 0.6112,
      df1: 3,
      df2: 69,
      p: 0.6101,
      sumOfSquares: 21.3,
      epsilonGreenhouseGeisser: 0.771,
      epsilonHuynhFeldt: 0.861,
      pGreenhouseGeisser: 0.5648,
      pHuynhFeldt: 0.5841,
      partialEtaSquared: 0.026,
      partialEtaSquaredInterval: [0, 0.09],
      generalizedEtaSquared: 0.003,
    },
  ],
  sphericity: [{ effect: "glove", w: 0.6921, statistic: 7.93, df: 5, p: 0.16 }],
  varianceComponents: [
    { unit: "operator", term: "intercept", variance: 38.2, sd: 6.181, lower: 19.9, upper: 81.3 },
    { unit: "operator", term: "shift", variance: 0, sd: 0, boundary: true },
    { unit: "residual", term: "residual", variance: 13.878, sd: 3.7253, lower: 11.1, upper: 17.8 },
  ],
  intraclassCorrelation: [{ unit: "operator", value: 0.733, lower: 0.57, upper: 0.86 }],
  observations: 192,
  subjects: 24,
  notes: [
    { code: "component-at-zero", facts: { unit: "operator", term: "shift" } },
    { code: "omnibus-not-required", facts: {} },
  ],
};

export const oneWay: OmnibusResult = {
  kind: "omnibus",
  method: "one-way",
  response: seconds,
  state: "declared",
  effects: [
    {
      effect: "glove",
      method: "one-way",
      statistic: "F",
      value: 4.213,
      df1: 3,
      df2: 44,
      p: 0.0105,
      sumOfSquares: 812.4,
      meanSquare: 270.8,
      partialEtaSquared: 0.223,
      partialEtaSquaredInterval: [0.02, 0.38],
      omegaSquared: 0.167,
    },
  ],
  error: { df: 44, sumOfSquares: 2828.3, meanSquare: 64.28 },
  rSquared: 0.223,
  residualSd: 8.0175,
  observations: 48,
  subjects: 48,
  notes: [],
};

export const described: DescribeResult = {
  kind: "describe",
  response: seconds,
  by: ["glove", "shift"],
  intervalLevel: 0.95,
  rehearsal: false,
  cells: gloves.flatMap((glove) =>
    shifts.map((shift, place) => {
      const mean = gloveMeans[glove] + place * 0.43;
      return {
        levels: { glove, shift },
        n: glove === "knit" && shift === "night" ? 23 : 24,
        missing: glove === "knit" && shift === "night" ? 1 : 0,
        mean,
        sd: 7.1 + place * 0.3,
        standardError: 1.449 + place * 0.06,
        lower: mean - 3.0,
        upper: mean + 3.0,
        withinLower: mean - 1.6,
        withinUpper: mean + 1.6,
      };
    }),
  ),
  notes: [{ code: "within-intervals-of-complete-subjects", facts: { complete: 23, of: 24, unit: "operator" } }],
};

export const meansPicture: MeansPicture = {
  picture: "means",
  response: seconds,
  state: "planned",
  notes: [],
  factors: [
    { name: "glove", levels: gloves, ordered: false },
    { name: "shift", levels: shifts, ordered: false },
  ],
  cells: described.cells.map((cell) => ({
    levels: cell.levels,
    n: cell.n,
    mean: cell.mean,
    lower: cell.withinLower!,
    upper: cell.withinUpper!,
  })),
  points: described.cells.flatMap((cell, place) =>
    Array.from({ length: cell.n }, (_, index) => ({
      levels: cell.levels,
      value: cell.mean! + 4.5 * wave(index, place + 1),
    })),
  ),
  sampledFrom: null,
  interval: "within",
  intervalLevel: 0.95,
};

export const profilesPicture: ProfilesPicture = {
  picture: "profiles",
  response: seconds,
  state: "planned",
  notes: [],
  factor: { name: "glove", levels: gloves },
  group: null,
  lines: Array.from({ length: 24 }, (_, subject) => ({
    subject: `operator ${subject + 1}`,
    group: null,
    values: gloves.map((glove, place) =>
      subject === 5 && place === 2 ? null : gloveMeans[glove] + 6 * wave(subject, 9) + 1.8 * wave(subject, place + 20),
    ),
  })),
  means: [{ group: null, values: gloves.map((glove) => gloveMeans[glove]) }],
};

export const distributionsPicture: DistributionsPicture = {
  picture: "distributions",
  response: seconds,
  state: "planned",
  notes: [],
  factor: { name: "glove", levels: gloves },
  values: gloves.map((level, place) => ({
    level,
    values: Array.from({ length: 48 }, (_, index) => gloveMeans[level] + 5 * wave(index, place + 3)),
  })),
  sampledFrom: null,
};

const residuals = Array.from({ length: 96 }, (_, index) => 1.1 * wave(index, 4));
export const residualsPicture: ResidualsPicture = {
  picture: "residuals",
  response: seconds,
  state: "declared",
  notes: [],
  fitted: residuals.map((_, index) => 41 + (index % 4) * 3.7 + 0.4 * (index % 7)),
  residuals,
  normalQuantiles: residuals.map((_, index) => {
    const share = (index + 1 - 0.375) / (96 + 0.25);
    // Tukey's lambda with 0.14 is near enough to the normal quantile for a picture of invented data.
    return (share ** 0.14 - (1 - share) ** 0.14) / 0.1975;
  }),
  sampledFrom: null,
};

export const powerPicture: PowerPicture = {
  picture: "power",
  response: seconds,
  state: "planned",
  notes: [],
  of: "primary",
  goal: 0.9,
  curves: ["every comparison", "nitrile - bare", "knit - bare", "leather - bare"].map((name, place) => ({
    name,
    points: Array.from({ length: 14 }, (_, index) => {
      const subjects = 8 + 4 * index;
      const rate = [0.028, 0.031, 0.075, 0.19][place]!;
      return { subjects, power: 1 - Math.exp(-rate * subjects), monteCarloError: place === 0 ? 0.007 : null };
    }),
  })),
};

export const passingPicture: PassingPicture = {
  picture: "passing",
  response: seconds,
  state: "planned",
  notes: [],
  nodes: [
    { name: "knit - bare", family: "primary", weight: 0.025, rejected: true },
    { name: "leather - bare", family: "primary", weight: 0.025, rejected: false },
    { name: "gloved", family: "primary", weight: 0, rejected: null },
  ],
  passes: [
    { from: "knit - bare", to: "leather - bare", share: 0.5 },
    { from: "knit - bare", to: "gloved", share: 0.5 },
    { from: "leather - bare", to: "knit - bare", share: 0.5 },
    { from: "leather - bare", to: "gloved", share: 0.5 },
    { from: "gloved", to: "knit - bare", share: 1 },
  ],
};

export const gatePicture: PassingPicture = {
  ...passingPicture,
  nodes: [
    { name: "nitrile - bare", family: "primary", weight: 0.05, rejected: null },
    { name: "knit - bare", family: "primary", weight: 0, rejected: null },
    { name: "leather - bare", family: "primary", weight: 0, rejected: null },
    { name: "gloved", family: "secondary", weight: 0, rejected: null },
    { name: "shift_gap", family: "secondary", weight: 0, rejected: null },
  ],
  passes: [
    { from: "nitrile - bare", to: "knit - bare", share: 1 },
    { from: "knit - bare", to: "leather - bare", share: 1 },
    { from: "primary", to: "secondary", share: 1, gate: true },
  ],
};

export const calibration: CalibrationResult = {
  kind: "calibration",
  of: "primary",
  correction: "single-step",
  error: 0.05,
  seed: 7,
  studies: 20_000,
  asked: 20_000,
  shard: null,
  scenarios: [
    {
      scenario: "no difference",
      source: "data",
      studies: 20_000,
      familyError: 0.0512,
      familyErrorMonteCarlo: 0.00156,
      every: null,
      any: null,
      coverage: 0.9488,
      coverageMonteCarlo: 0.00156,
      comparisons: [
        { comparison: "nitrile - bare", rejected: 0.0181, trueDifference: 0, coverage: 0.9819 },
        { comparison: "knit - bare", rejected: 0.0177, trueDifference: 0, coverage: 0.9823 },
      ],
    },
    {
      scenario: "as expected",
      source: "plan",
      studies: 20_000,
      familyError: null,
      familyErrorMonteCarlo: null,
      every: 0.713,
      any: 0.999,
      coverage: 0.9503,
      coverageMonteCarlo: 0.00154,
      comparisons: [
        { comparison: "nitrile - bare", rejected: 0.713, trueDifference: 2, coverage: 0.9821 },
        { comparison: "knit - bare", rejected: 0.997, trueDifference: 5, coverage: 0.982 },
      ],
    },
  ],
  conclusion: "holds",
  notes: [],
};

export const size: SizeResult = {
  kind: "size",
  of: "primary",
  target: 0.9,
  goal: "every",
  method: "joint distribution",
  errorRate: 0.05,
  correction: "single-step",
  subjects: 58,
  subjectsPerGroup: [58],
  enrolled: 65,
  achieved: 0.9031,
  comparisons: [
    { comparison: "nitrile - bare", power: 0.904, subjects: 58 },
    { comparison: "knit - bare", power: 0.999, subjects: 21 },
  ],
  notes: [],
};
export const power: PowerResult = {
  kind: "power",
  of: "primary",
  method: "simulation",
  errorRate: 0.05,
  correction: "holm",
  points: [20, 40, 60].map((subjects, index) => ({
    subjects,
    subjectsPerGroup: [subjects / 2, subjects / 2],
    comparisons: [{ comparison: "nitrile - bare", power: 0.2 + 0.3 * index }],
    every: 0.18 + 0.3 * index,
    any: 0.5 + 0.2 * index,
    monteCarloError: 0.0034,
  })),
  notes: [],
};
export const detectable: DetectableResult = {
  kind: "detectable",
  of: "primary",
  target: 0.8,
  goal: "each",
  method: "closed form",
  errorRate: 0.05,
  correction: "single-step",
  subjects: 24,
  subjectsPerGroup: [24],
  multiple: 1.32,
  comparisons: [{ comparison: "nitrile - bare", estimate: 2.64, standardised: 0.71 }],
  notes: [],
};

export const check: CheckResult = {
  kind: "check",
  rehearsal: false,
  design: {
    subjects: 24,
    cells: 8,
    observations: 191,
    factors: [
      {
        name: "glove",
        declared: "within operator",
        found: "within operator",
        levels: gloves.map((level) => ({ level, subjects: 24, observations: level === "knit" ? 47 : 48 })),
      },
      {
        name: "shift",
        declared: "between operators",
        found: "within operator",
        levels: shifts.map((level) => ({ level, subjects: 24, observations: 96 })),
      },
    ],
    subjectsPerCell: described.cells.map((cell) => ({ levels: cell.levels, subjects: cell.n, observations: cell.n })),
    missingCells: 1,
    problems: [
      {
        code: "declared-between-found-within",
        message: 'The factor "shift" is declared between operators, but 24 operators have more than one of its levels.',
        advice: "Declare it within operator.",
        severity: "error",
      },
    ],
  },
  assumptions: [
    {
      assumption: "spread",
      method: "Brown-Forsythe",
      of: "cells",
      statistic: 1.21,
      df1: 7,
      df2: 183,
      p: 0.299,
      finding: "no concern",
      facts: {},
      statement: null,
    },
    {
      assumption: "normality",
      method: "Shapiro-Wilk",
      of: "residuals",
      statistic: 0.981,
      df1: null,
      df2: null,
      p: 0.012,
      finding: "concern",
      facts: {},
      statement: "omnibus by resampling",
    },
  ],
  pictures: [residualsPicture],
  notes: [],
};

export const read: DataResult = {
  kind: "data",
  action: "read",
  source: "assembly.csv",
  digest: "5e3a7b0c4d11f29877aa0bb1c2d3e4f5061728394a5b6c7d8e9fa0b1c2d3e4f5",
  rows: 384,
  columns: [
    { name: "operator", type: "text", role: "subjects", missing: 0, distinct: 24 },
    { name: "glove", type: "text", role: "factor", missing: 0, distinct: 4 },
    { name: "seconds", type: "number", role: "response", missing: 1, distinct: 371 },
  ],
  excluded: 0,
  excludedByCell: [],
  reason: null,
  afterResults: false,
  seed: null,
  rehearsal: false,
  preview: {
    title: "First rows",
    columns: [
      { name: "operator", type: "text" },
      { name: "glove", type: "text" },
      { name: "seconds", type: "number" },
    ],
    rows: [
      ["o1", "bare", 41.25],
      ["o1", "knit", null],
    ],
    moreRows: 382,
  },
  notes: [{ code: "separator-detected", facts: { separator: "comma" } }],
};
export const excluded: DataResult = {
  ...read,
  action: "exclude",
  rows: 192,
  excluded: 192,
  excludedByCell: [{ levels: { glove: "bare", shift: "day" }, rows: 24 }],
  reason: "practice trial, excluded in the plan",
  afterResults: true,
  preview: null,
  notes: [],
};
export const plan: PlanResult = {
  kind: "plan",
  action: "seal",
  name: "glove",
  path: "glove.plan.json",
  digest: "0f".repeat(32),
  sealedAt: "2026-03-02T09:14:00Z",
  statements: [
    'study "Glove type and assembly time"',
    "family primary: each glove against bare\n  hold error 5% by single-step",
  ],
  amendments: [
    {
      at: "2026-03-09T08:00:00Z",
      statement: "amend family secondary: gloved",
      reason: "shift was dropped by the site",
      afterResults: false,
    },
  ],
  notes: [],
};
export const ledger: LedgerResult = {
  kind: "ledger",
  action: "audit",
  path: "glove.ledger.jsonl",
  entries: [
    { index: 1, at: "2026-03-02T09:10:00Z", event: "declare", summary: "family primary", digest: "ab".repeat(32) },
  ],
  head: "ab".repeat(32),
  whole: true,
  problems: [],
  notes: [],
};

export const comparisonsPictureOf = (comparisons: ComparisonsResult) =>
  ({
    picture: "comparisons",
    response: comparisons.response,
    state: comparisons.state,
    notes: [],
    comparisons,
  }) as const;

export const results: readonly Result[] = [
  size,
  power,
  detectable,
  { kind: "picture", picture: powerPicture },
  { kind: "picture", picture: passingPicture },
  plan,
  read,
  excluded,
  check,
  described,
  { kind: "picture", picture: meansPicture },
  { kind: "picture", picture: profilesPicture },
  { kind: "picture", picture: distributionsPicture },
  omnibus,
  primary,
  secondary,
  { kind: "picture", picture: comparisonsPictureOf(primary) },
  explored,
  { kind: "picture", picture: comparisonsPictureOf(explored) },
  calibration,
  { kind: "picture", picture: { picture: "calibration", response: seconds, state: "planned", notes: [], calibration } },
  ledger,
  {
    kind: "report",
    path: "glove-report.html",
    format: "html",
    bytes: 48_200,
    sections: ["Design", "Methods"],
    notes: [],
  },
  { kind: "export", path: "primary.csv", format: "csv", bytes: 900, of: "the family primary", notes: [] },
  { kind: "message", code: "declared", facts: { what: "factor", name: "glove" }, notes: [] },
  {
    kind: "help",
    topic: "compare",
    sections: [
      {
        heading: "compare",
        lines: ["Tests one declared family, always whole."],
        example: "compare primary",
        table: null,
      },
    ],
    notes: [],
  },
];

export const facts: ReportFacts = {
  title: "Glove type and assembly time",
  caution: "Findings inform glove choice; they do not replace the site's hand-protection rules.",
  response: seconds,
  units: [{ name: "operator", role: "subjects", nestedIn: [] }],
  factors: [
    { name: "glove", levels: gloves, varies: "within", unit: "operator", measured: false },
    { name: "shift", levels: shifts, varies: "within", unit: "operator", measured: false },
  ],
  covariates: [],
  assumptions: { variances: "equal", covariance: null },
  plan: { name: "glove", digest: "0f".repeat(32), sealedAt: "2026-03-02T09:14:00Z", statements: plan.statements },
  amendments: plan.amendments,
  data: {
    source: "assembly.csv",
    digest: read.digest!,
    rowsRead: 384,
    rows: 191,
    rehearsal: false,
    seed: null,
    exclusions: [
      {
        text: 'exclude where trial = 1 because "practice trial, excluded in the plan"',
        reason: "practice trial, excluded in the plan",
        rows: 192,
        byCell: [],
        afterResults: false,
      },
      {
        text: 'exclude where operator = "o7" because "glove tore"',
        reason: "glove tore",
        rows: 1,
        byCell: [{ levels: { glove: "knit", shift: "night" }, rows: 1 }],
        afterResults: true,
      },
    ],
    steps: ["average seconds over trial"],
  },
  results,
  deviations: [
    {
      code: "excluded-after-results",
      facts: { statement: 'exclude where operator = "o7"', reason: "glove tore", rows: 1 },
    },
  ],
  head: "ab".repeat(32),
  version: "0.1.0",
  environment: { node: "20.20.2", platform: "linux-x64" },
  writtenAt: "2026-04-01T10:00:00.000Z",
};
