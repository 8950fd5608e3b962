import { readFileSync } from "node:fs";
import { describe, expect, it } from "vitest";
import { asNumbers, columnNamed, readTable, textCodes } from "../../../src/data/index.ts";
import { cellStatistics, oneWayAnalysis } from "../../../src/models/index.ts";

const folder = new URL("../../reference/nist-strd/", import.meta.url);
const sets = Object.entries(
  JSON.parse(readFileSync(new URL("certified.json", folder), "utf8")) as Record<
    string,
    { kind: string; file: string; certified: Record<string, string> }
  >,
).filter(([, set]) => set.kind === "one-way analysis of variance");

const agreeingDigits = (value: number, wanted: string) =>
  Math.min(15, -Math.log10(Math.abs(value - Number(wanted)) / Math.abs(Number(wanted)) || 1e-15));

describe("NIST StRD from the bytes of the file, through the reader's exact intake (certified values)", () => {
  it.each(sets)("%s agrees to 13 digits", async (_, set) => {
    const { table } = await readTable(new Uint8Array(readFileSync(new URL(set.file, folder))), { format: "csv" });
    const response = asNumbers(columnNamed(table, "response"));
    const treatment = textCodes(columnNamed(table, "treatment"));
    const analysis = oneWayAnalysis(
      cellStatistics({
        rows: table.rows,
        response,
        cells: treatment.codes,
        cellCount: treatment.categories.length,
      }),
    );
    const effect = analysis.effects[0]!;
    const found = {
      between_ss: effect.sumOfSquares!,
      between_ms: effect.meanSquare!,
      f: effect.value!,
      within_ss: analysis.error!.sumOfSquares,
      within_ms: analysis.error!.meanSquare,
      r_squared: analysis.rSquared!,
      residual_sd: analysis.residualSd!,
    };
    for (const [name, value] of Object.entries(found)) {
      expect(agreeingDigits(value, set.certified[name]!), name).toBeGreaterThanOrEqual(13);
    }
  });
});
