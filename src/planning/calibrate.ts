import type { CalibrationResult, CalibrationScenario, Note } from "../results/index.ts";
import { hasJointIntervals, trueNulls } from "./decisions.ts";
import { planned, requireStudies } from "./evaluate.ts";
import { groupSizes, layoutOf, type PlanLayout, placedWeights } from "./layout.ts";
import { PlanningError } from "./problem.ts";
import { chainTruths, runStudies, type Scenario, type ScenarioCounts, spreadOf } from "./simulate.ts";
import type { ObservedDesign, PlanAim, PlanningDesign, PlanningOptions } from "./types.ts";

interface NamedScenario extends Scenario {
  readonly scenario: string;
}

export const defaultCalibrationStudies = 20_000;

const dot = (left: readonly number[], right: readonly number[]) =>
  left.reduce((sum, value, at) => sum + value * right[at]!, 0);

/** The means nearest to the expected ones at which about half of the comparisons, the smaller ones, have no difference. */
function partlyEqual(layout: PlanLayout, weights: readonly (readonly number[])[], truths: readonly number[]): number[] {
  const size = (i: number) => Math.abs(truths[i]!) / Math.sqrt(dot(weights[i]!, weights[i]!));
  const order = [...weights.keys()].sort((a, b) => size(a) - size(b));
  const directions: number[][] = [];
  let means = [...layout.means];
  for (const index of order.slice(0, Math.ceil(weights.length / 2))) {
    let direction = [...weights[index]!];
    for (const earlier of directions) {
      const share = dot(direction, earlier);
      direction = direction.map((value, at) => value - share * earlier[at]!);
    }
    const length = Math.sqrt(dot(direction, direction));
    if (length < 1e-9) continue;
    direction = direction.map((value) => value / length);
    directions.push(direction);
    const share = dot(direction, means);
    means = means.map((value, at) => value - share * direction[at]!);
  }
  return means;
}

function scenariosOf(aim: PlanAim, layout: PlanLayout): NamedScenario[] {
  const common = layout.means.reduce((sum, mean) => sum + mean, 0) / layout.means.length;
  const equal: Scenario = { means: layout.means.map(() => common), truths: null };
  const expected: NamedScenario = { scenario: "as expected", means: layout.means, truths: null };
  if ("omnibus" in aim) return [{ scenario: "no difference", ...equal }, expected];
  const plan = aim.family;
  const truths = chainTruths(aim, layout, expected).at(-1)!;
  const found: NamedScenario[] = [];
  if (plan.margin === null) found.push({ scenario: "no difference", ...equal });
  else {
    const edge =
      plan.margin.type === "not worse" && plan.margin.better !== "lower" ? -plan.margin.value : plan.margin.value;
    found.push({ scenario: "at the margin", means: equal.means, truths: truths.map(() => edge) });
  }
  found.push(expected);
  if (plan.margin === null && truths.length > 1) {
    const weights = plan.contrasts.map((contrast) => placedWeights(layout, contrast.weights));
    const means = partlyEqual(layout, weights, truths);
    const partly: NamedScenario = { scenario: "partly no difference", means, truths: null };
    const nulls = trueNulls(plan, chainTruths(aim, layout, partly).at(-1)!, spreadOf(layout));
    if (nulls.includes(true) && nulls.includes(false)) found.push(partly);
  }
  return found;
}

const binomialError = (share: number, studies: number) => Math.sqrt((share * (1 - share)) / studies);

/**
 * Studies of one shard: 1-based index. Shards are runs of study numbers that follow each other, as even as they can be.
 */
function shardRange(studies: number, shard: { readonly index: number; readonly of: number } | null): [number, number] {
  if (shard === null) return [0, studies];
  const { index, of } = shard;
  if (!(Number.isInteger(index) && Number.isInteger(of) && index >= 1 && index <= of && of <= studies)) {
    throw new PlanningError(
      "shards-do-not-fit",
      `There is no shard ${index} of ${of}.`,
      "Shards count from 1 to their number, which is at most the number of studies.",
    );
  }
  return [Math.floor((studies * (index - 1)) / of), Math.floor((studies * index) / of)];
}

/**
 * Simulated studies of the user's own design, decided by the declared procedure: error under no difference (and where only some
 * comparisons have none), power under the expectation, coverage of the intervals. With `observed`, sizes, means, spreads and shape are
 * those found in the data.
 *
 * Study n has its own random stream, the same in every scenario; counts are the same for any number of workers, and merged shards are
 * the same as one run. An interrupt keeps the studies that are done; `studies` says how many of `asked`.
 *
 * @param question.subjects  in total, for the plan's own expectations; not needed with `observed`
 * @param question.studies  in all shards together, default 20,000
 * @throws PlanningError; FamilyProblemError; Interrupted when stopped before the first studies were done
 */
export async function calibrate(
  question: {
    readonly design: PlanningDesign;
    readonly aim: PlanAim;
    readonly subjects?: number | null;
    readonly observed?: ObservedDesign | null;
    readonly shard?: { readonly index: number; readonly of: number } | null;
  },
  options: PlanningOptions,
): Promise<CalibrationResult> {
  const { aim, observed = null, shard = null } = question;
  const design = observed === null ? question.design : { ...question.design, cellMeans: observed.cellMeans };
  const asked = requireStudies(options.studies ?? defaultCalibrationStudies);
  const [first, end] = shardRange(asked, shard);
  const layout = layoutOf(design, observed);
  const sizes =
    observed === null
      ? groupSizes(design.allocation, question.subjects ?? Number.NaN)
      : groupSizes(
          [...observed.groupSizes],
          observed.groupSizes.reduce((sum, size) => sum + size, 0),
        );
  // An omnibus calibration is about every effect, also those of which nothing is expected.
  const it = planned(
    design,
    "omnibus" in aim ? { omnibus: { ...aim.omnibus, effects: aim.omnibus.effects ?? allEffects(design) } } : aim,
  );
  const scenarios = scenariosOf(it.aim, layout);
  const coverage = "family" in it.aim && it.aim.family.after === null && hasJointIntervals(it.aim.family);
  const { counts, done } = await runStudies(
    {
      design,
      layout,
      sizes,
      aim: it.aim,
      scenarios,
      seed: options.seed,
      purpose: "calibration",
      first,
      count: end - first,
      over: "false nulls",
      coverage,
    },
    { host: options.host, watch: options.watch, label: "simulating studies", keep: true },
  );
  const plan = "family" in it.aim ? it.aim.family : null;
  const names = plan === null ? it.effects.map((effect) => effect.name) : plan.contrasts.map((one) => one.name);
  const source = observed === null ? "plan" : "data";
  const rows = scenarios.map((scenario, s): CalibrationScenario => {
    const truths = plan === null ? names.map(() => 0) : chainTruths(it.aim, layout, scenario).at(-1)!;
    const nulls =
      plan === null
        ? names.map(() => scenario.scenario === "no difference")
        : trueNulls(plan, truths, spreadOf(layout));
    return scenarioRow(
      { scenario: scenario.scenario, source, names, truths, nulls, coverage, omnibus: plan === null },
      counts[s]!,
      done,
    );
  });
  const notes: Note[] = [...it.notes];
  if (design.shape !== "normal" && observed === null)
    notes.push({ code: "simulated-shape", facts: { shape: design.shape } });
  if ("family" in it.aim && !coverage)
    notes.push({ code: "coverage-not-computed", facts: { method: it.aim.family.correction } });
  if (plan === null && names.length > 1)
    notes.push({ code: "omnibus-effects-not-corrected", facts: { effects: names.length } });
  return {
    kind: "calibration",
    of: it.of,
    correction: it.correction,
    error: it.errorRate,
    seed: options.seed,
    studies: done,
    asked: end - first,
    shard,
    scenarios: rows,
    conclusion: conclusionOf(rows, it.errorRate, it.correction),
    notes,
  };
}

const allEffects = (design: PlanningDesign): string[][] => {
  const names = design.factors.map((factor) => factor.name);
  return Array.from({ length: 2 ** names.length - 1 }, (_, k) => names.filter((__, i) => (((k + 1) >> i) & 1) === 1));
};

interface RowFacts {
  readonly scenario: string;
  readonly source: "plan" | "data";
  readonly names: readonly string[];
  readonly truths: readonly number[];
  readonly nulls: readonly boolean[];
  readonly coverage: boolean;
  readonly omnibus: boolean;
}

function scenarioRow(facts: RowFacts, counts: ScenarioCounts, studies: number): CalibrationScenario {
  const { names, truths, nulls, coverage } = facts;
  const someNull = nulls.includes(true);
  const someReal = nulls.includes(false);
  // Effects of an omnibus analysis are tests of their own: error and power are told for each, not for all together.
  const familyError = !someNull
    ? null
    : facts.omnibus
      ? Math.max(...counts.rejected) / studies
      : counts.falseClaims / studies;
  const allCover = coverage ? counts.allCover / studies : null;
  return {
    scenario: facts.scenario,
    source: facts.source,
    studies,
    familyError,
    familyErrorMonteCarlo: familyError === null ? null : binomialError(familyError, studies),
    every: someReal ? counts.every / studies : null,
    any: someReal ? counts.any / studies : null,
    coverage: allCover,
    coverageMonteCarlo: allCover === null ? null : binomialError(allCover, studies),
    comparisons: names.map((comparison, i) => ({
      comparison,
      rejected: counts.rejected[i]! / studies,
      trueDifference: truths[i]!,
      coverage: coverage ? counts.covered[i]! / studies : null,
    })),
  };
}

/**
 * "exceeds": some scenario's error is above the level by more than 2.6 Monte Carlo errors (99%); "conservative": the largest is below
 * four fifths of it by as much; "cannot tell": a Monte Carlo error at the level above a tenth of the level; otherwise "holds".
 * A method that holds the false discovery rate holds the family's error only where nothing differs, and is judged there.
 */
function conclusionOf(
  scenarios: readonly CalibrationScenario[],
  error: number,
  correction: string | null,
): CalibrationResult["conclusion"] {
  const falseDiscovery = correction === "bh" || correction === "by";
  const judged = scenarios.filter(
    (row) => row.familyError !== null && (!falseDiscovery || row.scenario === "no difference"),
  );
  if (judged.length === 0) return "cannot tell";
  if (judged.some((row) => row.familyError! - 2.6 * binomialError(error, row.studies) > error)) return "exceeds";
  if (binomialError(error, judged[0]!.studies) > error / 10) return "cannot tell";
  if (judged.every((row) => row.familyError! + 2.6 * binomialError(error, row.studies) < 0.8 * error))
    return "conservative";
  return "holds";
}

/**
 * One result from the shards of one calibration: shares become counts again (exactly, since counts are whole) and add up.
 * @param results  of the same design, aim and seed, each shard once
 * @throws PlanningError "shards-do-not-fit"
 */
export function mergeCalibrations(results: readonly CalibrationResult[]): CalibrationResult {
  const first = results[0];
  const refuse = (why: string): never => {
    throw new PlanningError(
      "shards-do-not-fit",
      `These shards cannot be put together: ${why}.`,
      "Give every shard of one calibration, each once.",
    );
  };
  if (first === undefined) return refuse("there are none");
  const seen = new Set<number>();
  for (const one of results) {
    if (one.of !== first.of || one.correction !== first.correction || one.error !== first.error)
      refuse(`one is of "${first.of}", another of "${one.of}", or their methods differ`);
    if (one.seed !== first.seed) refuse(`seeds ${first.seed} and ${one.seed} differ`);
    if (one.shard === null) refuse("one is not a shard");
    if (one.shard!.of !== first.shard!.of) refuse(`one is of ${first.shard!.of} shards, another of ${one.shard!.of}`);
    if (seen.has(one.shard!.index)) refuse(`shard ${one.shard!.index} is there twice`);
    seen.add(one.shard!.index);
    const same =
      one.scenarios.length === first.scenarios.length &&
      one.scenarios.every((row, s) => {
        const other = first.scenarios[s]!;
        return (
          row.scenario === other.scenario &&
          row.source === other.source &&
          row.comparisons.length === other.comparisons.length &&
          row.comparisons.every(
            (comparison, i) =>
              comparison.comparison === other.comparisons[i]!.comparison &&
              comparison.trueDifference === other.comparisons[i]!.trueDifference,
          )
        );
      });
    if (!same) refuse("they simulated different designs");
  }
  for (let index = 1; index <= first.shard!.of; index++)
    if (!seen.has(index)) refuse(`shard ${index} of ${first.shard!.of} is missing`);
  const studies = results.reduce((sum, one) => sum + one.studies, 0);
  const together = (share: (row: CalibrationScenario) => number | null, s: number): number | null => {
    let count = 0;
    for (const one of results) {
      const value = share(one.scenarios[s]!);
      if (value === null) return null;
      count += Math.round(value * one.studies);
    }
    return count / studies;
  };
  const scenarios = first.scenarios.map((row, s): CalibrationScenario => {
    const rejected = row.comparisons.map((_, i) => together((one) => one.comparisons[i]!.rejected, s)!);
    const ofFamily = together((one) => one.familyError, s);
    // Of several effects the largest error is told, and which one is largest can differ from shard to shard.
    const familyError = ofFamily !== null && first.correction === null ? Math.max(...rejected) : ofFamily;
    const coverage = together((one) => one.coverage, s);
    return {
      ...row,
      studies,
      familyError,
      familyErrorMonteCarlo: familyError === null ? null : binomialError(familyError, studies),
      every: together((one) => one.every, s),
      any: together((one) => one.any, s),
      coverage,
      coverageMonteCarlo: coverage === null ? null : binomialError(coverage, studies),
      comparisons: row.comparisons.map((comparison, i) => ({
        ...comparison,
        rejected: rejected[i]!,
        coverage: together((one) => one.comparisons[i]!.coverage, s),
      })),
    };
  });
  return {
    ...first,
    studies,
    asked: results.reduce((sum, one) => sum + one.asked, 0),
    shard: null,
    scenarios,
    conclusion: conclusionOf(scenarios, first.error, first.correction),
  };
}
