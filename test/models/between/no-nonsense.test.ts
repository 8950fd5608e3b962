import fc from "fast-check";
import { describe, it } from "vitest";
import type { ModelData } from "../../../src/design/types.ts";
import { silentWatch } from "../../../src/host/index.ts";
import {
  adjustedMeans,
  assumptionFindings,
  betweenContrasts,
  bootstrapContrasts,
  brownForsytheAnalysis,
  cellQuartiles,
  cellStatistics,
  contrastResamples,
  describeCells,
  factorialAnalysis,
  friedmanAnalysis,
  friedmanContrasts,
  homogeneousSlopes,
  kruskalWallisAnalysis,
  ModelError,
  oneWayAnalysis,
  permutationOmnibus,
  rankContrasts,
  residualPoints,
  scoreTable,
  welchAnalysis,
  welchFactorialAnalysis,
} from "../../../src/models/index.ts";
import { modelData } from "../within/model-data.ts";
import { factorData } from "./between-data.ts";

/** Every number in a result is finite, but for degrees of freedom that may be infinite. */
function expectNumbers(result: unknown, path: string): void {
  if (typeof result === "number") {
    const allowed = Number.isFinite(result) || (result === Number.POSITIVE_INFINITY && /\.df/.test(path));
    if (!allowed) throw new Error(`${path} is ${result}`);
  } else if (result !== null && typeof result === "object") {
    for (const [key, value] of Object.entries(result)) expectNumbers(value, `${path}.${key}`);
  }
}

/** A result without nonsense, or a refusal with a code and advice; anything else is a mistake. */
function soundOrRefused(name: string, work: () => unknown): void {
  let result: unknown;
  try {
    result = work();
  } catch (error) {
    if (error instanceof ModelError && error.code !== "" && error.advice !== "") return;
    throw error;
  }
  expectNumbers(result, name);
}

// Few distinct values: ties, cells without spread, cells with one observation or none.
const value = fc.oneof(fc.integer({ min: 0, max: 3 }), fc.constantFrom(0.1, 0.3, 1e9 + 0.1, -2.5));
const rows = fc.array(
  fc.tuple(fc.integer({ min: 0, max: 2 }), fc.integer({ min: 0, max: 1 }), value, fc.integer({ min: 0, max: 2 })),
  {
    minLength: 1,
    maxLength: 14,
  },
);
const options = { mostExact: 300, resamples: 120, seed: 3, watch: silentWatch };

function contrastsFor(cells: number) {
  const pick = (plus: number, minus: number) =>
    Float64Array.from({ length: cells }, (_, cell) => (cell === plus ? 1 : cell === minus ? -1 : 0));
  return [
    { name: "second - first", weights: pick(1, 0) },
    { name: "last - first", weights: pick(cells - 1, 0) },
  ];
}

function everything(data: ModelData): void {
  const statistics = cellStatistics(data);
  const contrasts = contrastsFor(data.cellCount);
  const factors = data.factors;
  soundOrRefused("one-way", () => oneWayAnalysis(statistics));
  soundOrRefused("welch", () => welchAnalysis(statistics));
  soundOrRefused("brown-forsythe", () => brownForsytheAnalysis(statistics));
  soundOrRefused("welch factorial", () => welchFactorialAnalysis(statistics, factors));
  for (const adjustment of ["cells weigh equally", "respecting marginality"] as const) {
    soundOrRefused(`factorial ${adjustment}`, () => factorialAnalysis({ data, factors, adjustment }));
  }
  for (const variances of ["equal", "unequal"] as const) {
    for (const standardiser of ["pooled spread", "average spread", "control spread", "difference spread"] as const) {
      soundOrRefused(`comparisons ${variances} ${standardiser}`, () =>
        betweenContrasts({ data, contrasts, variances, standardiser, controlCells: [0] }),
      );
    }
  }
  soundOrRefused("describe", () => describeCells(statistics, 0.95));
  soundOrRefused("quartiles", () => cellQuartiles(data));
  soundOrRefused("kruskal-wallis", () => kruskalWallisAnalysis(data));
  soundOrRefused("dunn", () => rankContrasts(data, contrasts, "dunn"));
  soundOrRefused("conover", () => rankContrasts(data, contrasts, "conover"));
  soundOrRefused("findings", () => assumptionFindings(data, { response: "y" }));
  soundOrRefused("residuals", () => residualPoints(data));
  soundOrRefused("slopes", () => homogeneousSlopes(data));
  soundOrRefused("adjusted means", () => adjustedMeans(data, 0.95));
  soundOrRefused("rearranged omnibus", () => permutationOmnibus(data, options));
  soundOrRefused("rearranged comparisons", () => {
    const found = contrastResamples(data, contrasts, options);
    return Array.from({ length: Math.min(found.count, 20) }, (_, index) => {
      const target = new Float64Array(contrasts.length);
      found.fill(index, target);
      return Array.from(target);
    });
  });
  soundOrRefused("bootstrap", () => bootstrapContrasts(data, contrasts, { ...options, level: 0.95 }));
}

describe("whatever the data, a result has numbers or there is a refusal with a code and advice", () => {
  it("between subjects, with and without a covariate", () => {
    fc.assert(
      fc.property(rows, fc.boolean(), (table, withCovariate) => {
        const columns = { a: table.map(([a]) => `a${a}`), b: table.map(([, b]) => `b${b}`) };
        const levels = { a: ["a0", "a1", "a2"], b: ["b0", "b1"] };
        const covariates = withCovariate ? { x: table.map(([, , , x]) => x) } : {};
        everything(
          factorData(
            columns,
            table.map(([, , y]) => y),
            { levels, covariates },
          ),
        );
      }),
      { numRuns: 60, seed: 20250611 },
    );
  });
  it("within subjects and mixed", () => {
    const scores = fc.array(fc.tuple(fc.integer({ min: 0, max: 4 }), fc.integer({ min: 0, max: 2 }), value), {
      minLength: 2,
      maxLength: 24,
    });
    fc.assert(
      fc.property(scores, fc.boolean(), (table, groups) => {
        // Subjects are renumbered, so that each unit has rows.
        const names = [...new Set(table.map(([subject]) => subject))];
        const data = modelData({
          response: table.map(([, , y]) => y),
          factors: [
            ...(groups ? [{ name: "g", within: false, levels: 2, codes: table.map(([subject]) => subject % 2) }] : []),
            { name: "f", within: true, levels: 3, codes: table.map(([, cell]) => cell) },
          ],
          units: { subject: table.map(([subject]) => names.indexOf(subject)) },
        });
        const contrasts = contrastsFor(data.cellCount);
        soundOrRefused("findings", () => assumptionFindings(data, { response: "y" }));
        soundOrRefused("residuals", () => residualPoints(data));
        soundOrRefused("ranks", () => friedmanAnalysis(scoreTable(data)));
        soundOrRefused("rearranged omnibus", () => permutationOmnibus(data, options));
        soundOrRefused("bootstrap", () => bootstrapContrasts(data, contrasts, { ...options, level: 0.95 }));
        soundOrRefused("rearranged comparisons", () => {
          const found = contrastResamples(data, contrasts, options);
          const target = new Float64Array(contrasts.length);
          found.fill(0, target);
          return Array.from(target);
        });
      }),
      { numRuns: 150, seed: 20250611 },
    );
  });
  it("within subjects, by ranks", () => {
    fc.assert(
      fc.property(
        fc.integer({ min: 1, max: 5 }),
        fc.integer({ min: 1, max: 4 }),
        fc.array(value, { minLength: 20, maxLength: 20 }),
        (subjects, cells, list) => {
          const table = { scores: Float64Array.from(list.slice(0, subjects * cells)), subjects, cells };
          soundOrRefused("friedman", () => friedmanAnalysis(table));
          if (cells < 2) return;
          soundOrRefused("nemenyi", () => friedmanContrasts(table, contrastsFor(cells), "nemenyi"));
          soundOrRefused("conover", () => friedmanContrasts(table, contrastsFor(cells), "conover"));
        },
      ),
      { numRuns: 300, seed: 20250611 },
    );
  });
});
