import type { SizeResult } from "../results/index.ts";
import { defaultStudies, evaluate, type Goal, planned, powerFor, requireReachable } from "./evaluate.ts";
import { groupSizes, subjectStep } from "./layout.ts";
import { enrolledFor, tooMany } from "./power.ts";
import type { PlanAim, PlanningDesign, PlanningOptions } from "./types.ts";

const mostSubjects = 1e6;

/**
 * Smallest whole number at which something holds, where it holds from there on: doubling, halving, then one by one downwards while the
 * number below still does (simulated powers are not quite monotone). Null above `most`.
 */
async function smallest(
  from: number,
  most: number,
  holds: (at: number) => Promise<boolean>,
  guess = from,
): Promise<number | null> {
  let low = from - 1;
  let high = Math.min(most, Math.max(from, Math.ceil(guess * 1.05)));
  const near = Math.floor(guess * 0.95) - 1;
  if (near >= from && near < high && !(await holds(near))) low = near;
  while (!(await holds(high))) {
    if (high >= most) return null;
    low = high;
    high = Math.min(most, high * 2);
  }
  while (high - low > 1) {
    const middle = Math.floor((low + high) / 2);
    if (await holds(middle)) high = middle;
    else low = middle;
  }
  while (high > from && (await holds(high - 1))) high--;
  return high;
}

const roughStudies = 1000;

/**
 * The smallest number of subjects with data that reaches the target, in steps that divide over the groups as allocated; one step fewer
 * does not reach it (checked, on common random numbers where simulated).
 *
 * @param question.goal  "every": all comparisons together; "any": at least one; "each": every single one by itself; "omnibus": every
 *   effect planned for, each by itself
 * @returns `enrolled` where dropout is expected; with goal "each" and exact powers also what each comparison alone needs
 * @throws PlanningError "power-not-above-error", "no-difference-expected", "too-many-subjects", "studies-out-of-range"; FamilyProblemError
 */
export async function sizeFor(
  question: { readonly design: PlanningDesign; readonly aim: PlanAim; readonly target: number; readonly goal: Goal },
  options: PlanningOptions,
): Promise<SizeResult> {
  const { design, aim, target, goal } = question;
  const it = planned(design, aim);
  requireReachable(it, goal, target);
  const step = subjectStep(design.allocation);
  const smallestShare = Math.min(...design.allocation) / design.allocation.reduce((sum, share) => sum + share, 0);
  const from = Math.ceil(2 / smallestShare / step - 1e-9);
  const most = Math.floor(mostSubjects / step);
  const valuesAt = (steps: number, chosen: PlanningOptions) =>
    evaluate(it, { sizes: groupSizes(design.allocation, steps * step), goal }, chosen);
  const known = new Map<number, Awaited<ReturnType<typeof valuesAt>>>();
  const at = async (steps: number) => {
    let values = known.get(steps);
    if (values === undefined) {
      values = await valuesAt(steps, options);
      known.set(steps, values);
    }
    return values;
  };
  // Where powers are simulated, fewer studies say first about where to look.
  const studies = options.studies ?? defaultStudies;
  const first = await valuesAt(from, { ...options, studies: Math.min(studies, roughStudies) });
  const rough =
    first.method !== "simulation" || studies <= 2 * roughStudies
      ? from
      : await smallest(
          from,
          most,
          async (one) => powerFor(await valuesAt(one, { ...options, studies: roughStudies }), goal) >= target,
        );
  const steps = await smallest(from, most, async (one) => powerFor(await at(one), goal) >= target, rough ?? most);
  if (steps === null) throw tooMany();
  const values = await at(steps);
  const alone: (number | undefined)[] = values.names.map(() => undefined);
  if (values.method === "closed form" && values.names.length > 1) {
    for (const i of values.names.keys()) {
      const own = await smallest(from, most, async (one) => (await at(one)).each[i]! >= target);
      alone[i] = own === null ? undefined : own * step;
    }
  }
  const subjects = steps * step;
  return {
    kind: "size",
    of: it.of,
    target,
    goal,
    method: values.method,
    errorRate: it.errorRate,
    correction: it.correction,
    subjects,
    subjectsPerGroup: groupSizes(design.allocation, subjects),
    ...(design.dropout > 0 ? { enrolled: enrolledFor(design, subjects) } : {}),
    achieved: powerFor(values, goal),
    ...(values.monteCarloError === null ? {} : { monteCarloError: values.monteCarloError }),
    ...(values.names.length > 1
      ? {
          comparisons: values.names.map((comparison, i) => ({
            comparison,
            power: values.each[i]!,
            ...(alone[i] === undefined ? {} : { subjects: alone[i] }),
          })),
        }
      : {}),
    ...(design.cost === null ? {} : { cost: design.cost * enrolledFor(design, subjects) }),
    notes: it.notes,
  };
}
