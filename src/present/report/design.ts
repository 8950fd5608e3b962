import { type Block, paragraph } from "../blocks.ts";
import { counted, listed, plural } from "../numbers.ts";
import { responseTitle } from "../response-words.ts";
import { capitalised } from "../sentences/words.ts";
import type { ReportFacts } from "./document.ts";

type Factor = ReportFacts["factors"][number];

const levelsOf = (factor: Factor): string =>
  factor.levels.length <= 8
    ? `${factor.name} (${listed(factor.levels)})`
    : `${factor.name} (${factor.levels.length} levels, ${factor.levels[0]} to ${factor.levels.at(-1)})`;

/** Factors that vary alike within or between the same unit, together. */
function factorGroups(factors: readonly Factor[]): Factor[][] {
  const groups = new Map<string, Factor[]>();
  for (const factor of factors) {
    const key = `${factor.varies} ${factor.unit}`;
    groups.set(key, [...(groups.get(key) ?? []), factor]);
  }
  return [...groups.values()];
}

export function designBlocks(facts: ReportFacts): Block[] {
  const sentences: string[] = [];
  const { response } = facts;
  if (response !== null) {
    const better = response.better === null ? "" : `, for which ${response.better} is better`;
    sentences.push(`The response was ${responseTitle(response)}${better}.`);
  }
  for (const group of factorGroups(facts.factors)) {
    const { varies, unit } = group[0]!;
    const is = group.length === 1 ? "was" : "were";
    const where = varies === "within" ? `within each ${unit}` : `between ${plural(unit)}`;
    const assigned = group.filter((factor) => !factor.measured);
    const measured = group.filter((factor) => factor.measured);
    if (assigned.length > 0)
      sentences.push(
        `${capitalised(listed(assigned.map(levelsOf)))} ${assigned.length === 1 ? "was" : "were"} varied ${where}.`,
      );
    if (measured.length > 0)
      sentences.push(
        `${capitalised(listed(measured.map(levelsOf)))} ${is} recorded, not assigned: differences between ${measured.length === 1 ? "its" : "their"} levels need not be effects of ${measured.length === 1 ? "it" : "them"}.`,
      );
  }
  for (const unit of facts.units) {
    if (unit.role === "subjects")
      sentences.push(
        `The unit of sampling was the ${unit.name}${unit.nestedIn.length > 0 ? `, each within one ${unit.nestedIn.join(" within one ")}` : ""}.`,
      );
    if (unit.role === "items")
      sentences.push(`${capitalised(plural(unit.name))} were a second unit of sampling, crossed with the first.`);
    if (unit.role === "blocks") sentences.push(`${capitalised(plural(unit.name))} were blocks.`);
  }
  if (facts.covariates.length > 0)
    sentences.push(
      `${capitalised(listed(facts.covariates.map((covariate) => covariate.name)))} ${facts.covariates.length === 1 ? "was a covariate" : "were covariates"}, and means were adjusted for ${facts.covariates.length === 1 ? "it" : "them"}.`,
    );
  if (response?.scale === "log")
    sentences.push(
      "The analysis was on the logarithm of the response; results are given back as ratios of geometric means.",
    );
  if (facts.assumptions.variances === "unequal") sentences.push("Variances were not assumed to be equal.");
  if (facts.assumptions.covariance !== null)
    sentences.push(`Of the covariance within subjects, ${facts.assumptions.covariance} was assumed.`);
  return sentences.length === 0 ? [] : [paragraph(sentences.join(" "))];
}

const mostCells = 12;

/** "bare, day: 24; bare, night: 23 and 14 more cells" */
function byCellText(
  cells: readonly { readonly levels: Readonly<Record<string, string>>; readonly rows: number }[],
): string {
  const told = cells.slice(0, mostCells).map((cell) => `${Object.values(cell.levels).join(", ")}: ${cell.rows}`);
  return `${told.join("; ")}${cells.length > mostCells ? ` and ${counted(cells.length - mostCells, "more cell")}` : ""}`;
}

/** How many took part, as the results that used the data say. */
function participants(facts: ReportFacts): string | null {
  const unit = facts.units.find((each) => each.role === "subjects")?.name ?? "subject";
  let subjects: number | null = null;
  let observations: number | null = null;
  for (const result of facts.results) {
    if (result.kind === "check") [subjects, observations] = [result.design.subjects, result.design.observations];
    if (result.kind === "omnibus") [subjects, observations] = [result.subjects, result.observations];
  }
  if (subjects === null) return null;
  return `${capitalised(counted(subjects, unit))} with ${counted(observations!, "observation")} entered the analysis.`;
}

export function dataBlocks(facts: ReportFacts): Block[] {
  const { data } = facts;
  if (data === null) return [paragraph("No data were held when this report was written.")];
  const blocks: Block[] = [];
  const who = participants(facts);
  if (who !== null) blocks.push(paragraph(who));
  blocks.push(
    data.rehearsal
      ? paragraph(
          `The data are a rehearsal: simulated from the plan's expectations with seed ${data.seed}. Nothing in this report is a finding.`,
          "state",
        )
      : paragraph(
          `${counted(data.rowsRead, "row was", "rows were")} read from ${data.source === null ? "the notebook itself" : `the file "${data.source}"`} (SHA-256 ${data.digest}); ${counted(data.rows, "row")} remained after the steps below.`,
        ),
  );
  if (data.exclusions.length === 0) blocks.push(paragraph("Nothing was excluded."));
  else {
    blocks.push(paragraph("Exclusions, each by a rule that was stated with its reason:"), {
      type: "list",
      items: data.exclusions.map((entry) => {
        const cells = byCellText(entry.byCell);
        const rule = entry.text.replace(/\s+because\s+"[\s\S]*$/, "");
        return `${counted(entry.rows, "row")}: ${entry.reason} (${rule}).${cells === "" ? "" : ` By cell: ${cells}.`}${entry.afterResults ? " This exclusion came after results had been seen." : ""}`;
      }),
    });
  }
  const steps = data.steps.filter((step) => !step.startsWith("exclude"));
  if (steps.length > 0)
    blocks.push(paragraph("Steps taken before the analysis:"), { type: "statements", lines: steps });
  return blocks;
}
