/** Every row of the reference tables of central distributions, and random grids from mpmath. */
import { describe, it } from "vitest";
import * as numeric from "../../src/numeric/index.ts";
import { expectClose, gridRows, numberOf, referenceTable, reportWorstCases, type TableRow } from "./worst-case.ts";

reportWorstCases();

const tolerance = 1e-12;
type Read = (name: string) => number;

const tails: Readonly<Record<string, (read: Read) => number>> = {
  "standard normal, upper tail probability": (read) => numeric.normalUpperTail(read("z")),
  "Student t, upper tail probability": (read) => numeric.tUpperTail(read("t"), read("df")),
  "Fisher F, upper tail probability": (read) => numeric.fUpperTail(read("f"), read("df1"), read("df2")),
  "Fisher F, lower tail probability": (read) => numeric.fLowerTail(read("f"), read("df1"), read("df2")),
  "chi-square, upper tail probability": (read) => numeric.chiSquareUpperTail(read("x"), read("df")),
  "chi-square, lower tail probability": (read) => numeric.chiSquareLowerTail(read("x"), read("df")),
  "beta, lower tail probability": (read) => numeric.betaLowerTail(read("x"), read("a"), read("b")),
  "beta, upper tail probability": (read) => numeric.betaUpperTail(read("x"), read("a"), read("b")),
};

/** The same tails through their logarithm: exp undoes it, at the cost of |log p| roundings. */
const logTails: Readonly<Record<string, (read: Read) => number>> = {
  "standard normal, upper tail probability": (read) => numeric.normalLogUpperTail(read("z")),
  "Student t, upper tail probability": (read) => numeric.tLogUpperTail(read("t"), read("df")),
  "Fisher F, upper tail probability": (read) => numeric.fLogUpperTail(read("f"), read("df1"), read("df2")),
  "chi-square, upper tail probability": (read) => numeric.chiSquareLogUpperTail(read("x"), read("df")),
  "beta, lower tail probability": (read) => numeric.betaLogLowerTail(read("x"), read("a"), read("b")),
  "beta, upper tail probability": (read) => numeric.betaLogUpperTail(read("x"), read("a"), read("b")),
};

const quantiles: Readonly<Record<string, (read: Read) => number>> = {
  "Student t, upper quantile": (read) => numeric.tUpperQuantile(read("alpha"), read("df")),
  "Fisher F, upper quantile": (read) => numeric.fUpperQuantile(read("alpha"), read("df1"), read("df2")),
  "chi-square, upper quantile": (read) => numeric.chiSquareUpperQuantile(read("alpha"), read("df")),
};

const adjusted: Readonly<Record<string, (read: Read) => number>> = {
  "Bonferroni two-sided critical t": (read) =>
    numeric.tUpperQuantile(read("alpha") / (2 * read("comparisons")), read("df")),
  "Sidak two-sided critical t": (read) =>
    numeric.tUpperQuantile(-Math.expm1(Math.log1p(-read("alpha")) / read("comparisons")) / 2, read("df")),
  "Scheffe critical value for |estimate|/standard error": (read) =>
    Math.sqrt((read("means") - 1) * numeric.fUpperQuantile(read("alpha"), read("means") - 1, read("df"))),
};

function checkTable(table: string, functions: Readonly<Record<string, (read: Read) => number>>): void {
  for (const row of referenceTable(table)) {
    const compute = functions[row.method];
    if (compute === undefined) throw new Error(`no function for ${row.method}`);
    const actual = compute((name) => numberOf(row, name));
    expectClose(row.method, actual, row.value, tolerance, JSON.stringify(row.parameters));
  }
}

describe("central distributions agree with test/reference/tables to 1e-12", () => {
  it("tails, down to 1e-300 (computed, 20 digits)", () => checkTable("central-tails", tails));

  it("log tails (computed, 20 digits)", () => {
    for (const row of referenceTable("central-tails") as readonly TableRow[]) {
      const compute = logTails[row.method];
      if (compute === undefined) continue; // lower tails of F and chi-square have no log form at the door
      const actual = Math.exp(compute((name) => numberOf(row, name)));
      expectClose(`log of ${row.method}`, actual, row.value, tolerance, JSON.stringify(row.parameters));
    }
  });

  it("quantiles (computed, 20 digits)", () => checkTable("central-quantiles", quantiles));

  it("adjusted critical values (computed, 20 digits)", () => checkTable("adjusted-critical-values", adjusted));
});

describe("central functions agree with mpmath on random grids to 1e-12", () => {
  const functions: Readonly<Record<string, (...values: number[]) => number>> = {
    normalUpperTail: numeric.normalUpperTail,
    normalLogUpperTail: numeric.normalLogUpperTail,
    errorFunction: numeric.errorFunction,
    errorFunctionComplement: numeric.errorFunctionComplement,
    logGamma: numeric.logGamma,
    fUpperTail: numeric.fUpperTail,
    fLowerTail: numeric.fLowerTail,
    tUpperTail: numeric.tUpperTail,
    betaLowerTail: numeric.betaLowerTail,
    betaUpperTail: numeric.betaUpperTail,
    chiSquareUpperTail: numeric.chiSquareUpperTail,
    chiSquareLowerTail: numeric.chiSquareLowerTail,
  };
  it.each(Object.entries(functions))("%s", (name, compute) => {
    for (const row of gridRows(name)) {
      expectClose(name, compute(...row.arguments), row.value, tolerance, row.arguments.join(", "));
    }
  });

  it("logBeta, to 1e-12 of the larger of 1 and its size (it passes through zero)", () => {
    for (const row of gridRows("logBeta")) {
      const [a, b] = row.arguments as [number, number];
      const reference = Number(row.value);
      const scale = Math.max(1, Math.abs(reference));
      expectClose("logBeta", (numeric.logBeta(a, b) - reference) / scale + 1, "1", tolerance, row.arguments.join(", "));
    }
  });
});
