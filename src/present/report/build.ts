import type { ComparisonsResult, EffectMethod, OmnibusResult, Result } from "../../results/index.ts";
import type { Block } from "../blocks.ts";
import { blocksOf } from "../bundle.ts";
import { noteText } from "../notes.ts";
import { counted, listed, percentText } from "../numbers.ts";
import { correctionReferences, references } from "../references.ts";
import { responseTitle } from "../response-words.ts";
import type { ReportDocument, ReportFacts, ReportSection } from "./document.ts";

/** Stands in every report: conclusions can hurt someone. */
export const standingCaution =
  "This report does not replace the review of a qualified statistician, the ethics board's rules or the regulations that apply. Where a conclusion bears on treatment, dosing, safety limits or exposure, have it reviewed before anyone acts on it.";

const paragraph = (text: string, tone: "plain" | "note" | "caution" | "state" = "plain"): Block => ({
  type: "paragraph",
  text,
  tone,
});
const plural = (name: string): string =>
  /(?:s|x|z|ch|sh)$/.test(name) ? `${name}es` : /[^aeiou]y$/.test(name) ? `${name.slice(0, -1)}ies` : `${name}s`;

function designSentences(facts: ReportFacts): string[] {
  const sentences: string[] = [];
  const response = facts.response === null ? "The response" : responseTitle(facts.response);
  const within = facts.factors.filter((factor) => factor.varies === "within");
  const between = facts.factors.filter((factor) => factor.varies === "between");
  const name = (factor: ReportFacts["factors"][number]) => `${factor.name} (${factor.levels.join(", ")})`;
  const parts: string[] = [];
  if (within.length > 0) parts.push(`${listed(within.map(name))} varied within each ${within[0]!.unit}`);
  if (between.length > 0) parts.push(`${listed(between.map(name))} varied between ${plural(between[0]!.unit)}`);
  if (parts.length > 0) sentences.push(`${response} was measured; ${parts.join(", and ")}.`);
  const measured = facts.factors.filter((factor) => factor.measured);
  if (measured.length > 0)
    sentences.push(
      `${listed(measured.map((factor) => factor.name))} ${measured.length === 1 ? "is an attribute" : "are attributes"} that nobody assigned: differences between ${measured.length === 1 ? "its" : "their"} levels need not be effects of ${measured.length === 1 ? "it" : "them"}.`,
    );
  for (const unit of facts.units)
    if (unit.nestedIn.length > 0)
      sentences.push(`Each ${unit.name} belonged to one ${unit.nestedIn.join(" in one ")}.`);
  if (facts.covariates.length > 0)
    sentences.push(`Means were adjusted for ${listed(facts.covariates.map((covariate) => covariate.name))}.`);
  if (facts.response?.scale === "log")
    sentences.push("The analysis was on the logarithm; results are given back as ratios of geometric means.");
  return sentences;
}

function dataBlocks(facts: ReportFacts): Block[] {
  const { data } = facts;
  if (data === null) return [paragraph("No data were held when this report was written.")];
  const blocks: Block[] = [];
  if (data.rehearsal)
    blocks.push(
      paragraph(
        `The data are a rehearsal: simulated from the plan's expectations with seed ${data.seed}. Nothing in this report is a finding.`,
        "state",
      ),
    );
  else
    blocks.push(
      paragraph(
        `${counted(data.rowsRead, "row")} were read from ${data.source === null ? "the notebook itself" : `"${data.source}"`} (SHA-256 ${data.digest}); ${counted(data.rows, "row")} entered the analysis.`,
      ),
    );
  if (data.exclusions.length === 0) blocks.push(paragraph("Nothing was excluded."));
  else {
    blocks.push({
      type: "list",
      items: data.exclusions.map((entry) => {
        const cells = entry.byCell.map((cell) => `${Object.values(cell.levels).join(", ")}: ${cell.rows}`).join("; ");
        return `${counted(entry.rows, "row")} excluded because: ${entry.reason}. Rule: ${entry.text.replace(/\s+because\s+"[\s\S]*$/, "")}.${cells === "" ? "" : ` By cell: ${cells}.`}${entry.afterResults ? " This exclusion came after results had been seen." : ""}`;
      }),
    });
  }
  const steps = data.steps.filter((step) => !step.startsWith("exclude"));
  if (steps.length > 0)
    blocks.push(paragraph("Steps taken before the analysis:"), { type: "statements", lines: steps });
  return blocks;
}

const ofKind = <K extends Result["kind"]>(results: readonly Result[], kind: K): Extract<Result, { kind: K }>[] =>
  results.filter((result): result is Extract<Result, { kind: K }> => result.kind === kind);

const methodReferences: Readonly<Record<EffectMethod, readonly string[]>> = {
  "one-way": ["fisher-1925"],
  welch: ["welch-1951"],
  "brown-forsythe": ["brown-forsythe-1974"],
  factorial: ["fisher-1925", "yates-1934"],
  covariance: ["fisher-1925"],
  "repeated measures": ["greenhouse-geisser-1959", "huynh-feldt-1976", "lecoutre-1991", "mauchly-1940"],
  multivariate: [],
  multilevel: ["kenward-roger-1997"],
  "kruskal-wallis": ["kruskal-wallis-1952"],
  friedman: ["friedman-1937"],
  resampling: ["fisher-1935"],
};

const methodSentences: Readonly<Record<EffectMethod, string>> = {
  "one-way": "Group means were compared by one-way analysis of variance.",
  welch: "Group means were compared by Welch's test, which does not pool variances.",
  "brown-forsythe": "Group means were compared by Brown and Forsythe's test, which lets variances differ.",
  factorial:
    "Effects were tested by factorial analysis of variance in which cells weigh equally unless said otherwise.",
  covariance: "Adjusted means were compared by analysis of covariance.",
  "repeated measures":
    "Repeated-measures F tests were corrected for departures from sphericity by Greenhouse and Geisser's and by Huynh and Feldt's epsilon.",
  multivariate: "Multivariate tests of the within factors were taken.",
  multilevel:
    "Effects were tested in a multilevel model fitted by restricted maximum likelihood, with Kenward and Roger's degrees of freedom; the likelihood-ratio test compares the model with the effect against the same model without it, by maximum likelihood.",
  "kruskal-wallis": "Groups were compared by Kruskal and Wallis's test on ranks.",
  friedman: "Conditions were compared by Friedman's test on ranks within subjects.",
  resampling: "Effects were tested by rearranging the data in the ways that the design makes equally likely.",
};

const correctionSentence = (result: ComparisonsResult): string => {
  const what =
    result.family === null
      ? "Exploratory comparisons"
      : `The family "${result.family}" (${counted(result.rows.length, "comparison")})`;
  if (result.holds === "nothing") return `${what} carried no correction.`;
  return result.holds === "false discovery rate"
    ? `${what} held the false discovery rate at ${percentText(result.error)} by ${result.correction}.`
    : `${what} held the family-wise error at ${percentText(result.error)} by ${result.correction}.`;
};

function methodsBlocks(facts: ReportFacts): Block[] {
  const omnibus = ofKind(facts.results, "omnibus");
  const comparisons = ofKind(facts.results, "comparisons");
  const methods = [...new Set(omnibus.flatMap((result) => result.effects.map((effect) => effect.method)))];
  const sentences = [
    ...methods.map((method) => methodSentences[method]),
    ...[...new Set(comparisons.map(correctionSentence))],
    ...(comparisons.some((result) => result.errorTerm === "contrast scores")
      ? ["Comparisons within subjects rest on each subject's own contrast score, which needs no sphericity."]
      : []),
    ...(comparisons.some((result) => result.rows.some((row) => row.effectSize?.name === "g"))
      ? [
          "Effect sizes are standardised differences with Hedges's factor; their intervals invert the noncentral t distribution.",
        ]
      : []),
    ...(comparisons.some((result) => result.margin !== null)
      ? [
          "Claims of equivalence and of being not worse were tested by one-sided tests against the declared margin, inside the error of the family.",
        ]
      : []),
    `Computed with Meanwise ${facts.version}.`,
  ];
  const keys = [
    ...methods.flatMap((method) => methodReferences[method]),
    ...comparisons.flatMap((result) => correctionReferences[result.correction] ?? []),
    ...(comparisons.some((result) => result.rows.some((row) => row.effectSize?.name === "g")) ? ["hedges-1981"] : []),
    ...(omnibus.some((result) => result.effects.some((effect) => effect.generalizedEtaSquared !== undefined))
      ? ["olejnik-algina-2003"]
      : []),
    ...(comparisons.some((result) => result.margin !== null) ? ["schuirmann-1987"] : []),
    ...(ofKind(facts.results, "describe").some((result) =>
      result.cells.some((cell) => typeof cell.withinLower === "number"),
    )
      ? ["cousineau-2005", "morey-2008"]
      : []),
  ];
  const texts = [...new Set(keys)]
    .map((key) => references[key])
    .filter((text): text is string => text !== undefined)
    .sort((left, right) => left.localeCompare(right, "en"));
  return [
    paragraph(sentences.join(" ")),
    ...(texts.length > 0
      ? [
          { type: "heading" as const, level: 3 as const, text: "References" },
          { type: "list" as const, items: texts },
        ]
      : []),
  ];
}

/** The last result of each key: a statement that was run again is reported once. */
function latestBy<R extends Result>(results: readonly R[], key: (result: R) => string): R[] {
  const last = new Map<string, R>();
  for (const result of results) {
    last.delete(key(result));
    last.set(key(result), result);
  }
  return [...last.values()];
}

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

function bannerOf(facts: ReportFacts): string[] {
  const banner: string[] = [];
  if (facts.data?.rehearsal === true)
    banner.push("REHEARSAL: the data are simulated. Nothing in this report is a finding.");
  if (facts.plan !== null)
    banner.push(
      `Planned: the plan "${facts.plan.name}" was sealed on ${facts.plan.sealedAt} (SHA-256 ${facts.plan.digest}).`,
    );
  else banner.push("No sealed plan: no comparison in this report counts as planned.");
  return banner;
}

/** The report of a study, in the order in which a paper tells it. Sections without content are left out. */
export function buildReport(facts: ReportFacts): ReportDocument {
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
  const planningPictures = pictures.filter((result) =>
    ["power", "passing", "calibration"].includes(result.picture.picture),
  );
  const checks = latestBy(ofKind(facts.results, "check"), () => "check");
  const each = (results: readonly Result[]): Block[] => results.flatMap((result) => blocksOf(result));
  const planning = each([
    ...latestBy(ofKind(facts.results, "size"), (result) => `${result.of} ${result.goal}`),
    ...latestBy(ofKind(facts.results, "power"), (result) => result.of),
    ...latestBy(ofKind(facts.results, "detectable"), (result) => result.of),
  ]);
  const calibrations = each(latestBy(ofKind(facts.results, "calibration"), (result) => result.of));
  const caution: Block[] = [
    ...(facts.caution === null ? [] : [paragraph(facts.caution, "caution")]),
    paragraph(standingCaution, "caution"),
  ];
  const sections: readonly ReportSection[] = [
    { id: "caution", title: "Caution", blocks: caution },
    { id: "design", title: "Design", blocks: designSentences(facts).map((text) => paragraph(text)) },
    { id: "planning", title: "Planning", blocks: [...planning, ...each(planningPictures)] },
    { id: "data", title: "Data and exclusions", blocks: dataBlocks(facts) },
    { id: "checks", title: "Checks", blocks: each(checks) },
    {
      id: "descriptives",
      title: "Description",
      blocks: each([...latestBy(ofKind(facts.results, "describe"), (result) => result.by.join(" ")), ...described]),
    },
    { id: "omnibus", title: "Omnibus test", blocks: each(latestBy(ofKind(facts.results, "omnibus"), omnibusKey)) },
    {
      id: "planned",
      title: committed.some((result) => result.state === "planned") ? "Planned comparisons" : "Committed comparisons",
      blocks: each([...committed, ...comparisonPictures]),
    },
    {
      id: "exploratory",
      title: "Exploratory comparisons",
      blocks:
        exploratory.length === 0
          ? []
          : [
              paragraph(
                "What follows was not committed to before results were seen. It suggests what to test next; it confirms nothing.",
                "state",
              ),
              ...each(exploratory),
            ],
    },
    { id: "calibration", title: "Does the procedure hold its error here?", blocks: calibrations },
    { id: "deviations", title: "Deviations from the plan", blocks: deviationBlocks(facts) },
    { id: "methods", title: "Methods", blocks: methodsBlocks(facts) },
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
    banner: bannerOf(facts),
    sections: sections.filter((section) => section.blocks.length > 0),
    writtenAt: facts.writtenAt,
    version: facts.version,
  };
}
