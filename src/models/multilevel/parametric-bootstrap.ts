import type { Watch } from "../../host/index.ts";
import { chiSquareUpperTail, randomStream } from "../../numeric/index.ts";
import type { LikelihoodRatio } from "../../results/index.ts";
import { ModelError } from "../model-error.ts";
import { type Hypothesis, nullBasis } from "./fixed-part.ts";
import type { Engine } from "./engine.ts";
import type { FittedModel } from "./fitted-model.ts";
import { fitByLikelihood, ratioOf } from "./likelihood-ratio.ts";
import type { Fit } from "./scoring.ts";

export interface Bootstrap {
  readonly studies: number;
  /** Every effect and study has a stream of its own under this seed, so that the answer is the same wherever it runs. */
  readonly seed: number;
}

/**
 * The same tests with p from a parametric bootstrap: responses drawn from the model fitted under the hypothesis, both models
 * fitted again. p = (1 + studies at least as large) / (1 + studies).
 * @source halekoh-hojsgaard-2014 (J. Stat. Softw. 59(9)) for the procedure; davison-hinkley-1997 for the p-value
 */
export function bootstrapLikelihoodRatio(
  model: FittedModel,
  hypotheses: readonly Hypothesis[],
  bootstrap: Bootstrap,
  watch: Watch,
): LikelihoodRatio[] {
  const free = fitByLikelihood(model, model.engine, null);
  return hypotheses.map((hypothesis, index) => {
    const basis = nullBasis(hypothesis, model.fixed.columns);
    const held = fitByLikelihood(model, model.engine, basis, free.phi);
    const statistic = ratioOf(free, held);
    let atLeast = 0;
    for (let study = 0; study < bootstrap.studies; study++) {
      watch.checkpoint();
      watch.progress(study + index * bootstrap.studies, hypotheses.length * bootstrap.studies, "parametric bootstrap");
      const stream = randomStream(bootstrap.seed, `parametric bootstrap of ${hypothesis.effect}`, study);
      const drawn = model.engine.simulated(held.theta, held.evaluation.beta, () => stream.normal());
      if (!(drawnRatio(model, drawn, basis, held) < statistic)) atLeast++;
    }
    return {
      statistic,
      df: hypothesis.df,
      p: chiSquareUpperTail(statistic, hypothesis.df),
      bootstrapP: (1 + atLeast) / (1 + bootstrap.studies),
      bootstrapStudies: bootstrap.studies,
    };
  });
}

/** The statistic of drawn responses; Infinity where a fit fails, so that such a study never speaks for the effect. */
function drawnRatio(model: FittedModel, drawn: Engine, basis: Float64Array, held: Fit): number {
  try {
    const free = fitByLikelihood(model, drawn, null, held.phi);
    return ratioOf(free, fitByLikelihood(model, drawn, basis, free.phi));
  } catch (error) {
    if (error instanceof ModelError && error.code === "no-convergence") return Number.POSITIVE_INFINITY;
    throw error;
  }
}
