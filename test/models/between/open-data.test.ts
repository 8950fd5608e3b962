import { readFileSync } from "node:fs";
import { describe, expect, it } from "vitest";
import {
  assumptionFindings,
  cellStatistics,
  factorialAnalysis,
  friedmanAnalysis,
  kruskalWallisAnalysis,
  oneWayAnalysis,
} from "../../../src/models/index.ts";
import { factorData } from "./between-data.ts";
import { expectClose } from "./close.ts";
import type { FactorialCase } from "./fixtures.ts";

const expected = JSON.parse(readFileSync(new URL("fixtures/open-data.json", import.meta.url), "utf8")) as {
  readonly penguins: {
    readonly rows: number;
    readonly f: number;
    readonly p: number;
    readonly h: number;
    readonly hP: number;
    readonly spread: number;
    readonly spreadP: number;
    readonly factorial: FactorialCase;
    readonly covariance: FactorialCase;
  };
  readonly barley: {
    readonly rows: number;
    readonly varieties: string[];
    readonly sites: string[];
    readonly q: number;
    readonly qP: number;
    readonly table: number[][];
    readonly factorial: FactorialCase;
  };
};
const dataset = (name: string) =>
  JSON.parse(
    readFileSync(new URL(`../../../node_modules/vega-datasets/data/${name}`, import.meta.url), "utf8"),
  ) as Record<string, string | number | null>[];

function expectEffects(
  found: ReturnType<typeof factorialAnalysis>,
  wanted: readonly { f: number; sumOfSquares: number; p: number }[],
) {
  for (const [index, effect] of wanted.entries()) {
    expectClose(found.effects[index]!.value, effect.f, 1e-9, found.effects[index]!.effect);
    expectClose(found.effects[index]!.sumOfSquares, effect.sumOfSquares, 1e-9, found.effects[index]!.effect);
    expectClose(found.effects[index]!.p, effect.p, 1e-8, found.effects[index]!.effect);
  }
}

describe("body mass of penguins (vega-datasets; Gorman, Williams & Fraser 2014), unbalanced", () => {
  const rows = dataset("penguins.json").filter(
    (row) => row["Body Mass (g)"] !== null && (row.Sex === "MALE" || row.Sex === "FEMALE"),
  );
  const mass = rows.map((row) => Number(row["Body Mass (g)"]));
  const species = rows.map((row) => String(row.Species));
  const levels = { species: ["Adelie", "Chinstrap", "Gentoo"], sex: ["FEMALE", "MALE"] };
  it("one-way, ranks and spread as SciPy", () => {
    const data = factorData({ species }, mass, { levels: { species: levels.species } });
    expect(data.rows).toBe(expected.penguins.rows);
    const oneWay = oneWayAnalysis(cellStatistics(data)).effects[0]!;
    expectClose(oneWay.value, expected.penguins.f, 1e-11);
    expectClose(oneWay.p, expected.penguins.p, 1e-9);
    const ranks = kruskalWallisAnalysis(data).effects[0]!;
    expect(ranks.form).toBe("chi-square");
    expectClose(ranks.value, expected.penguins.h, 1e-11);
    expectClose(ranks.p, expected.penguins.hP, 1e-9);
    const spread = assumptionFindings(data, { response: "mass" })[0]!;
    expectClose(spread.statistic, expected.penguins.spread, 1e-10);
    expectClose(spread.p, expected.penguins.spreadP, 1e-9);
  });
  it("species by sex, both adjustments, and species with flipper length as covariate, as least squares", () => {
    const data = factorData({ species, sex: rows.map((row) => String(row.Sex)) }, mass, { levels });
    expectEffects(factorialAnalysis({ data, factors: data.factors }), expected.penguins.factorial.equal);
    expectEffects(
      factorialAnalysis({ data, factors: data.factors, adjustment: "respecting marginality" }),
      expected.penguins.factorial.marginal,
    );
    const flipper = rows.map((row) => Number(row["Flipper Length (mm)"]));
    const adjusted = factorData({ species }, mass, { levels: { species: levels.species }, covariates: { flipper } });
    const analysis = factorialAnalysis({ data: adjusted, factors: adjusted.factors });
    expect(analysis.method).toBe("covariance");
    expectEffects(analysis, [...expected.penguins.covariance.equal, ...expected.penguins.covariance.covariateTests]);
  });
});

describe("yields of barley (vega-datasets; Immer, Hayes & Powers 1934), balanced", () => {
  const rows = dataset("barley.json");
  it("variety by site as least squares, and varieties ranked within site and year as SciPy", () => {
    const { varieties, sites, table, factorial, q, qP } = expected.barley;
    const data = factorData(
      { variety: rows.map((row) => String(row.variety)), site: rows.map((row) => String(row.site)) },
      rows.map((row) => Number(row.yield)),
      { levels: { variety: varieties, site: sites } },
    );
    expectEffects(factorialAnalysis({ data, factors: data.factors }), factorial.equal);
    const friedman = friedmanAnalysis({
      scores: Float64Array.from(table.flat()),
      subjects: table.length,
      cells: varieties.length,
    }).effects[0]!;
    expectClose(friedman.value, q, 1e-11);
    expectClose(friedman.p, qP, 1e-9);
  });
});
