import type { OmnibusMethod } from "../../../grammar/index.ts";
import { cellLabels, type FactorDeclaration, type ModelData } from "../../design/index.ts";
import type { Watch } from "../../host/index.ts";
import {
  type BetweenAnalysis,
  brownForsytheAnalysis,
  cellStatistics,
  factorialAnalysis,
  friedmanAnalysis,
  kruskalWallisAnalysis,
  multilevelOmnibus,
  oneWayAnalysis,
  permutationOmnibus,
  repeatedMeasuresAnalysis,
  scoreTable,
  welchAnalysis,
  welchFactorialAnalysis,
} from "../../models/index.ts";
import type { Note, OmnibusEffect, OmnibusResult, State } from "../../results/index.ts";
import { SessionProblem } from "../problem.ts";
import { type Prepared, refuseWrongDesign, responseFacts } from "./layout.ts";

export interface OmnibusQuestion {
  readonly method: OmnibusMethod | null;
  /** Effects asked for, as sets of factor names; null for all. */
  readonly effects: readonly (readonly string[])[] | null;
  readonly marginality: boolean;
  readonly degrees: "kenward-roger" | "satterthwaite" | null;
  readonly bootstrap: number | null;
  readonly resamples: number;
  readonly seed: number;
  readonly level: number;
  readonly state: State;
  readonly watch: Watch;
}

type Answer = Pick<OmnibusResult, "method" | "effects" | "notes"> &
  Partial<
    Pick<
      OmnibusResult,
      | "error"
      | "rSquared"
      | "residualSd"
      | "varianceComponents"
      | "intraclassCorrelation"
      | "sphericity"
      | "likelihoodRatio"
    >
  >;

/** More arrangements than this are drawn, not enumerated. */
export const mostExactArrangements = 200_000;

export function arrangementOptions(question: { readonly seed: number; readonly resamples: number }) {
  return { mostExact: mostExactArrangements, resamples: question.resamples, seed: question.seed };
}

const effectName = (factors: readonly FactorDeclaration[], names: readonly string[]): string =>
  factors
    .filter((factor) => names.includes(factor.name))
    .map((factor) => factor.name)
    .join(" x ");

function wantedEffects(data: ModelData, effects: OmnibusQuestion["effects"]): readonly string[] | null {
  if (effects === null) return null;
  for (const name of effects.flat()) {
    if (
      data.factors.some((factor) => factor.name === name) ||
      data.covariates.some((covariate) => covariate.name === name)
    )
      continue;
    throw new SessionProblem(
      "unknown-factor",
      `There is no factor "${name}".`,
      `Declared: ${data.factors.map((factor) => factor.name).join(", ")}.`,
      name,
    );
  }
  return effects.map((names) => effectName(data.factors, names) || names.join(" x "));
}

function cellNames(data: ModelData): string[] {
  return Array.from({ length: data.cellCount }, (_, cell) => Object.values(cellLabels(data.factors, cell)).join(", "));
}

function onlyFactor(data: ModelData, method: string): FactorDeclaration {
  if (data.factors.length === 1) return data.factors[0]!;
  throw new SessionProblem(
    "one-factor-only",
    `${method} compares the levels of one factor; ${data.factors.length} are declared.`,
    data.factors.every((factor) => factor.varies === "between")
      ? "Use omnibus by variance analysis, by resampling, or by multilevel model."
      : "Use omnibus, omnibus by resampling, or omnibus by multilevel model.",
  );
}

function fromBetween(analysis: BetweenAnalysis): Answer {
  return {
    method: analysis.method,
    effects: analysis.effects,
    notes: analysis.notes,
    ...(analysis.error === undefined ? {} : { error: analysis.error }),
    ...(analysis.rSquared === undefined ? {} : { rSquared: analysis.rSquared }),
    ...(analysis.residualSd === undefined ? {} : { residualSd: analysis.residualSd }),
  };
}

function betweenVarianceAnalysis(data: ModelData, question: OmnibusQuestion): Answer {
  if (data.factors.length === 1 && data.covariates.length === 0) {
    return fromBetween(
      oneWayAnalysis(cellStatistics(data), {
        effect: data.factors[0]!.name,
        cellNames: cellNames(data),
        level: question.level,
      }),
    );
  }
  return fromBetween(
    factorialAnalysis({
      data: data.covariates.length > 0 ? data : cellStatistics(data),
      factors: data.factors,
      adjustment: question.marginality ? "respecting marginality" : "cells weigh equally",
      level: question.level,
    }),
  );
}

function multilevel(data: ModelData, question: OmnibusQuestion, wanted: readonly string[] | null): Answer {
  const fitted = multilevelOmnibus(data, {
    watch: question.watch,
    df: question.degrees ?? "kenward-roger",
    likelihoodRatio: true,
    bootstrap: question.bootstrap === null ? null : { studies: question.bootstrap, seed: question.seed },
    intervalLevel: question.level,
    effects: wanted,
  });
  return {
    method: "multilevel",
    effects: fitted.effects,
    varianceComponents: fitted.components,
    intraclassCorrelation: fitted.intraclassCorrelation,
    notes: fitted.notes,
  };
}

/** Within-subject designs with every cell: the multilevel model first, the repeated-measures analysis beside it. */
function withinAnalysis(data: ModelData, question: OmnibusQuestion, wanted: readonly string[] | null): Answer {
  const model = multilevel(data, question, wanted);
  const repeated = repeatedMeasuresAnalysis(data, { level: question.level });
  return {
    ...model,
    effects: [...model.effects, ...repeated.effects],
    sphericity: repeated.sphericity,
    notes: [...model.notes, ...repeated.notes],
  };
}

function byRanks(data: ModelData, model: Prepared["found"]["choice"]["model"]): Answer {
  const factor = onlyFactor(data, "The test by ranks");
  if (factor.varies === "between") {
    if (model === "multilevel") {
      throw new SessionProblem(
        "ranks-need-independence",
        "Ranks take every row as an independent subject; in this design rows share units.",
        "Use omnibus by multilevel model.",
      );
    }
    const analysis = kruskalWallisAnalysis(data, { effect: factor.name, cellNames: cellNames(data) });
    return { method: "kruskal-wallis", effects: analysis.effects, notes: analysis.notes };
  }
  const table = scoreTable(data);
  const analysis = friedmanAnalysis(table, { effect: factor.name });
  return { method: "friedman", effects: analysis.effects, notes: [...table.notes, ...analysis.notes] };
}

function answer(prepared: Prepared, question: OmnibusQuestion): Answer {
  const { data } = prepared.layout;
  const { model } = prepared.found.choice;
  const wanted = wantedEffects(data, question.effects);
  const within = data.factors.some((factor) => factor.varies === "within");
  switch (question.method) {
    case "welch":
    case "brown-forsythe": {
      const words = question.method === "welch" ? "Welch's test" : "Brown and Forsythe's test";
      const factor = onlyFactor(data, words);
      if (within || model === "multilevel") {
        throw new SessionProblem(
          "between-only",
          `${words} is for independent groups.`,
          "Use omnibus, or omnibus by multilevel model.",
        );
      }
      if (data.covariates.length > 0) {
        throw new SessionProblem(
          "no-covariates",
          `${words} takes no covariate.`,
          "Use omnibus by variance analysis, or leave the covariate out.",
        );
      }
      const analyse = question.method === "welch" ? welchAnalysis : brownForsytheAnalysis;
      return fromBetween(analyse(cellStatistics(data), { effect: factor.name, cellNames: cellNames(data) }));
    }
    case "ranks":
      return byRanks(data, model);
    case "resampling": {
      const analysis = permutationOmnibus(data, { ...arrangementOptions(question), watch: question.watch });
      return { method: "resampling", effects: analysis.effects, notes: analysis.notes };
    }
    case "multilevel model":
      return multilevel(data, question, wanted);
    case "multivariate": {
      if (!within) {
        throw new SessionProblem(
          "no-within-factor",
          "Multivariate tests are for factors within subjects; none is declared.",
          "Use omnibus.",
        );
      }
      const analysis = repeatedMeasuresAnalysis(data, { level: question.level });
      return { method: "multivariate", effects: analysis.multivariate, notes: analysis.notes };
    }
    case "variance analysis": {
      if (!within) return betweenVarianceAnalysis(data, question);
      const analysis = repeatedMeasuresAnalysis(data, { level: question.level });
      return {
        method: "repeated measures",
        effects: analysis.effects,
        sphericity: analysis.sphericity,
        notes: analysis.notes,
      };
    }
    case null:
      if (model === "multilevel") return multilevel(data, question, wanted);
      if (model === "within") {
        // A stated covariance structure is a property of the multilevel model; the classical analysis beside it would contradict it.
        return data.assumptions.covariance === "unstructured"
          ? multilevel(data, question, wanted)
          : withinAnalysis(data, question, wanted);
      }
      if (data.assumptions.variances === "unequal") {
        if (data.factors.length === 1 && data.covariates.length === 0) {
          return fromBetween(
            welchAnalysis(cellStatistics(data), { effect: data.factors[0]!.name, cellNames: cellNames(data) }),
          );
        }
        if (data.covariates.length === 0)
          return fromBetween(
            welchFactorialAnalysis(cellStatistics(data), data.factors, { cellNames: cellNames(data) }),
          );
        return multilevel(data, question, wanted);
      }
      return betweenVarianceAnalysis(data, question);
  }
}

/**
 * The omnibus test of the declared factors, in the model that the design calls for or the one asked for.
 * @throws SessionProblem, ModelError, DomainError, Interrupted
 */
export function omnibusTest(prepared: Prepared, question: OmnibusQuestion): OmnibusResult {
  refuseWrongDesign(prepared, question.method === "multilevel model");
  const { data } = prepared.layout;
  const found = answer(prepared, question);
  const wanted = wantedEffects(data, question.effects);
  const effects: readonly OmnibusEffect[] =
    wanted === null ? found.effects : found.effects.filter((effect) => wanted.includes(effect.effect));
  if (wanted !== null) {
    for (const name of wanted) {
      if (effects.some((effect) => effect.effect === name)) continue;
      throw new SessionProblem(
        "effect-not-tested",
        `This analysis has no test of ${name}.`,
        `It tests: ${[...new Set(found.effects.map((effect) => effect.effect))].join(", ")}.`,
      );
    }
  }
  const notes: Note[] = [...found.notes];
  const { choice } = prepared.found;
  if (question.method === null && choice.model === "multilevel")
    notes.push({ code: "model-chosen", facts: { model: choice.model, reason: choice.reason } });
  const single =
    new Set(effects.map((effect) => effect.effect)).size === 1
      ? effects.find((effect) => effect.likelihoodRatio !== undefined)
      : undefined;
  return {
    kind: "omnibus",
    response: responseFacts(prepared.design),
    state: question.state,
    observations: data.rows,
    subjects: prepared.found.subjects,
    ...found,
    effects,
    ...(single?.likelihoodRatio === undefined ? {} : { likelihoodRatio: single.likelihoodRatio }),
    notes,
  };
}
