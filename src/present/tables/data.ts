import type { DataResult } from "../../results/index.ts";
import { type Block, noteBlocks, paragraph, tableOf } from "../blocks.ts";
import { counted, countText } from "../numbers.ts";
import { factsTable } from "./facts.ts";

export function dataBlocks(result: DataResult): Block[] {
  const source = result.source === null ? "the notebook" : `"${result.source}"`;
  const blocks: Block[] = [];
  switch (result.action) {
    case "read":
      blocks.push(
        paragraph(
          `Read ${counted(result.rows, "row")} and ${counted(result.columns.length, "column")} from ${source}, SHA-256 ${result.digest?.slice(0, 16) ?? ""}\u2026`,
        ),
      );
      break;
    case "typed":
      blocks.push(paragraph(`Took in ${counted(result.rows, "row")} typed into the notebook.`));
      break;
    case "rehearse":
      blocks.push(
        paragraph(
          `Rehearsal: ${counted(result.rows, "row")} simulated from the plan's expectations with seed ${result.seed}. Everything computed from them is marked; reading real data drops them.`,
          "state",
        ),
      );
      break;
    case "derive":
      blocks.push(
        paragraph(`Added the column "${result.columns.at(-1)?.name ?? ""}" to ${counted(result.rows, "row")}.`),
      );
      break;
    case "average":
      blocks.push(paragraph(`${counted(result.rows, "row")} after averaging.`));
      break;
    case "show":
      blocks.push(paragraph(`${counted(result.rows, "row")} from ${source}.`));
      break;
    case "exclude": {
      const by = result.excludedByCell.map((cell) => `${Object.values(cell.levels).join(", ")}: ${cell.rows}`);
      blocks.push(
        paragraph(
          `Excluded ${counted(result.excluded, "row")} because: ${result.reason ?? ""}. ${counted(result.rows, "row")} left.${by.length > 0 ? ` By cell: ${by.join("; ")}.` : ""}${
            result.afterResults ? " Results had already been seen: the report says so." : ""
          }`,
          result.afterResults ? "state" : "plain",
        ),
      );
      break;
    }
  }
  if (result.action === "read" || result.action === "typed" || result.action === "rehearse") {
    blocks.push({
      type: "table",
      table: tableOf("Columns", result.columns, [
        { label: "column", value: (row) => row.name, header: true },
        { label: "type", value: (row) => row.type },
        { label: "declared as", value: (row) => row.role, text: (row) => row.role ?? "" },
        { label: "different values", value: (row) => row.distinct, text: (row) => countText(row.distinct) },
        { label: "missing", value: (row) => row.missing, text: (row) => countText(row.missing) },
      ]),
    });
  }
  if (result.preview !== null) blocks.push({ type: "table", table: factsTable(result.preview) });
  return [...blocks, ...noteBlocks(result.notes)];
}
