import { cellCount, levelsOfCell } from "./cells.ts";
import { DesignError, listed } from "./problem.ts";
import type { Contrast, FactorDeclaration, MemberShape } from "./types.ts";

/** A level, with its factor where it was written (`low of dose`). */
export interface LevelReference {
  readonly level: string;
  readonly factor: string | null;
}

/** Arithmetic over levels as `contrast` takes it. A level stands for the mean of its cells, each weighing the same. */
export type ContrastExpression =
  | ({ readonly type: "level" } & LevelReference)
  | { readonly type: "mean"; readonly of: readonly ContrastExpression[] }
  | { readonly type: "number"; readonly value: number }
  | { readonly type: "negate"; readonly operand: ContrastExpression }
  | {
      readonly type: "arithmetic";
      readonly operator: "+" | "-" | "*" | "/";
      readonly left: ContrastExpression;
      readonly right: ContrastExpression;
    }
  | { readonly type: "at"; readonly operand: ContrastExpression; readonly at: readonly LevelReference[] }
  | { readonly type: "weights"; readonly weights: readonly (LevelReference & { readonly weight: number })[] };

export type MemberAt = LevelReference | { readonly each: string };

/** A member of a family, before it is spelled out as comparisons. */
export type Member = { readonly at: readonly MemberAt[] } & (
  | { readonly type: "contrast"; readonly name: string }
  | { readonly type: "each against level"; readonly factor: string; readonly level: string }
  | { readonly type: "each against mean"; readonly factor: string }
  | { readonly type: "all pairs"; readonly factor: string }
  | { readonly type: "neighbours"; readonly factor: string }
  | { readonly type: "trend"; readonly factor: string; readonly degrees: readonly number[] }
);

/** Levels held fixed while an expression is read: factor name -> level index. */
type Held = ReadonlyMap<string, number>;
type Factors = readonly FactorDeclaration[];

/** Either a plain number or a weighted sum of cell means. */
type Value = { readonly number: number } | { readonly weights: Float64Array };

const trendNames = ["", "linear", "quadratic", "cubic", "quartic", "quintic"];

/** Finds the factor of a name; throws "unknown-factor" with the nearest declared ones. */
export function factorNamed(factors: Factors, name: string): FactorDeclaration {
  const found = factors.find((factor) => factor.name === name);
  if (found !== undefined) return found;
  throw new DesignError(
    "unknown-factor",
    `There is no factor "${name}".`,
    factors.length > 0
      ? `Declared are ${listed(factors.map((factor) => factor.name))}.`
      : `Declare it first: factor ${name} between subjects: first, second`,
    name,
  );
}

/**
 * Resolves a level to its factor and index.
 * @throws DesignError "unknown-level", or "ambiguous-level" when several factors have it and none is named
 */
export function resolveLevel(
  factors: Factors,
  reference: LevelReference,
): { factor: FactorDeclaration; index: number } {
  const candidates = reference.factor === null ? factors : [factorNamed(factors, reference.factor)];
  const found = candidates.filter((factor) => factor.levels.includes(reference.level));
  if (found.length === 1) return { factor: found[0]!, index: found[0]!.levels.indexOf(reference.level) };
  if (found.length > 1) {
    const names = found.map((factor) => factor.name);
    throw new DesignError(
      "ambiguous-level",
      `"${reference.level}" is a level of ${listed(names)}.`,
      `Say which: "${reference.level} of ${names[0]}".`,
      reference.level,
    );
  }
  const known = candidates.flatMap((factor) => factor.levels);
  throw new DesignError(
    "unknown-level",
    reference.factor === null
      ? `No declared factor has a level "${reference.level}".`
      : `The factor "${reference.factor}" has no level "${reference.level}".`,
    known.length > 0 ? `Declared levels: ${listed(known, 12)}.` : "Declare a factor with its levels first.",
    reference.level,
  );
}

/** Mean of the cells with the held levels, every cell weighing the same. */
function meanOfCells(factors: Factors, held: Held): Float64Array {
  const total = cellCount(factors);
  const weights = new Float64Array(total);
  let matching = 0;
  for (let cell = 0; cell < total; cell++) {
    const levels = levelsOfCell(factors, cell);
    if (factors.every((factor, index) => !held.has(factor.name) || held.get(factor.name) === levels[index])) {
      weights[cell] = 1;
      matching++;
    }
  }
  for (let cell = 0; cell < total; cell++) weights[cell]! /= matching;
  return weights;
}

function combine(left: Float64Array, leftFactor: number, right: Float64Array, rightFactor: number): Float64Array {
  return left.map((weight, cell) => leftFactor * weight + rightFactor * right[cell]!);
}

function notLinear(): DesignError {
  return new DesignError(
    "contrast-not-linear",
    "A contrast is a weighted sum of means; this multiplies or divides means by each other, or adds a bare number to one.",
    "Multiply or divide means by numbers only: (a + b) / 2 - c.",
  );
}

function evaluate(factors: Factors, expression: ContrastExpression, held: Held): Value {
  switch (expression.type) {
    case "number":
      return { number: expression.value };
    case "level": {
      const { factor, index } = resolveLevel(factors, expression);
      const already = held.get(factor.name);
      if (already !== undefined && already !== index) {
        throw new DesignError(
          "level-contradicts-at",
          `"${expression.level}" and "at ${factor.levels[already]}" are both levels of "${factor.name}".`,
          "Use levels of another factor after at.",
          expression.level,
        );
      }
      return { weights: meanOfCells(factors, new Map(held).set(factor.name, index)) };
    }
    case "mean": {
      const parts = expression.of.map((part) => evaluate(factors, part, held));
      let sum: Float64Array | null = null;
      for (const part of parts) {
        if (!("weights" in part)) throw notLinear();
        sum = sum === null ? part.weights : combine(sum, 1, part.weights, 1);
      }
      if (sum === null) throw notLinear();
      return { weights: sum.map((weight) => weight / parts.length) };
    }
    case "negate": {
      const value = evaluate(factors, expression.operand, held);
      return "number" in value ? { number: -value.number } : { weights: value.weights.map((weight) => -weight) };
    }
    case "at": {
      const inner = new Map(held);
      for (const reference of expression.at) {
        const { factor, index } = resolveLevel(factors, reference);
        inner.set(factor.name, index);
      }
      return evaluate(factors, expression.operand, inner);
    }
    case "weights": {
      let sum = new Float64Array(cellCount(factors));
      for (const entry of expression.weights) {
        const { factor, index } = resolveLevel(factors, entry);
        sum = combine(
          sum,
          1,
          meanOfCells(factors, new Map(held).set(factor.name, index)),
          entry.weight,
        ) as Float64Array<ArrayBuffer>;
      }
      return { weights: sum };
    }
    case "arithmetic": {
      const left = evaluate(factors, expression.left, held);
      const right = evaluate(factors, expression.right, held);
      switch (expression.operator) {
        case "+":
        case "-": {
          const sign = expression.operator === "+" ? 1 : -1;
          if ("number" in left && "number" in right) return { number: left.number + sign * right.number };
          if ("weights" in left && "weights" in right)
            return { weights: combine(left.weights, 1, right.weights, sign) };
          throw notLinear();
        }
        case "*":
          if ("number" in left && "number" in right) return { number: left.number * right.number };
          if ("number" in left && "weights" in right)
            return { weights: right.weights.map((weight) => weight * left.number) };
          if ("weights" in left && "number" in right)
            return { weights: left.weights.map((weight) => weight * right.number) };
          throw notLinear();
        case "/":
          if ("weights" in right) throw notLinear();
          if (right.number === 0) {
            throw new DesignError(
              "division-by-zero",
              "The contrast divides by zero.",
              "Divide by a number other than zero.",
            );
          }
          return "number" in left
            ? { number: left.number / right.number }
            : { weights: left.weights.map((weight) => weight / right.number) };
      }
    }
  }
}

/** Sums of weights whose rounding is worse than this share of the largest weight are a mistake, not arithmetic noise. */
const weightRounding = 1e-9;

/**
 * Weights over the cells of a declared contrast.
 *
 * @param factors all declared factors, in order
 * @param name name of the contrast
 * @param expression arithmetic over levels, or weights
 * @param at levels at which a family's member wants it (`gloved at night`)
 * @returns weights over cells, summing to zero
 * @throws DesignError "weights-not-zero" (saying by how much), "contrast-empty", "contrast-not-linear", "unknown-level" ...
 */
export function contrastWeights(
  factors: Factors,
  name: string,
  expression: ContrastExpression,
  at: readonly LevelReference[] = [],
): Contrast {
  if (factors.length === 0) {
    throw new DesignError(
      "no-factor",
      `The contrast "${name}" needs a factor.`,
      "Declare a factor with its levels first.",
      name,
    );
  }
  const value = evaluate(factors, at.length === 0 ? expression : { type: "at", operand: expression, at }, new Map());
  if ("number" in value) throw notLinear();
  const largest = value.weights.reduce((most, weight) => Math.max(most, Math.abs(weight)), 0);
  if (largest < 1e-12) {
    throw new DesignError(
      "contrast-empty",
      `Every weight of the contrast "${name}" is zero: it compares nothing.`,
      "Write a difference between means, such as a - b.",
      name,
    );
  }
  const sum = value.weights.reduce((total, weight) => total + weight, 0);
  if (Math.abs(sum) > weightRounding * largest * value.weights.length) {
    const off = Number(sum.toPrecision(6));
    throw new DesignError(
      "weights-not-zero",
      `The weights of the contrast "${name}" sum to ${off}, not to 0.`,
      off > 0
        ? `Take ${off} away: what is added and what is subtracted must weigh the same.`
        : `Add ${-off}: what is added and what is subtracted must weigh the same.`,
      name,
    );
  }
  // Rounding left over from thirds is taken out, so that a constant shift of the data can never leak into an estimate.
  const used = value.weights.reduce((count, weight) => count + (weight === 0 ? 0 : 1), 0);
  return { name, weights: value.weights.map((weight) => (weight === 0 ? 0 : weight - sum / used)) };
}

/**
 * Monic orthogonal polynomials on the given positions, each level weighing the same, by the three-term recurrence.
 * @param positions numeric position of each level, distinct
 * @param degree 1 for linear, 2 for quadratic ...; less than the number of positions
 * @returns values of the polynomial of that degree at the positions
 * @source forsythe-1957 (J. SIAM 5, 74-88)
 */
export function monicOrthogonalPolynomial(positions: readonly number[], degree: number): number[] {
  const product = (left: readonly number[], right: readonly number[]) =>
    left.reduce((sum, value, index) => sum + value * right[index]!, 0);
  let before = positions.map(() => 0);
  let current = positions.map(() => 1);
  let normBefore = 1;
  for (let step = 0; step < degree; step++) {
    const norm = product(current, current);
    const shift =
      product(
        current,
        current.map((value, index) => value * positions[index]!),
      ) / norm;
    const back = step === 0 ? 0 : norm / normBefore;
    const next = current.map((value, index) => (positions[index]! - shift) * value - back * before[index]!);
    before = current;
    current = next;
    normBefore = norm;
  }
  return current;
}

function suffix(factors: Factors, held: readonly { factor: FactorDeclaration; index: number }[]): string {
  if (held.length === 0) return "";
  return ` at ${held
    .map(({ factor, index }) => {
      const level = factor.levels[index]!;
      return factors.filter((other) => other.levels.includes(level)).length > 1 ? `${level} of ${factor.name}` : level;
    })
    .join(", ")}`;
}

/** Every combination of levels that the `at` part of a member asks for. */
function heldCombinations(factors: Factors, at: readonly MemberAt[]): { factor: FactorDeclaration; index: number }[][] {
  let combinations: { factor: FactorDeclaration; index: number }[][] = [[]];
  for (const part of at) {
    const choices =
      "each" in part
        ? factorNamed(factors, part.each).levels.map((_, index) => ({ factor: factorNamed(factors, part.each), index }))
        : [resolveLevel(factors, part)];
    combinations = combinations.flatMap((combination) => choices.map((choice) => [...combination, choice]));
  }
  return combinations;
}

function enoughLevels(factor: FactorDeclaration, least: number, what: string): void {
  if (factor.levels.length >= least) return;
  throw new DesignError(
    "too-few-levels",
    `${what} needs at least ${least} levels; "${factor.name}" has ${factor.levels.length}.`,
    "Declare more levels, or use another member.",
    factor.name,
  );
}

function differences(factor: FactorDeclaration, member: Member): { name: string; weights: number[] }[] {
  const levels = factor.levels;
  const difference = (plus: number, minus: number) => ({
    name: `${levels[plus]} - ${levels[minus]}`,
    weights: levels.map((_, index) => (index === plus ? 1 : index === minus ? -1 : 0)),
  });
  switch (member.type) {
    case "each against level": {
      const control = levels.indexOf(member.level);
      if (control < 0) resolveLevel([factor], { level: member.level, factor: factor.name });
      return levels.flatMap((_, index) => (index === control ? [] : [difference(index, control)]));
    }
    case "each against mean":
      return levels.map((level, index) => ({
        name: `${level} - mean`,
        weights: levels.map((_, other) => (other === index ? 1 : 0) - 1 / levels.length),
      }));
    case "all pairs":
      return levels.flatMap((_, first) => levels.slice(first + 1).map((__, gap) => difference(first + 1 + gap, first)));
    case "neighbours":
      return levels.slice(1).map((_, index) => difference(index + 1, index));
    case "trend":
      return member.degrees.map((degree) => {
        enoughLevels(factor, degree + 1, `A ${trendNames[degree] ?? `degree-${degree}`} trend`);
        const positions = factor.positions ?? levels.map((_, index) => index + 1);
        const polynomial = monicOrthogonalPolynomial(positions, degree);
        const norm = polynomial.reduce((sum, value) => sum + value * value, 0);
        return {
          name: `${trendNames[degree] ?? `degree ${degree}`} trend of ${factor.name}`,
          weights: polynomial.map((value) => value / norm),
        };
      });
    case "contrast":
      return [];
  }
}

/** What a family comes to: its comparisons, and the shape that tells which corrections fit. */
export interface SpelledFamily {
  readonly contrasts: readonly Contrast[];
  readonly shape: MemberShape;
  /** Weights over the compared means where all members compare levels of one factor (rows: comparisons), else over cells. */
  readonly meansWeights: readonly (readonly number[])[];
}

/**
 * Spells the members of a family out as comparisons, in the order in which they were written.
 *
 * @param factors all declared factors
 * @param members members as written
 * @param declared expression of each declared contrast
 * @throws DesignError "empty-family", "duplicate-member", "unknown-contrast", "unknown-factor", "unknown-level", "too-few-levels" ...
 */
export function spellMembers(
  factors: Factors,
  members: readonly Member[],
  declared: ReadonlyMap<string, ContrastExpression>,
): SpelledFamily {
  if (members.length === 0) {
    throw new DesignError(
      "empty-family",
      "The family has no members.",
      "Name contrasts, or write: all pairs of FACTOR.",
    );
  }
  const contrasts: Contrast[] = [];
  for (const member of members) {
    for (const held of heldCombinations(factors, member.at)) {
      const at = held.map(({ factor, index }) => ({ level: factor.levels[index]!, factor: factor.name }));
      const end = suffix(factors, held);
      if (member.type === "contrast") {
        const expression = declared.get(member.name);
        if (expression === undefined) {
          throw new DesignError(
            "unknown-contrast",
            `There is no contrast "${member.name}".`,
            declared.size > 0
              ? `Declared are ${listed([...declared.keys()])}.`
              : `Declare it first: contrast ${member.name}: a - b`,
            member.name,
          );
        }
        const contrast = contrastWeights(factors, member.name, expression, at);
        contrasts.push({ name: member.name + end, weights: contrast.weights });
        continue;
      }
      const factor = factorNamed(factors, member.factor);
      enoughLevels(factor, 2, "A comparison");
      if (held.some((part) => part.factor.name === factor.name)) {
        throw new DesignError(
          "level-contradicts-at",
          `"${factor.name}" is compared and cannot also stand after at.`,
          "Use another factor after at.",
          factor.name,
        );
      }
      for (const { name, weights } of differences(factor, member)) {
        const expression: ContrastExpression = {
          type: "weights",
          weights: weights.map((weight, index) => ({ level: factor.levels[index]!, factor: factor.name, weight })),
        };
        contrasts.push({ name: name + end, weights: contrastWeights(factors, name, expression, at).weights });
      }
    }
  }
  refuseDuplicates(contrasts);
  return { contrasts, shape: shapeOf(factors, members), meansWeights: weightsOverMeans(factors, members, contrasts) };
}

function refuseDuplicates(contrasts: readonly Contrast[]): void {
  for (const [index, contrast] of contrasts.entries()) {
    const twin = contrasts
      .slice(0, index)
      .find(
        (other) =>
          other.name === contrast.name ||
          other.weights.every((weight, cell) => Math.abs(weight - contrast.weights[cell]!) < 1e-12),
      );
    if (twin !== undefined) {
      throw new DesignError(
        "duplicate-member",
        twin.name === contrast.name
          ? `The comparison "${contrast.name}" is in the family twice.`
          : `"${contrast.name}" is the same comparison as "${twin.name}".`,
        "Keep it once: a repeated comparison makes the correction stricter for nothing.",
        contrast.name,
      );
    }
  }
}

function shapeOf(factors: Factors, members: readonly Member[]): MemberShape {
  const only = members.length === 1 ? members[0]! : null;
  if (only === null || only.type === "contrast") return { kind: "free", factor: null, means: null, repeated: false };
  const factor = factorNamed(factors, only.factor);
  const kinds = {
    "each against level": "against one",
    "each against mean": "against mean",
    "all pairs": "all pairs",
    neighbours: "neighbours",
    trend: "trend",
  } as const;
  const repeated = only.at.some((part) => "each" in part && factorNamed(factors, part.each).levels.length > 1);
  return { kind: kinds[only.type], factor: factor.name, means: factor.levels.length, repeated };
}

function weightsOverMeans(factors: Factors, members: readonly Member[], contrasts: readonly Contrast[]): number[][] {
  const only = members.length === 1 ? members[0]! : null;
  if (only !== null && only.type !== "contrast" && only.at.every((part) => !("each" in part))) {
    const factor = factorNamed(factors, only.factor);
    return differences(factor, only).map((difference) => [...difference.weights]);
  }
  return contrasts.map((contrast) => [...contrast.weights]);
}
