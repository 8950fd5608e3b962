import { DataProblem } from "../problem.ts";
import type { Condition, Expression } from "../types.ts";

/** Where a dialect differs. Numbers in text columns are compared as numbers only where the text is one. */
export interface Dialect {
  /** The text of any value. */
  text(value: string): string;
  /** A text as a double, or null where it is none. */
  number(value: string): string;
  /** A text literal. */
  literal(value: string): string;
}

const quotedName = (name: string) => `"${name.replaceAll('"', '""')}"`;
const quotedText = (value: string) => `'${value.replaceAll("'", "''")}'`;

export const duckdbDialect: Dialect = {
  text: (value) => `CAST(${value} AS VARCHAR)`,
  number: (value) => `TRY_CAST(${value} AS DOUBLE)`,
  literal: quotedText,
};

const numberPattern = "^[+-]?([0-9]+[.]?[0-9]*|[.][0-9]+)([eE][+-]?[0-9]+)?$";

export const postgresDialect: Dialect = {
  text: (value) => `(${value})::text`,
  number: (value) => `(CASE WHEN (${value})::text ~ '${numberPattern}' THEN (${value})::text::numeric END)`,
  // A backslash is only itself where the server has standard strings, which the connection asks for.
  literal: quotedText,
};

export { quotedName, quotedText };

/** What a name stands for: a column as it is, or a derived column's arithmetic; null where there is none. */
export type NameLookup = (name: string) => { readonly sql: string; readonly numeric: boolean } | null;

interface Part {
  readonly sql: string;
  readonly numeric: boolean;
}

/**
 * Arithmetic and conditions as SQL. Values are numbers or texts as they are in a table read from a file; a row in which
 * something is missing meets no comparison.
 */
export class SqlWriter {
  readonly #dialect: Dialect;
  readonly #lookup: NameLookup;
  constructor(dialect: Dialect, lookup: NameLookup) {
    this.#dialect = dialect;
    this.#lookup = lookup;
  }

  /** @param bare whether a word that is no column is a text */
  expression(expression: Expression, bare = false): Part {
    switch (expression.type) {
      case "number":
        return { sql: numberLiteral(expression.value, expression.text), numeric: true };
      case "string":
        return { sql: this.#dialect.literal(expression.value), numeric: false };
      case "missing":
        return { sql: "NULL", numeric: true };
      case "name": {
        const found = this.#lookup(expression.name);
        if (found !== null) return found;
        if (bare) return { sql: this.#dialect.literal(expression.name), numeric: false };
        throw new DataProblem("unknown-column", { column: expression.name, nearest: null, columns: "" });
      }
      case "negate":
        return { sql: `(-${this.#numeric(expression.operand)})`, numeric: true };
      case "arithmetic": {
        const left = this.#numeric(expression.left);
        const right = this.#numeric(expression.right);
        if (expression.operator === "^") return { sql: `power(${left}, ${right})`, numeric: true };
        if (expression.operator === "/")
          return { sql: `(CAST(${left} AS DOUBLE PRECISION) / ${right})`, numeric: true };
        return { sql: `(${left} ${expression.operator} ${right})`, numeric: true };
      }
      case "function": {
        const operand = this.#numeric(expression.operand);
        const double = `CAST(${operand} AS DOUBLE PRECISION)`;
        const functions = {
          log: `ln(${double})`,
          log10: `(ln(${double}) / ln(CAST(10 AS DOUBLE PRECISION)))`,
          root: `sqrt(${double})`,
          abs: `abs(${operand})`,
          exp: `exp(${double})`,
          // Halves go up, as they do elsewhere here.
          round: `floor(${operand} + 0.5)`,
        } as const;
        return { sql: functions[expression.function], numeric: true };
      }
      case "choice": {
        const yes = this.expression(expression.then);
        const no = this.expression(expression.otherwise);
        const numeric = yes.numeric && no.numeric;
        const written = (part: Part) => (numeric ? part.sql : this.#dialect.text(part.sql));
        const condition = this.condition(expression.condition);
        return { sql: `(CASE WHEN ${condition} THEN ${written(yes)} ELSE ${written(no)} END)`, numeric };
      }
    }
  }

  #numeric(expression: Expression): string {
    const part = this.expression(expression);
    return part.numeric ? part.sql : this.#dialect.number(part.sql);
  }

  /** A condition that is true or false, never unknown. */
  condition(condition: Condition): string {
    switch (condition.type) {
      case "and":
        return `(${this.condition(condition.left)} AND ${this.condition(condition.right)})`;
      case "or":
        return `(${this.condition(condition.left)} OR ${this.condition(condition.right)})`;
      case "not":
        return `(NOT ${this.condition(condition.operand)})`;
      case "is missing":
        return `(${this.expression(condition.left).sql} IS ${condition.negated ? "NOT " : ""}NULL)`;
      case "between": {
        const [value, low, high] = [condition.left, condition.low, condition.high].map((part) => this.#numeric(part));
        return `COALESCE(${value} BETWEEN ${low} AND ${high}, FALSE)`;
      }
      case "among": {
        const any = condition.values.map((value) => this.#equal(condition.left, value)).join(" OR ");
        return condition.negated ? `(NOT (${any}))` : `(${any})`;
      }
      case "compare": {
        const { operator, left, right } = condition;
        if (operator === "=") return this.#equal(left, right);
        if (operator === "!=") return `(${this.expression(left).sql} IS NOT NULL AND NOT ${this.#equal(left, right)})`;
        return `COALESCE(${this.#numeric(left)} ${operator} ${this.#numeric(right)}, FALSE)`;
      }
    }
  }

  /** By text first, by value second. */
  #equal(left: Expression, right: Expression): string {
    const first = this.expression(left);
    const second = this.expression(right, true);
    if (first.numeric && second.numeric) return `COALESCE(${first.sql} = ${second.sql}, FALSE)`;
    const asNumber = (part: Part) => (part.numeric ? part.sql : this.#dialect.number(part.sql));
    const byText = `${this.#dialect.text(first.sql)} = ${this.#dialect.text(second.sql)}`;
    return `(COALESCE(${byText}, FALSE) OR COALESCE(${asNumber(first)} = ${asNumber(second)}, FALSE))`;
  }
}

function numberLiteral(value: number, text: string): string {
  return /^[+-]?\d+(\.\d+)?$/.test(text) ? text : String(value);
}
