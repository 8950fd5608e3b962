import type {
  Allocation,
  AtPart,
  ConditionNode,
  ContrastNode,
  ExpressionNode,
  LevelPlace,
  MarginClause,
  MemberNode,
  Name,
  NumberValue,
} from "./ast.ts";
import { calculations, trendDegrees } from "./rules.ts";

/** Pieces of statements as the language writes them. */

const bareName = /^[\p{L}_][\p{L}\p{M}\p{N}_]*$/u;

export const quoted = (text: string): string => `"${text.replaceAll('"', '""')}"`;
/** A name that came from elsewhere: in quotes where it needs them. */
export const writtenName = (text: string, reserved: { has(word: string): boolean }): string =>
  bareName.test(text) && !reserved.has(text) ? text : quoted(text);

/** A name as it was written. */
export const nameText = (name: Name): string => (name.quoted ? quoted(name.text) : name.text);
export const numberText = (value: NumberValue): string => value.text;
export const namesText = (names: readonly Name[]): string => names.map(nameText).join(", ");
export const numbersText = (numbers: readonly NumberValue[]): string => numbers.map(numberText).join(", ");

const placeText = (place: LevelPlace): string =>
  place.factor === null ? nameText(place.level) : `${nameText(place.level)} of ${nameText(place.factor)}`;
const atText = (at: readonly AtPart[]): string =>
  at.map((each) => ` at ${"each" in each ? `each ${nameText(each.each)}` : placeText(each)}`).join("");

export function memberText(member: MemberNode): string {
  return `${comparedText(member)}${atText(member.at)}`;
}

function comparedText(member: MemberNode): string {
  switch (member.type) {
    case "contrast":
      return nameText(member.name);
    case "each against level":
      return `each ${nameText(member.factor)} against ${nameText(member.level)}`;
    case "each against mean":
      return `each ${nameText(member.factor)} against mean`;
    case "all pairs":
      return `all pairs of ${nameText(member.factor)}`;
    case "neighbours":
      return `neighbours of ${nameText(member.factor)}`;
    case "trend":
      return `trend of ${nameText(member.factor)}: ${member.degrees.map((degree) => trendDegrees[degree - 1]).join(", ")}`;
  }
}

export const membersText = (members: readonly MemberNode[]): string => members.map(memberText).join(", ");

/** How tightly a node holds together: a looser one inside a tighter one needs parentheses. */
const contrastStrength = (node: ContrastNode): number => {
  switch (node.type) {
    case "at":
    case "weights":
      return 0;
    case "arithmetic":
      return node.operator === "+" || node.operator === "-" ? 1 : 2;
    case "negate":
      return 3;
    default:
      return 4;
  }
};

export function contrastText(node: ContrastNode, atLeast = 0): string {
  const text = bareContrast(node);
  return contrastStrength(node) < atLeast ? `(${text})` : text;
}

function bareContrast(node: ContrastNode): string {
  switch (node.type) {
    case "level":
      return placeText(node);
    case "number":
      return numberText(node.number);
    case "mean":
      return `mean(${node.of.map((each) => contrastText(each)).join(", ")})`;
    case "negate":
      return `-${contrastText(node.operand, 3)}`;
    case "arithmetic": {
      const strength = contrastStrength(node);
      return `${contrastText(node.left, strength)} ${node.operator} ${contrastText(node.right, strength + 1)}`;
    }
    case "at":
      return `${contrastText(node.operand, 1)}${atText(node.at)}`;
    case "weights":
      return `weights ${node.weights.map((each) => `${nameText(each.level)} ${numberText(each.weight)}`).join(", ")}`;
  }
}

/** Words that begin something else where a column could stand. */
const expressionWords = new Set<string>([...calculations, "if", "not", "missing"]);

const expressionStrength = (node: ExpressionNode | ConditionNode): number => {
  switch (node.type) {
    case "choice":
      return 0;
    case "or":
      return 1;
    case "and":
      return 2;
    case "not":
      return 3;
    case "compare":
    case "among":
    case "between":
    case "is missing":
      return 4;
    case "arithmetic":
      return node.operator === "^" ? 8 : node.operator === "+" || node.operator === "-" ? 5 : 6;
    case "negate":
      return 7;
    case "function":
      return 8;
    default:
      return 9;
  }
};

export function expressionText(node: ExpressionNode | ConditionNode, atLeast = 0): string {
  const text = bareExpression(node);
  return expressionStrength(node) < atLeast ? `(${text})` : text;
}

export const conditionText = (node: ConditionNode): string => expressionText(node);

/** To the right of a comparison quotes make a text, so a column's name stands bare there, as it was written. */
function operandText(node: ExpressionNode): string {
  return node.type === "name" && bareName.test(node.name) ? node.name : expressionText(node, 5);
}

function bareExpression(node: ExpressionNode | ConditionNode): string {
  switch (node.type) {
    case "number":
      return node.text;
    case "string":
      return quoted(node.value);
    case "name":
      return writtenName(node.name, expressionWords);
    case "missing":
      return "missing";
    case "negate":
      return `-${expressionText(node.operand, 7)}`;
    case "arithmetic": {
      const strength = expressionStrength(node);
      if (node.operator === "^") return `${expressionText(node.left, 9)}^${expressionText(node.right, 7)}`;
      return `${expressionText(node.left, strength)} ${node.operator} ${expressionText(node.right, strength + 1)}`;
    }
    case "function":
      return `${node.function} of ${expressionText(node.operand, 7)}`;
    case "choice":
      return `if ${expressionText(node.condition)} then ${expressionText(node.then, 1)} else ${expressionText(node.otherwise)}`;
    case "compare":
      return `${expressionText(node.left, 5)} ${node.operator} ${operandText(node.right)}`;
    case "among":
      return `${expressionText(node.left, 5)} ${node.negated ? "not among" : "among"} ${node.values.map(operandText).join(", ")}`;
    case "between":
      return `${expressionText(node.left, 5)} between ${operandText(node.low)} and ${operandText(node.high)}`;
    case "is missing":
      return `${expressionText(node.left, 5)} is ${node.negated ? "not " : ""}missing`;
    case "or":
      return `${expressionText(node.left, 1)} or ${expressionText(node.right, 2)}`;
    case "and":
      return `${expressionText(node.left, 2)} and ${expressionText(node.right, 3)}`;
    case "not":
      return `not ${expressionText(node.operand, 3)}`;
  }
}

/** Clauses that several statements have; a clause that does not stand is left out of the list. */
export const marginText = (margin: MarginClause | null): readonly string[] =>
  margin === null ? [] : [`${margin.type === "equivalence" ? "margin" : "not worse by"} ${numberText(margin.value)}`];
export const sidesText = (sides: "two-sided" | "upper" | "lower"): readonly string[] =>
  sides === "two-sided" ? [] : [`one-sided ${sides}`];
export const allocationText = (allocation: Allocation | null): readonly string[] =>
  allocation === null
    ? []
    : [
        `allocation ${allocation.factor === null ? "" : `${nameText(allocation.factor)} `}${allocation.shares.map(numberText).join(":")}`,
      ];
/** `seed` and 7 -> `seed 7`; nothing where there is no number. */
export const clauseText = (before: string, value: NumberValue | null, after = ""): readonly string[] =>
  value === null ? [] : [`${before} ${numberText(value)}${after}`];
/** Clauses that follow a statement on its own line, after commas. */
export const onOneLine = (head: string, ...rest: readonly (readonly string[])[]): readonly string[] => [
  [head, ...rest.flat()].join(", "),
];
