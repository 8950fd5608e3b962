import type { PictureFrame, PowerPicture, PowerResult } from "../results/index.ts";
import { evaluate, planned, type PowerValues } from "./evaluate.ts";
import { groupSizes, subjectStep } from "./layout.ts";
import { PlanningError } from "./problem.ts";
import type { PlanAim, PlanningDesign, PlanningOptions } from "./types.ts";

/** Subjects to enrol so that this many can be expected to stay. */
export function enrolledFor(design: PlanningDesign, subjects: number): number {
  return Math.ceil(subjects / (1 - design.dropout) - 1e-9);
}

const strongest = (one: PowerValues["method"], other: PowerValues["method"]) =>
  one === "simulation" || other === "simulation" ? "simulation" : one === "joint distribution" ? one : other;

/**
 * Power at given numbers of subjects with data (in total; dropout comes on top and is told in a note).
 *
 * @param question.subjects  totals, each at least two per group
 * @returns for the omnibus `power` (of several effects the smallest) and each effect under `comparisons`; for a family each comparison,
 *   `every` and `any`
 * @throws PlanningError "too-few-subjects", "too-many-subjects", "no-difference-expected", "studies-out-of-range"; FamilyProblemError
 */
export async function powerOf(
  question: { readonly design: PlanningDesign; readonly aim: PlanAim; readonly subjects: readonly number[] },
  options: PlanningOptions,
): Promise<PowerResult> {
  const { design, aim } = question;
  const it = planned(design, aim);
  const points: PowerResult["points"][number][] = [];
  let method: PowerValues["method"] = "closed form";
  for (const subjects of question.subjects) {
    if (subjects > 1e6) throw tooMany();
    const sizes = groupSizes(design.allocation, subjects);
    const values = await evaluate(it, { sizes, goal: "all" }, options);
    method = strongest(method, values.method);
    const comparisons = values.names.map((comparison, i) => ({ comparison, power: values.each[i]! }));
    const omnibus = "omnibus" in aim;
    points.push({
      subjects,
      subjectsPerGroup: sizes,
      ...(omnibus || comparisons.length === 1 ? { power: Math.min(...values.each) } : {}),
      ...(comparisons.length > 1 ? { comparisons } : {}),
      ...(!omnibus && comparisons.length > 1 ? { every: values.every!, any: values.any! } : {}),
      ...(values.monteCarloError === null ? {} : { monteCarloError: values.monteCarloError }),
      ...(design.cost === null ? {} : { cost: design.cost * enrolledFor(design, subjects) }),
    });
  }
  const notes = [...it.notes];
  if (design.dropout > 0) {
    notes.push({
      code: "planned-dropout",
      facts: { dropout: design.dropout, enrolled: question.subjects.map((subjects) => enrolledFor(design, subjects)) },
    });
  }
  return { kind: "power", of: it.of, method, errorRate: it.errorRate, correction: it.correction, points, notes };
}

export function tooMany(): PlanningError {
  return new PlanningError(
    "too-many-subjects",
    "More than 1,000,000 subjects would be needed.",
    "The expected difference is very small against the spread: plan for the smallest difference that matters.",
  );
}

const mostPoints = 30;

/**
 * Power against the number of subjects, at up to 30 sizes that divide into groups as allocated.
 * @throws PlanningError as `powerOf`; "too-few-subjects" also where no size lies between the ends
 */
export async function powerCurve(
  question: {
    readonly design: PlanningDesign;
    readonly aim: PlanAim;
    readonly from: number;
    readonly to: number;
    readonly goal?: number | null;
    readonly frame: Pick<PictureFrame, "response" | "state">;
  },
  options: PlanningOptions,
): Promise<PowerPicture> {
  const { design, aim, from, to } = question;
  const step = subjectStep(design.allocation);
  const first = Math.ceil(Math.max(from, 2 * design.allocation.length) / step);
  const last = Math.floor(to / step);
  if (!(last >= first)) {
    throw new PlanningError(
      "too-few-subjects",
      `No number of subjects from ${from} to ${to} divides over the groups.`,
      `Draw from at least ${Math.ceil((2 * design.allocation.length) / step) * step} subjects, in steps of ${step}.`,
    );
  }
  const stride = Math.max(1, Math.ceil((last - first + 1) / mostPoints));
  const subjects: number[] = [];
  for (let at = first; at <= last; at += stride) subjects.push(at * step);
  if (subjects.at(-1) !== last * step) subjects.push(last * step);
  const result = await powerOf({ design, aim, subjects }, options);
  const curve = (name: string, of: (point: PowerResult["points"][number]) => number | undefined) => ({
    name,
    points: result.points.map((point) => ({
      subjects: point.subjects,
      power: of(point)!,
      monteCarloError: point.monteCarloError ?? null,
    })),
  });
  const names = result.points[0]!.comparisons?.map((one) => one.comparison) ?? [];
  const curves =
    names.length === 0
      ? [curve("omnibus" in aim ? "omnibus" : aim.family.contrasts[0]!.name, (point) => point.power)]
      : [
          ...("omnibus" in aim ? [] : [curve("every", (point) => point.every), curve("any", (point) => point.any)]),
          ...names.map((name, i) => curve(name, (point) => point.comparisons![i]!.power)),
        ];
  return {
    picture: "power",
    ...question.frame,
    of: result.of,
    goal: question.goal ?? null,
    curves,
    notes: result.notes,
  };
}
