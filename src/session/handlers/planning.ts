import type { StatementOf } from "../../../grammar/index.ts";
import { tableDigest, typedTable } from "../../data/index.ts";
import { cellCount, levelsOfCell } from "../../design/index.ts";
import {
  calibrate as calibratePlan,
  detectableFor,
  expectedDesign,
  type ObservedDesign,
  type PlanningDesign,
  type PlanningOptions,
  powerCurve,
  powerOf,
  rehearsalRows,
  sizeFor,
} from "../../planning/index.ts";
import { digestOf } from "../../record/index.ts";
import type { CalibrationResult, Note, PowerPicture } from "../../results/index.ts";
import { needDesign, type Prepared, prepare, refuseWrongDesign, responseFacts } from "../analysis/layout.ts";
import { observedDesign } from "../analysis/observed.ts";
import { expectationOf, planAim, plannedDesign } from "../analysis/plan.ts";
import type { Context, Handler } from "../handler.ts";
import { SessionProblem } from "../problem.ts";
import type { Study } from "../study.ts";
import { dataResult, holdTable } from "./data.ts";
import { seedOf } from "./seed.ts";

type Planning = Pick<StatementOf<"size">, "allocation" | "cost" | "studies" | "seed">;

function choicesOf(statement: Planning) {
  return {
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

function optionsOf(study: Study, context: Context, statement: Pick<Planning, "studies" | "seed">): PlanningOptions {
  return {
    host: context.host,
    watch: context.host.watch,
    seed: statement.seed?.value ?? seedOf(study),
    studies: statement.studies?.value ?? study.settings.studies ?? undefined,
  };
}

const size: Handler<"size"> = async (statement, study, context) => {
  const design = plannedDesign(study, choicesOf(statement));
  const aim = planAim(study, statement.aim);
  const goal = statement.aim.family === null ? "omnibus" : statement.goal;
  return {
    study,
    result: await sizeFor({ design, aim, target: statement.power.value, goal }, optionsOf(study, context, statement)),
  };
};

const power: Handler<"power"> = async (statement, study, context) => {
  const design = plannedDesign(study, choicesOf(statement));
  const subjects = statement.subjects.map((count) => count.value);
  return {
    study,
    result: await powerOf(
      { design, aim: planAim(study, statement.aim), subjects },
      optionsOf(study, context, statement),
    ),
  };
};

const detectable: Handler<"detectable"> = async (statement, study, context) => {
  if (statement.subjects.length !== 1) {
    throw new SessionProblem(
      "one-size-only",
      "detectable takes one number of subjects.",
      "Write: detectable primary with 40 subjects for 80% power",
    );
  }
  const design = plannedDesign(study, choicesOf(statement));
  const goal = statement.aim.family === null ? "omnibus" : statement.goal;
  const question = {
    design,
    aim: planAim(study, statement.aim),
    subjects: statement.subjects[0]!.value,
    target: statement.power.value,
    goal,
  } as const;
  return { study, result: await detectableFor(question, optionsOf(study, context, statement)) };
};

const rehearse: Handler<"rehearse"> = (statement, study) => {
  const { response } = needDesign(study);
  const design = plannedDesign(study);
  const seed = statement.seed?.value ?? seedOf(study);
  const rows = rehearsalRows({ design, subjects: statement.subjects.value, seed });
  // Six digits: what a careful instrument would give, and short enough to read.
  const table = typedTable([
    [rows.unit, ...rows.factors, response.name],
    ...rows.subjects.map((subject, row) => [
      subject,
      ...rows.levels[row]!,
      String(Number(rows.responses[row]!.toPrecision(6))),
    ]),
  ]);
  const held = holdTable(table, null, digestOf(tableDigest(table)), { seed });
  const next = { ...study, data: held };
  const notes: Note[] = study.data !== null && !study.data.rehearsal ? [{ code: "data-put-aside", facts: {} }] : [];
  return {
    study: next,
    result: dataResult(next, held, { action: "rehearse", notes }),
    events: [{ event: "rehearse", facts: { subjects: statement.subjects.value, seed } }],
  };
};

/** The design with the data's own means standing for expectations, where nothing was declared to be expected. */
function standIn(study: Study, observed: ObservedDesign): PlanningDesign {
  const { factors, units, assumptions } = study;
  const cells = Array.from({ length: cellCount(factors) }, (_, cell) => levelsOfCell(factors, cell));
  return expectedDesign(
    { units, factors, scale: "linear", variances: assumptions.variances, covariance: assumptions.covariance },
    {
      means: [
        {
          factors: factors.map((factor) => factor.name),
          values: cells.map((levels, cell) => ({
            levels: levels.map((level, index) => factors[index]!.levels[level]!),
            value: observed.cellMeans[cell]!,
          })),
        },
      ],
      spread: { common: 1, byLevel: null },
      // Sizes, spreads and correlations are the data's; these only fill the form.
      correlation: factors.some((factor) => factor.varies === "within") ? [0] : null,
      dropout: null,
      missing: null,
      shape: null,
      allocation: null,
      cost: null,
    },
  );
}

function preparedForCalibration(study: Study): Prepared | null {
  if (study.data === null) return null;
  const prepared = prepare(study);
  refuseWrongDesign(prepared);
  return prepared;
}

const calibrate: Handler<"calibrate"> = async (statement, study, context) => {
  const aim = planAim(study, statement.aim);
  const options = optionsOf(study, context, statement);
  const shard = statement.shard === null ? null : { index: statement.shard.index.value, of: statement.shard.of.value };
  const expected = expectationOf(study) === null ? null : plannedDesign(study);
  const prepared = statement.basis === "plan" ? null : preparedForCalibration(study);
  if (statement.basis === "data" && prepared === null) {
    throw new SessionProblem(
      "no-data",
      "No data are held to calibrate on.",
      'Read them first: read "file.csv"; or: calibrate primary from plan with 40 subjects',
    );
  }
  const found = prepared === null ? null : observedDesign(prepared);
  const results: CalibrationResult[] = [];
  if (expected !== null && statement.basis !== "data") {
    const subjects = statement.subjects?.value ?? found?.groupSizes.reduce((sum, count) => sum + count, 0) ?? null;
    if (subjects === null) {
      throw new SessionProblem(
        "how-many-subjects",
        "Nothing says how many subjects the simulated studies have.",
        "Write: calibrate primary with 40 subjects",
      );
    }
    results.push(await calibratePlan({ design: expected, aim, subjects, shard }, options));
  }
  if (found !== null && (statement.basis === "data" || statement.subjects === null)) {
    const observed = expected === null ? found : { ...found, cellMeans: expected.cellMeans };
    results.push(await calibratePlan({ design: expected ?? standIn(study, found), aim, observed, shard }, options));
  }
  const [first] = results;
  if (first === undefined) plannedDesign(study);
  // Data like those held weigh most: their conclusion leads.
  const leading = results.at(-1)!;
  const result: CalibrationResult = {
    ...leading,
    studies: Math.min(...results.map((entry) => entry.studies)),
    scenarios: results.flatMap((entry) => entry.scenarios),
    conclusion: worst(results.map((entry) => entry.conclusion)),
    notes: [...new Map(results.flatMap((entry) => entry.notes).map((note) => [JSON.stringify(note), note])).values()],
  };
  // With the data's own means the simulated power tells what was found: that is a result seen.
  const tells = found !== null && expected === null && study.data?.rehearsal === false;
  return {
    study,
    result,
    events: tells
      ? [{ event: "result", facts: { statement: context.text, seen: true, data: study.data!.stateDigest } }]
      : [],
  };
};

function worst(conclusions: readonly CalibrationResult["conclusion"][]): CalibrationResult["conclusion"] {
  for (const conclusion of ["exceeds", "cannot tell", "holds", "conservative"] as const)
    if (conclusions.includes(conclusion)) return conclusion;
  return "cannot tell";
}

/** Powers from one number of subjects to another, for `draw power of X from A to B subjects`. */
export async function powerPicture(
  statement: StatementOf<"draw">,
  study: Study,
  context: Context,
): Promise<PowerPicture> {
  const design = plannedDesign(study);
  const aim = planAim(study, { family: statement.omnibus ? null : statement.family });
  const groups = design.allocation.length;
  const from = statement.from?.value ?? Math.max(8, 2 * groups);
  const to = statement.to?.value ?? Math.max(60, from * 2);
  const goals = study.results.flatMap((kept) => (kept.result.kind === "size" ? [kept.result.target] : []));
  return powerCurve(
    {
      design,
      aim,
      from,
      to,
      goal: goals.at(-1) ?? null,
      frame: { response: responseFacts(needDesign(study)), state: study.plan === null ? "declared" : "planned" },
    },
    optionsOf(study, context, { studies: null, seed: null }),
  );
}

export const planningHandlers = { size, power, detectable, rehearse, calibrate } as const;
