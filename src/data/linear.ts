import { decimalMinus, exactDecimal } from "./decimal.ts";
import { exactPowers } from "./numbers.ts";
import type { Column, Expression, NumberColumn, Table } from "./types.ts";

interface Linear {
  readonly center: number;
  /** Null where the part is a constant. */
  readonly offsets: Float64Array | null;
  readonly constant: number;
  readonly decimals: number | null;
}

/** Sum and what its rounding left (Knuth's two-sum). */
function twoSum(a: number, b: number): readonly [number, number] {
  const sum = a + b;
  const part = sum - a;
  return [sum, a - (sum - part) + (b - part)];
}

function negated(part: Linear): Linear {
  return {
    center: -part.center,
    offsets: part.offsets === null ? null : part.offsets.map((value) => -value),
    constant: -part.constant,
    decimals: part.decimals,
  };
}

function added(left: Linear, right: Linear): Linear {
  const [center, rest] = twoSum(left.center, right.center);
  const constant = left.constant + right.constant + rest;
  const decimals = left.decimals === null || right.decimals === null ? null : Math.max(left.decimals, right.decimals);
  const [a, b] = [left.offsets, right.offsets];
  const offsets = a === null ? b : b === null ? a : a.map((value, row) => value + b[row]!);
  return { center, offsets, constant, decimals };
}

function linearPart(expression: Expression, columnOf: (name: string) => Column | null): Linear | null {
  switch (expression.type) {
    case "name": {
      const column = columnOf(expression.name);
      if (column?.kind !== "number") return null;
      return { center: column.center, offsets: column.offsets, constant: 0, decimals: column.decimals };
    }
    case "number": {
      const decimal = expression.text.includes("%") ? null : exactDecimal(expression.text);
      if (decimal === null) return null;
      const center = Math.round(expression.value);
      if (!Number.isSafeInteger(center)) return null;
      return { center, offsets: null, constant: decimalMinus(decimal, center), decimals: decimal.places };
    }
    case "negate": {
      const operand = linearPart(expression.operand, columnOf);
      return operand === null ? null : negated(operand);
    }
    case "arithmetic": {
      if (expression.operator !== "+" && expression.operator !== "-") return null;
      const left = linearPart(expression.left, columnOf);
      const right = left === null ? null : linearPart(expression.right, columnOf);
      if (left === null || right === null) return null;
      return added(left, expression.operator === "+" ? right : negated(right));
    }
    default:
      return null;
  }
}

/**
 * Sums and differences of columns and constants, centres and offsets apart, so that a large constant part costs no
 * digits; null where the expression is anything else.
 */
export function linearColumn(table: Table, name: string, expression: Expression): NumberColumn | null {
  const columnOf = (wanted: string) => table.columns.find((column) => column.name === wanted) ?? null;
  const part = linearPart(expression, columnOf);
  if (part === null || part.offsets === null || !Number.isFinite(part.center)) return null;
  const { center, constant, decimals } = part;
  let offsets = constant === 0 ? part.offsets : part.offsets.map((value) => value + constant);
  if (offsets.some((value) => Math.abs(value) === Number.POSITIVE_INFINITY)) return null;
  const scale = decimals !== null && decimals <= 22 && Number.isInteger(center) ? exactPowers[decimals]! : 0;
  // The result is a decimal of as many places: rounding to them takes away what the sums rounded.
  if (scale > 0 && offsets.every((value) => Number.isNaN(value) || Math.abs(value) * scale < 2 ** 49))
    offsets = offsets.map((value) => Math.round(value * scale) / scale + 0);
  return { kind: "number", name, center, offsets, texts: null, decimals };
}
