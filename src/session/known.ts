import type { Known } from "../../grammar/index.ts";
import { correctionNames, corrections } from "../families/index.ts";
import type { Host } from "../host/index.ts";
import { helpTopics } from "./handlers/settings.ts";
import type { Study } from "./study.ts";

/** What completion and hover may offer: everything declared and at hand. */
export async function knownNames(study: Study, host: Pick<Host, "listFiles">): Promise<Known> {
  const files = await host.listFiles(".");
  return {
    ...(study.response === null ? {} : { response: study.response.name }),
    units: study.units.flatMap((unit) => [unit.name, ...unit.nestedIn]),
    factors: study.factors.map((factor) => factor.name),
    levels: Object.fromEntries(study.factors.map((factor) => [factor.name, factor.levels])),
    covariates: study.covariates.map((covariate) => covariate.name),
    contrasts: [...study.contrasts.keys()],
    families: [...study.families.keys()],
    columns: study.data?.table.columns.map((column) => column.name) ?? [],
    methods: Object.fromEntries(correctionNames.map((name) => [name, corrections[name].help.controls])),
    files: files.filter((file) => !file.endsWith("/") && !file.startsWith(".")),
    plans: files.filter((file) => file.endsWith(".plan.json")).map((file) => file.replace(/\.plan\.json$/, "")),
    topics: helpTopics(),
    declarations: Object.fromEntries(
      study.declarations.map((declared) => [declared.key.split(" ").slice(1).join(" ") || declared.key, declared.text]),
    ),
  };
}
