import { type Host, Interrupted, silentWatch, type Watch } from "../host/index.ts";
import { randomStream } from "../numeric/index.ts";
import { contrastErrors } from "./contrast-errors.ts";
import { chainDecider, familyChain, hasJointIntervals, trueNulls } from "./decisions.ts";
import { studyDrawer } from "./draw-study.ts";
import { type PlanLayout, placedWeights } from "./layout.ts";
import { omnibusTests, plannedEffects } from "./omnibus-tests.ts";
import type { PlanAim, PlanningDesign } from "./types.ts";

/** One set of true values under which the same simulated deviations are decided. */
export interface Scenario {
  /** True means, groups x within cells. */
  readonly means: readonly number[];
  /** True value of each comparison of the last family where it is not that of the means (null at a margin); null otherwise. */
  readonly truths: readonly number[] | null;
}

export interface SimulationInput {
  readonly design: PlanningDesign;
  readonly layout: PlanLayout;
  readonly sizes: readonly number[];
  readonly aim: PlanAim;
  readonly scenarios: readonly Scenario[];
  readonly seed: number;
  readonly purpose: string;
  /** First study and how many: study n always has stream (seed, purpose, n). */
  readonly first: number;
  readonly count: number;
  /** What `every` and `any` are counted over: all comparisons, or those whose null hypothesis is false. */
  readonly over: "all" | "false nulls";
  /** Also count how often intervals cover. */
  readonly coverage: boolean;
}

/** Counts of studies, one entry per scenario. Sums of two runs are the counts of both. */
export interface ScenarioCounts {
  /** Some true null hypothesis rejected. */
  readonly falseClaims: number;
  /** Every one rejected; some one rejected: see `over`. */
  readonly every: number;
  readonly any: number;
  /** Per comparison, or per effect of the omnibus. */
  readonly rejected: readonly number[];
  readonly allCover: number;
  readonly covered: readonly number[];
}

export const blockStudies = 500;
const blocksPerWave = 8;

const dotted = (weights: readonly number[], means: readonly number[]) =>
  weights.reduce((sum, weight, at) => sum + weight * means[at]!, 0);

/** True value of each comparison of a chain's families under the means. */
export function chainTruths(aim: PlanAim, layout: PlanLayout, scenario: Scenario): number[][] {
  if ("omnibus" in aim) return [];
  const chain = familyChain(aim.family);
  return chain.map((plan, index) =>
    index === chain.length - 1 && scenario.truths !== null
      ? [...scenario.truths]
      : plan.contrasts.map((contrast) => dotted(placedWeights(layout, contrast.weights), scenario.means)),
  );
}

/** Largest spread, which says what counts as no difference. */
export const spreadOf = (layout: PlanLayout): number =>
  Math.sqrt(Math.max(...layout.covariances.flatMap((one) => one.map((row, i) => row[i]!)))) +
  Math.max(...layout.means.map(Math.abs)) * 1e-3;

/** Runs some studies and counts. The task that compute workers run. */
export function simulateStudies(input: SimulationInput): readonly ScenarioCounts[] {
  return "omnibus" in input.aim ? simulateOmnibus(input) : simulateFamily(input);
}

function tallyOf(members: number) {
  return {
    falseClaims: 0,
    every: 0,
    any: 0,
    rejected: new Array<number>(members).fill(0),
    allCover: 0,
    covered: new Array<number>(members).fill(0),
  };
}

function simulateOmnibus(input: SimulationInput): readonly ScenarioCounts[] {
  const { design, layout, aim, scenarios } = input;
  if (!("omnibus" in aim)) return [];
  const effects = plannedEffects(design, layout, aim.omnibus);
  const test = omnibusTests(design, layout, effects);
  const draw = studyDrawer(layout, input.sizes, layout.errors === "separate");
  const tallies = scenarios.map(() => tallyOf(effects.length));
  const scale = spreadOf(layout);
  const nulls = scenarios.map(({ means }) => effects.map((effect) => !hasEffect(effect, layout, means, scale)));
  for (let study = input.first; study < input.first + input.count; study++) {
    const drawn = draw(randomStream(input.seed, input.purpose, study));
    if (!drawn.whole) continue;
    for (const [s, { means }] of scenarios.entries())
      count(
        tallies[s]!,
        test(drawn, means).map((p) => p <= aim.omnibus.error),
        nulls[s]!,
        input.over,
      );
  }
  return tallies;
}

function hasEffect(
  effect: ReturnType<typeof plannedEffects>[number],
  layout: PlanLayout,
  means: readonly number[],
  scale: number,
): boolean {
  return effect.between[0]!.some((_, a) =>
    effect.within[0]!.some((__, b) => {
      let sum = 0;
      for (let g = 0; g < layout.groups; g++)
        for (let w = 0; w < layout.withinCells; w++)
          sum += effect.between[g]![a]! * effect.within[w]![b]! * means[g * layout.withinCells + w]!;
      return Math.abs(sum) > 1e-10 * scale;
    }),
  );
}

function count(
  tally: ReturnType<typeof tallyOf>,
  rejected: readonly boolean[],
  nulls: readonly boolean[],
  over: SimulationInput["over"],
): void {
  let falseClaim = false;
  let every = true;
  let any = false;
  for (let i = 0; i < rejected.length; i++) {
    if (rejected[i]) tally.rejected[i]!++;
    if (nulls[i]) falseClaim ||= rejected[i]!;
    if (!nulls[i] || over === "all") {
      every &&= rejected[i]!;
      any ||= rejected[i]!;
    }
  }
  if (falseClaim) tally.falseClaims++;
  if (every) tally.every++;
  if (any) tally.any++;
}

function simulateFamily(input: SimulationInput): readonly ScenarioCounts[] {
  const { layout, aim, scenarios } = input;
  if ("omnibus" in aim) return [];
  const chain = familyChain(aim.family).map((plan) => {
    const blank = () => new Float64Array(plan.contrasts.length);
    return {
      plan,
      layout,
      errors: contrastErrors(
        layout,
        plan.contrasts.map((contrast) => placedWeights(layout, contrast.weights)),
      ),
      evidence: { deviations: blank(), standardErrors: blank(), df: blank() },
    };
  });
  const plan = aim.family;
  const members = plan.contrasts.length;
  const draw = studyDrawer(layout, input.sizes, layout.errors === "separate");
  const { decide, newStudy } = chainDecider(chain, silentWatch);
  // Intervals are those of the family held on its own.
  const alone = input.coverage && hasJointIntervals(plan) && plan.after === null;
  const truths = scenarios.map((scenario) => chainTruths(aim, layout, scenario));
  const scale = spreadOf(layout);
  const nulls = truths.map((one) => trueNulls(plan, one.at(-1)!, scale));
  const tallies = scenarios.map(() => tallyOf(members));
  const noTruth = [plan.contrasts.map(() => 0)];
  for (let study = input.first; study < input.first + input.count; study++) {
    const drawn = draw(randomStream(input.seed, input.purpose, study));
    if (!drawn.whole) continue;
    newStudy(drawn.df);
    for (const { errors, evidence } of chain) errors.fill(drawn, evidence);
    // What an interval misses is what would be rejected of the deviations themselves; the same under every truth.
    const missed = alone ? decide(noTruth) : null;
    for (const [s, truth] of truths.entries()) {
      const tally = tallies[s]!;
      const zero = missed !== null && truth[0]!.every((value) => value === 0);
      count(tally, zero ? missed : decide(truth), nulls[s]!, input.over);
      if (missed === null) continue;
      if (!missed.includes(true)) tally.allCover++;
      for (let i = 0; i < members; i++) if (!missed[i]) tally.covered[i]!++;
    }
  }
  return tallies;
}

/** Entry by entry. */
export function addCounts(left: readonly ScenarioCounts[], right: readonly ScenarioCounts[]): ScenarioCounts[] {
  const plus = (a: readonly number[], b: readonly number[]) => a.map((value, i) => value + b[i]!);
  return left.map((one, s) => {
    const other = right[s]!;
    return {
      falseClaims: one.falseClaims + other.falseClaims,
      every: one.every + other.every,
      any: one.any + other.any,
      rejected: plus(one.rejected, other.rejected),
      allCover: one.allCover + other.allCover,
      covered: plus(one.covered, other.covered),
    };
  });
}

/**
 * Runs studies `first` to `first + count - 1` in fixed blocks on the host's workers. Counts are sums over studies, each with its own
 * stream, so that they are the same for any number of workers, any blocks and any shards.
 *
 * @param keep  an interrupt keeps the waves that are done (none done: it is thrown on)
 * @throws Interrupted
 */
export async function runStudies(
  input: SimulationInput,
  { host, watch, label, keep = false }: { host: Pick<Host, "runJobs">; watch: Watch; label: string; keep?: boolean },
): Promise<{ readonly counts: readonly ScenarioCounts[]; readonly done: number }> {
  let counts: readonly ScenarioCounts[] | null = null;
  let done = 0;
  while (done < input.count) {
    const jobs: { task: string; input: SimulationInput }[] = [];
    let planned = done;
    for (; jobs.length < blocksPerWave && planned < input.count; ) {
      const size = Math.min(blockStudies, input.count - planned);
      jobs.push({ task: "simulate studies", input: { ...input, first: input.first + planned, count: size } });
      planned += size;
    }
    const base = done;
    const wave: Watch = {
      checkpoint: () => watch.checkpoint(),
      progress: (finished, total) =>
        watch.progress(
          Math.min(input.count, base + Math.round(((planned - base) * finished) / total)),
          input.count,
          label,
        ),
    };
    try {
      for (const answer of (await host.runJobs(jobs, wave)) as (readonly ScenarioCounts[])[])
        counts = counts === null ? answer : addCounts(counts, answer);
    } catch (error) {
      if (keep && done > 0 && (error instanceof Interrupted || (error as Error).name === "Interrupted")) break;
      throw error;
    }
    done = planned;
    watch.progress(done, input.count, label);
  }
  return { counts: counts ?? [], done };
}
