import { readFileSync } from "node:fs";
import { describe, expect, it } from "vitest";
import { betweenContrasts, cellStatistics, factorialAnalysis, oneWayAnalysis } from "../../../src/models/index.ts";
import { exactData, factorData } from "./between-data.ts";
import { expectClose } from "./close.ts";

interface HandbookCase {
  readonly id: string;
  readonly source: string;
  readonly data: {
    readonly groups?: Record<string, string[]>;
    readonly cells?: Record<string, Record<string, string[]>>;
    readonly contrasts?: string[][];
  };
  readonly expected: Record<string, { readonly value: string; readonly tolerance: string }>;
  readonly recomputed: Record<string, string>;
  readonly additional?: Record<string, string>;
}

const { cases } = JSON.parse(readFileSync(new URL("../../reference/handbook/cases.json", import.meta.url), "utf8")) as {
  cases: HandbookCase[];
};
const caseNamed = (id: string) => cases.find((candidate) => candidate.id === id)!;

/** Printed digits within half a unit of the last one, and the recomputed value to 12 digits. */
function expectFigure(it: HandbookCase, name: string, value: number | null | undefined): void {
  const printed = it.expected[name];
  if (printed !== undefined) {
    expect(Math.abs(value! - Number(printed.value)), `${it.id} ${name}`).toBeLessThanOrEqual(Number(printed.tolerance));
  }
  const exact = it.recomputed[name] ?? it.additional?.[name];
  expect(exact, `${it.id} ${name} is in the reference`).toBeDefined();
  expectClose(value, Number(exact), 1e-12, `${it.id} ${name}`);
}

const rowsOf = (groups: Record<string, string[]>) =>
  Object.entries(groups).flatMap(([name, texts]) => texts.map((text) => [name, text] as const));

describe("worked examples of the NIST/SEMATECH e-Handbook of Statistical Methods", () => {
  it("7.4.3 one-way analysis of the resistance of circuits", () => {
    const example = caseNamed("one-way-resistance");
    const analysis = oneWayAnalysis(cellStatistics(exactData(rowsOf(example.data.groups!))));
    const effect = analysis.effects[0]!;
    expectFigure(example, "ss_treatments", effect.sumOfSquares);
    expectFigure(example, "ss_error", analysis.error!.sumOfSquares);
    expectFigure(example, "ms_treatments", effect.meanSquare);
    expectFigure(example, "ms_error", analysis.error!.meanSquare);
    expectFigure(example, "f", effect.value);
    expectFigure(example, "p", effect.p);
    expectFigure(example, "r_squared", analysis.rSquared);
  });
  it("3.2.3.1 one-way analysis of pin diameters from five machines", () => {
    const example = caseNamed("one-way-lathe");
    const statistics = cellStatistics(exactData(rowsOf(example.data.groups!)));
    const analysis = oneWayAnalysis(statistics);
    expectFigure(example, "ss_machine", analysis.effects[0]!.sumOfSquares);
    expectFigure(example, "ss_error", analysis.error!.sumOfSquares);
    expectFigure(example, "f", analysis.effects[0]!.value);
    expectFigure(example, "p", analysis.effects[0]!.p);
    for (const [cell, mean] of statistics.mean.entries()) {
      expectFigure(example, `mean_${cell + 1}`, statistics.center + mean);
    }
  });
  it("3.2.3.2 two-way analysis of pin diameters, five machines and two coolants", () => {
    const example = caseNamed("two-way-crossed-lathe");
    const rows = Object.entries(example.data.cells!).flatMap(([coolant, machines]) =>
      Object.entries(machines).flatMap(([machine, texts]) => texts.map((text) => ({ coolant, machine, text }))),
    );
    const { response } = exactData(rows.map(({ machine, text }) => [machine, text] as const));
    const data = factorData(
      { machine: rows.map((row) => row.machine), coolant: rows.map((row) => row.coolant) },
      Array.from(response.offsets),
      { center: response.center },
    );
    const analysis = factorialAnalysis({ data, factors: data.factors });
    for (const [name, effect] of [
      ["machine", analysis.effects[0]!],
      ["coolant", analysis.effects[1]!],
      ["interaction", analysis.effects[2]!],
    ] as const) {
      expectFigure(example, `ss_${name}`, effect.sumOfSquares);
      expectFigure(example, `f_${name}`, effect.value);
      expectFigure(example, `p_${name}`, effect.p);
    }
    expectFigure(example, "ss_residual", analysis.error!.sumOfSquares);
  });
  it("7.4.7.2 two contrasts of four groups", () => {
    const example = caseNamed("scheffe-two-contrasts");
    const found = betweenContrasts({
      data: exactData(rowsOf(example.data.groups!)),
      contrasts: example.data.contrasts!.map((weights, index) => ({
        name: `contrast ${index + 1}`,
        weights: Float64Array.from(weights, Number),
      })),
    });
    expectFigure(example, "estimate_1", found.estimates[0]);
    expectFigure(example, "estimate_2", found.estimates[1]);
    expectFigure(example, "standard_error", found.standardErrors[0]);
    expectFigure(example, "standard_error", found.standardErrors[1]);
  });
});
