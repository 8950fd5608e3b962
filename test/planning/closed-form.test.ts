// Powers and sizes against test/reference/tables/power.json (60-digit arithmetic); Cohen (1992), recalled, as its cross-check.
import { readFileSync } from "node:fs";
import { describe, expect, it } from "vitest";
import { powerOf, sizeFor } from "../../src/planning/index.ts";
import { allPairs, design, factor, family, options } from "./designs.ts";

interface Row {
  readonly method: string;
  readonly parameters: Record<string, string | number>;
  readonly value: string;
  readonly published?: { readonly value: string };
}
const rows = JSON.parse(
  readFileSync(new URL("../reference/tables/power.json", import.meta.url), "utf8"),
) as readonly Row[];
const of = (method: string) => rows.filter((row) => row.method === method);

/** "0.05" or "0.05/6". */
function levelOf(text: string | number | undefined): number {
  const [level, parts = "1"] = String(text).split("/");
  return Number(level) / Number(parts);
}

/** Means of k groups whose standard deviation over the groups is f. */
function meansOf(groups: number, f: number): number[] {
  const means = Array.from({ length: groups }, (_, i) => i);
  const centre = (groups - 1) / 2;
  const sd = Math.sqrt(means.reduce((sum, one) => sum + (one - centre) ** 2, 0) / groups);
  return means.map((one) => ((one - centre) * f) / sd);
}

describe("one-way F test", () => {
  it("has the power of the reference table", async () => {
    const table = of("power of the one-way F test");
    expect(table.length).toBeGreaterThan(60);
    for (const { parameters, value } of table) {
      const groups = Number(parameters.groups);
      const planned = design([factor("a", groups, "between")], meansOf(groups, Number(parameters.effect_f)));
      const aim = { omnibus: { effects: null, error: levelOf(parameters.alpha) } };
      const subjects = [groups * Number(parameters.n_per_group)];
      const { points, method } = await powerOf({ design: planned, aim, subjects }, options);
      expect(method).toBe("closed form");
      expect(Math.abs(points[0]!.power! / Number(value) - 1)).toBeLessThan(1e-10);
    }
  });

  it("needs the subjects of the reference table, which Cohen (1992) gives to within one or two", async () => {
    for (const { parameters, value, published } of of("least n per group for the one-way F test")) {
      const groups = Number(parameters.groups);
      const planned = design([factor("a", groups, "between")], meansOf(groups, Number(parameters.effect_f)));
      const aim = { omnibus: { effects: null, error: levelOf(parameters.alpha) } };
      const question = { design: planned, aim, target: Number(parameters.power), goal: "omnibus" as const };
      const { subjectsPerGroup, achieved } = await sizeFor(question, options);
      expect(subjectsPerGroup).toEqual(new Array(groups).fill(Number(value)));
      expect(achieved).toBeGreaterThanOrEqual(Number(parameters.power));
      if (published !== undefined)
        expect(Math.abs(Number(published.value) - subjectsPerGroup[0]!)).toBeLessThanOrEqual(2);
    }
  });
});

describe("one comparison", () => {
  const two = [factor("a", 2, "between")];
  it("between subjects has the power of the two-sample t test", async () => {
    for (const { parameters, value } of of("power of the two-sided two-sample t test, equal sizes")) {
      const plan = family(two, [allPairs("a")], "holm", { error: levelOf(parameters.alpha) });
      const planned = design(two, [0, Number(parameters.effect_d)]);
      const subjects = [2 * Number(parameters.n_per_group)];
      const { points, method } = await powerOf({ design: planned, aim: { family: plan }, subjects }, options);
      expect(method).toBe("closed form");
      expect(Math.abs(points[0]!.power! / Number(value) - 1)).toBeLessThan(1e-10);
    }
  });

  it("between subjects needs the subjects of the two-sample t test", async () => {
    for (const { parameters, value } of of("least n per group for the two-sided two-sample t test")) {
      const plan = family(two, [allPairs("a")], "none", { error: levelOf(parameters.alpha) });
      const planned = design(two, [0, Number(parameters.effect_d)]);
      const question = {
        design: planned,
        aim: { family: plan },
        target: Number(parameters.power),
        goal: "each" as const,
      };
      expect((await sizeFor(question, options)).subjectsPerGroup[0]).toBe(Number(value));
    }
  });

  it("within subjects has the power of the paired t test", async () => {
    const within = [factor("a", 2, "within")];
    for (const { parameters, value } of of("power of the two-sided paired t test")) {
      // The spread of a difference is sqrt(2 (1 - correlation)) spreads.
      const correlation = 0.3;
      const planned = design(within, [0, Number(parameters.effect_dz) * Math.sqrt(2 * (1 - correlation))], {
        correlation,
      });
      const plan = family(within, [allPairs("a")], "none", { error: levelOf(parameters.alpha) });
      const subjects = [Number(parameters.pairs)];
      const { points } = await powerOf({ design: planned, aim: { family: plan }, subjects }, options);
      expect(Math.abs(points[0]!.power! / Number(value) - 1)).toBeLessThan(1e-9);
    }
  });
});
