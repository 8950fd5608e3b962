import type { Aim, ExpectedLevels, ExpectStatement } from "../../../grammar/index.ts";
import { spellMembers } from "../../design/index.ts";
import type { CorrectionName } from "../../families/index.ts";
import {
  type Expectation,
  expectedDesign,
  type FamilyPlan,
  type PlanAim,
  type PlanningDesign,
} from "../../planning/index.ts";
import { SessionProblem } from "../problem.ts";
import type { FamilyDeclaration, Study } from "../study.ts";
import { graphOf, marginOnScale } from "./comparisons.ts";
import { needDesign } from "./layout.ts";

const levelsTable = (table: ExpectedLevels) => ({
  factors: table.factors.map((name) => name.text),
  values: table.values.map(({ levels, value }) => ({ levels: levels.map((level) => level.text), value: value.value })),
});

/** What `expect` says, as plain data; null where nothing was declared. */
export function expectationOf(study: Study): Expectation | null {
  const statement = study.expectation as ExpectStatement | null;
  if (statement === null) return null;
  return {
    means: statement.means.map(levelsTable),
    spread:
      statement.spread === null
        ? null
        : {
            common: statement.spread.common?.value ?? null,
            byLevel: statement.spread.byLevel === null ? null : levelsTable(statement.spread.byLevel),
          },
    correlation: statement.correlation?.map((value) => value.value) ?? null,
    dropout: statement.dropout?.value ?? null,
    missing: statement.missing?.value ?? null,
    shape: statement.shape,
    allocation:
      statement.allocation === null
        ? null
        : {
            factor: statement.allocation.factor?.text ?? null,
            shares: statement.allocation.shares.map((share) => share.value),
          },
    cost: statement.cost?.value ?? null,
  };
}

export interface PlanningChoices {
  readonly allocation: { readonly factor: string | null; readonly shares: readonly number[] } | null;
  readonly cost: number | null;
}

/** The declared design with what is expected of it, and what a planning statement changes for itself. */
export function plannedDesign(
  study: Study,
  choices: PlanningChoices = { allocation: null, cost: null },
): PlanningDesign {
  const design = needDesign(study);
  const expectation = expectationOf(study);
  return expectedDesign(
    {
      units: study.units,
      factors: study.factors,
      scale: design.response.scale,
      variances: study.assumptions.variances,
      covariance: study.assumptions.covariance,
    },
    expectation === null
      ? null
      : {
          ...expectation,
          allocation: choices.allocation ?? expectation.allocation,
          cost: choices.cost ?? expectation.cost,
        },
  );
}

function familyPlan(study: Study, family: FamilyDeclaration, chain: readonly string[] = []): FamilyPlan {
  const spelled = spellMembers(study.factors, family.members, study.contrasts);
  const names = spelled.contrasts.map((contrast) => contrast.name);
  const before = family.after === null || chain.includes(family.name) ? null : study.families.get(family.after.family);
  return {
    name: family.name,
    contrasts: spelled.contrasts,
    shape: spelled.shape,
    meansWeights: spelled.meansWeights,
    correction: family.correction as CorrectionName,
    error: family.error,
    sides: family.sides,
    margin: marginOnScale(study, family),
    graph: graphOf(family, names),
    after:
      before === null || before === undefined
        ? null
        : { family: familyPlan(study, before, [...chain, family.name]), any: family.after!.any },
  };
}

/** Error of the omnibus test in planning: the usual one (common practice); families carry their own. */
const omnibusError = 0.05;

export function planAim(study: Study, aim: Aim): PlanAim {
  if (aim.family === null) return { omnibus: { effects: null, error: omnibusError } };
  const name = aim.family.text;
  const family = study.families.get(name);
  if (family === undefined) {
    const names = [...study.families.keys()];
    throw new SessionProblem(
      "unknown-family",
      `There is no family "${name}".`,
      names.length > 0 ? `Declared: ${names.join(", ")}.` : `Declare it first: family ${name}: all pairs of FACTOR`,
      name,
    );
  }
  return { family: familyPlan(study, family) };
}
