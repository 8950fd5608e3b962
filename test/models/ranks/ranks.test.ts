import { readFileSync } from "node:fs";
import { describe, expect, it } from "vitest";
import type { Contrast } from "../../../src/design/types.ts";
import {
  friedmanAnalysis,
  friedmanContrasts,
  kruskalWallisAnalysis,
  midRanks,
  rankContrasts,
} from "../../../src/models/index.ts";
import { normalUpperTail, tTwoSidedTail } from "../../../src/numeric/index.ts";
import { groupData } from "../between/between-data.ts";
import { expectClose } from "../between/close.ts";
import { betweenFixtures } from "../between/fixtures.ts";

type Row = Readonly<Record<string, number>>;
const fixtures = JSON.parse(readFileSync(new URL("fixtures/ranks.json", import.meta.url), "utf8")) as {
  readonly kruskal: readonly { groups: number[][]; h: number; p: number; exactP: number; arrangements: number }[];
  readonly comparisons: readonly { groups: number[][]; rows: Row[] }[];
  readonly friedman: readonly {
    table: number[][];
    q: number;
    p: number;
    exactP: number | null;
    ties: boolean;
    rows: Row[];
  }[];
};

const dataOf = (groups: readonly (readonly number[])[]) =>
  groupData(
    groups.flatMap((values, group) => values.map(() => `g${group}`)),
    groups.flat(),
  );
const pairs = (rows: readonly Row[], cells: number): Contrast[] =>
  rows.map(({ i, j }) => ({
    name: `${j} - ${i}`,
    weights: Float64Array.from({ length: cells }, (_, cell) => (cell === j ? 1 : cell === i ? -1 : 0)),
  }));

describe("Kruskal-Wallis", () => {
  it.each(fixtures.kruskal.map((it) => [it.groups.map((values) => values.length).join(", "), it] as const))(
    "exact p equals brute force over all arrangements, chi-square p SciPy's: sizes %s",
    (_, wanted) => {
      const [exact, large] = kruskalWallisAnalysis(dataOf(wanted.groups)).effects;
      expect([exact!.form, exact!.exact, large!.form]).toEqual(["exact", true, "chi-square"]);
      expectClose(exact!.value, wanted.h, 1e-12, "H");
      expectClose(exact!.p, wanted.exactP, 1e-12, "exact p");
      expectClose(large!.p, wanted.p, 1e-10, "p");
    },
  );
  it("agrees with SciPy on larger groups", () => {
    for (const wanted of betweenFixtures.groups) {
      const effects = kruskalWallisAnalysis(dataOf(wanted.groups)).effects;
      const large = effects.find((effect) => effect.form === "chi-square")!;
      expectClose(large.value, wanted.kruskal.h, 1e-11, "H");
      expectClose(large.p, wanted.kruskal.p, 1e-10, "p");
    }
  });
  it("takes three groups of five exactly, and their 5% point is the tabled one", () => {
    // Kruskal & Wallis 1952, table of exact tails (recalled): sizes 5, 5, 5: H >= 5.780 has probability 0.049.
    const exact = kruskalWallisAnalysis(
      dataOf([
        [1, 2, 3, 4, 13],
        [5, 6, 7, 8, 14],
        [9, 10, 11, 12, 15],
      ]),
    ).effects[0]!;
    expect(exact.form).toBe("exact");
    expectClose(exact.value, 5.78, 1e-12);
    expect(exact.p!.toFixed(3)).toBe("0.049");
  });
  it("depends on the order of values only, not on the order of groups", () => {
    const groups = [
      [1, 2, 2, 7],
      [3, 4, 9],
      [5, 8, 8],
    ];
    const base = kruskalWallisAnalysis(dataOf(groups)).effects[0]!;
    const stretched = kruskalWallisAnalysis(dataOf([...groups].reverse().map((list) => list.map(Math.exp))))
      .effects[0]!;
    expectClose(stretched.value, base.value!, 1e-12);
    expectClose(stretched.p, base.p!, 1e-12);
  });
  it("equal observations everywhere are an error", () => {
    expect(() =>
      kruskalWallisAnalysis(
        dataOf([
          [1, 1],
          [1, 1],
        ]),
      ),
    ).toThrow(expect.objectContaining({ code: "zero-variance" }));
  });
});

describe("comparisons of mean ranks between groups (formulas of the papers written out in NumPy)", () => {
  it.each(fixtures.comparisons.map((it) => [it.groups.length, it] as const))("%i groups with ties", (count, wanted) => {
    const dunn = rankContrasts(dataOf(wanted.groups), pairs(wanted.rows, count), "dunn");
    const conover = rankContrasts(dataOf(wanted.groups), pairs(wanted.rows, count), "conover");
    for (const [index, row] of wanted.rows.entries()) {
      const z = dunn.estimates[index]! / dunn.standardErrors[index]!;
      const t = conover.estimates[index]! / conover.standardErrors[index]!;
      expect(dunn.df[index]).toBe(Number.POSITIVE_INFINITY);
      expectClose(dunn.estimates[index], row.difference!, 1e-12, "difference");
      expectClose(z, row.dunnZ!, 1e-12, "z");
      expectClose(2 * normalUpperTail(Math.abs(z)), row.dunnP!, 1e-10, "Dunn's p");
      expectClose(t, row.conoverT!, 1e-12, "t");
      expectClose(tTwoSidedTail(t, conover.df[index]!), row.conoverP!, 1e-10, "Conover's p");
    }
  });
});

describe("Friedman", () => {
  it.each(fixtures.friedman.map((it) => [`${it.table.length} x ${it.table[0]!.length}, ties ${it.ties}`, it] as const))(
    "statistic and p as SciPy's, exact p as brute force, comparisons as written out: %s",
    (_, wanted) => {
      const cells = wanted.table[0]!.length;
      const table = { scores: Float64Array.from(wanted.table.flat()), subjects: wanted.table.length, cells };
      const effects = friedmanAnalysis(table).effects;
      const large = effects.find((effect) => effect.form === "chi-square")!;
      expectClose(large.value, wanted.q, 1e-11, "Q");
      expectClose(large.p, wanted.p, 1e-10, "p");
      const exact = effects.find((effect) => effect.form === "exact");
      if (wanted.exactP !== null) expectClose(exact!.p, wanted.exactP, 1e-12, "exact p");
      const nemenyi = friedmanContrasts(table, pairs(wanted.rows, cells), "nemenyi");
      const conover = friedmanContrasts(table, pairs(wanted.rows, cells), "conover");
      for (const [index, row] of wanted.rows.entries()) {
        expect(nemenyi.n[index]).toBe(wanted.table.length);
        if (row.difference === 0) continue;
        const z = nemenyi.estimates[index]! / nemenyi.standardErrors[index]!;
        const t = conover.estimates[index]! / conover.standardErrors[index]!;
        expect(Math.abs(z - row.nemenyiZ!)).toBeLessThan(1e-11);
        if (!wanted.ties) expect(Math.abs(z - row.nemenyiUntied!)).toBeLessThan(1e-11);
        expect(Math.abs(t - row.conoverT!)).toBeLessThan(1e-11);
        expect(Math.abs(tTwoSidedTail(t, conover.df[index]!) - row.conoverP!)).toBeLessThan(1e-11);
      }
    },
  );
  it("for two conditions the exact p is the sign test's (closed form)", () => {
    const scores = Float64Array.from([1, 2, 3, 5, 2, 9, 4, 6, 7, 1, 1, 3, 2, 8].flat());
    const exact = friedmanAnalysis({ scores, subjects: 7, cells: 2 }).effects[0]!;
    // Six of seven subjects agree: two-sided sign test (1 + 7) / 2^7 * 2.
    expectClose(exact.p, (2 * 8) / 128, 1e-12);
  });
  it("one subject, one condition and equal scores are errors", () => {
    const refused = (scores: number[], subjects: number, cells: number, code: string) =>
      expect(() => friedmanAnalysis({ scores: Float64Array.from(scores), subjects, cells })).toThrow(
        expect.objectContaining({ code }),
      );
    refused([1, 2, 3], 1, 3, "one-subject");
    refused([1, 2, 3], 3, 1, "too-few-groups");
    refused([1, 1, 2, 2], 2, 2, "zero-variance");
  });
});

describe("mid-ranks", () => {
  it("share the mean of the places of equal values", () => {
    expect(Array.from(midRanks([10, 20, 10, 5, 20, 20]))).toEqual([2.5, 5, 2.5, 1, 5, 5]);
  });
  it("refuse what is not a number", () => {
    expect(() => midRanks([1, Number.NaN])).toThrow("finite numbers");
  });
});
