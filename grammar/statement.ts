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
  /** Runs as it stands after the glove study's declarations (or on its own). */
  readonly example: string;
  /** What follows the verb. Null where the rest is read in its own way (`data`, `amend`). */
  readonly syntax: Syntax | null;
  /** The printed form, where it is better told than derived. */
  readonly form?: string;
  readonly build: (read: Read) => S;
}

export function defineStatement<S extends Statement>(description: StatementDescription<S>): StatementDescription<S> {
  return description;
}
