import { silentWatch } from "../host/index.ts";
import type { Note } from "../results/index.ts";
import { effectPower, familyPower } from "./closed-form.ts";
import { contrastErrors } from "./contrast-errors.ts";
import { familyChain, requireFitting, templateOf, trueNulls } from "./decisions.ts";
import { studyDrawer } from "./draw-study.ts";
import { layoutOf, type PlanLayout, placedWeights } from "./layout.ts";
import { randomStream } from "../numeric/index.ts";
import { type PlannedEffect, plannedEffects } from "./omnibus-tests.ts";
import { PlanningError } from "./problem.ts";
import { chainTruths, runStudies, spreadOf } from "./simulate.ts";
import type { FamilyGoal, PlanAim, PlanningDesign, PlanningOptions } from "./types.ts";

export type Method = "closed form" | "joint distribution" | "simulation";
export type Goal = FamilyGoal | "omnibus";

export interface PowerValues {
  /** Comparisons, or effects of the omnibus. */
  readonly names: readonly string[];
  readonly each: readonly number[];
  readonly every: number | null;
  readonly any: number | null;
  readonly method: Method;
  /** Largest Monte Carlo standard error of what is simulated; null where nothing is. */
  readonly monteCarloError: number | null;
}

/** A design with its aim, ready to be evaluated at any size. */
export interface PlannedAim {
  readonly design: PlanningDesign;
  readonly layout: PlanLayout;
  readonly aim: PlanAim;
  readonly effects: readonly PlannedEffect[];
  readonly of: string;
  readonly errorRate: number;
  readonly correction: string | null;
  readonly notes: readonly Note[];
}

export const defaultStudies = 10_000;

/**
 * Checks that the aim can be planned.
 * @throws PlanningError "nothing-to-plan", "design-not-planned", "unknown-factor"; FamilyProblemError where a method does not fit
 */
export function planned(design: PlanningDesign, aim: PlanAim): PlannedAim {
  const layout = layoutOf(design);
  const notes: Note[] = [];
  const errorRate = "omnibus" in aim ? aim.omnibus.error : aim.family.error;
  if (design.missing > 0) notes.push({ code: "planned-on-complete-subjects", facts: { missing: design.missing } });
  if (design.covariance === "unstructured" && layout.withinCells > 1)
    notes.push({ code: "planned-with-contrast-scores", facts: {} });
  if ("omnibus" in aim) {
    const effects = plannedEffects(design, layout, aim.omnibus);
    if (effects.length === 0) {
      throw new PlanningError(
        "no-difference-expected",
        "All expected means are equal: there is no difference for the omnibus test to find.",
        "Expect different means, or name the effect: power of omnibus of FACTOR",
      );
    }
    for (const effect of effects)
      if (effect.epsilon < 1 - 1e-9)
        notes.push({ code: "planned-with-epsilon", facts: { effect: effect.name, epsilon: effect.epsilon } });
    return { design, layout, aim, effects, of: "omnibus", errorRate, correction: null, notes };
  }
  for (const plan of familyChain(aim.family)) {
    // One study drawn: only to know the correlations that the method will meet.
    const errors = contrastErrors(
      layout,
      plan.contrasts.map((contrast) => placedWeights(layout, contrast.weights)),
    );
    const blank = () => new Float64Array(plan.contrasts.length);
    const sizes = new Array<number>(layout.groups).fill(10 + 2 * layout.withinCells);
    const drawn = studyDrawer(
      { ...layout, missing: 0 },
      sizes,
      layout.errors === "separate",
    )(randomStream(1, "fit", 0));
    errors.fill(drawn, { deviations: blank(), standardErrors: blank(), df: blank() });
    const commonDf = errors.shared ? errors.commonDf(drawn.df) : null;
    requireFitting(plan, templateOf(plan, layout, { correlation: errors.correlation(), commonDf, watch: silentWatch }));
    if (plan.correction === "resampling")
      notes.push({ code: "resampling-planned-as-step-down", facts: { family: plan.name } });
  }
  const { name, correction } = aim.family;
  return { design, layout, aim, effects: [], of: name, errorRate, correction, notes };
}

/** Means whose differences are `multiple` times the expected ones. */
const scaledMeans = (layout: PlanLayout, multiple: number) => layout.means.map((mean) => mean * multiple);

/** True values of the last family's comparisons when the expected differences are multiplied. */
export function targetTruths(it: PlannedAim, multiple = 1): number[] {
  return chainTruths(it.aim, it.layout, { means: scaledMeans(it.layout, multiple), truths: null }).at(-1) ?? [];
}

/**
 * Power at given group sizes. Exact where it can be, unless simulation is asked for; simulated with the same streams for every size and
 * multiple (common random numbers).
 * @param goal  what is needed; "all" for each, every and any
 */
export async function evaluate(
  it: PlannedAim,
  question: { readonly sizes: readonly number[]; readonly multiple?: number; readonly goal: Goal | "all" },
  options: PlanningOptions,
): Promise<PowerValues> {
  const { layout, aim, effects } = it;
  const { sizes, multiple = 1, goal } = question;
  const exactly = options.method !== "simulation";
  const means = scaledMeans(layout, multiple);
  let each: readonly number[] | null = null;
  if ("omnibus" in aim) {
    const names = effects.map((effect) => effect.name);
    const powers = effects.map((effect) => effectPower(layout, effect, sizes, means, aim.omnibus.error));
    if (exactly && powers.every((power) => power !== null)) {
      each = powers.map((power) => power!.power);
      return { names, each, every: null, any: null, method: "closed form", monteCarloError: null };
    }
  } else if (exactly) {
    const closed = familyPower(layout, aim.family, sizes, targetTruths(it, multiple), goal !== "each");
    if (closed !== null) {
      each = closed.each;
      const enough =
        goal === "each" ||
        (goal === "every" && closed.every !== null) ||
        (goal === "any" && closed.any !== null) ||
        (closed.every !== null && closed.any !== null);
      const names = aim.family.contrasts.map((contrast) => contrast.name);
      const method = names.length > 1 && goal !== "each" ? "joint distribution" : "closed form";
      if (enough) return { names, ...closed, method, monteCarloError: null };
    }
  }
  return simulated(it, { sizes, means, each }, options);
}

async function simulated(
  it: PlannedAim,
  known: {
    readonly sizes: readonly number[];
    readonly means: readonly number[];
    readonly each: readonly number[] | null;
  },
  options: PlanningOptions,
): Promise<PowerValues> {
  const studies = requireStudies(options.studies ?? defaultStudies);
  const { counts } = await runStudies(
    {
      design: it.design,
      layout: it.layout,
      sizes: known.sizes,
      aim: it.aim,
      scenarios: [{ means: known.means, truths: null }],
      seed: options.seed,
      purpose: "power",
      first: 0,
      count: studies,
      over: "all",
      coverage: false,
    },
    { host: options.host, watch: options.watch, label: "simulating studies" },
  );
  const tally = counts[0]!;
  const names =
    "omnibus" in it.aim ? it.effects.map((effect) => effect.name) : it.aim.family.contrasts.map((one) => one.name);
  const simulatedEach = tally.rejected.map((count) => count / studies);
  const every = tally.every / studies;
  const any = tally.any / studies;
  const shown = [...(known.each === null ? simulatedEach : []), every, any];
  return {
    names,
    each: known.each ?? simulatedEach,
    every,
    any,
    method: "simulation",
    monteCarloError: Math.max(...shown.map((p) => Math.sqrt((p * (1 - p)) / studies))),
  };
}

export function requireStudies(studies: number): number {
  if (Number.isInteger(studies) && studies >= 100 && studies <= 1e8) return studies;
  throw new PlanningError(
    "studies-out-of-range",
    `${studies} simulated studies are not possible.`,
    "Ask for a whole number from 100 to 100,000,000.",
  );
}

/** The share that the goal is about. */
export function powerFor(values: PowerValues, goal: Goal): number {
  if (goal === "every") return values.every!;
  if (goal === "any") return values.any!;
  return Math.min(...values.each);
}

/**
 * Refuses a target that nothing could reach or that needs nothing.
 * @throws PlanningError "power-not-above-error", "no-difference-expected", "goal-not-for-omnibus"
 */
export function requireReachable(it: PlannedAim, goal: Goal, target: number): void {
  if ("omnibus" in it.aim !== (goal === "omnibus")) {
    throw new PlanningError(
      "goal-not-for-omnibus",
      "every, any and each are about the comparisons of a family.",
      "Plan the omnibus test without them, or name a family.",
    );
  }
  if (!(target > it.errorRate && target < 1)) {
    throw new PlanningError(
      "power-not-above-error",
      `A power of ${target * 100}% is not possible to plan for with an error of ${it.errorRate * 100}%.`,
      `The power lies above the error, ${it.errorRate * 100}%, and below 100%; 80% or 90% is common practice.`,
    );
  }
  if ("omnibus" in it.aim) {
    const sizes = new Array<number>(it.layout.groups).fill(100);
    const none = it.effects.find((effect) => {
      const power = effectPower(
        { ...it.layout, sameCovariance: true, errors: "pooled", shape: "normal", residuals: null, missing: 0 },
        effect,
        sizes,
        it.layout.means,
        0.05,
      );
      return power !== null && power.noncentrality < 1e-12;
    });
    if (none === undefined) return;
    throw new PlanningError(
      "no-difference-expected",
      `No difference is expected for ${none.name}: no number of subjects gives its test power.`,
      "Expect different means, or plan for another effect.",
      none.name,
    );
  }
  const plan = it.aim.family;
  for (const one of familyChain(plan)) {
    const truths =
      one === plan
        ? targetTruths(it)
        : chainTruths({ family: one }, it.layout, { means: it.layout.means, truths: null }).at(-1)!;
    const nulls = trueNulls(one, truths, spreadOf(it.layout));
    // A family that is waited for must be rejected whole; of an `any` one, or under an `any` goal, one will do.
    const oneWillDo = one === plan ? goal === "any" : plan.after?.any === true;
    if (oneWillDo ? nulls.includes(false) : !nulls.includes(true)) continue;
    const name = one.contrasts[nulls.indexOf(true)]!.name;
    throw new PlanningError(
      "no-difference-expected",
      one.margin === null
        ? `The expected difference of "${name}" is zero or against its claim: no number of subjects gives it power.`
        : `The expected difference of "${name}" is not inside the margin: no number of subjects gives it power.`,
      goal === "any"
        ? "Expect a difference in some comparison."
        : "Expect a difference there, plan for any comparison, or leave it out of the family.",
      name,
    );
  }
}
