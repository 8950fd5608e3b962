/**
 * Golden sentences over a table of outcomes (test/present/goldens/sentences.txt). Each was read when it was put there; a change shows as a
 * difference to be read again. The claims below the table do not rest on the golden file: they state what must hold of every sentence.
 */
import { describe, expect, it, test } from "vitest";
import type {
  ComparisonRow,
  ComparisonsResult,
  DescribeResult,
  OmnibusResult,
  State,
} from "../../../src/results/index.ts";
import { comparisonSentence, familySentences } from "../../../src/present/sentences/comparison.ts";
import { checkSentences, describeSentences } from "../../../src/present/sentences/description.ts";
import { omnibusSentences } from "../../../src/present/sentences/omnibus.ts";
import {
  calibrationSentences,
  detectableSentence,
  powerSentences,
  sizeSentence,
} from "../../../src/present/sentences/planning.ts";
import * as glove from "../glove.ts";

const plain = (text: string) => text.replaceAll("\u00a0", " ").replaceAll("\u202f", " ");
const shown: Partial<ComparisonRow> = {
  estimate: 5.2,
  standardError: 0.91,
  statistic: 5.714,
  p: 8.1e-6,
  adjustedP: 2.4e-5,
  lower: 2.92,
  upper: 7.48,
  rejected: true,
};
const below: Partial<ComparisonRow> = { ...shown, estimate: -5.2, lower: -7.48, upper: -2.92, statistic: -5.714 };
const single: Partial<ComparisonsResult> = { intervals: "individual" };

const comparisons: Readonly<Record<string, [Partial<ComparisonRow>, Partial<ComparisonsResult>]>> = {
  "shown, above": [shown, {}],
  "shown, below": [below, {}],
  "not shown": [{}, {}],
  "higher is better": [shown, { response: { ...glove.seconds, better: "higher" } }],
  "no direction, unit or label": [shown, { response: { ...glove.seconds, better: null, unit: null, label: null } }],
  "within a level of another factor": [{ ...shown, comparison: "knit - bare at night" }, {}],
  "against the mean of all": [{ ...shown, comparison: "knit - mean" }, {}],
  "against the mean of all, not shown": [{ comparison: "knit - mean" }, {}],
  "linear trend upward": [{ ...shown, comparison: "linear trend of dose" }, {}],
  "linear trend downward": [{ ...below, comparison: "linear trend of dose" }, {}],
  "quadratic trend": [{ ...shown, comparison: "quadratic trend of dose" }, {}],
  "trend not shown": [{ comparison: "quadratic trend of dose" }, {}],
  "named contrast": [{ ...shown, comparison: "gloved" }, {}],
  "named contrast not shown": [{ comparison: "gloved" }, {}],
  "a level that holds the sign": [{ ...shown, comparison: "x - y - z" }, {}],
  "one-sided upper, shown": [{ ...shown, upper: null }, { sides: "upper" }],
  "one-sided upper, not shown": [{ lower: -0.3, upper: null }, { sides: "upper" }],
  "one-sided lower, not shown": [{ lower: null, upper: 3.1 }, { sides: "lower" }],
  "one-sided lower, contrast not shown": [{ comparison: "gloved", lower: null, upper: 3.1 }, { sides: "lower" }],
  "no correction": [{ ...shown }, { ...single, correction: "none", holds: "nothing" }],
  "interval at its threshold": [shown, { ...single, notes: [{ code: "limits-at-threshold", facts: {} }] }],
  "no intervals": [{ ...shown, lower: null, upper: null }, { intervals: "none" }],
  "p at its upper end": [{ estimate: 0, p: 1, adjustedP: 1, statistic: 0, effectSize: null }, {}],
  "no standard error": [
    { standardError: null, df: null, statistic: null, lower: null, upper: null, effectSize: null },
    {},
  ],
  "fractional degrees of freedom": [{ ...shown, df: 17.318 }, { errorTerm: "unequal variances" }],
  ranks: [
    { ...below, estimate: -9.25, standardError: 4.1, df: null, lower: null, upper: null, effectSize: null },
    { errorTerm: "ranks", correction: "dunn", intervals: "none" },
  ],
  "ranks of a response on log scale": [
    { ...shown, estimate: 9.25, standardError: 4.1, df: null, lower: null, upper: null, effectSize: null },
    { errorTerm: "ranks", correction: "dunn", intervals: "none", response: glove.turbidity },
  ],
  declared: [{ ...shown, state: "declared" }, {}],
  exploratory: [{ ...shown, state: "exploratory" }, {}],
  rehearsal: [{ ...shown, state: "rehearsal" }, {}],
  "ratio, shown": [{ ...glove.ratios.rows[0]! }, glove.ratios],
  "ratio, not shown": [{ ...glove.ratios.rows[1]! }, glove.ratios],
  "ratio as a contrast": [{ ...glove.ratios.rows[1]!, comparison: "filtered" }, glove.ratios],
  equivalent: [{ ...glove.equivalence.rows[0]! }, glove.equivalence],
  "not shown to be equivalent": [{ ...glove.equivalence.rows[1]! }, glove.equivalence],
  "contrast equivalent": [{ ...glove.equivalence.rows[0]!, comparison: "gloved" }, glove.equivalence],
  "ratio equivalent": [
    {
      ...glove.ratios.rows[1]!,
      rejected: true,
      equivalence: { margin: Math.log(1.25), lowerP: 0.01, upperP: 0.001, equivalent: true },
    },
    { ...glove.ratios, margin: { type: "equivalence", value: Math.log(1.25) } },
  ],
  "not worse": [
    { estimate: 0.3, lower: null, upper: 1.1, rejected: true, adjustedP: 0.012 },
    { ...single, margin: { type: "not worse", value: 1.5 }, sides: "lower" },
  ],
  "not shown to be not worse": [
    { estimate: 1.3, lower: null, upper: 2.1 },
    { ...single, margin: { type: "not worse", value: 1.5 }, sides: "lower" },
  ],
  "gate closed": [{}, { after: { family: "first", open: false } }],
};

const families: Readonly<Record<string, Partial<ComparisonsResult>>> = {
  "some shown": {},
  "none shown": { rows: glove.primary.rows.map((row) => ({ ...row, rejected: false })) },
  "all shown": { rows: glove.primary.rows.map((row) => ({ ...row, rejected: true })) },
  "one of one": { rows: [glove.row("a - b", { rejected: true })] },
  "none of one": { rows: [glove.row("a - b")] },
  "both of two": { rows: [glove.row("a - b", { rejected: true }), glove.row("c - b", { rejected: true })] },
  "none of two": { rows: [glove.row("a - b"), glove.row("c - b")] },
  exploratory: { family: null, state: "exploratory" },
  "false discovery": { holds: "false discovery rate", correction: "bh" },
  "nothing held": { holds: "nothing", correction: "none" },
  "waiting for another": { after: { family: "first", open: false }, rows: [glove.row("a - b")] },
  "one-sided": { sides: "upper" },
  "several states": { rows: [glove.row("a - b"), glove.row("c - b", { state: "exploratory" })] },
  equivalence: { margin: { type: "equivalence", value: 2 } },
  "not worse": { margin: { type: "not worse", value: 2 } },
};

const effect = glove.oneWay.effects[0]!;
const omnibus: Readonly<Record<string, Partial<OmnibusResult>>> = {
  "one-way": {},
  "not shown, Welch": {
    effects: [{ effect: "glove", method: "welch", statistic: "F", value: 1.2, df1: 3, df2: 23.456, p: 0.33 }],
  },
  "two factors, two methods": glove.omnibus,
  "three factors": { effects: [{ ...effect, effect: "glove x shift x site" }] },
  "exact ranks": {
    effects: [
      {
        effect: "glove",
        method: "kruskal-wallis",
        statistic: "H",
        value: 12.41,
        df1: 3,
        df2: null,
        p: 0.0061,
        exact: true,
      },
    ],
  },
  "ranks within": {
    effects: [
      { effect: "glove", method: "friedman", statistic: "chi-square", value: 9.1, df1: 3, df2: null, p: 0.028 },
    ],
  },
  resampled: {
    effects: [{ ...effect, method: "resampling", resamples: 10_000, monteCarloError: 0.0011, partialEtaSquared: 0.2 }],
  },
  "could not be tested": { effects: [{ ...effect, p: null, value: null }] },
  "methods that do not agree": {
    effects: [effect, { ...effect, method: "repeated measures", p: 0.04, pGreenhouseGeisser: 0.061 }],
  },
  "bootstrap of the likelihood ratio": {
    effects: [
      { ...effect, likelihoodRatio: { statistic: 12.1, df: 3, p: 0.0071, bootstrapP: 0.011, bootstrapStudies: 999 } },
    ],
  },
};

const cell = glove.described.cells[0]!;
const descriptions: Readonly<Record<string, Partial<DescribeResult>>> = {
  "several cells": {},
  "one cell": { cells: [cell] },
  "two alike": { cells: [cell, cell] },
  "empty cells": {
    cells: [...glove.described.cells, { ...cell, levels: { glove: "mesh", shift: "day" }, n: 0, mean: null, sd: null }],
  },
  "no value at all": { cells: [{ ...cell, n: 0, mean: null }] },
  "log scale": {
    response: glove.turbidity,
    cells: glove.described.cells.map((each) => ({ ...each, mean: Math.log(each.mean!) })),
  },
  "one value in a cell": { cells: [{ ...cell, n: 1, sd: null, standardError: null }, glove.described.cells[2]!] },
  rehearsal: { rehearsal: true },
};

const sentenceOf = (name: string) => {
  const [row, result] = comparisons[name]!;
  return plain(comparisonSentence(glove.row("knit - bare", row), { ...glove.primary, ...result }));
};

describe("sentences", () => {
  test("are the golden ones over every outcome", async () => {
    const lines = [
      ...Object.keys(comparisons).map((name) => `comparison, ${name}\n  ${sentenceOf(name)}`),
      ...Object.entries(families).map(
        ([name, more]) => `family, ${name}\n  ${plain(familySentences({ ...glove.primary, ...more }).join(" "))}`,
      ),
      ...Object.entries(omnibus).map(
        ([name, more]) =>
          `omnibus, ${name}\n  ${omnibusSentences({ ...glove.oneWay, ...more })
            .map(plain)
            .join("\n  ")}`,
      ),
      ...Object.entries(descriptions).map(
        ([name, more]) => `describe, ${name}\n  ${plain(describeSentences({ ...glove.described, ...more }).join(" "))}`,
      ),
      `check\n  ${checkSentences(glove.check).join(" ")}`,
      `check, no concern\n  ${checkSentences({ ...glove.check, design: { ...glove.check.design, missingCells: 0, problems: [] }, assumptions: glove.check.assumptions.slice(0, 1) }).join(" ")}`,
      `size\n  ${plain(sizeSentence(glove.size))}`,
      `size of the omnibus\n  ${plain(sizeSentence({ ...glove.size, of: "omnibus", goal: "omnibus", subjects: 48, subjectsPerGroup: [12, 12, 12, 12], correction: null, method: "closed form", achieved: 0.99999 }))}`,
      `size by simulation, groups of different size\n  ${plain(sizeSentence({ ...glove.size, goal: "any", subjectsPerGroup: [20, 38], method: "simulation", monteCarloError: 0.0031, cost: 1740 }))}`,
      `power\n  ${powerSentences(glove.power).map(plain).join("\n  ")}`,
      `power with one subject\n  ${powerSentences({ ...glove.power, of: "omnibus", points: [{ subjects: 1, subjectsPerGroup: [1], power: 0.05 }] }).join(" ")}`,
      `detectable\n  ${plain(detectableSentence(glove.detectable))}`,
      ...(["holds", "exceeds", "conservative", "cannot tell"] as const).map(
        (conclusion) =>
          `calibration, ${conclusion}\n  ${plain(calibrationSentences({ ...glove.calibration, conclusion }).join(" "))}`,
      ),
      `calibration, stopped\n  ${plain(calibrationSentences({ ...glove.calibration, studies: 1500 }).join(" "))}`,
    ];
    await expect(`${lines.join("\n")}\n`).toMatchFileSnapshot("../goldens/sentences.txt");
  });

  it.each(Object.keys(comparisons))("name their state first and end in one full stop: %s", (name) => {
    const text = sentenceOf(name);
    expect(text).toMatch(/^[\u25a0\u25b2\u25cb\u25c7] (planned|declared|exploratory|rehearsal): .+[^.]\.$/);
    expect(text).not.toMatch(/NaN|undefined|null|Infinity| {2}|\*/);
  });

  it("say the direction that the sign of the estimate has, and better or worse by the declaration", () => {
    for (const [better, estimate, words] of [
      ["lower", -1, "lower (better)"],
      ["lower", 1, "higher (worse)"],
      ["higher", -1, "lower (worse)"],
      ["higher", 1, "higher (better)"],
      [null, 1, "higher for"],
    ] as const)
      expect(
        comparisonSentence(glove.row("a - b", { ...shown, estimate }), {
          ...glove.primary,
          response: { ...glove.seconds, better },
        }),
      ).toContain(words);
  });

  it("never claim a direction for what was not shown", () => {
    for (const [name, [row]] of Object.entries(comparisons))
      if (row.rejected !== true)
        expect(sentenceOf(name), name).not.toMatch(/\bwas (higher|lower|above|below|upward|downward)\b/);
  });

  it("give results on log scale back as ratios: exp(log 0.62) = 0.62", () => {
    expect(sentenceOf("ratio, shown")).toContain("ratio 0.620, 95% simultaneous interval [0.470, 0.820]");
  });

  it("carry each state's own word", () => {
    for (const state of ["planned", "declared", "exploratory", "rehearsal"] as State[])
      expect(comparisonSentence(glove.row("a - b", { state }), glove.primary)).toContain(`${state}:`);
  });
});
