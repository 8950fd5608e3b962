import { deviationsOf, headOf } from "../record/index.ts";
import type { ReportFacts } from "../present/index.ts";
import type { Context } from "./handler.ts";
import type { Study } from "./study.ts";

/** What the report needs of the study beside its results. */
export function reportFacts(study: Study, context: Context): ReportFacts {
  return {
    title: study.title ?? context.host.documentName ?? "Comparison of means",
    caution: study.caution,
    response: study.response,
    units: study.units,
    factors: study.factors,
    covariates: study.covariates,
    assumptions: study.assumptions,
    plan:
      study.plan === null
        ? null
        : {
            name: study.plan.plan.name,
            digest: study.plan.digest,
            sealedAt: study.plan.sealedAt,
            statements: study.plan.plan.statements,
          },
    amendments: study.amendments,
    data:
      study.data === null
        ? null
        : {
            source: study.data.source,
            digest: study.data.digest,
            rowsRead: study.data.rowsRead,
            rows: study.data.table.rows,
            rehearsal: study.data.rehearsal,
            seed: study.data.seed,
            exclusions: study.data.exclusions,
            steps: study.data.steps,
          },
    results: study.results.map((kept) => kept.result),
    deviations: deviationsOf(study.ledger).map(({ code, facts }) => ({ code, facts })),
    head: headOf(study.ledger),
    version: context.version,
    environment: context.host.environment,
    writtenAt: new Date(context.host.now()).toISOString(),
  };
}
