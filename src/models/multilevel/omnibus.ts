import { silentWatch, type Watch } from "../../host/index.ts";
import type { ModelData } from "../../design/types.ts";
import type { LikelihoodRatio, Note, OmnibusEffect, OmnibusResult, VarianceComponent } from "../../results/index.ts";
import type { CovarianceStructure } from "./covariance-structure.ts";
import { effectHypotheses, type Hypothesis } from "./fixed-part.ts";
import { fitMultilevel, type FittedModel } from "./fitted-model.ts";
import { type FixedTest, kenwardRogerTest, satterthwaiteTest } from "./fixed-tests.ts";
import { likelihoodRatioTests } from "./likelihood-ratio.ts";
import { type Bootstrap, bootstrapLikelihoodRatio } from "./parametric-bootstrap.ts";
import { intraclassCorrelations, varianceComponents } from "./variance-components.ts";

export interface MultilevelOptions {
  readonly watch?: Watch;
  /** Default "kenward-roger". */
  readonly df?: "kenward-roger" | "satterthwaite";
  /** Each effect's likelihood-ratio test; default true. */
  readonly likelihoodRatio?: boolean;
  /** Parametric bootstrap of the likelihood-ratio tests; default none. */
  readonly bootstrap?: Bootstrap | null;
  /** Level of the profile-likelihood intervals of components and intraclass correlations, or null for none; default 0.95. */
  readonly intervalLevel?: number | null;
  /** Names of the effects wanted ("glove x shift"); default all. */
  readonly effects?: readonly string[] | null;
  /** Another random part than the one that the declaration calls for. */
  readonly structure?: CovarianceStructure;
}

export interface MultilevelOmnibus {
  /** One entry per effect, method "multilevel", form "Kenward-Roger" or "Satterthwaite", each with its likelihood ratio. */
  readonly effects: readonly OmnibusEffect[];
  readonly components: readonly VarianceComponent[];
  readonly intraclassCorrelation: NonNullable<OmnibusResult["intraclassCorrelation"]>;
  /** -2 log restricted likelihood. */
  readonly deviance: number;
  readonly observations: number;
  readonly subjects: number;
  readonly notes: readonly Note[];
}

/** Tests one hypothesis by the chosen method; falls back to Satterthwaite where Kenward-Roger's moments do not exist. */
export function testHypothesis(
  model: FittedModel,
  weights: Float64Array,
  df: number,
  method: "kenward-roger" | "satterthwaite",
): { test: FixedTest | null; form: "Kenward-Roger" | "Satterthwaite" } {
  if (method === "kenward-roger") {
    const test = kenwardRogerTest(model.precision, weights, df);
    if (test !== null) return { test, form: "Kenward-Roger" };
  }
  return { test: satterthwaiteTest(model.precision, weights, df), form: "Satterthwaite" };
}

function estimableHypotheses(model: FittedModel, wanted: readonly string[] | null, notes: Note[]): Hypothesis[] {
  const all = effectHypotheses(model.data, model.fixed).filter(
    ({ effect }) => wanted === null || wanted.includes(effect),
  );
  for (const { effect, df, wantedDf } of all) {
    if (df === 0) notes.push({ code: "effect-not-estimable", facts: { effect } });
    else if (df < wantedDf) notes.push({ code: "effect-partly-estimable", facts: { effect, df, of: wantedDf } });
  }
  return all.filter(({ df }) => df > 0);
}

/**
 * Multilevel model of a within, mixed, nested or crossed design: every effect of the declared factors (and covariates) by
 * Kenward and Roger's F, with its own likelihood-ratio test, and the variance components. All rows enter; cells weigh equally.
 *
 * @throws ModelError as `fitMultilevel`
 */
export function multilevelOmnibus(data: ModelData, options: MultilevelOptions = {}): MultilevelOmnibus {
  const watch = options.watch ?? silentWatch;
  const model = fitMultilevel(data, watch, options.structure ?? null);
  const notes: Note[] = [...model.notes];
  const hypotheses = estimableHypotheses(model, options.effects ?? null, notes);
  const ratios: (LikelihoodRatio | null)[] =
    options.likelihoodRatio === false
      ? hypotheses.map(() => null)
      : options.bootstrap != null
        ? bootstrapLikelihoodRatio(model, hypotheses, options.bootstrap, watch)
        : likelihoodRatioTests(model, hypotheses);
  const effects = hypotheses.map((hypothesis, index): OmnibusEffect => {
    const { test, form } = testHypothesis(model, hypothesis.weights, hypothesis.df, options.df ?? "kenward-roger");
    if (test === null) notes.push({ code: "effect-not-testable", facts: { effect: hypothesis.effect } });
    else if (form === "Satterthwaite" && options.df !== "satterthwaite") {
      notes.push({ code: "satterthwaite-instead", facts: { effect: hypothesis.effect } });
    }
    const ratio = ratios[index];
    if (ratio === null && options.likelihoodRatio !== false) {
      notes.push({ code: "likelihood-ratio-not-found", facts: { effect: hypothesis.effect } });
    }
    return {
      effect: hypothesis.effect,
      method: "multilevel",
      form,
      statistic: "F",
      value: test?.value ?? null,
      df1: test?.df1 ?? hypothesis.df,
      df2: test?.df2 ?? null,
      p: test?.p ?? null,
      ...(ratio === null || ratio === undefined ? {} : { likelihoodRatio: ratio }),
    };
  });
  const level = options.intervalLevel === undefined ? 0.95 : options.intervalLevel;
  return {
    effects,
    components: varianceComponents(model, level, notes),
    intraclassCorrelation: intraclassCorrelations(model, level, notes),
    deviance: model.fit.evaluation.deviance,
    observations: data.rows,
    subjects: data.units.find((unit) => unit.role === "subjects")?.count ?? 0,
    notes,
  };
}
