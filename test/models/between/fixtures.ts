import { readFileSync } from "node:fs";

/** Expected values made by generate-between.py (NumPy least squares, SciPy). */
export interface GroupCase {
  readonly groups: readonly (readonly number[])[];
  readonly oneWay: { readonly f: number; readonly p: number };
  readonly welch: { readonly f: number; readonly df2: number; readonly p: number };
  readonly brownForsythe: { readonly f: number; readonly df2: number; readonly p: number };
  readonly kruskal: { readonly h: number; readonly p: number };
  readonly levene: { readonly f: number; readonly p: number };
  readonly medianSpread: { readonly f: number; readonly p: number };
  readonly partialEtaSquared: readonly [number, number];
  readonly shapiro: { readonly w: number; readonly p: number };
  readonly bartlett: { readonly statistic: number; readonly p: number };
  readonly skew: number;
  readonly pairs: readonly {
    readonly i: number;
    readonly j: number;
    readonly estimate: number;
    readonly pooledStandardError: number;
    readonly pooledP: number;
    readonly g: number;
    readonly gLower: number;
    readonly gUpper: number;
    readonly welchT: number;
    readonly welchDf: number;
    readonly welchP: number;
  }[];
}

export interface TermCase {
  readonly effect: readonly number[];
  readonly sumOfSquares: number;
  readonly df: number;
  readonly f: number;
  readonly p: number;
}

export interface FactorialCase {
  readonly levels: readonly number[];
  readonly codes: readonly (readonly number[])[];
  readonly y: readonly number[];
  readonly covariates: readonly (readonly number[])[];
  readonly error: { readonly df: number; readonly sumOfSquares: number };
  readonly rSquared: number;
  readonly equal: readonly TermCase[];
  readonly marginal: readonly TermCase[];
  readonly covariateTests: readonly TermCase[];
  readonly leverage: readonly number[];
  readonly studentised: readonly (number | null)[];
  readonly cook: readonly (number | null)[];
  readonly adjusted?: readonly { readonly cell: number; readonly mean: number; readonly standardError: number }[];
  readonly slopes?: readonly number[];
  readonly adjustedDifference?: { readonly estimate: number; readonly standardError: number };
  readonly slopesTests?: readonly {
    readonly f: number;
    readonly df1: number;
    readonly df2: number;
    readonly p: number;
  }[];
}

export const betweenFixtures = JSON.parse(readFileSync(new URL("fixtures/between.json", import.meta.url), "utf8")) as {
  readonly groups: readonly GroupCase[];
  readonly factorial: readonly FactorialCase[];
};
