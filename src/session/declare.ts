import {
  type ContrastExpression,
  contrastWeights,
  type CovariateDeclaration,
  type FactorDeclaration,
  type ResponseDeclaration,
  spellMembers,
  type UnitDeclaration,
} from "../design/index.ts";
import { SessionProblem } from "./problem.ts";
import type { DeclaredStatement, FamilyDeclaration, Study } from "./study.ts";

/** The study with one declared statement set under its key, in its old place when it replaces one. */
export function withDeclaration(study: Study, declared: DeclaredStatement): readonly DeclaredStatement[] {
  const position = study.declarations.findIndex((other) => other.key === declared.key);
  if (position < 0) return [...study.declarations, declared];
  return study.declarations.map((other, index) => (index === position ? declared : other));
}

/**
 * Refuses a declaration that would change a plan already opened; the same declaration again is no change.
 * @throws SessionProblem "plan-is-sealed"
 */
export function refuseIfSealed(study: Study, declared: DeclaredStatement): void {
  if (study.plan === null) return;
  const before = study.declarations.find((other) => other.key === declared.key);
  if (before?.text === declared.text) return;
  // `study` and display words may be added to an open plan only through an amendment as well: one way, no exceptions to remember.
  throw new SessionProblem(
    "plan-is-sealed",
    before === undefined
      ? `The plan "${study.plan.plan.name}" is sealed and does not declare this.`
      : `The plan "${study.plan.plan.name}" is sealed; this would change what it declares.`,
    `To change a sealed plan: amend ${declared.text.split("\n")[0]} because "...". To look further without changing it: explore.`,
  );
}

function upsert<T extends { readonly name: string }>(list: readonly T[], item: T): readonly T[] {
  return list.some((other) => other.name === item.name)
    ? list.map((other) => (other.name === item.name ? item : other))
    : [...list, item];
}

export function declareResponse(study: Study, response: ResponseDeclaration): Study {
  return { ...study, response };
}

export function declareUnit(study: Study, unit: UnitDeclaration): Study {
  // One kind of subject per study: a second `subjects` replaces the first.
  const others = unit.role === "subjects" ? study.units.filter((other) => other.role !== "subjects") : study.units;
  return { ...study, units: unit.role === "subjects" ? [unit, ...others] : upsert(others, unit) };
}

/** @throws SessionProblem "duplicate-level", "positions-count", "positions-equal", "unknown-level" */
export function declareFactor(study: Study, factor: FactorDeclaration): Study {
  const seen = new Set<string>();
  for (const level of factor.levels) {
    if (seen.has(level)) {
      throw new SessionProblem(
        "duplicate-level",
        `The level "${level}" of "${factor.name}" is declared twice.`,
        "Name each level once.",
        level,
      );
    }
    seen.add(level);
  }
  if (factor.levels.length < 2) {
    throw new SessionProblem(
      "too-few-levels",
      `The factor "${factor.name}" has only one level: there is nothing to compare.`,
      "Declare at least two levels, separated by commas.",
      factor.name,
    );
  }
  if (factor.positions !== null && factor.positions.length !== factor.levels.length) {
    throw new SessionProblem(
      "positions-count",
      `"${factor.name}" has ${factor.levels.length} levels and ${factor.positions.length} positions after at.`,
      "Give one position for each level, in the same order.",
      factor.name,
    );
  }
  if (factor.positions !== null && new Set(factor.positions).size !== factor.positions.length) {
    throw new SessionProblem(
      "positions-equal",
      `Two levels of "${factor.name}" have the same position.`,
      "Positions must differ.",
      factor.name,
    );
  }
  if (factor.reference !== null && !seen.has(factor.reference)) {
    throw new SessionProblem(
      "unknown-level",
      `The factor "${factor.name}" has no level "${factor.reference}".`,
      `Declared levels: ${factor.levels.join(", ")}.`,
      factor.reference,
    );
  }
  if (factor.name === study.response?.name) {
    throw new SessionProblem(
      "name-taken",
      `"${factor.name}" is the response.`,
      "A factor needs a column of its own.",
      factor.name,
    );
  }
  const units = study.units.flatMap((unit) => [unit.name, ...unit.nestedIn]);
  for (const unit of [factor.unit, factor.betweenUnit]) {
    if (unit !== null && !units.includes(unit)) {
      throw new SessionProblem(
        "unknown-unit",
        `No sampling unit "${unit}" is declared.`,
        units.length > 0 ? `Declared: ${units.join(", ")}.` : `Declare it above: subjects ${unit}`,
        unit,
      );
    }
  }
  return { ...study, factors: upsert(study.factors, factor) };
}

export function declareCovariate(study: Study, covariate: CovariateDeclaration): Study {
  if (covariate.name === study.response?.name) {
    throw new SessionProblem(
      "name-taken",
      `"${covariate.name}" is the response.`,
      "A covariate needs a column of its own.",
      covariate.name,
    );
  }
  return { ...study, covariates: upsert(study.covariates, covariate) };
}

/** @throws DesignError when the expression is not a contrast over the declared levels */
export function declareContrast(study: Study, name: string, expression: ContrastExpression): Study {
  contrastWeights(study.factors, name, expression);
  return { ...study, contrasts: new Map(study.contrasts).set(name, expression) };
}

/**
 * @throws DesignError when a member cannot be spelled out; SessionProblem "unknown-family", "cyclic-after"
 */
export function declareFamily(study: Study, family: FamilyDeclaration): Study {
  spellMembers(study.factors, family.members, study.contrasts);
  const families = new Map(study.families).set(family.name, family);
  let step: string | undefined = family.after?.family;
  const passed = [family.name];
  while (step !== undefined) {
    if (passed.includes(step)) {
      throw new SessionProblem(
        "cyclic-after",
        `The families wait for each other: ${[...passed, step].join(" after ")}.`,
        "Let one of them stand without after.",
        family.after!.family,
      );
    }
    const next: FamilyDeclaration | undefined = families.get(step);
    if (next === undefined) {
      throw new SessionProblem(
        "unknown-family",
        `There is no family "${step}".`,
        study.families.size > 0 ? `Declared: ${[...study.families.keys()].join(", ")}.` : "Declare it above.",
        step,
      );
    }
    passed.push(step);
    step = next.after?.family;
  }
  if (family.margin?.type === "not worse" && study.response?.better === null) {
    throw new SessionProblem(
      "direction-unknown",
      `"not worse by ${family.margin.value}" needs to know which direction is worse.`,
      `Say it with the response: response ${study.response.name}, lower is better`,
    );
  }
  return { ...study, families };
}
