import { ColumnBuilder, columnFrom, nearestName, unknownColumn } from "./build.ts";
import { numericWherePossible, rowsOf, textCodes } from "./columns.ts";
import { exactDecimal, isNumberText } from "./decimal.ts";
import { linearColumn } from "./linear.ts";
import { computedColumn, nearestValues } from "./numbers.ts";
import { DataProblem } from "./problem.ts";
import type { Column, Condition, Expression, NumberColumn, Table } from "./types.ts";

/** Value of an expression in a row; null is missing. */
type Value = number | string | null;
type Evaluate = (row: number) => Value;
type Test = (row: number) => boolean;

const find = (table: Table, name: string): Column | null =>
  table.columns.find((column) => column.name === name) ?? null;

function columnValue(column: Column): Evaluate {
  if (column.kind === "text") return (row) => (column.codes[row]! < 0 ? null : column.categories[column.codes[row]!]!);
  const valueAt = nearestValues(column);
  return (row) => {
    const value = valueAt(row);
    return Number.isNaN(value) ? null : value;
  };
}

class Evaluator {
  readonly #table: Table;
  /** Name of what is being made, for messages. */
  readonly #target: string;
  constructor(table: Table, target: string) {
    this.#table = table;
    this.#target = target;
  }

  #numeric(expression: Expression): (row: number) => number | null {
    const evaluate = this.value(expression, null);
    return (row) => {
      const value = evaluate(row);
      if (value === null || typeof value === "number") return value;
      throw new DataProblem("text-in-arithmetic", {
        row: this.#table.sourceRows[row]!,
        column: nameIn(expression) ?? value,
        hint: `"${value}" is not a number.`,
      });
    };
  }

  /** @param among the column on the other side of a comparison: a bare word may be one of its values */
  value(expression: Expression, among: Column | null): Evaluate {
    switch (expression.type) {
      case "number":
        return () => expression.value;
      case "string":
        return () => expression.value;
      case "missing":
        return () => null;
      case "name": {
        const column = find(this.#table, expression.name);
        if (column !== null) return columnValue(column);
        if (among !== null) {
          // A word that no row has is most often a slip; a level that was excluded before is not, but then there is nothing to find.
          const known = textCodes(among).categories;
          if (known.includes(expression.name)) return () => expression.name;
          throw new DataProblem("unknown-name", {
            column: expression.name,
            nearest: nearestName(expression.name, [
              ...known.slice(0, 200),
              ...this.#table.columns.map((other) => other.name),
            ]),
            columns: this.#table.columns.map((other) => other.name).join(", "),
          });
        }
        throw unknownColumn(
          expression.name,
          this.#table.columns.map((other) => other.name),
        );
      }
      case "negate": {
        const operand = this.#numeric(expression.operand);
        return (row) => {
          const value = operand(row);
          return value === null ? null : -value;
        };
      }
      case "arithmetic":
        return this.#arithmetic(expression.operator, this.#numeric(expression.left), this.#numeric(expression.right));
      case "function":
        return this.#function(expression.function, this.#numeric(expression.operand));
      case "choice": {
        const test = this.condition(expression.condition);
        const yes = this.value(expression.then, null);
        const no = this.value(expression.otherwise, null);
        return (row) => (test(row) ? yes(row) : no(row));
      }
    }
  }

  #problem(
    code: "division-by-zero" | "log-of-nonpositive" | "root-of-negative" | "not-finite",
    row: number,
    value: number | null = null,
  ): DataProblem {
    return new DataProblem(code, { row: this.#table.sourceRows[row]!, column: this.#target, value });
  }

  #arithmetic(operator: string, left: (row: number) => number | null, right: (row: number) => number | null): Evaluate {
    return (row) => {
      const a = left(row);
      const b = right(row);
      if (a === null || b === null) return null;
      if (operator === "/" && b === 0) throw this.#problem("division-by-zero", row);
      const value =
        operator === "+"
          ? a + b
          : operator === "-"
            ? a - b
            : operator === "*"
              ? a * b
              : operator === "/"
                ? a / b
                : a ** b;
      if (!Number.isFinite(value)) throw this.#problem("not-finite", row);
      return value;
    };
  }

  #function(name: string, operand: (row: number) => number | null): Evaluate {
    return (row) => {
      const value = operand(row);
      if (value === null) return null;
      if ((name === "log" || name === "log10") && value <= 0) throw this.#problem("log-of-nonpositive", row, value);
      if (name === "root" && value < 0) throw this.#problem("root-of-negative", row, value);
      const functions: Readonly<Record<string, (x: number) => number>> = {
        log: Math.log,
        log10: Math.log10,
        root: Math.sqrt,
        abs: Math.abs,
        exp: Math.exp,
        round: Math.round,
      };
      const result = functions[name]!(value);
      if (!Number.isFinite(result)) throw this.#problem("not-finite", row);
      return result;
    };
  }

  #sideColumn(expression: Expression): Column | null {
    return expression.type === "name" ? find(this.#table, expression.name) : null;
  }

  condition(condition: Condition): Test {
    switch (condition.type) {
      case "and": {
        const left = this.condition(condition.left);
        const right = this.condition(condition.right);
        return (row) => left(row) && right(row);
      }
      case "or": {
        const left = this.condition(condition.left);
        const right = this.condition(condition.right);
        return (row) => left(row) || right(row);
      }
      case "not": {
        const operand = this.condition(condition.operand);
        return (row) => !operand(row);
      }
      case "is missing": {
        const value = this.value(condition.left, null);
        return (row) => (value(row) === null) !== condition.negated;
      }
      case "between": {
        const value = this.#ordered(condition.left);
        const low = this.#ordered(condition.low);
        const high = this.#ordered(condition.high);
        return (row) => {
          const [a, b, c] = [value(row), low(row), high(row)];
          return a !== null && b !== null && c !== null && a >= b && a <= c;
        };
      }
      case "among": {
        const column = this.#sideColumn(condition.left);
        const tests = condition.values.map((value) => this.#equal(condition.left, value, column));
        return (row) => tests.some((test) => test(row)) !== condition.negated;
      }
      case "compare": {
        const { operator } = condition;
        if (operator === "=" || operator === "!=") {
          const equal = this.#equal(condition.left, condition.right, this.#sideColumn(condition.left));
          if (operator === "=") return equal;
          const missing = this.value(condition.left, null);
          return (row) => missing(row) !== null && !equal(row);
        }
        const left = this.#ordered(condition.left);
        const right = this.#ordered(condition.right);
        return (row) => {
          const a = left(row);
          const b = right(row);
          if (a === null || b === null) return false;
          return operator === "<" ? a < b : operator === "<=" ? a <= b : operator === ">" ? a > b : a >= b;
        };
      }
    }
  }

  #ordered(expression: Expression): (row: number) => number | null {
    const evaluate = this.value(expression, null);
    return (row) => {
      const value = evaluate(row);
      if (value === null || typeof value === "number") return value;
      throw new DataProblem("order-of-text", {
        row: this.#table.sourceRows[row]!,
        column: nameIn(expression) ?? value,
      });
    };
  }

  /** Equality by text first, by value second: level 10 is "10" and also 10.0. A numeric column compares its decimals exactly. */
  #equal(left: Expression, right: Expression, column: Column | null): Test {
    const first = this.value(left, null);
    const second = this.value(right, column);
    if (column?.kind === "number" && right.type === "number") return exactlyEqual(column, right.text);
    return (row) => {
      const a = first(row);
      const b = second(row);
      if (a === null || b === null) return false;
      if (a === b) return true;
      if (typeof a === typeof b)
        return typeof a === "string" && isNumberText(a) && isNumberText(b as string) && Number(a) === Number(b);
      const [textValue, numeric] = typeof a === "string" ? [a, b] : [b as string, a];
      return isNumberText(textValue) && Number(textValue) === numeric;
    };
  }
}

/** 0.1 in the file equals 0.1 in the statement, whatever was centred away. */
function exactlyEqual(column: NumberColumn, text: string): Test {
  const plain = text.endsWith("%") ? String(Number(text.slice(0, -1)) / 100) : text;
  if (column.texts !== null && isNumberText(plain)) {
    const wanted = exactDecimal(plain);
    const matching = column.texts.categories.map((category) => {
      const own = exactDecimal(category);
      if (own === null || wanted === null) return Number(category) === Number(plain);
      const places = BigInt(Math.max(own.places, wanted.places));
      return (
        own.digits * 10n ** (places - BigInt(own.places)) === wanted.digits * 10n ** (places - BigInt(wanted.places))
      );
    });
    const { codes } = column.texts;
    return (row) => codes[row]! >= 0 && matching[codes[row]!]!;
  }
  const value = Number(plain);
  const valueAt = nearestValues(column);
  return (row) => valueAt(row) === value;
}

function nameIn(expression: Expression): string | null {
  return expression.type === "name" ? expression.name : null;
}

/**
 * The table with one more column, computed row by row; missing in gives missing out.
 * @throws DataProblem "unknown-column", "column-exists", "division-by-zero" ... naming the row
 */
export function deriveColumn(table: Table, name: string, expression: Expression): Table {
  if (table.columns.some((column) => column.name === name)) throw new DataProblem("column-exists", { column: name });
  const column = linearColumn(table, name, expression) ?? evaluatedColumn(table, name, expression);
  return { ...table, columns: [...table.columns, column.kind === "number" ? withFewTexts(column) : column] };
}

function evaluatedColumn(table: Table, name: string, expression: Expression): Column {
  const evaluate = new Evaluator(table, name).value(expression, null);
  const numbers = new Float64Array(table.rows);
  const texts: (string | null)[] = [];
  let text = false;
  for (let row = 0; row < table.rows; row++) {
    const value = evaluate(row);
    if (typeof value === "string" && !text) {
      text = true;
      for (let before = 0; before < row; before++)
        texts.push(Number.isNaN(numbers[before]!) ? null : String(numbers[before]!));
    }
    if (text) texts.push(value === null ? null : String(value));
    else numbers[row] = value === null ? Number.NaN : (value as number);
  }
  if (!text) return computedColumn(name, numbers);
  const builder = new ColumnBuilder(new Set());
  for (const value of texts) builder.add(value);
  return columnFrom(name, builder.texts);
}

/** A computed column of so few distinct values may serve as a factor, so their texts are kept. */
const fewTexts = 1000;

function withFewTexts(column: NumberColumn): NumberColumn {
  const valueAt = nearestValues(column);
  const distinct = new Set<number>();
  for (let row = 0; row < column.offsets.length; row++) {
    distinct.add(valueAt(row));
    if (distinct.size > fewTexts) return column;
  }
  return { ...column, texts: textCodes(column) };
}

/**
 * The table without the rows that meet a condition.
 * @returns the table, and the source rows that were taken out
 */
export function excludeRows(
  table: Table,
  condition: Condition,
): { readonly table: Table; readonly excludedRows: Int32Array } {
  const test = new Evaluator(table, "the condition").condition(condition);
  const kept = new Int32Array(table.rows);
  const excluded = new Int32Array(table.rows);
  let keptRows = 0;
  let excludedCount = 0;
  for (let row = 0; row < table.rows; row++) {
    if (test(row)) excluded[excludedCount++] = table.sourceRows[row]!;
    else kept[keptRows++] = row;
  }
  const excludedRows = excluded.slice(0, excludedCount);
  if (excludedCount === 0) return { table, excludedRows };
  const left = rowsOf(table, kept.subarray(0, keptRows));
  // With the stray texts gone a column may be one of numbers.
  return { table: { ...left, columns: left.columns.map(numericWherePossible) }, excludedRows };
}
