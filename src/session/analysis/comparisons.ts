import { cellLabels, type Contrast, type SpelledFamily, spellMembers } from "../../design/index.ts";
import {
  besideOtherMethods,
  comparisonP,
  type CorrectionName,
  corrections,
  equivalenceP,
  type FamilyAnswer,
  type FamilyProblem,
  type GatedFamily,
  gatekeep,
  holdFamily,
  passing,
} from "../../families/index.ts";
import type { Watch } from "../../host/index.ts";
import {
  betweenContrasts,
  contrastResamples,
  friedmanContrasts,
  multilevelContrasts,
  rankContrasts,
  scoreTable,
  withinContrasts,
} from "../../models/index.ts";
import type { ContrastEstimates } from "../../models/types.ts";
import type { ComparisonRow, ComparisonsResult, Note, PassingPicture, State } from "../../results/index.ts";
import { SessionProblem } from "../problem.ts";
import type { FamilyDeclaration, Study } from "../study.ts";
import { needDesign, type Prepared, refuseWrongDesign, responseFacts } from "./layout.ts";
import { arrangementOptions } from "./omnibus.ts";

export interface ComparisonOptions {
  readonly level: number;
  readonly seed: number;
  readonly resamples: number;
  readonly beside: boolean;
  readonly watch: Watch;
}

const rankMethods = new Set(["dunn", "conover", "nemenyi"]);

function control(study: Study, prepared: Prepared, spelled: SpelledFamily): { controlCells?: readonly number[] } {
  if (study.settings.standardiser !== "control spread") return {};
  // The control is what each comparison subtracts, where all subtract the same cells.
  const cells = (contrast: Contrast) => [...contrast.weights.keys()].filter((cell) => contrast.weights[cell]! < 0);
  const first = cells(spelled.contrasts[0]!);
  if (spelled.contrasts.every((contrast) => cells(contrast).join() === first.join())) return { controlCells: first };
  const reference = prepared.design.factors.find((factor) => factor.reference !== null);
  if (reference !== undefined) {
    const index = prepared.layout.data.factors.findIndex((factor) => factor.name === reference.name);
    const all = Array.from({ length: prepared.layout.data.cellCount }, (_, cell) => cell);
    return {
      controlCells: all.filter(
        (cell) => Object.values(cellLabels(prepared.layout.data.factors, cell))[index] === reference.reference,
      ),
    };
  }
  throw new SessionProblem(
    "no-control",
    "The control spread needs one control condition, and these comparisons have none in common.",
    "Declare it: a line reference LEVEL under the factor; or set standardiser pooled spread.",
  );
}

/** Estimates of the comparisons, in the model that the design calls for. */
export function estimateContrasts(
  study: Study,
  prepared: Prepared,
  spelled: SpelledFamily,
  correction: string,
  options: ComparisonOptions,
): ContrastEstimates {
  const { data } = prepared.layout;
  const { model } = prepared.found.choice;
  const { contrasts } = spelled;
  const scale = prepared.design.response.scale;
  const standardiser = study.settings.standardiser === "default" ? {} : { standardiser: study.settings.standardiser };
  const cellNames = Array.from({ length: data.cellCount }, (_, cell) =>
    Object.values(cellLabels(data.factors, cell)).join(", "),
  );
  if (rankMethods.has(correction)) {
    const within = data.factors.some((factor) => factor.varies === "within");
    if (within) return friedmanContrasts(scoreTable(data), contrasts, correction === "conover" ? "conover" : "nemenyi");
    return rankContrasts(data, contrasts, correction === "conover" ? "conover" : "dunn");
  }
  if (model === "between") {
    // Games and Howell's method is the one for unequal variances: declaring it is declaring them.
    const variances = correction === "games-howell" ? "unequal" : data.assumptions.variances;
    return betweenContrasts({
      data,
      contrasts,
      variances,
      level: options.level,
      scale,
      cellNames,
      ...standardiser,
      ...control(study, prepared, spelled),
    });
  }
  if (
    model === "within" &&
    data.assumptions.covariance !== "unstructured" &&
    data.assumptions.covariance !== "compound symmetry"
  ) {
    return withinContrasts(data, contrasts, {
      level: options.level,
      scale,
      ...standardiser,
      ...control(study, prepared, spelled),
    });
  }
  return multilevelContrasts(data, contrasts, { watch: options.watch, level: options.level, scale });
}

export function marginOnScale(study: Study, family: Pick<FamilyDeclaration, "margin">): FamilyProblem["margin"] {
  if (family.margin === null) return null;
  const { type, value } = family.margin;
  const better = study.response?.better ?? null;
  if (study.response?.scale !== "log") return { type, value, better };
  if (!(value > 1)) {
    throw new SessionProblem(
      "margin-not-a-ratio",
      `On log scale comparisons are ratios, and so is the margin; ${value} is not above 1.`,
      "Write the largest ratio that does not matter: margin 1.25",
    );
  }
  return { type, value: Math.log(value), better };
}

export function graphOf(family: FamilyDeclaration, names: readonly string[]): FamilyProblem["graph"] {
  if (family.weights === null && family.passes === null) return null;
  const place = (name: string) => {
    const index = names.indexOf(name);
    if (index >= 0) return index;
    throw new SessionProblem(
      "unknown-member",
      `"${name}" is not a member of the family "${family.name}".`,
      `Members: ${names.join(", ")}.`,
      name,
    );
  };
  const weights = names.map(() => 0);
  for (const { name, weight } of family.weights ?? []) weights[place(name)] = weight;
  const passes = names.map(() => names.map(() => 0));
  for (const { from, to, share } of family.passes ?? []) passes[place(from)]![place(to)] = share;
  return { weights, passes };
}

interface Problem {
  readonly family: FamilyDeclaration;
  readonly spelled: SpelledFamily;
  readonly estimates: ContrastEstimates;
  readonly problem: FamilyProblem;
  readonly notes: readonly Note[];
}

function familyProblem(
  study: Study,
  prepared: Prepared,
  family: FamilyDeclaration,
  options: ComparisonOptions,
): Problem {
  const spelled = spellMembers(study.factors, family.members, study.contrasts);
  const estimates = estimateContrasts(study, prepared, spelled, family.correction, options);
  const names = spelled.contrasts.map((contrast) => contrast.name);
  const margin = marginOnScale(study, family);
  const notes: Note[] = [...estimates.notes];
  const resamples =
    family.correction === "resampling"
      ? contrastResamples(prepared.layout.data, spelled.contrasts, arrangementOptions(options))
      : null;
  if (resamples !== null) notes.push(...resamples.notes);
  const within = prepared.layout.data.factors.some(
    (factor) => factor.varies === "within" && (spelled.shape.factor === null || spelled.shape.factor === factor.name),
  );
  const problem: FamilyProblem = {
    names,
    estimates: estimates.estimates,
    standardErrors: estimates.standardErrors,
    df: estimates.df,
    p: estimates.estimates.map((estimate, index) =>
      comparisonP({
        estimate,
        standardError: estimates.standardErrors[index]!,
        df: estimates.df[index]!,
        sides: family.sides,
        margin,
      }),
    ),
    correlation: estimates.correlation,
    commonDf: estimates.commonDf,
    sides: family.sides,
    margin,
    error: family.error,
    shape: {
      kind: spelled.shape.kind,
      means: spelled.shape.means,
      repeated: spelled.shape.repeated,
      within: within && estimates.errorTerm !== "pooled",
    },
    weights: spelled.meansWeights,
    graph: graphOf(family, names),
    resamples,
    seed: options.seed,
    watch: options.watch,
    ...(estimates.errorTerm === "ranks" ? { ranks: true } : {}),
  };
  return { family, spelled, estimates, problem, notes };
}

/** The family and those it waits for, in order. */
function familiesBefore(study: Study, family: FamilyDeclaration): FamilyDeclaration[] {
  const chain = [family];
  while (chain[0]!.after !== null) {
    const before = study.families.get(chain[0]!.after.family);
    if (before === undefined) {
      throw new SessionProblem(
        "unknown-family",
        `There is no family "${chain[0]!.after.family}".`,
        "Declare it above.",
        chain[0]!.after.family,
      );
    }
    chain.unshift(before);
  }
  return chain;
}

/** Families that stand in one passing of error: everything connected by `after`. */
function connectedFamilies(study: Study, family: FamilyDeclaration): FamilyDeclaration[] {
  const root = familiesBefore(study, family)[0]!;
  const found = [root];
  for (let index = 0; index < found.length; index++) {
    for (const other of study.families.values()) {
      if (other.after?.family === found[index]!.name && !found.includes(other)) found.push(other);
    }
  }
  return found;
}

function rowsOf(given: Problem, answer: FamilyAnswer, state: State): ComparisonRow[] {
  const { estimates, problem } = given;
  return problem.names.map((comparison, index): ComparisonRow => {
    const estimate = estimates.estimates[index]!;
    const standardError = estimates.standardErrors[index]!;
    const df = estimates.df[index]!;
    const size = estimates.effectSizes[index] ?? null;
    const row = {
      comparison,
      state,
      estimate,
      standardError,
      df: Number.isFinite(df) ? df : null,
      statistic: standardError > 0 ? estimate / standardError : null,
      p: answer.p[index]!,
      adjustedP: answer.adjustedP[index]!,
      threshold: answer.threshold[index] ?? null,
      lower: answer.lower[index] ?? null,
      upper: answer.upper[index] ?? null,
      rejected: answer.rejected[index]!,
      effectSize: size === null ? null : { name: size.name, value: size.value, lower: size.lower, upper: size.upper },
    };
    if (problem.margin?.type !== "equivalence") return row;
    const { lowerP, upperP } = equivalenceP({ estimate, standardError, df, margin: problem.margin.value });
    return {
      ...row,
      equivalence: { margin: problem.margin.value, lowerP, upperP, equivalent: answer.rejected[index]! },
    };
  });
}

function assembled(
  prepared: Prepared,
  given: Problem,
  answer: FamilyAnswer,
  options: {
    readonly family: string | null;
    readonly state: State;
    readonly level: number;
    readonly beside: boolean;
    readonly open: boolean;
  },
): ComparisonsResult {
  const { family, problem } = given;
  const correction = corrections[family.correction as CorrectionName];
  return {
    kind: "comparisons",
    family: options.family,
    state: options.state,
    response: responseFacts(prepared.design),
    correction: family.correction,
    holds: correction.holds,
    error: family.error,
    sides: family.sides,
    margin: problem.margin === null ? null : { type: problem.margin.type, value: problem.margin.value },
    intervalLevel: 1 - family.error,
    intervals: answer.intervals,
    after: family.after === null ? null : { family: family.after.family, open: options.open },
    rows: rowsOf(given, answer, options.state),
    errorTerm: given.estimates.errorTerm,
    ...(options.beside ? { beside: besideOtherMethods(problem, family.correction as CorrectionName) } : {}),
    notes: [...given.notes, ...answer.notes],
  };
}

/** One declared family, whole, with the families it waits for. */
export function compareFamily(
  study: Study,
  prepared: Prepared,
  name: string,
  state: State,
  options: ComparisonOptions,
): ComparisonsResult {
  refuseWrongDesign(prepared);
  const family = study.families.get(name)!;
  const before = familiesBefore(study, family);
  const any = connectedFamilies(study, family).some((other) => other.after?.any === true);
  // Where error passes on between families, what one may use depends on all that are connected.
  const needed = any ? connectedFamilies(study, family) : before;
  const problems = needed.map((member) => familyProblem(study, prepared, member, options));
  const given = problems.find((problem) => problem.family.name === name)!;
  if (needed.length === 1 && family.after === null) {
    const answer = holdFamily(family.correction as CorrectionName, given.problem);
    return assembled(prepared, given, answer, {
      family: name,
      state,
      level: options.level,
      beside: options.beside,
      open: true,
    });
  }
  const answers = gatekeep(gatedFamilies(problems));
  const own = answers.find((answer) => answer.name === name)!;
  return assembled(prepared, given, own.answer, {
    family: name,
    state,
    level: options.level,
    beside: options.beside,
    open: own.open,
  });
}

function gatedFamilies(problems: readonly Problem[]): GatedFamily[] {
  return problems.map(({ family, problem }) => ({
    name: family.name,
    correction: family.correction as CorrectionName,
    problem,
    after: family.after,
  }));
}

/** Comparisons that nobody committed to. */
export function exploreMembers(
  study: Study,
  prepared: Prepared,
  family: FamilyDeclaration,
  state: State,
  options: ComparisonOptions,
): ComparisonsResult {
  refuseWrongDesign(prepared);
  const given = familyProblem(study, prepared, family, options);
  const answer = holdFamily(family.correction as CorrectionName, given.problem);
  return assembled(prepared, given, answer, {
    family: null,
    state,
    level: options.level,
    beside: options.beside,
    open: true,
  });
}

/** How error passes between and within the declared families, before any data. */
export function passingPicture(study: Study, watch: Watch): PassingPicture {
  const design = needDesign(study);
  const gated: GatedFamily[] = [...study.families.values()].map((family) => {
    const spelled = spellMembers(study.factors, family.members, study.contrasts);
    const names = spelled.contrasts.map((contrast) => contrast.name);
    return {
      name: family.name,
      correction: family.correction as CorrectionName,
      after: family.after,
      problem: {
        names,
        estimates: names.map(() => 0),
        standardErrors: names.map(() => 1),
        df: names.map(() => Number.POSITIVE_INFINITY),
        p: names.map(() => 1),
        correlation: null,
        commonDf: null,
        sides: family.sides,
        margin: marginOnScale(study, family),
        error: family.error,
        shape: {
          kind: spelled.shape.kind,
          means: spelled.shape.means,
          repeated: spelled.shape.repeated,
          within: false,
        },
        weights: spelled.meansWeights,
        graph: graphOf(family, names),
        resamples: null,
        seed: 0,
        watch,
      },
    };
  });
  const drawn = passing(gated);
  return {
    picture: "passing",
    response: responseFacts(design),
    state: "declared",
    notes: [],
    nodes: drawn.nodes,
    passes: drawn.passes,
  };
}
