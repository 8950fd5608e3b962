import { spellMembers } from "../../src/design/index.ts";
import type { FactorDeclaration, Member } from "../../src/design/index.ts";
import type { CorrectionName } from "../../src/families/index.ts";
import type { Host } from "../../src/host/index.ts";
import { silentWatch } from "../../src/host/index.ts";
import { type FamilyPlan, type PlanningDesign, runTask } from "../../src/planning/index.ts";

export function factor(
  name: string,
  levels: number | readonly string[],
  varies: "within" | "between",
): FactorDeclaration {
  return {
    name,
    levels: typeof levels === "number" ? Array.from({ length: levels }, (_, i) => `${name}${i + 1}`) : levels,
    varies,
    unit: "subject",
    betweenUnit: null,
    ordered: false,
    positions: null,
    reference: null,
    measured: false,
  };
}

export function design(
  factors: readonly FactorDeclaration[],
  cellMeans: readonly number[],
  more: Partial<PlanningDesign> = {},
): PlanningDesign {
  const groups = factors
    .filter((one) => one.varies === "between")
    .reduce((product, one) => product * one.levels.length, 1);
  return {
    factors,
    scale: "linear",
    variances: "equal",
    covariance: null,
    cellMeans,
    cellSpread: cellMeans.map(() => 1),
    correlation: 0.5,
    shape: "normal",
    dropout: 0,
    missing: 0,
    allocation: new Array<number>(groups).fill(1),
    cost: null,
    unit: "subject",
    ...more,
  };
}

export function family(
  factors: readonly FactorDeclaration[],
  members: readonly Member[],
  correction: CorrectionName,
  more: Partial<FamilyPlan> = {},
): FamilyPlan {
  const spelled = spellMembers(factors, members, new Map());
  return {
    name: "primary",
    contrasts: spelled.contrasts,
    shape: spelled.shape,
    meansWeights: spelled.meansWeights,
    correction,
    error: 0.05,
    sides: "two-sided",
    margin: null,
    graph: null,
    after: null,
    ...more,
  };
}

export const allPairs = (name: string): Member => ({ type: "all pairs", factor: name, at: [] });
export const against = (name: string, level: string): Member => ({
  type: "each against level",
  factor: name,
  level,
  at: [],
});

/** Runs jobs in this process, as `workers` would: in another order, and through a copy of their plain data. */
export function inProcess(workers = 1): Pick<Host, "runJobs"> {
  return {
    async runJobs(jobs, watch) {
      const answers = new Array<unknown>(jobs.length);
      let done = 0;
      for (let worker = workers - 1; worker >= 0; worker--)
        for (let at = worker; at < jobs.length; at += workers) {
          watch.checkpoint();
          answers[at] = runTask(jobs[at]!.task, structuredClone(jobs[at]!.input));
          watch.progress(++done, jobs.length, "computing");
        }
      return answers;
    },
  };
}

export const options = { host: inProcess(), watch: silentWatch, seed: 11 };
