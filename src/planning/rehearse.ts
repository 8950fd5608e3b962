import { cellLabels } from "../design/index.ts";
import { randomStream } from "../numeric/index.ts";
import { shapedVariate } from "./draw-study.ts";
import { groupSizes, layoutOf, symmetricRoot } from "./layout.ts";
import type { PlanningDesign } from "./types.ts";

/** Simulated data in long form: one row per subject and cell that is there. */
export interface RehearsalRows {
  readonly unit: string;
  readonly factors: readonly string[];
  readonly subjects: readonly string[];
  /** Level of each factor, row by row, in the order of `factors`. */
  readonly levels: readonly (readonly string[])[];
  /** On the response's own scale (the exponential of the analysis scale for a response on log scale). */
  readonly responses: readonly number[];
  readonly groupSizes: readonly number[];
}

/**
 * Data as the study would bring them, from what is expected, dropout and missing values included.
 *
 * @param question.subjects  enrolled in total; each is lost with probability `dropout`, each single value with probability `missing`
 * @param question.seed  whole number from 0 to 2^53 - 1
 * @throws PlanningError "too-few-subjects"
 */
export function rehearsalRows(question: {
  readonly design: PlanningDesign;
  readonly subjects: number;
  readonly seed: number;
}): RehearsalRows {
  const { design, subjects, seed } = question;
  const layout = layoutOf(design);
  const sizes = groupSizes(design.allocation, subjects);
  const width = layout.withinCells;
  const names = design.factors.map((factor) => factor.name);
  const digits = String(subjects).length;
  const levelNames = layout.cellOf.map((cell) => {
    const labelled = cellLabels(design.factors, cell);
    return names.map((name) => labelled[name]!);
  });
  const labels: string[] = [];
  const levels: (readonly string[])[] = [];
  const responses: number[] = [];
  let number = 0;
  for (const [group, size] of sizes.entries()) {
    const root = symmetricRoot(layout.covariances[group]!);
    for (let one = 0; one < size; one++) {
      number++;
      const stream = randomStream(seed, "rehearsal", number);
      const variates = Array.from({ length: width }, () => shapedVariate(stream, layout.shape, null));
      if (stream.uniform() < design.dropout) continue;
      for (let place = 0; place < width; place++) {
        if (stream.uniform() < design.missing) continue;
        const at = group * width + place;
        const score = root[place]!.reduce((sum, weight, k) => sum + weight * variates[k]!, layout.means[at]!);
        labels.push(`${design.unit} ${String(number).padStart(digits, "0")}`);
        levels.push(levelNames[at]!);
        responses.push(design.scale === "log" ? Math.exp(score) : score);
      }
    }
  }
  return { unit: design.unit, factors: names, subjects: labels, levels, responses, groupSizes: sizes };
}
