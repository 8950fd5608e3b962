import type { Statement, StatementOf } from "../../grammar/index.ts";
import type { Host } from "../host/index.ts";
import type { LedgerEvent, LedgerFacts } from "../record/index.ts";
import type { Result } from "../results/index.ts";
import type { Study } from "./study.ts";

/** What a handler may use beside the study itself. */
export interface Context {
  readonly host: Host;
  /** Number of the cell, from 1. */
  readonly cell: number;
  /** The statement in its settled form: what the record keeps of it. */
  readonly text: string;
  readonly version: string;
}

export interface Outcome {
  readonly study: Study;
  readonly result: Result;
  /** What the ledger must know; written and flushed before the result is shown. */
  readonly events?: readonly { readonly event: LedgerEvent; readonly facts: LedgerFacts }[] | undefined;
}

/** Runs one kind of statement: takes a study and returns the next one. Throws problems as errors with code and advice. */
export type Handler<K extends Statement["kind"]> = (
  statement: StatementOf<K>,
  study: Study,
  context: Context,
) => Outcome | Promise<Outcome>;

/** Result of a statement that only had to be taken in. */
export function taken(code: string, facts: Extract<Result, { kind: "message" }>["facts"] = {}): Result {
  return { kind: "message", code, facts, notes: [] };
}
