import { helpTopics as languageTopics, nearest } from "../../../grammar/index.ts";
import { spellMembers } from "../../design/index.ts";
import { type CorrectionName, correctionNames, corrections } from "../../families/index.ts";
import type { HelpResult, TableFacts } from "../../results/index.ts";
import { prepare } from "../analysis/layout.ts";
import { type Handler, taken } from "../handler.ts";
import { modelTopics } from "../method-help.ts";
import { SessionProblem } from "../problem.ts";
import type { Study } from "../study.ts";
import { analysisHandlers } from "./analyses.ts";
import { showData } from "./data.ts";
import { ledgerResult, planResult } from "./record.ts";

const set: Handler<"set"> = (statement, study) => {
  const { setting } = statement;
  const { settings } = study;
  switch (setting.name) {
    case "digits":
      return {
        study: { ...study, settings: { ...settings, digits: setting.value.value } },
        result: taken("set", { name: "digits", value: setting.value.value }),
      };
    case "seed":
      return {
        study: { ...study, settings: { ...settings, seed: setting.value.value } },
        result: taken("set", { name: "seed", value: setting.value.value }),
      };
    case "interval":
      return {
        study: { ...study, settings: { ...settings, intervalLevel: setting.value.value } },
        result: taken("set", { name: "interval", value: setting.value.value }),
      };
    case "show": {
      const showAdjustedP = setting.what !== "thresholds";
      const showThresholds = setting.what !== "adjusted p";
      return {
        study: { ...study, settings: { ...settings, showAdjustedP, showThresholds } },
        result: taken("set", { name: "show", value: setting.what }),
      };
    }
    case "standardiser":
      return {
        study: { ...study, settings: { ...settings, standardiser: setting.value } },
        result: taken("set", { name: "standardiser", value: setting.value }),
      };
    case "resamples":
    case "studies":
      return {
        study: { ...study, settings: { ...settings, [setting.name]: setting.value.value } },
        result: taken("set", { name: setting.name, value: setting.value.value }),
      };
  }
};

function familiesTable(study: Study): TableFacts {
  return {
    title: "Families",
    columns: ["family", "comparison", "holds", "method", "after"].map((name) => ({ name, type: "text" as const })),
    rows: [...study.families.values()].flatMap((family) => {
      const { contrasts } = spellMembers(study.factors, family.members, study.contrasts);
      const holds = `${family.holds === "family" ? "family error" : "false discovery"} ${Number((family.error * 100).toPrecision(6))}%`;
      const after = family.after === null ? "" : `${family.after.any ? "any of " : ""}${family.after.family}`;
      return contrasts.map((contrast) => [family.name, contrast.name, holds, family.correction, after]);
    }),
    moreRows: 0,
  };
}

function settingsTable(study: Study): TableFacts {
  const { settings } = study;
  return {
    title: "Settings",
    columns: [
      { name: "setting", type: "text" },
      { name: "value", type: "text" },
    ],
    rows: [
      ["digits", settings.digits === null ? "by the size of the error" : String(settings.digits)],
      ["seed", settings.seed === null ? "as built in" : String(settings.seed)],
      ["interval", `${Number((settings.intervalLevel * 100).toPrecision(6))}%`],
      [
        "show",
        settings.showAdjustedP && settings.showThresholds
          ? "both"
          : settings.showThresholds
            ? "thresholds"
            : "adjusted p",
      ],
      ["standardiser", settings.standardiser],
    ],
    moreRows: 0,
  };
}

function designTable(study: Study): TableFacts {
  const rows: (string | number | null)[][] = [];
  if (study.response !== null) {
    const { name, label, unit, better, scale } = study.response;
    rows.push([
      "response",
      name,
      [label, unit, better === null ? null : `${better} is better`, scale === "log" ? "on log scale" : null]
        .filter((part) => part !== null)
        .join(", "),
    ]);
  }
  for (const unit of study.units)
    rows.push([unit.role, unit.name, unit.nestedIn.length > 0 ? `nested in ${unit.nestedIn.join(", in ")}` : ""]);
  for (const factor of study.factors)
    rows.push(["factor", factor.name, `${factor.varies} ${factor.unit}: ${factor.levels.join(", ")}`]);
  for (const covariate of study.covariates) rows.push(["covariate", covariate.name, covariate.varies]);
  for (const name of study.contrasts.keys()) rows.push(["contrast", name, ""]);
  return {
    title: "Declared design",
    columns: ["part", "name", "declared"].map((name) => ({ name, type: "text" as const })),
    rows,
    moreRows: 0,
  };
}

const helpWith = (topic: string, table: TableFacts): HelpResult => ({
  kind: "help",
  topic,
  sections: [{ heading: null, lines: [], example: null, table }],
  notes: [],
});

const show: Handler<"show"> = (statement, study, context) => {
  switch (statement.what) {
    case "data": {
      const outcome = showData(study);
      const rehearsal = study.data?.rehearsal === true;
      return rehearsal
        ? outcome
        : {
            ...outcome,
            events: [
              { event: "result", facts: { statement: context.text, seen: true, data: study.data!.stateDigest } },
            ],
          };
    }
    case "plan":
      return { study, result: planResult(study, "show", null) };
    case "ledger":
      return { study, result: ledgerResult(study, "show", null) };
    case "settings":
      return { study, result: helpWith("settings", settingsTable(study)) };
    case "families": {
      if (study.families.size === 0)
        throw new SessionProblem(
          "no-families",
          "No family is declared.",
          "Declare one: family primary: all pairs of FACTOR",
        );
      return { study, result: helpWith("families", familiesTable(study)) };
    }
    case "design":
      if (study.data === null || study.response === null || study.factors.length === 0)
        return { study, result: helpWith("design", designTable(study)) };
      prepare(study);
      return analysisHandlers.check({ ...statement, kind: "check" }, study, context);
  }
};

function methodHelp(name: CorrectionName): HelpResult {
  const { help, holds, dependence } = corrections[name];
  return {
    kind: "help",
    topic: name,
    sections: [
      { heading: "Holds", lines: [holds, help.controls], example: null, table: null },
      {
        heading: "Assumes",
        lines: [help.assumes, `Dependence between comparisons: ${dependence}.`],
        example: null,
        table: null,
      },
      { heading: "When", lines: [help.betterThan], example: null, table: null },
      { heading: "Source", lines: help.source, example: null, table: null },
    ],
    notes: [],
  };
}

/** Everything that `help` can answer about, for completion too. */
export function helpTopics(): readonly string[] {
  return [...languageTopics().keys(), ...correctionNames, ...Object.keys(modelTopics)];
}

const help: Handler<"help"> = (statement, study) => {
  const topic = statement.topic?.text ?? null;
  const section = (heading: string | null, lines: readonly string[], example: string | null = null) => ({
    heading,
    lines,
    example,
    table: null,
  });
  if (topic === null) {
    const sections = [
      section(null, ["Statements, by their verbs. help VERB explains one; so does help METHOD."]),
      ...[...languageTopics().values()].map((entry) =>
        section(entry.topic, entry.sections[0]?.lines.slice(0, 1) ?? []),
      ),
      section("Methods that hold the error of a family", [correctionNames.join(", ")]),
      section("Analyses", [Object.keys(modelTopics).join(", ")]),
    ];
    return { study, result: { kind: "help", topic: "Meanwise", sections, notes: [] } };
  }
  const method = correctionNames.find((name) => name === topic);
  if (method !== undefined) return { study, result: methodHelp(method) };
  const model = modelTopics[topic];
  if (model !== undefined)
    return {
      study,
      result: { kind: "help", topic, sections: model.map(({ heading, lines }) => section(heading, lines)), notes: [] },
    };
  const found = languageTopics().get(topic);
  if (found !== undefined)
    return {
      study,
      result: {
        kind: "help",
        topic,
        sections: found.sections.map((part) => section(part.heading, part.lines, part.example)),
        notes: [],
      },
    };
  const near = nearest(topic, helpTopics());
  throw new SessionProblem(
    "unknown-topic",
    `There is no help on "${topic}".`,
    near === null ? "help alone lists the topics." : `Did you mean "${near}"?`,
    topic,
  );
};

export const settingsHandlers = { set, show, help } as const;
