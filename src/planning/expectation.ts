import { cellCount, cellLabels, levelsOfCell } from "../design/index.ts";
import type { FactorDeclaration } from "../design/types.ts";
import { symmetricEigen } from "../numeric/index.ts";
import { PlanningError } from "./problem.ts";
import type { ExpectedMeans, Expectation, PlannedDeclaration, PlanningDesign } from "./types.ts";

type Factors = readonly FactorDeclaration[];

const named = (names: readonly string[]) => names.map((name) => `"${name}"`).join(", ");

function factorOf(factors: Factors, name: string): FactorDeclaration {
  const found = factors.find((factor) => factor.name === name);
  if (found !== undefined) return found;
  throw new PlanningError(
    "unknown-factor",
    `There is no factor "${name}".`,
    `Declared are ${named(factors.map((factor) => factor.name))}.`,
    name,
  );
}

/** Values of a clause over the cross of its own factors, in their order. */
function ownCells(factors: Factors, clause: ExpectedMeans, what: string): { own: Factors; values: number[] } {
  const own = clause.factors.map((name) => factorOf(factors, name));
  const values = new Array<number>(cellCount(own)).fill(Number.NaN);
  for (const { levels, value } of clause.values) {
    let cell = 0;
    for (const [index, factor] of own.entries()) {
      const level = factor.levels.indexOf(levels[index]!);
      if (level < 0) {
        throw new PlanningError(
          "unknown-level",
          `"${levels[index]}" is not a level of "${factor.name}".`,
          `Its levels are ${named(factor.levels)}.`,
          levels[index]!,
        );
      }
      cell = cell * factor.levels.length + level;
    }
    if (!Number.isNaN(values[cell]!)) {
      throw new PlanningError(
        "repeated-cell",
        `The ${what} of ${levels.join(" ")} is given twice.`,
        "Give each level or cell once.",
        levels[0] ?? null,
      );
    }
    values[cell] = value;
  }
  const open = values.flatMap((value, cell) =>
    Number.isNaN(value) ? [Object.values(cellLabels(own, cell)).join(" ")] : [],
  );
  if (open.length > 0) {
    throw new PlanningError(
      "incomplete-cells",
      `The ${what} by ${clause.factors.join(" by ")} leaves out ${named(open.slice(0, 4))}${open.length > 4 ? " and more" : ""}.`,
      "Give a number for every level, or for every cell where factors are crossed.",
      clause.factors[0] ?? null,
    );
  }
  return { own, values };
}

/** Spreads the values of a clause over the cells of the full cross. */
function overCells(factors: Factors, own: Factors, values: readonly number[]): number[] {
  const places = own.map((factor) => factors.indexOf(factor));
  return Array.from({ length: cellCount(factors) }, (_, cell) => {
    const levels = levelsOfCell(factors, cell);
    let at = 0;
    for (const [index, factor] of own.entries()) at = at * factor.levels.length + levels[places[index]!]!;
    return values[at]!;
  });
}

/**
 * Range that one entry of a correlation matrix may take, all others as they are: the entries for which the matrix stays positive
 * definite are an interval, the roots of a determinant that is quadratic in the entry. Found by bisection on the smallest eigenvalue
 * from its maximum outwards; null where no value will do.
 */
function allowedRange(matrix: readonly (readonly number[])[], row: number, column: number): [number, number] | null {
  const smallest = (value: number) => {
    const trial = matrix.map((line, i) =>
      line.map((entry, j) => ((i === row && j === column) || (i === column && j === row) ? value : entry)),
    );
    return Math.min(...symmetricEigen(trial).values);
  };
  let best = -1;
  let highest = Number.NEGATIVE_INFINITY;
  // The smallest eigenvalue is concave in the entry: a golden-section search finds its top.
  let low = -1;
  let high = 1;
  for (let step = 0; step < 60; step++) {
    const left = low + (high - low) * 0.382;
    const right = low + (high - low) * 0.618;
    if (smallest(left) < smallest(right)) low = left;
    else high = right;
  }
  best = (low + high) / 2;
  highest = smallest(best);
  if (!(highest > 0)) return null;
  const edge = (outside: number) => {
    let inner = best;
    let outer = outside;
    for (let step = 0; step < 60; step++) {
      const middle = (inner + outer) / 2;
      if (smallest(middle) > 0) inner = middle;
      else outer = middle;
    }
    return inner;
  };
  return [edge(-1), edge(1)];
}

/** Shown so that the number given is inside: cut towards zero width, not rounded. */
const inward = (value: number, up: boolean) => (up ? Math.ceil(value * 1000) : Math.floor(value * 1000)) / 1000;

function correlationOf(entries: readonly number[], cells: number): PlanningDesign["correlation"] {
  for (const entry of entries) {
    if (entry > -1 && entry < 1) continue;
    throw new PlanningError(
      "impossible-correlation",
      `A correlation of ${entry} is not possible.`,
      "Correlations between different conditions lie above -1 and below 1.",
    );
  }
  if (entries.length === 1 && cells !== 2) {
    const lowest = -1 / (cells - 1);
    if (entries[0]! > lowest) return entries[0]!;
    throw new PlanningError(
      "impossible-correlation",
      `${cells} conditions cannot all correlate ${entries[0]} with each other.`,
      `A correlation common to ${cells} conditions lies above ${inward(lowest, true)} and below 1.`,
    );
  }
  if (entries.length === 1) return entries[0]!;
  const needed = (cells * (cells - 1)) / 2;
  if (entries.length !== needed) {
    throw new PlanningError(
      "correlation-count",
      `There are ${entries.length} correlations; ${cells} conditions have ${needed}.`,
      `Give one for all, or ${needed} row by row: 2 with 1, 3 with 1, 3 with 2 ...`,
    );
  }
  const matrix = Array.from({ length: cells }, (_, i) =>
    Array.from({ length: cells }, (__, j): number => (i === j ? 1 : 0)),
  );
  let at = 0;
  for (let i = 1; i < cells; i++)
    for (let j = 0; j < i; j++) {
      matrix[i]![j] = entries[at]!;
      matrix[j]![i] = entries[at++]!;
    }
  if (Math.min(...symmetricEigen(matrix).values) > 1e-12) return matrix;
  const ranges: string[] = [];
  for (let i = 1; i < cells && ranges.length < 3; i++)
    for (let j = 0; j < i && ranges.length < 3; j++) {
      const range = allowedRange(matrix, i, j);
      if (range !== null)
        ranges.push(
          `conditions ${i + 1} and ${j + 1} between ${inward(range[0], true)} and ${inward(range[1], false)}`,
        );
    }
  throw new PlanningError(
    "impossible-correlation",
    "No data can have this pattern of correlations.",
    ranges.length > 0
      ? `With the others as they are, allowed would be: ${ranges.join("; or ")}.`
      : "No single entry mends it: more than one is too far from the others.",
  );
}

function share(value: number | null, what: string): number {
  if (value === null) return 0;
  if (value >= 0 && value < 1) return value;
  throw new PlanningError(
    "share-out-of-range",
    `A ${what} of ${value * 100}% is not possible.`,
    `The ${what} is a share from 0% to less than 100%.`,
  );
}

/** Shares of the between groups, from those of one factor's levels. */
export function allocationOf(factors: Factors, allocation: Expectation["allocation"]): number[] {
  const between = factors.filter((factor) => factor.varies === "between");
  const groups = cellCount(between);
  if (allocation === null) return new Array<number>(groups).fill(1);
  if (allocation.factor === null && between.length !== 1 && allocation.shares.length !== groups) {
    throw new PlanningError(
      "allocation-count",
      between.length === 0
        ? "No factor is between subjects: there is nothing to allocate."
        : "Say which between factor the allocation is of.",
      between.length === 0
        ? "Leave the allocation out."
        : `Between are ${named(between.map((factor) => factor.name))}.`,
    );
  }
  const factor =
    allocation.factor === null ? (between.length === 1 ? between[0]! : null) : factorOf(factors, allocation.factor);
  const expected = factor === null ? groups : factor.levels.length;
  if ((factor !== null && factor.varies !== "between") || allocation.shares.length !== expected) {
    throw new PlanningError(
      "allocation-count",
      factor !== null && factor.varies !== "between"
        ? `"${factor.name}" is within subjects: each subject has all its levels.`
        : `There are ${allocation.shares.length} shares for ${expected} levels.`,
      factor !== null && factor.varies !== "between"
        ? "Allocate subjects to a between factor."
        : "Give one share for each level.",
      allocation.factor,
    );
  }
  for (const one of allocation.shares) {
    if (one > 0 && Number.isFinite(one)) continue;
    throw new PlanningError("allocation-count", `A share of ${one} is not possible.`, "Shares are above zero.");
  }
  if (factor === null) return [...allocation.shares];
  const place = between.indexOf(factor);
  return Array.from({ length: groups }, (_, group) => allocation.shares[levelsOfCell(between, group)[place]!]!);
}

/**
 * The design with what is expected of it. Clauses of means add up around their common mean: with `glove ...` and `shift ...` the
 * expectation has both main effects and no interaction; a clause of crossed factors gives all its cells.
 *
 * @param declaration factors in declaration order, units, scale and assumptions
 * @param expectation content of `expect`, or null when nothing was declared
 * @throws PlanningError "no-expectation", "unknown-factor", "unknown-level", "incomplete-cells", "repeated-cell", "no-spread",
 *   "no-correlation", "impossible-correlation", "correlation-count", "share-out-of-range", "allocation-count", "design-not-planned"
 */
export function expectedDesign(declaration: PlannedDeclaration, expectation: Expectation | null): PlanningDesign {
  const { factors, units } = declaration;
  if (expectation === null || expectation.means.length === 0) {
    throw new PlanningError(
      "no-expectation",
      "Nothing says what the study is expected to find.",
      "Declare it: expect RESPONSE, and below it the means by factor, the spread and, within subjects, the correlation.",
    );
  }
  if (factors.length === 0) {
    throw new PlanningError(
      "design-not-planned",
      "There is no factor to plan for.",
      "Declare a factor with its levels.",
    );
  }
  const subjects = units.find((unit) => unit.role === "subjects");
  const larger = units.find((unit) => unit.role !== "subjects" || unit.nestedIn.length > 0);
  if (larger !== undefined || factors.some((factor) => factor.betweenUnit !== null)) {
    throw new PlanningError(
      "design-not-planned",
      `Planning covers subjects that are sampled one by one; "${larger?.name ?? "this design"}" adds a second source of variation that expect has no words for.`,
      "Plan the design without items, blocks and nesting, or calibrate from pilot data.",
      larger?.name ?? null,
    );
  }
  const cells = cellCount(factors);
  const clauses = expectation.means.map((clause) => ownCells(factors, clause, "mean"));
  const common = (values: readonly number[]) => values.reduce((sum, value) => sum + value, 0) / values.length;
  const middle = common(clauses.map((clause) => common(clause.values)));
  const cellMeans = new Array<number>(cells).fill(clauses.length === 1 ? 0 : middle);
  for (const { own, values } of clauses) {
    const centre = clauses.length === 1 ? 0 : common(values);
    for (const [cell, value] of overCells(factors, own, values).entries()) cellMeans[cell]! += value - centre;
  }
  if (expectation.spread === null || (expectation.spread.common === null && expectation.spread.byLevel === null)) {
    throw new PlanningError(
      "no-spread",
      "Nothing says how much subjects differ within a condition.",
      "Add the standard deviation to expect: spread 9",
    );
  }
  const { byLevel } = expectation.spread;
  let cellSpread = new Array<number>(cells).fill(expectation.spread.common ?? 1);
  if (byLevel !== null) {
    const { own, values } = ownCells(factors, byLevel, "spread");
    cellSpread = overCells(factors, own, values);
  }
  for (const spread of cellSpread) {
    if (spread > 0 && Number.isFinite(spread)) continue;
    throw new PlanningError(
      "no-spread",
      `A spread of ${spread} is not possible.`,
      "The spread is a standard deviation above zero.",
    );
  }
  const within = factors.filter((factor) => factor.varies === "within");
  const withinCells = cellCount(within);
  if (within.length > 0 && expectation.correlation === null) {
    throw new PlanningError(
      "no-correlation",
      "Nothing says how strongly the conditions of a subject go together.",
      "Add it to expect: correlation 0.6",
    );
  }
  if (within.length === 0 && expectation.correlation !== null) {
    throw new PlanningError(
      "correlation-without-within",
      "No factor is within subjects: there is nothing to correlate.",
      "Leave the correlation out, or declare the factor within subjects.",
    );
  }
  return {
    factors,
    scale: declaration.scale,
    variances: declaration.variances,
    covariance: declaration.covariance,
    cellMeans,
    cellSpread,
    correlation: within.length === 0 ? 0 : correlationOf(expectation.correlation!, withinCells),
    shape: expectation.shape ?? "normal",
    dropout: share(expectation.dropout, "dropout"),
    missing: share(expectation.missing, "share of missing values"),
    allocation: allocationOf(factors, expectation.allocation),
    cost: expectation.cost,
    unit: subjects?.name ?? factors[0]!.unit,
  };
}
