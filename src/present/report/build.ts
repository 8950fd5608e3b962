import type { ComparisonsResult, OmnibusResult, PictureResult, Result } from "../../results/index.ts";
import { type Block, paragraph } from "../blocks.ts";
import { blocksOf } from "../bundle.ts";
import { noteText } from "../notes.ts";
import { counted } from "../numbers.ts";
import { stateMark } from "../response-words.ts";
import { dataBlocks, designBlocks } from "./design.ts";
import type { ReportDocument, ReportFacts, ReportSection } from "./document.ts";
import { methodsBlocks } from "./methods.ts";
import { isRehearsed, latestBy, ofKind } from "./results-of.ts";

/** Stands in every report: conclusions can hurt someone. */
export const standingCaution =
  "This report does not replace the review of a qualified statistician, the ethics board's rules or the regulations that apply. Where a conclusion bears on treatment, dosing, safety limits or exposure, have it reviewed before anyone acts on it.";

const comparisonKey = (result: ComparisonsResult) =>
  `${result.family ?? "explore"} ${result.correction} ${result.rows.map((row) => row.comparison).join("|")}`;
const omnibusKey = (result: OmnibusResult) =>
  `${result.method} ${result.effects.map((effect) => `${effect.effect} ${effect.method}`).join("|")}`;

function deviationBlocks(facts: ReportFacts): Block[] {
  const items = facts.deviations.map((deviation) => noteText({ code: deviation.code, facts: deviation.facts }));
  if (items.length > 0) return [{ type: "list", items }];
  return [
    paragraph(
      facts.plan === null
        ? "There was no sealed plan to deviate from."
        : "None: every planned family was compared as sealed, and nothing was excluded or changed after results had been seen.",
    ),
  ];
}

/** A family that was compared again with other numbers is told, since only the last run is shown. */
function rerunBlocks(results: readonly Result[], shown: readonly ComparisonsResult[]): Block[] {
  return shown.flatMap((last) => {
    const runs = ofKind(results, "comparisons").filter((result) => result.family === last.family);
    const different = new Set(runs.map((run) => JSON.stringify(run.rows.map((row) => [row.estimate, row.p]))));
    return different.size < 2
      ? []
      : [
          paragraph(
            `The family "${last.family}" was compared with ${counted(different.size, "different outcome")}, since the data or the plan changed in between. The last one is shown; the record holds all.`,
            "state",
          ),
        ];
  });
}

/** What state the work is in, at the top: plan, data, and how many comparisons are of which state. */
function bannerOf(facts: ReportFacts, comparisons: readonly ComparisonsResult[]): string[] {
  const banner: string[] = [];
  if (facts.data?.rehearsal === true)
    banner.push("\u25c7 REHEARSAL: the data are simulated. Nothing in this report is a finding.");
  banner.push(
    facts.plan === null
      ? "No sealed plan: no comparison in this report counts as planned."
      : `The plan "${facts.plan.name}" was sealed on ${facts.plan.sealedAt} (SHA-256 ${facts.plan.digest}).`,
  );
  const states = (["planned", "declared", "exploratory", "rehearsal"] as const).flatMap((state) => {
    const count = comparisons.reduce((sum, result) => sum + result.rows.filter((row) => row.state === state).length, 0);
    return count === 0 ? [] : [`${count} ${stateMark(state)}`];
  });
  if (states.length > 0) banner.push(`Comparisons: ${states.join(", ")}.`);
  // That there is no plan is said above; it is nothing to deviate from.
  const deviations = facts.deviations.filter((deviation) => deviation.code !== "no-plan").length;
  if (deviations > 0)
    banner.push(
      `${counted(deviations, "deviation")}${facts.plan === null ? " from what was declared" : " from the plan"}: see below.`,
    );
  return banner;
}

/** The report of a study, in the order in which a paper tells it. Sections without content are left out. */
export function buildReport(given: ReportFacts): ReportDocument {
  // Once real data are held, what was tried on simulated ones is no part of the report.
  const facts =
    given.data?.rehearsal === true ? given : { ...given, results: given.results.filter((each) => !isRehearsed(each)) };
  const comparisons = latestBy(ofKind(facts.results, "comparisons"), comparisonKey);
  const committed = comparisons.filter((result) => result.family !== null && result.state !== "exploratory");
  const exploratory = comparisons.filter((result) => result.family === null || result.state === "exploratory");
  const pictures = latestBy(ofKind(facts.results, "picture"), (result) =>
    JSON.stringify([
      result.picture.picture,
      "factors" in result.picture ? result.picture.factors : "",
      "comparisons" in result.picture ? result.picture.comparisons.family : "",
      "of" in result.picture ? result.picture.of : "",
    ]),
  );
  const described = pictures.filter((result) =>
    ["means", "profiles", "distributions"].includes(result.picture.picture),
  );
  const comparisonPictures = pictures.filter((result) => result.picture.picture === "comparisons");
  const isExploratory = (result: PictureResult) => result.picture.state === "exploratory";
  const residualPictures = pictures.filter((result) => result.picture.picture === "residuals");
  const planningPictures = pictures.filter((result) => ["power", "passing"].includes(result.picture.picture));
  const calibrationPictures = pictures.filter((result) => result.picture.picture === "calibration");
  const checks = latestBy(ofKind(facts.results, "check"), () => "check");
  const each = (results: readonly Result[]): Block[] => results.flatMap((result) => blocksOf(result));
  const planning = each([
    ...latestBy(ofKind(facts.results, "size"), (result) => `${result.of} ${result.goal}`),
    ...latestBy(ofKind(facts.results, "power"), (result) => result.of),
    ...latestBy(ofKind(facts.results, "detectable"), (result) => result.of),
  ]);
  const calibrations = each([
    ...latestBy(ofKind(facts.results, "calibration"), (result) => result.of),
    ...calibrationPictures,
  ]);
  const methods = methodsBlocks(facts);
  const caution: Block[] = [
    ...(facts.caution === null ? [] : [paragraph(facts.caution, "caution")]),
    paragraph(standingCaution, "caution"),
  ];
  const sections: readonly ReportSection[] = [
    { id: "caution", title: "Caution", blocks: caution },
    { id: "design", title: "Design", blocks: designBlocks(facts) },
    { id: "planning", title: "Planning", blocks: [...planning, ...each(planningPictures)] },
    { id: "data", title: "Participants, data and exclusions", blocks: dataBlocks(facts) },
    { id: "checks", title: "Checks", blocks: each([...checks, ...residualPictures]) },
    {
      id: "descriptives",
      title: "Description",
      blocks: each([...latestBy(ofKind(facts.results, "describe"), (result) => result.by.join(" ")), ...described]),
    },
    { id: "omnibus", title: "Omnibus test", blocks: each(latestBy(ofKind(facts.results, "omnibus"), omnibusKey)) },
    {
      id: "planned",
      title: committed.some((result) => result.state === "planned") ? "Planned comparisons" : "Committed comparisons",
      blocks: [
        ...each([...committed, ...comparisonPictures.filter((result) => !isExploratory(result))]),
        ...rerunBlocks(facts.results, committed),
      ],
    },
    {
      id: "exploratory",
      title: "Exploratory comparisons",
      blocks:
        exploratory.length === 0 && !comparisonPictures.some(isExploratory)
          ? []
          : [
              paragraph(
                "What follows was not committed to before results were seen. It suggests what to test next; it confirms nothing.",
                "state",
              ),
              ...each([...exploratory, ...comparisonPictures.filter(isExploratory)]),
            ],
    },
    { id: "calibration", title: "Does the procedure hold its error here?", blocks: calibrations },
    {
      id: "deviations",
      title: facts.plan === null ? "Deviations" : "Deviations from the plan",
      blocks: deviationBlocks(facts),
    },
    { id: "methods", title: "Methods", blocks: methods.methods },
    { id: "references", title: "References", blocks: methods.references },
    {
      id: "record",
      title: "Record",
      blocks: [
        ...(facts.plan === null
          ? []
          : [paragraph("The sealed plan:"), { type: "statements" as const, lines: facts.plan.statements }]),
        ...(facts.amendments.length === 0
          ? []
          : [
              paragraph("Amendments:"),
              {
                type: "list" as const,
                items: facts.amendments.map(
                  (entry) =>
                    `${entry.at}${entry.afterResults ? ", after results had been seen" : ", before results were seen"}: ${entry.statement.replace(/\s+/g, " ")} (because: ${entry.reason})`,
                ),
              },
            ]),
        paragraph(
          `Ledger head ${facts.head ?? "none"}. Meanwise ${facts.version}; ${Object.entries(facts.environment)
            .map(([name, value]) => `${name} ${value}`)
            .join(", ")}. Written ${facts.writtenAt}.`,
        ),
      ],
    },
  ];
  return {
    title: facts.title,
    banner: bannerOf(facts, comparisons),
    sections: sections.filter((section) => section.blocks.length > 0),
    writtenAt: facts.writtenAt,
    version: facts.version,
  };
}
