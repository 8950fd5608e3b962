/** Every row of the reference tables of noncentral distributions, of power and of the maximum F ratio; grids from mpmath. */
import { describe, expect, it } from "vitest";
import * as numeric from "../../src/numeric/index.ts";
import { expectClose, gridRows, numberOf, referenceTable, reportWorstCases, type TableRow } from "./worst-case.ts";

reportWorstCases();

const tolerance = 1e-10;
type Read = (name: string) => number;

const functions: Readonly<Record<string, (read: Read) => number>> = {
  "noncentral t, lower tail probability": (read) =>
    numeric.noncentralTLowerTail(read("t"), read("df"), read("noncentrality")),
  "noncentral t, upper tail probability": (read) =>
    numeric.noncentralTUpperTail(read("t"), read("df"), read("noncentrality")),
  "noncentral F, lower tail probability": (read) =>
    numeric.noncentralFLowerTail(read("f"), read("df1"), read("df2"), read("noncentrality")),
  "noncentral F, upper tail probability": (read) =>
    numeric.noncentralFUpperTail(read("f"), read("df1"), read("df2"), read("noncentrality")),
  "noncentral chi-square, lower tail probability": (read) =>
    numeric.noncentralChiSquareLowerTail(read("x"), read("df"), read("noncentrality")),
  "noncentral chi-square, upper tail probability": (read) =>
    numeric.noncentralChiSquareUpperTail(read("x"), read("df"), read("noncentrality")),
  "largest over smallest of k variances, upper tail probability": (read) =>
    numeric.maximumFRatioUpperTail(read("ratio"), { variances: read("variances"), df: read("df_each") }),
  "largest over smallest of k variances, upper 5% critical value": (read) =>
    numeric.maximumFRatioUpperQuantile(read("alpha"), { variances: read("variances"), df: read("df_each") }),
};

describe("noncentral distributions agree with test/reference/tables to 1e-10", () => {
  it.each(["noncentral-t", "noncentral-f", "noncentral-chi-square", "maximum-f-ratio"])("%s", (table) => {
    for (const row of referenceTable(table)) {
      const compute = functions[row.method];
      if (compute === undefined) throw new Error(`no function for ${row.method}`);
      const actual = compute((name) => numberOf(row, name));
      expectClose(row.method, actual, row.value, tolerance, JSON.stringify(row.parameters));
    }
  });

  it.each([
    ["noncentralTUpperTail", numeric.noncentralTUpperTail],
    ["noncentralChiSquareLowerTail", numeric.noncentralChiSquareLowerTail],
  ] as const)("%s agrees with mpmath quadrature of the definition", (name, compute) => {
    for (const row of gridRows(name)) {
      const [x, df, noncentrality] = row.arguments as [number, number, number];
      expectClose(`${name}, grid`, compute(x, df, noncentrality), row.value, tolerance, row.arguments.join(", "));
    }
  });
});

/** "0.05/6" is a corrected error rate. */
function errorRateOf(row: TableRow): number {
  const [numerator, denominator] = String(row.parameters.alpha).split("/");
  return Number(numerator) / Number(denominator ?? 1);
}

function powerOfF(groups: number, size: number, effect: number, errorRate: number): number {
  const df1 = groups - 1;
  const df2 = groups * (size - 1);
  return numeric.noncentralFUpperTail(
    numeric.fUpperQuantile(errorRate, df1, df2),
    df1,
    df2,
    groups * size * effect ** 2,
  );
}

function powerOfT(df: number, noncentrality: number, errorRate: number): number {
  const critical = numeric.tUpperQuantile(errorRate / 2, df);
  return (
    numeric.noncentralTUpperTail(critical, df, noncentrality) +
    numeric.noncentralTLowerTail(-critical, df, noncentrality)
  );
}

function leastSize(power: (size: number) => number, wanted: number): number {
  let size = 2;
  while (power(size) < wanted) size += 1;
  return size;
}

describe("power and sample sizes of test/reference/tables/power follow from the noncentral tails", () => {
  for (const row of referenceTable("power")) {
    const read = (name: string) => numberOf(row, name);
    it(`${row.method} ${JSON.stringify(row.parameters)}`, () => {
      const errorRate = errorRateOf(row);
      switch (row.method) {
        case "power of the one-way F test": {
          const actual = powerOfF(read("groups"), read("n_per_group"), read("effect_f"), errorRate);
          return expectClose(row.method, actual, row.value, tolerance, JSON.stringify(row.parameters));
        }
        case "power of the two-sided two-sample t test, equal sizes": {
          const size = read("n_per_group");
          const actual = powerOfT(2 * size - 2, read("effect_d") * Math.sqrt(size / 2), errorRate);
          return expectClose(row.method, actual, row.value, tolerance, JSON.stringify(row.parameters));
        }
        case "power of the two-sided paired t test": {
          const pairs = read("pairs");
          const actual = powerOfT(pairs - 1, read("effect_dz") * Math.sqrt(pairs), errorRate);
          return expectClose(row.method, actual, row.value, tolerance, JSON.stringify(row.parameters));
        }
        case "least n per group for the one-way F test":
          return expect(
            leastSize((size) => powerOfF(read("groups"), size, read("effect_f"), errorRate), read("power")),
          ).toBe(Number(row.value));
        case "least n per group for the two-sided two-sample t test":
          return expect(
            leastSize(
              (size) => powerOfT(2 * size - 2, read("effect_d") * Math.sqrt(size / 2), errorRate),
              read("power"),
            ),
          ).toBe(Number(row.value));
        default:
          throw new Error(`no function for ${row.method}`);
      }
    });
  }
});
