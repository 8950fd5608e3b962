// Simulation and closed form are two routes to one number: 60 designs, simulated powers within Monte Carlo error of the exact ones.
import { describe, expect, it } from "vitest";
import type { CorrectionName } from "../../src/families/index.ts";
import { type PlanAim, type PlanningDesign, powerOf } from "../../src/planning/index.ts";
import { against, allPairs, design, factor, family, options } from "./designs.ts";

interface Case {
  readonly name: string;
  readonly design: PlanningDesign;
  readonly aim: PlanAim;
  readonly subjects: number;
}

function cases(): Case[] {
  const found: Case[] = [];
  const omnibus: PlanAim = { omnibus: { effects: null, error: 0.05 } };
  const corrections: readonly [CorrectionName, boolean][] = [
    ["bonferroni", true],
    ["sidak", true],
    ["tukey", true],
    ["scheffe", true],
    ["single-step", true],
    ["dunnett", false],
  ];
  for (const levels of [3, 4]) {
    for (const allocation of [
      new Array<number>(levels).fill(1),
      Array.from({ length: levels }, (_, i) => 1 + (i % 2)),
    ]) {
      const factors = [factor("a", levels, "between")];
      const means = Array.from({ length: levels }, (_, i) => 0.25 * i * i);
      const planned = design(factors, means, { allocation });
      const subjects = 12 * allocation.reduce((sum, share) => sum + share, 0);
      const label = `between ${levels}, ${allocation.join(":")}`;
      found.push({ name: `${label}, omnibus`, design: planned, aim: omnibus, subjects });
      for (const [correction, pairs] of corrections) {
        const plan = family(factors, [pairs && levels === 3 ? allPairs("a") : against("a", "a1")], correction);
        if (levels === 4 && (correction === "tukey" || correction === "scheffe")) continue;
        found.push({ name: `${label}, ${correction}`, design: planned, aim: { family: plan }, subjects });
      }
    }
  }
  for (const levels of [3, 4])
    for (const correlation of [0, 0.4, 0.8])
      for (const error of [0.05, 0.01]) {
        const factors = [factor("w", levels, "within")];
        const planned = design(
          factors,
          Array.from({ length: levels }, (_, i) => 0.25 * i),
          { correlation },
        );
        const plan = family(factors, [against("w", "w1")], "bonferroni", { error });
        found.push({
          name: `within ${levels}, ${correlation}, ${error}`,
          design: planned,
          aim: { family: plan },
          subjects: 17,
        });
        found.push({
          name: `within ${levels}, ${correlation}, ${error}, omnibus`,
          design: planned,
          aim: { omnibus: { effects: null, error } },
          subjects: 17,
        });
      }
  const mixed = [factor("g", 2, "between"), factor("w", 3, "within")];
  for (const correlation of [0.2, 0.7])
    for (const allocation of [
      [1, 1],
      [2, 1],
    ]) {
      const planned = design(mixed, [0, 0.3, 0.6, 0.2, 0.9, 1.3], { correlation, allocation });
      found.push({ name: `mixed, ${correlation}, ${allocation}`, design: planned, aim: omnibus, subjects: 30 });
      for (const member of [allPairs("w"), allPairs("g")])
        found.push({
          name: `mixed, ${correlation}, ${allocation}, pairs`,
          design: planned,
          aim: { family: family(mixed, [member], "sidak") },
          subjects: 30,
        });
      const spherical = { ...planned, covariance: "sphericity" as const };
      found.push({
        name: `mixed, ${correlation}, ${allocation}, sphericity`,
        design: spherical,
        aim: { family: family(mixed, [against("w", "w1")], "dunnett") },
        subjects: 30,
      });
    }
  const factorial = [factor("a", 2, "between"), factor("b", 3, "between")];
  for (const allocation of [
    [1, 1, 1, 1, 1, 1],
    [1, 2, 1, 2, 1, 1],
  ]) {
    const planned = design(factorial, [0, 0.4, 0.5, 0.6, 0.3, 1.2], { allocation });
    found.push({ name: `factorial ${allocation}, omnibus`, design: planned, aim: omnibus, subjects: 72 });
    for (const [sides, error] of [
      ["two-sided", 0.05],
      ["lower", 0.1],
    ] as const)
      found.push({
        name: `factorial ${allocation}, ${sides}`,
        design: planned,
        aim: { family: family(factorial, [allPairs("b")], "single-step", { sides, error }) },
        subjects: 72,
      });
  }
  return found;
}

describe("simulation agrees with the exact routes", () => {
  const all = cases();
  it("on at least 60 designs", () => expect(all.length).toBeGreaterThanOrEqual(60));

  it("within Monte Carlo error", async () => {
    const studies = 3000;
    // Each design with its own seed: one seed for all would make their deviations go together.
    let squares = 0;
    let compared = 0;
    for (const [index, one] of all.entries()) {
      const question = { design: one.design, aim: one.aim, subjects: [one.subjects] };
      const exact = await powerOf(question, { ...options, studies });
      const simulated = await powerOf(question, { ...options, studies, method: "simulation", seed: 1000 + index });
      expect(simulated.method).toBe("simulation");
      const left = exact.points[0]!;
      const right = simulated.points[0]!;
      const pairs: [number, number][] = (left.comparisons ?? [{ power: left.power! }]).map((row, i) => [
        row.power,
        right.comparisons?.[i]?.power ?? right.power!,
      ]);
      if (exact.method === "joint distribution") pairs.push([left.every!, right.every!], [left.any!, right.any!]);
      for (const [p, share] of pairs) {
        const deviation = (share - p) / Math.sqrt(Math.max((p * (1 - p)) / studies, 1 / studies ** 2));
        // 4.5 standard errors: once in 150,000 by chance for one of the some 200 numbers.
        expect(Math.abs(deviation), `${one.name}: exact ${p}, simulated ${share}`).toBeLessThan(4.5);
        if (p > 0.01 && p < 0.99) {
          squares += deviation ** 2;
          compared++;
        }
      }
    }
    // All together: mean square near 1 (numbers of one design go together, hence the room).
    expect(compared).toBeGreaterThan(120);
    expect(squares / compared).toBeGreaterThan(0.6);
    expect(squares / compared).toBeLessThan(1.5);
  });
});
