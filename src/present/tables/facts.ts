import type { TableFacts } from "../../results/index.ts";
import { type PresentedTable, tableOf } from "../blocks.ts";
import { counted, plainNumber, pText } from "../numbers.ts";

/** A table that a statement put together itself. */
export function factsTable(facts: TableFacts): PresentedTable {
  return tableOf(
    facts.title,
    facts.rows,
    facts.columns.map((column, index) => ({
      label: column.name,
      value: (row: TableFacts["rows"][number]) => row[index] ?? null,
      text: (row: TableFacts["rows"][number]) => {
        const value = row[index] ?? null;
        if (value === null) return "\u2013";
        return typeof value === "number" ? (column.type === "p" ? pText(value) : plainNumber(value)) : value;
      },
      header: index === 0,
      align: column.type === "text" ? ("left" as const) : ("right" as const),
    })),
    facts.moreRows > 0 ? [`${counted(facts.moreRows, "more row")}.`] : [],
  );
}
