import { readFileSync } from "node:fs";
import { describe, expect, it } from "vitest";
import { chiSquareUpperTail } from "../../../src/numeric/index.ts";
import {
  effectBasis,
  greenhouseGeisserEpsilon,
  huynhFeldtEpsilon,
  mauchlyTest,
} from "../../../src/models/within/index.ts";

interface Row {
  readonly method: string;
  readonly parameters: {
    readonly matrix_name: string;
    readonly covariance: readonly (readonly string[])[];
    readonly subjects?: number;
    readonly groups?: number;
  };
  readonly value: string;
  readonly source: string;
}

// test/reference/tables/sphericity.json: computed for this project to 20 digits and more, source beside each row.
const rows: Row[] = JSON.parse(
  readFileSync(new URL("../../reference/tables/sphericity.json", import.meta.url), "utf8"),
);

/** Covariance of orthonormal contrast scores. */
function contrastCovariance(covariance: readonly (readonly string[])[]): number[][] {
  const basis = effectBasis([covariance.length], [true]);
  const p = covariance.length - 1;
  const value = (i: number, j: number) => Number(covariance[i]![j]!);
  return Array.from({ length: p }, (_, a) =>
    Array.from({ length: p }, (__, b) => {
      let sum = 0;
      for (let i = 0; i <= p; i++) for (let j = 0; j <= p; j++) sum += basis[i]![a]! * value(i, j) * basis[j]![b]!;
      return sum;
    }),
  );
}

function computed(row: Row): number {
  const covariance = contrastCovariance(row.parameters.covariance);
  const p = covariance.length;
  const subjects = row.parameters.subjects ?? 1000;
  const groups = row.parameters.groups ?? 1;
  const epsilon = greenhouseGeisserEpsilon(covariance);
  const mauchly = mauchlyTest(covariance, subjects - groups);
  switch (row.method) {
    case "Greenhouse-Geisser (Box) epsilon":
      return epsilon;
    case "Huynh-Feldt epsilon, Lecoutre's correction, uncapped":
      return huynhFeldtEpsilon(epsilon, p, subjects, groups);
    case "Huynh-Feldt epsilon, original form, uncapped":
      // The same formula with the number of subjects in place of the error df plus one.
      return (
        (huynhFeldtEpsilon(epsilon, p, subjects, groups) * (p * (subjects - groups - p * epsilon)) +
          (groups - 1) * p * epsilon) /
        (p * (subjects - groups - p * epsilon))
      );
    case "Mauchly W":
      return mauchly?.w ?? 1;
    case "Mauchly chi-square approximation":
      return mauchly!.statistic;
    case "Mauchly p-value, second order":
      return mauchly!.p;
    case "Mauchly p-value, exact for three conditions":
      // Box's expansion has no second-order term for three conditions and is then exact.
      return mauchly!.p;
    case "Mauchly p-value, first order":
      return chiSquareUpperTail(mauchly!.statistic, mauchly!.df);
    default:
      throw new Error(`no check for ${row.method}`);
  }
}

describe("sphericity", () => {
  it("has rows to check", () => expect(rows.length).toBeGreaterThan(40));
  it.each(rows)("$method of matrix $parameters.matrix_name, $parameters.subjects subjects ($source)", (row) => {
    const expected = Number(row.value);
    expect(Math.abs(computed(row) - expected)).toBeLessThanOrEqual(1e-12 * Math.max(1, Math.abs(expected)));
  });
  it("has no test where there are fewer error degrees of freedom than contrasts", () => {
    expect(
      mauchlyTest(
        [
          [1, 0],
          [0, 1],
        ],
        1,
      ),
    ).toBeNull();
  });
});
