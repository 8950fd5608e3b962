import type { Watch } from "../../host/index.ts";
import { chiSquareUpperTail } from "../../numeric/index.ts";
import type { LikelihoodRatio } from "../../results/index.ts";
import { type Hypothesis, nullBasis } from "./fixed-part.ts";
import type { FittedModel } from "./fitted-model.ts";
import { fitByLikelihood, ratioOf } from "./likelihood-ratio.ts";

/** Where the drawn responses come from: a stream of standard normal numbers of its own for every study, so that any number of workers agree. */
export interface Bootstrap {
  readonly studies: number;
  /** @param effect name of the effect tested @param study number of the study, from 0 */
  readonly stream: (effect: string, study: number) => { normal(): number };
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
      const stream = bootstrap.stream(hypothesis.effect, study);
      const drawn = model.engine.simulated(held.theta, held.evaluation.beta, () => stream.normal());
      const drawnFree = fitByLikelihood(model, drawn, null, held.phi);
      const drawnHeld = fitByLikelihood(model, drawn, basis, drawnFree.phi);
      if (ratioOf(drawnFree, drawnHeld) >= statistic) atLeast++;
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
