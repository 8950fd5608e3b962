import type { ComparisonRow, ComparisonsResult } from "../results/index.ts";

/** What a row came to, in a word or two: the same in tables, pictures and sentences. */
export function conclusionOf(
  row: ComparisonRow,
  result: ComparisonsResult,
): "shown" | "not shown" | "equivalent" | "not worse" | "not tested" {
  if (result.after !== null && !result.after.open && !row.rejected) return "not tested";
  if (row.equivalence !== undefined) return row.equivalence.equivalent ? "equivalent" : "not shown";
  if (!row.rejected) return "not shown";
  return result.margin?.type === "not worse" ? "not worse" : "shown";
}
