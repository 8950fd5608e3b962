import { chiSquareUpperTail } from "../../numeric/index.ts";
import type { LikelihoodRatio } from "../../results/index.ts";
import { ModelError } from "../model-error.ts";
import type { Engine } from "./engine.ts";
import { type Hypothesis, nullBasis } from "./fixed-part.ts";
import { type FittedModel, startFrom } from "./fitted-model.ts";
import { parameterMap } from "./parameter-map.ts";
import { type Fit, fitCovariance } from "./scoring.ts";

/** Only the deviance is used of these fits, and it is flat at its minimum. */
const deviancePrecision = 1e-10;

/** The model by maximum likelihood, with all its variances free, fixed effects free or held. */
export function fitByLikelihood(
  model: FittedModel,
  engine: Engine,
  basis: Float64Array | null,
  start?: Float64Array,
): Fit {
  const map = parameterMap(engine, model.structure, model.all);
  return fitCovariance(
    engine,
    map,
    model.all,
    "ML",
    basis,
    start ?? startFrom(map, model.fit.theta, engine, model.structure, model.all),
    deviancePrecision,
  );
}

export const ratioOf = (free: Fit, held: Fit) => Math.max(0, held.evaluation.deviance - free.evaluation.deviance);

/**
 * Likelihood-ratio test of each effect: the model against the same model with the effect's contrasts held at zero, same random
 * part, both by maximum likelihood; chi-square with the contrasts' number as df. Null where a fit did not converge.
 */
export function likelihoodRatioTests(
  model: FittedModel,
  hypotheses: readonly Hypothesis[],
): (LikelihoodRatio | null)[] {
  const free = fitOrNothing(() => fitByLikelihood(model, model.engine, null));
  return hypotheses.map((hypothesis) => {
    if (free === null) return null;
    const basis = nullBasis(hypothesis, model.fixed.columns);
    const held = fitOrNothing(() => fitByLikelihood(model, model.engine, basis, free.phi));
    if (held === null) return null;
    const statistic = ratioOf(free, held);
    return { statistic, df: hypothesis.df, p: chiSquareUpperTail(statistic, hypothesis.df) };
  });
}

/** Maximum likelihood may have no maximum where the restricted one has: the F test stands, its companion is left out. */
function fitOrNothing(search: () => Fit): Fit | null {
  try {
    return search();
  } catch (error) {
    if (error instanceof ModelError && error.code === "no-convergence") return null;
    throw error;
  }
}
