import { assumptionFindings, residualPoints } from "../../models/index.ts";
import { firstResultSeen, type LedgerFacts, stateOf } from "../../record/index.ts";
import type { CheckResult, ComparisonsResult, Note, Picture, Result, State } from "../../results/index.ts";
import { compareFamily, type ComparisonOptions, exploreMembers, passingPicture } from "../analysis/comparisons.ts";
import {
  describeData,
  distributionsPicture,
  keptFactors,
  meansPicture,
  profilesPicture,
} from "../analysis/describe.ts";
import { type Prepared, prepare, remembering, responseFacts } from "../analysis/layout.ts";
import { omnibusTest } from "../analysis/omnibus.ts";
import { designCommitment, familyCommitment } from "../commitment.ts";
import type { Context, Handler, Outcome } from "../handler.ts";
import { SessionProblem } from "../problem.ts";
import type { FamilyDeclaration, Study } from "../study.ts";
import { member } from "../translate.ts";
import { powerPicture } from "./planning.ts";
import { seedOf } from "./seed.ts";

/** Resamples drawn where they are not enumerated; common practice, and enough for p near 5% to 0.2 points. */
export const defaultResamples = 9_999;

function stateFor(study: Study, rehearsal: boolean, digest: string | null): State {
  if (rehearsal) return "rehearsal";
  return digest === null ? "exploratory" : stateOf(study.ledger, digest);
}

/** The ledger's line for a result of the response; rehearsals leave none that counts as seen. */
function seen(prepared: Prepared, context: Context, facts: LedgerFacts = {}): Outcome["events"] {
  if (prepared.held.rehearsal) return [];
  return [
    { event: "result", facts: { statement: context.text, seen: true, data: prepared.held.stateDigest, ...facts } },
  ];
}

const check: Handler<"check"> = (_, study) => {
  const prepared = prepare(study);
  const { found, layout, design } = prepared;
  const notes: Note[] = [];
  const blocked = found.problems.some((problem) => problem.severity === "error");
  let assumptions: CheckResult["assumptions"] = [];
  const pictures: Picture[] = [];
  if (blocked) notes.push({ code: "assumptions-wait-for-design", facts: {} });
  else {
    try {
      assumptions = assumptionFindings(layout.data, {
        response: design.response.name,
        logScale: design.response.scale === "log",
      });
      const points = residualPoints(layout.data);
      if (points.residuals.length > 0) {
        pictures.push({
          picture: "residuals",
          response: responseFacts(design),
          state: prepared.held.rehearsal ? "rehearsal" : "declared",
          notes: [],
          ...points,
        });
      }
    } catch (error) {
      // The design part must be shown whatever the assumptions say; what could not be looked at says why.
      if (!(error instanceof Error) || !("code" in error)) throw error;
      notes.push({ code: "assumptions-not-checked", facts: { reason: error.message } });
    }
  }
  const { problems, factors, subjectsPerCell, missingCells, subjects, cells, observations } = found;
  return {
    study: remembering(study, prepared),
    result: {
      kind: "check",
      rehearsal: prepared.held.rehearsal,
      design: { subjects, cells, observations, factors, subjectsPerCell, missingCells, problems },
      assumptions,
      pictures,
      notes,
    },
  };
};

function refuseOtherResponse(study: Study, name: string | null): void {
  if (name === null || study.response === null || name === study.response.name) return;
  throw new SessionProblem(
    "unknown-response",
    `"${name}" is not the declared response.`,
    `The response is "${study.response.name}".`,
    name,
  );
}

const describe: Handler<"describe"> = (statement, study, context) => {
  const prepared = prepare(study);
  refuseOtherResponse(study, statement.response?.text ?? null);
  const by = keptFactors(
    prepared,
    statement.by.map((name) => name.text),
  );
  const result = describeData(prepared, by, statement.quartiles, study.settings.intervalLevel);
  return { study: remembering(study, prepared), result, events: seen(prepared, context) };
};

const omnibus: Handler<"omnibus"> = (statement, study, context) => {
  const prepared = prepare(study);
  const plain = statement.method === null && statement.effects === null && !statement.marginality;
  const digest = designCommitment(study).digest;
  const state = stateFor(study, prepared.held.rehearsal, plain ? digest : null);
  const result = omnibusTest(prepared, {
    method: statement.method,
    effects: statement.effects?.map((names) => names.map((name) => name.text)) ?? null,
    marginality: statement.marginality,
    degrees: statement.degrees,
    bootstrap: statement.bootstrap?.value ?? null,
    resamples: statement.resamples?.value ?? study.settings.resamples ?? defaultResamples,
    seed: statement.seed?.value ?? seedOf(study),
    level: study.settings.intervalLevel,
    // A method chosen at analysis is the analyst's choice: declared at most while nothing was seen, exploratory afterwards.
    state:
      plain || prepared.held.rehearsal ? state : firstResultSeen(study.ledger) === null ? "declared" : "exploratory",
    watch: context.host.watch,
  });
  const compared = study.results.some((kept) => kept.result.kind === "comparisons");
  const notes: Note[] = compared ? [...result.notes, { code: "omnibus-not-required", facts: {} }] : [...result.notes];
  return {
    study: remembering(study, prepared),
    result: { ...result, notes },
    events: seen(prepared, context, { state: result.state }),
  };
};

function comparisonOptions(study: Study, context: Context, beside: boolean): ComparisonOptions {
  return {
    level: study.settings.intervalLevel,
    seed: seedOf(study),
    resamples: study.settings.resamples ?? defaultResamples,
    beside,
    watch: context.host.watch,
  };
}

function knownFamily(study: Study, name: string): FamilyDeclaration {
  const family = study.families.get(name);
  if (family !== undefined) return family;
  const names = [...study.families.keys()];
  const near =
    names.find((other) => other.toLowerCase() === name.toLowerCase()) ??
    names.find((other) => other.startsWith(name.slice(0, 3)));
  throw new SessionProblem(
    "unknown-family",
    `There is no family "${name}".`,
    near !== undefined
      ? `Did you mean "${near}"?`
      : names.length > 0
        ? `Declared: ${names.join(", ")}.`
        : `Declare it first: family ${name}: all pairs of FACTOR`,
    name,
  );
}

const compare: Handler<"compare"> = (statement, study, context) => {
  const name = statement.family.text;
  knownFamily(study, name);
  const prepared = prepare(study);
  const commitment = familyCommitment(study, name);
  const state = stateFor(study, prepared.held.rehearsal, commitment?.digest ?? null);
  const result = compareFamily(study, prepared, name, state, comparisonOptions(study, context, statement.beside));
  const omnibusSeen = study.results.some((kept) => kept.result.kind === "omnibus");
  return {
    study: remembering(study, prepared),
    result: omnibusSeen ? { ...result, notes: [...result.notes, { code: "omnibus-not-required", facts: {} }] } : result,
    events: seen(prepared, context, {
      family: name,
      familyDigest: commitment?.digest ?? null,
      state,
      rows: result.rows.length,
    }),
  };
};

const explore: Handler<"explore"> = (statement, study, context) => {
  const prepared = prepare(study);
  const rateMethod = statement.method === "bh" || statement.method === "by";
  if (statement.holds === "false discovery" && !rateMethod) {
    throw new SessionProblem(
      "not-false-discovery",
      `${statement.method ?? "This"} is not a method for false discovery.`,
      "Use bh or by.",
    );
  }
  const family: FamilyDeclaration = {
    name: "explore",
    members: statement.members.map(member),
    correction: statement.method ?? "holm",
    holds: statement.holds,
    error: statement.rate?.value ?? 0.05,
    sides: statement.sides,
    margin: statement.margin === null ? null : { type: statement.margin.type, value: statement.margin.value.value },
    after: null,
    weights: null,
    passes: null,
  };
  const state: State = prepared.held.rehearsal ? "rehearsal" : "exploratory";
  const result = exploreMembers(study, prepared, family, state, comparisonOptions(study, context, statement.beside));
  return { study: remembering(study, prepared), result, events: seen(prepared, context, { state }) };
};

function latest<K extends Result["kind"]>(
  study: Study,
  kind: K,
  fits: (result: Extract<Result, { kind: K }>) => boolean = () => true,
): Extract<Result, { kind: K }> | null {
  for (const kept of [...study.results].reverse()) {
    if (kept.result.kind === kind && fits(kept.result as Extract<Result, { kind: K }>))
      return kept.result as Extract<Result, { kind: K }>;
  }
  return null;
}

const draw: Handler<"draw"> = async (statement, study, context) => {
  const { what } = statement;
  const picture = (made: Picture): Result => ({ kind: "picture", picture: made });
  if (what === "passing") return { study, result: picture(passingPicture(study, context.host.watch)) };
  if (what === "power") return { study, result: picture(await powerPicture(statement, study, context)) };
  if (what === "calibration") {
    const found = latest(
      study,
      "calibration",
      (result) => statement.family === null || result.of === statement.family.text,
    );
    if (found === null)
      throw new SessionProblem(
        "nothing-calibrated",
        "Nothing was calibrated yet.",
        "Run it first: calibrate primary with 20000 studies",
      );
    const facts =
      study.response === null
        ? { name: "", label: null, unit: null, better: null, scale: "linear" as const }
        : responseFacts({ response: study.response });
    return {
      study,
      result: picture({ picture: "calibration", response: facts, state: "declared", notes: [], calibration: found }),
    };
  }
  const prepared = prepare(study);
  refuseOtherResponse(study, statement.response?.text ?? null);
  const by = statement.by.map((name) => name.text);
  const state: State = prepared.held.rehearsal ? "rehearsal" : study.plan === null ? "declared" : "planned";
  const next = remembering(study, prepared);
  const events = seen(prepared, context);
  switch (what) {
    case "means":
      return {
        study: next,
        result: picture(meansPicture(prepared, keptFactors(prepared, by), study.settings.intervalLevel, state)),
        events,
      };
    case "distributions":
      return { study: next, result: picture(distributionsPicture(prepared, keptFactors(prepared, by), state)), events };
    case "profiles":
      keptFactors(prepared, by);
      return { study: next, result: picture(profilesPicture(prepared, by, state)), events };
    case "residuals":
      // Residuals say nothing of the means that are compared, so that looking at them is not seeing results.
      return {
        study: next,
        result: picture({
          picture: "residuals",
          response: responseFacts(prepared.design),
          state,
          notes: [],
          ...residualPoints(prepared.layout.data),
        }),
      };
    case "comparisons": {
      const family = statement.family?.text ?? null;
      let found: ComparisonsResult | null;
      let facts: LedgerFacts = {};
      if (family === null) found = latest(study, "comparisons");
      else {
        knownFamily(study, family);
        const commitment = familyCommitment(study, family);
        const familyState = stateFor(study, prepared.held.rehearsal, commitment?.digest ?? null);
        found = compareFamily(study, prepared, family, familyState, comparisonOptions(study, context, false));
        facts = { family, familyDigest: commitment?.digest ?? null, state: familyState, rows: found.rows.length };
      }
      if (found === null)
        throw new SessionProblem(
          "nothing-compared",
          "Nothing was compared yet.",
          "Name a declared family: draw comparisons primary",
        );
      return {
        study: next,
        result: picture({
          picture: "comparisons",
          response: found.response,
          state: found.state,
          notes: [],
          comparisons: found,
        }),
        events: family === null ? [] : seen(prepared, context, facts),
      };
    }
  }
};

export const analysisHandlers = { check, describe, omnibus, compare, explore, draw } as const;
