import { parseCell } from "../../../grammar/index.ts";
import { HostError } from "../../host/index.ts";
import { correctionNames, corrections } from "../../families/index.ts";
import {
  auditLedger,
  canonicalJson,
  deviationsOf,
  doneAfterResults,
  firstResultSeen,
  headOf,
  PlanError,
  planPath,
  planText,
  readPlan,
  sameAct,
  sameCommitment,
  type SealedPlan,
  sealPlan,
} from "../../record/index.ts";
import { buildReport, presentResult, renderReport, resultToCsv, resultToJson } from "../../present/index.ts";
import type { LedgerResult, Note, PlanResult, Result } from "../../results/index.ts";
import { designCommitment, familyCommitments } from "../commitment.ts";
import { withDeclaration } from "../declare.ts";
import type { Context, Handler } from "../handler.ts";
import { SessionProblem } from "../problem.ts";
import { reportFacts } from "../report-facts.ts";
import { type Amendment, emptyStudy, type Study } from "../study.ts";
import { applyDeclaration, keyOf } from "./declarations.ts";

const decode = (bytes: Uint8Array): string => new TextDecoder().decode(bytes);
const encode = (text: string): Uint8Array => new TextEncoder().encode(text);

function planResult(
  study: Study,
  action: PlanResult["action"],
  path: string | null,
  notes: readonly Note[] = [],
): PlanResult {
  const { plan } = study;
  return {
    kind: "plan",
    action,
    name: plan?.plan.name ?? null,
    path,
    digest: plan?.digest ?? null,
    sealedAt: plan?.sealedAt ?? null,
    statements: study.declarations.map((declared) => declared.text),
    amendments: study.amendments,
    notes,
  };
}

async function existingPlan(context: Context, path: string): Promise<SealedPlan | null> {
  if (!(await context.host.exists(path))) return null;
  return readPlan(decode(await context.host.readBytes(path)), path);
}

const seal: Handler<"seal"> = async (statement, study, context) => {
  const name = statement.name.text;
  if (name.trim() === "")
    throw new SessionProblem("plan-name-empty", "The plan has no name.", 'Name it: seal plan as "glove"');
  if (study.families.size === 0) {
    throw new SessionProblem(
      "nothing-to-seal",
      "The plan commits to no family of comparisons.",
      "Declare one first: family primary: all pairs of FACTOR",
    );
  }
  const families = familyCommitments(study);
  const broken = [...study.families.keys()].filter(
    (family) => !families.some((commitment) => commitment.name === family),
  );
  if (broken.length > 0) {
    throw new SessionProblem(
      "family-broken",
      `The family "${broken[0]}" no longer fits the declared factors.`,
      "Declare it again, with levels that are declared.",
      broken[0]!,
    );
  }
  const content = {
    format: "meanwise plan",
    formatVersion: 1,
    meanwise: context.version,
    name,
    statements: study.declarations.map((declared) => declared.text),
    families,
  } as const;
  const path = planPath(name);
  const before = await existingPlan(context, path);
  let sealed = before;
  const notes: Note[] = [];
  if (before === null) {
    sealed = sealPlan(content, context.host.now());
    await context.host.writeBytes(path, encode(planText(sealed)));
  } else if (sameCommitment(before.plan, content)) {
    notes.push({ code: "plan-already-sealed", facts: { at: before.sealedAt } });
  } else {
    throw new SessionProblem(
      "plan-differs",
      `A plan named "${name}" was sealed on ${before.sealedAt} and commits to something else.`,
      `Seal this one under another name, or open the sealed one and amend it: open plan "${name}"`,
      name,
    );
  }
  const seen = firstResultSeen(study.ledger) !== null;
  if (seen) notes.push({ code: "sealed-after-results", facts: {} });
  else if (study.data !== null && !study.data.rehearsal) notes.push({ code: "sealed-after-reading", facts: {} });
  const next = { ...study, plan: sealed };
  return {
    study: next,
    result: planResult(next, "seal", path, notes),
    events: [
      {
        event: "seal",
        facts: {
          plan: name,
          digest: sealed!.digest,
          sealedAt: sealed!.sealedAt,
          families,
          design: [designCommitment(study)],
        },
      },
    ],
  };
};

/** The study that a plan's statements declare, from nothing. */
function declaredBy(plan: SealedPlan, path: string): Study {
  let study: Study = emptyStudy;
  for (const text of plan.plan.statements) {
    const parsed = parseCell(text);
    const [statement] = parsed.statements;
    if (parsed.problems.length > 0 || statement === undefined) {
      throw new SessionProblem(
        "plan-unreadable",
        `"${path}" holds a statement that this version does not understand: ${text.split("\n")[0]}`,
        `It was sealed by Meanwise ${plan.plan.meanwise}.`,
      );
    }
    const declaration = statement as Parameters<typeof keyOf>[0];
    study = {
      ...applyDeclaration(declaration, study),
      declarations: withDeclaration(study, { key: keyOf(declaration), text }),
    };
  }
  return study;
}

const open: Handler<"open"> = async (statement, study, context) => {
  const name = statement.name.text;
  const path = planPath(name);
  let text: string;
  try {
    text = decode(await context.host.readBytes(path));
  } catch (error) {
    if (!(error instanceof HostError) || error.code !== "missing-file") throw error;
    const plans = (await context.host.listFiles("."))
      .filter((file) => file.endsWith(".plan.json"))
      .map((file) => file.replace(/\.plan\.json$/, ""));
    throw new SessionProblem(
      "missing-plan",
      `There is no plan "${name}" (looked for ${path}).`,
      plans.length > 0 ? `Plans here: ${plans.join(", ")}.` : `A planning notebook writes it: seal plan as "${name}"`,
      name,
    );
  }
  const sealed = readPlan(text, path);
  const planned = declaredBy(sealed, path);
  const conflicting = study.declarations.find((own) => {
    const theirs = planned.declarations.find((other) => other.key === own.key);
    return theirs === undefined || theirs.text !== own.text;
  });
  if (conflicting !== undefined && study.plan?.digest !== sealed.digest) {
    throw new SessionProblem(
      "declared-beside-plan",
      `This notebook already declares something that the plan does not: ${conflicting.text.split("\n")[0]}`,
      "Open the plan first, in a fresh session; change it only by amend ... because.",
    );
  }
  if (study.plan?.digest === sealed.digest) {
    return { study, result: planResult(study, "open", path, [{ code: "plan-already-open", facts: {} }]) };
  }
  const next: Study = {
    ...planned,
    plan: sealed,
    data: study.data,
    results: study.results,
    settings: study.settings,
    ledger: study.ledger,
  };
  const families = familyCommitments(next);
  const differing = sealed.plan.families.find(
    (promised) => families.find((family) => family.name === promised.name)?.digest !== promised.digest,
  );
  const notes: Note[] =
    differing === undefined
      ? []
      : [{ code: "plan-read-differently", facts: { family: differing.name, version: sealed.plan.meanwise } }];
  if (study.data !== null && !study.data.rehearsal) notes.push({ code: "opened-after-reading", facts: {} });
  return {
    study: next,
    result: planResult(next, "open", path, notes),
    events: [
      {
        event: "open",
        facts: {
          plan: sealed.plan.name,
          digest: sealed.digest,
          sealedAt: sealed.sealedAt,
          families,
          design: [designCommitment(next)],
        },
      },
    ],
  };
};

const amend: Handler<"amend"> = (statement, study, context) => {
  if (study.plan === null) {
    throw new SessionProblem(
      "no-plan-open",
      "No sealed plan is open: there is nothing to amend.",
      "Declare it as usual; amend is for changes to a sealed plan.",
    );
  }
  if (statement.reason.text.trim() === "") {
    throw new SessionProblem("reason-empty", "The reason is empty.", 'Say why the plan changes: because "..."');
  }
  const { change } = statement;
  let next: Study;
  let text = context.text.replace(/^amend\s+/, "");
  text = text.replace(/\s*because\s+"(?:[^"]|"")*"\s*$/, "").trim();
  if (change.kind === "drop") {
    const key = `${change.what} ${change.name.text}`;
    if (!study.declarations.some((declared) => declared.key === key)) {
      throw new SessionProblem(
        "nothing-to-drop",
        `The plan declares no ${change.what} "${change.name.text}".`,
        "show plan lists what it declares.",
        change.name.text,
      );
    }
    const without = <V>(map: ReadonlyMap<string, V>) => new Map([...map].filter(([name]) => name !== change.name.text));
    next = {
      ...study,
      ...(change.what === "contrast" ? { contrasts: without(study.contrasts) } : {}),
      ...(change.what === "family" ? { families: without(study.families) } : {}),
      ...(change.what === "factor"
        ? { factors: study.factors.filter((factor) => factor.name !== change.name.text) }
        : {}),
      ...(change.what === "covariate"
        ? { covariates: study.covariates.filter((covariate) => covariate.name !== change.name.text) }
        : {}),
      declarations: study.declarations.filter((declared) => declared.key !== key),
    };
    const broken = [...next.families.keys()].find(
      (family) => !familyCommitments(next).some((commitment) => commitment.name === family),
    );
    if (broken !== undefined) {
      throw new SessionProblem(
        "still-needed",
        `The family "${broken}" still needs "${change.name.text}".`,
        "Amend that family first.",
        change.name.text,
      );
    }
  } else {
    const key = keyOf(change);
    next = { ...applyDeclaration(change, study), declarations: withDeclaration(study, { key, text }) };
  }
  const before = new Set(familyCommitments(study).map((family) => family.digest));
  const act = {
    plan: study.plan.plan.name,
    statement: text,
    reason: statement.reason.text,
    families: familyCommitments(next).filter((family) => !before.has(family.digest)),
    dropped: [...study.families.keys()].filter((name) => !next.families.has(name)),
    design: [designCommitment(next)],
  };
  const afterResults = doneAfterResults(study.ledger, "amend", act);
  const amendment: Amendment = {
    at: sameAct(study.ledger, "amend", act)?.at ?? new Date(context.host.now()).toISOString(),
    statement: text,
    reason: statement.reason.text,
    afterResults,
  };
  const repeated = study.amendments.some((other) => other.statement === text && other.reason === amendment.reason);
  next = { ...next, amendments: repeated ? study.amendments : [...study.amendments, amendment] };
  return {
    study: next,
    result: planResult(next, "amend", null, afterResults ? [{ code: "amended-after-results", facts: {} }] : []),
    events: repeated
      ? []
      : [
          {
            event: "amend",
            facts: { ...act, afterResults },
          },
        ],
  };
};

function ledgerResult(study: Study, action: LedgerResult["action"], publishedHead: string | null): LedgerResult {
  const text = study.ledger.entries.map((entry) => `${canonicalJson(entry)}\n`).join("");
  const found = auditLedger(text, { plan: study.plan, publishedHead });
  const summary = (facts: Readonly<Record<string, unknown>>): string =>
    String(facts.statement ?? facts.plan ?? facts.source ?? facts.path ?? facts.what ?? "").split("\n")[0]!;
  return {
    kind: "ledger",
    action,
    path: null,
    entries: study.ledger.entries.map(({ index, at, event, facts, digest }) => ({
      index,
      at,
      event,
      summary: summary(facts),
      digest,
    })),
    head: headOf(study.ledger),
    whole: found.whole,
    problems: found.problems,
    notes: deviationsOf(study.ledger).map((deviation) => ({
      code: deviation.code,
      facts: { ...deviation.facts, entry: deviation.entry },
    })),
  };
}

const audit: Handler<"audit"> = (statement, study) => ({
  study,
  result: ledgerResult(study, "audit", statement.head?.text ?? null),
});

function reportFormat(path: string): "html" | "md" | "docx" {
  const ending = /\.([^.]+)$/.exec(path)?.[1]?.toLowerCase();
  if (ending === "html" || ending === "htm") return "html";
  if (ending === "md") return "md";
  if (ending === "docx") return "docx";
  throw new SessionProblem(
    "unknown-format",
    `A report cannot be written as "${path}".`,
    'End the name in .html, .md or .docx: report to "report.html"',
    path,
  );
}

const report: Handler<"report"> = async (statement, study, context) => {
  const name = (context.host.documentName ?? "meanwise").replace(/\.(ipynb|mwise)$/i, "");
  const path = statement.path?.text ?? `${name}-report.html`;
  const format = reportFormat(path);
  if (study.results.length === 0) {
    throw new SessionProblem(
      "nothing-to-report",
      "There is no result to report yet.",
      "Run the analyses first, then report.",
    );
  }
  const document = buildReport(reportFacts(study, context));
  const bytes = await renderReport(document, format, context.host);
  await context.host.writeBytes(path, bytes);
  return {
    study,
    result: {
      kind: "report",
      path,
      format,
      bytes: bytes.length,
      sections: document.sections.map((section) => section.title),
      notes: [],
    },
    events: [{ event: "report", facts: { path, head: headOf(study.ledger) } }],
  };
};

const exportKinds: Readonly<Record<string, readonly Result["kind"][]>> = {
  comparisons: ["comparisons"],
  omnibus: ["omnibus"],
  description: ["describe"],
  check: ["check"],
  picture: ["picture", "check"],
  power: ["power"],
  size: ["size"],
  detectable: ["detectable"],
  calibration: ["calibration"],
};

function resultFor(study: Study, what: string, name: string | null): Result {
  if (what === "ledger") return ledgerResult(study, "show", null);
  if (what === "plan") return planResult(study, "show", null);
  const kinds = exportKinds[what] ?? [];
  const found = [...study.results]
    .reverse()
    .find(
      ({ result }) =>
        kinds.includes(result.kind) &&
        (name === null ||
          (result.kind === "comparisons" ? result.family === name : "of" in result && result.of === name)),
    );
  if (found !== undefined) return found.result;
  throw new SessionProblem(
    "nothing-to-export",
    `There is no ${what}${name === null ? "" : ` of "${name}"`} to export yet.`,
    "Run it first; export writes the latest of its kind.",
    name,
  );
}

const exportTo: Handler<"export"> = async (statement, study, context) => {
  const path = statement.path.text;
  const ending = /\.([^.]+)$/.exec(path)?.[1]?.toLowerCase() ?? "";
  let bytes: Uint8Array | null = null;
  if (statement.what === "data") {
    bytes = await (await import("../export-data.ts")).exportData(study, ending);
  } else {
    const result = resultFor(study, statement.what, statement.name?.text ?? null);
    if (statement.what === "picture") {
      const bundle = await presentResult(result, presentOptions(study), context.host);
      const svg = bundle["image/svg+xml"];
      if (ending === "svg" && svg !== undefined) bytes = encode(svg);
      if (ending === "png" && svg !== undefined) bytes = await context.host.svgToPng(svg, 1600);
    } else if (ending === "csv") bytes = encode(resultToCsv(result));
    else if (ending === "json") bytes = encode(resultToJson(result));
    else if (ending === "parquet") bytes = await (await import("../export-data.ts")).resultToParquet(result);
  }
  if (bytes === null) {
    throw new SessionProblem(
      "unknown-format",
      `${statement.what} cannot be written as "${path}".`,
      statement.what === "picture"
        ? "Pictures are written as .svg or .png."
        : "Results are written as .csv, .json or .parquet.",
      path,
    );
  }
  await context.host.writeBytes(path, bytes);
  return {
    study,
    result: { kind: "export", path, format: ending, bytes: bytes.length, of: statement.what, notes: [] },
    events: [{ event: "export", facts: { path, what: statement.what } }],
  };
};

export function presentOptions(study: Study) {
  return {
    digits: study.settings.digits,
    showAdjustedP: study.settings.showAdjustedP,
    showThresholds: study.settings.showThresholds,
  };
}

export const recordHandlers = { seal, open, amend, audit, report, export: exportTo } as const;
export { correctionNames, corrections, ledgerResult, PlanError, planResult };
