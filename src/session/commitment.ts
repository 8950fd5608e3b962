import { spellMembers } from "../design/index.ts";
import { digestOfValue, type PlannedFamily } from "../record/index.ts";
import type { Study } from "./study.ts";

/** What a family commits to: its digest covers everything that decides what is tested and how. */
export function familyCommitment(study: Study, name: string): PlannedFamily | null {
  const family = study.families.get(name);
  if (family === undefined) return null;
  try {
    const { contrasts } = spellMembers(study.factors, family.members, study.contrasts);
    const digest = digestOfValue({
      response: study.response,
      factors: study.factors,
      covariates: study.covariates,
      units: study.units,
      assumptions: study.assumptions,
      standardiser: study.settings.standardiser,
      family: { ...family, members: null },
      // Twelve digits: the same thirds, however they were written, are the same commitment.
      comparisons: contrasts.map((contrast) => ({
        name: contrast.name,
        weights: [...contrast.weights].map((weight) => Number(weight.toPrecision(12))),
      })),
    });
    return { name, digest, comparisons: contrasts.map((contrast) => contrast.name) };
  } catch {
    // A family whose levels were redeclared away commits to nothing; comparing it says what is wrong.
    return null;
  }
}

export function familyCommitments(study: Study): PlannedFamily[] {
  return [...study.families.keys()].flatMap((name) => familyCommitment(study, name) ?? []);
}

/** What the omnibus test commits to: the design itself. */
export function designCommitment(study: Study): { readonly name: string; readonly digest: string } {
  const { response, factors, covariates, units, assumptions } = study;
  return { name: "omnibus", digest: digestOfValue({ response, factors, covariates, units, assumptions }) };
}
