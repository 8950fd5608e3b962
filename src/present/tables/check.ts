import type { CheckResult } from "../../results/index.ts";
import { type Block, noteBlocks, paragraph, type PresentedTable, tableOf } from "../blocks.ts";
import { dfText, fixed, pText } from "../numbers.ts";
import { pictureCaption } from "../pictures/words.ts";
import { checkSentences } from "../sentences/description.ts";

const findingWords = { "no concern": "no concern", concern: "look at this", "cannot tell": "cannot tell" } as const;

function assumptionTable(result: CheckResult): PresentedTable {
  return tableOf(
    "Assumptions",
    result.assumptions,
    [
      { label: "assumption", value: (row) => row.assumption, header: true },
      { label: "of", value: (row) => row.of },
      { label: "by", value: (row) => row.method },
      {
        label: "statistic",
        value: (row) => row.statistic,
        text: (row) => (row.statistic === null ? "\u2013" : fixed(row.statistic, 2)),
      },
      {
        label: "df",
        value: (row) => row.df1,
        text: (row) =>
          row.df1 === null ? "" : row.df2 === null ? dfText(row.df1) : `${dfText(row.df1)}, ${dfText(row.df2)}`,
      },
      { label: "p", value: (row) => row.p, text: (row) => (row.p === null ? "\u2013" : pText(row.p)) },
      { label: "finding", value: (row) => row.finding, text: (row) => findingWords[row.finding] },
      {
        label: "what to do",
        value: (row) => row.statement,
        text: (row) => (row.finding === "concern" && row.statement !== null ? row.statement : ""),
        shown: result.assumptions.some((row) => row.finding === "concern" && row.statement !== null),
      },
    ],
    [
      "A test that finds nothing does not prove the assumption, least of all in a small study: look at the picture too.",
    ],
  );
}

export function checkBlocks(result: CheckResult): Block[] {
  const { design } = result;
  const blocks: Block[] = [];
  if (result.rehearsal) blocks.push(paragraph("Rehearsal: simulated data.", "state"));
  blocks.push(paragraph(checkSentences(result).join(" ")));
  blocks.push({
    type: "table",
    table: tableOf("Design declared and found", design.factors, [
      { label: "factor", value: (row) => row.name, header: true },
      { label: "declared", value: (row) => row.declared },
      { label: "found", value: (row) => row.found },
      {
        label: "subjects (observations) by level",
        value: (row) =>
          row.levels.map((level) => `${level.level}: ${level.subjects} (${level.observations})`).join("; "),
      },
    ]),
  });
  if (design.subjectsPerCell.length <= 40 && design.factors.length > 1) {
    blocks.push({
      type: "table",
      table: tableOf("Subjects in each cell", design.subjectsPerCell, [
        ...design.factors.map((factor) => ({
          label: factor.name,
          value: (row: (typeof design.subjectsPerCell)[number]) => row.levels[factor.name] ?? "",
          header: true,
        })),
        { label: "subjects", value: (row) => row.subjects },
        { label: "observations", value: (row) => row.observations },
      ]),
    });
  }
  if (design.problems.length > 0) {
    blocks.push({
      type: "list",
      items: design.problems.map(
        (problem) => `${problem.severity === "error" ? "To settle: " : ""}${problem.message} ${problem.advice}`,
      ),
    });
  }
  if (result.assumptions.length > 0) blocks.push({ type: "table", table: assumptionTable(result) });
  for (const picture of result.pictures) blocks.push({ type: "picture", picture, caption: pictureCaption(picture) });
  return [...blocks, ...noteBlocks(result.notes)];
}
