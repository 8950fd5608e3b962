import type { Condition, Expression } from "../types.ts";

/**
 * Bare words that are no column become texts. A part of a file need not hold every level, so a part cannot tell a level
 * from a slip.
 */
export function resolvedExpression(expression: Expression, columns: readonly string[]): Expression {
  const inner = (part: Expression) => resolvedExpression(part, columns);
  switch (expression.type) {
    case "name":
      return expression;
    case "negate":
    case "function":
      return { ...expression, operand: inner(expression.operand) };
    case "arithmetic":
      return { ...expression, left: inner(expression.left), right: inner(expression.right) };
    case "choice": {
      const { then: yes, otherwise, condition } = expression;
      // biome-ignore lint/suspicious/noThenProperty: the name of the branch in the language's own syntax tree
      return { ...expression, condition: resolved(condition, columns), then: inner(yes), otherwise: inner(otherwise) };
    }
    default:
      return expression;
  }
}

function resolved(condition: Condition, columns: readonly string[]): Condition {
  const side = (part: Expression): Expression =>
    part.type === "name" && !columns.includes(part.name)
      ? { type: "string", value: part.name }
      : resolvedExpression(part, columns);
  const left = (part: Expression) => resolvedExpression(part, columns);
  switch (condition.type) {
    case "compare":
      return { ...condition, left: left(condition.left), right: side(condition.right) };
    case "among":
      return { ...condition, left: left(condition.left), values: condition.values.map(side) };
    case "between":
      return { ...condition, left: left(condition.left), low: left(condition.low), high: left(condition.high) };
    case "is missing":
      return { ...condition, left: left(condition.left) };
    case "and":
    case "or":
      return { ...condition, left: resolved(condition.left, columns), right: resolved(condition.right, columns) };
    case "not":
      return { ...condition, operand: resolved(condition.operand, columns) };
  }
}

export function resolvedConditions(conditions: readonly Condition[], columns: readonly string[]): Condition[] {
  return conditions.map((condition) => resolved(condition, columns));
}
