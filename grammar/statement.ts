import type { Statement } from "./ast.ts";
import type { Read } from "./reader.ts";
import type { Syntax } from "./syntax.ts";

export type StatementGroup = "declare" | "plan" | "data" | "analyse" | "record";

/** Everything there is to know about a statement, apart from what it does. */
export interface StatementDescription<S extends Statement> {
  readonly verb: S["kind"];
  readonly group: StatementGroup;
  /** One line. */
  readonly help: string;
  /** More for those who ask: each a line or short paragraph. */
  readonly details: readonly string[];
  /** Parses as it stands. */
  readonly example: string;
  /** What follows the verb. */
  readonly syntax: Syntax;
  /** True where clauses nearly always follow on lines of their own, so that a console waits for them. */
  readonly continues?: boolean;
  /** True where what follows the verb is not read as tokens (`data`). */
  readonly rows?: boolean;
  readonly build: (read: Read) => S;
  /** The statement as the language writes it: lines, the first at the margin, the others to be indented. */
  readonly print: (statement: S) => readonly string[];
}

export function defineStatement<S extends Statement>(description: StatementDescription<S>): StatementDescription<S> {
  return description;
}
