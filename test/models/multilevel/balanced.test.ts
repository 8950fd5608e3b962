import { describe, expect, it } from "vitest";
import { multilevelOmnibus } from "../../../src/models/multilevel/index.ts";
import { repeatedMeasuresAnalysis } from "../../../src/models/within/index.ts";
import { modelData } from "../within/model-data.ts";
import { uniforms } from "./random-inputs.ts";

function balanced(subjects: number, within: readonly number[], groups: number, trials: number, seed: number) {
  const random = uniforms(seed);
  const response: number[] = [];
  const subject: number[] = [];
  const group: number[] = [];
  const codes = within.map(() => [] as number[]);
  const cells = within.reduce((product, levels) => product * levels, 1);
  for (let s = 0; s < subjects; s++) {
    const own = 80 * random();
    const ofFactor = within.map((levels) => Array.from({ length: levels }, () => 40 * random()));
    const ofPair = within.map((levels) => Array.from({ length: levels * 4 }, () => 15 * random()));
    for (let cell = 0; cell < cells; cell++) {
      let rest = cell;
      const levels = within.map(() => 0);
      for (let factor = within.length - 1; factor >= 0; factor--) {
        levels[factor] = rest % within[factor]!;
        rest = Math.floor(rest / within[factor]!);
      }
      const ofCell = trials > 1 ? 5 * random() : 0;
      const pairs =
        within.length < 3
          ? 0
          : levels.reduce(
              (sum, level, at) => sum + ofPair[at]![level + levels[(at + 1) % levels.length]! * within[at]!]!,
              0,
            );
      for (let trial = 0; trial < trials; trial++) {
        response.push(
          own +
            ofCell +
            pairs +
            levels.reduce((sum, level, factor) => sum + ofFactor[factor]![level]! + level, 0) +
            3 * random(),
        );
        subject.push(s);
        group.push(s % groups);
        for (const [factor, level] of levels.entries()) codes[factor]!.push(level);
      }
    }
  }
  return modelData({
    response,
    factors: [
      ...within.map((_, factor) => ({ name: `w${factor}`, codes: codes[factor]!, within: true })),
      ...(groups > 1 ? [{ name: "g", codes: group, within: false }] : []),
    ],
    units: { person: subject },
  });
}

describe("multilevel model of balanced data", () => {
  it.each([
    { within: [4], groups: 1, subjects: 9, trials: 1 },
    { within: [3], groups: 2, subjects: 12, trials: 1 },
    { within: [2, 3], groups: 1, subjects: 10, trials: 1 },
    { within: [3, 4], groups: 3, subjects: 15, trials: 1 },
    { within: [2, 2, 3], groups: 1, subjects: 14, trials: 1 },
    { within: [3], groups: 2, subjects: 10, trials: 4 },
    { within: [2, 3], groups: 2, subjects: 12, trials: 3 },
  ])(
    "has the repeated-measures F and df: within $within, $groups groups, $trials trials",
    ({ within, groups, subjects, trials }) => {
      const data = balanced(subjects, within, groups, trials, 17);
      const repeated = repeatedMeasuresAnalysis(data);
      const multilevel = multilevelOmnibus(data, { intervalLevel: null, likelihoodRatio: false });
      expect(multilevel.notes.filter((note) => note.code === "component-at-zero")).toEqual([]);
      for (const effect of repeated.effects) {
        const same = multilevel.effects.find((other) => other.effect === effect.effect)!;
        expect(same.form).toBe("Kenward-Roger");
        expect(same.value! / effect.value!).toBeCloseTo(1, 8);
        expect(same.df2! / effect.df2!).toBeCloseTo(1, 7);
      }
    },
  );
});
