import { describe, expect, it } from "vitest";
import { type CorrectionName, holdFamily } from "../../src/families/index.ts";
import { closedAdjustedP, problemOf, randomP, subsets, testRandom } from "./problems.ts";

const cases = 2000;
const tolerance = 1e-12;
const sorted = (p: readonly number[], rows: readonly number[]) => rows.map((i) => p[i]!).sort((a, b) => a - b);

function expectSame(found: readonly number[], wanted: readonly number[], what: string, within = tolerance) {
  for (const [i, value] of wanted.entries())
    if (!(Math.abs(found[i]! - value) <= within * Math.max(value, 1e-300)))
      expect.fail(`${what}: row ${i} is ${found[i]}, the closure says ${value}`);
}

/** Runs the cases with 1 to 6 hypotheses each; `local` is the p of one intersection. */
function againstClosure(
  name: CorrectionName,
  seed: number,
  local: (p: readonly number[], rows: readonly number[], shares: Shares) => number,
  declare: (random: () => number, count: number) => Shares = () => ({ weights: [], passes: [] }),
) {
  const random = testRandom(seed);
  const all = [0, 1, 2, 3, 4, 5, 6].map((count) => subsets(count));
  for (let k = 0; k < cases; k++) {
    const count = 1 + Math.floor(random() * 6);
    const p = randomP(random, count);
    const shares = declare(random, count);
    const graph = shares.weights.length > 0 ? shares : null;
    const found = holdFamily(name, problemOf({ p, graph })).adjustedP;
    const wanted = closedAdjustedP(p, (rows) => local(p, rows, shares), all[count]);
    expectSame(found, wanted, `${name}, seed ${seed}, case ${k}, p ${p}, ${JSON.stringify(graph)}`);
  }
}

interface Shares {
  readonly weights: readonly number[];
  readonly passes: readonly (readonly number[])[];
}

/** Shares that sum to one, with zeros among them. */
function randomShares(random: () => number, count: number, zeros = 0.3): number[] {
  const raw = Array.from({ length: count }, () => (random() < zeros ? 0 : random()));
  const sum = raw.reduce((a, b) => a + b, 0);
  return sum === 0 ? raw.map((_, i) => (i === 0 ? 1 : 0)) : raw.map((value) => value / sum);
}

function randomGraph(random: () => number, count: number): Shares {
  const passes = Array.from({ length: count }, (_, i) => {
    const others = randomShares(random, count - 1);
    const part = random() < 0.5 ? 1 : random();
    return Array.from({ length: count }, (__, j) => (i === j ? 0 : part * others[j < i ? j : j - 1]!));
  });
  return { weights: randomShares(random, count), passes };
}

/** Bonferroni's p of an intersection with shares: the smallest p over its share. */
const weighted = (p: readonly number[], rows: readonly number[], share: (row: number) => number) =>
  Math.min(1, ...rows.map((row) => (share(row) > 0 ? p[row]! / share(row) : Number.POSITIVE_INFINITY)));

/**
 * The shares that an intersection holds when all others have passed theirs on: a walk that starts by the weights and moves by the passing
 * shares, until a member of the intersection catches it. The visits of the others are summed over four million steps by doubling,
 * S(2n) = S(n) + B^n S(n). A second route to what the graph's updates do.
 */
function caughtShares({ weights, passes }: Shares, rows: readonly number[]): number[] {
  const gone = weights.map((_, i) => i).filter((i) => !rows.includes(i));
  const multiply = (a: number[][], b: number[][]) =>
    a.map((row) => row.map((_, j) => row.reduce((sum, value, k) => sum + value * b[k]![j]!, 0)));
  let step = gone.map((i) => gone.map((j) => passes[i]![j]!));
  let visits: number[][] = gone.map((_, i) => gone.map((__, j) => (i === j ? 1 : 0)));
  for (let doubling = 0; doubling < 22; doubling++) {
    const later = multiply(step, visits);
    visits = visits.map((row, i) => row.map((value, j) => value + later[i]![j]!));
    step = multiply(step, step);
    if (step.every((row) => row.every((value) => value < 1e-18))) break;
  }
  return weights.map((weight, row) => {
    if (!rows.includes(row)) return 0;
    let share = weight;
    for (const [k, from] of gone.entries())
      for (const [l, via] of gone.entries()) share += weights[from]! * visits[k]![l]! * passes[via]![row]!;
    return share;
  });
}

describe("closed testing (Marcus, Peritz & Gabriel 1976), 2,000 random families of 1 to 6 each", () => {
  it("holm is the closure of Bonferroni's test", () =>
    againstClosure("holm", 11, (p, rows) => rows.length * sorted(p, rows)[0]!));

  it("hochberg is the closure of the test by its own step-up levels", () =>
    againstClosure("hochberg", 12, (p, rows) =>
      Math.min(...sorted(p, rows).map((value, k) => (rows.length - k) * value)),
    ));

  it("hommel is the closure of the Simes test", () =>
    againstClosure("hommel", 13, (p, rows) =>
      Math.min(...sorted(p, rows).map((value, k) => (rows.length * value) / (k + 1))),
    ));

  it("fixed sequence is the closure of testing the first of each intersection", () =>
    againstClosure("fixed sequence", 14, (p, rows) => p[rows[0]!]!));

  it("fallback is the closure of Bonferroni's test with the shares of the gaps before each row", () =>
    againstClosure(
      "fallback",
      15,
      (p, rows, { weights }) =>
        weighted(p, rows, (row) => {
          const before = Math.max(-1, ...rows.filter((other) => other < row));
          return weights.slice(before + 1, row + 1).reduce((a, b) => a + b, 0);
        }),
      (random, count) => ({ weights: randomShares(random, count), passes: [] }),
    ));

  it("graph is the closure of Bonferroni's test with the shares that a walk over the graph brings", () =>
    againstClosure(
      "graph",
      16,
      (p, rows, shares) => {
        const caught = caughtShares(shares, rows);
        return weighted(p, rows, (row) => caught[row]!);
      },
      randomGraph,
    ));

  it("resampling is the closure of the largest statistic over the same arrangements", () => {
    const random = testRandom(17);
    for (let k = 0; k < cases; k++) {
      const count = 1 + Math.floor(random() * 6);
      const size = 40;
      // Small whole numbers, so that ties are common.
      const values = Array.from({ length: size }, () =>
        Array.from({ length: count }, () => Math.round(6 * (random() + random() - 1))),
      );
      values[0] = values[0]!.map((value) => value + Math.round(4 * (random() - 0.3)));
      const sides = (["two-sided", "upper", "lower"] as const)[k % 3]!;
      const sided = (value: number) => (sides === "two-sided" ? Math.abs(value) : sides === "upper" ? value : -value);
      const found = holdFamily(
        "resampling",
        problemOf({
          p: new Array(count).fill(0.5),
          sides,
          resamples: { count: size, exact: true, fill: (index, into) => into.set(values[index]!) },
        }),
      );
      const largest = (line: readonly number[], rows: readonly number[]) =>
        Math.max(...rows.map((i) => sided(line[i]!)));
      const wanted = closedAdjustedP(
        found.p,
        (rows) => values.filter((line) => largest(line, rows) >= largest(values[0]!, rows)).length / size,
      );
      expectSame(found.adjustedP, wanted, `resampling, case ${k}`);
    }
  });
});
