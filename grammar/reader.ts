import type { Name, NumberValue } from "./ast.ts";
import type { Span } from "./span.ts";

/** What the parser remembered under the labels of a syntax. */
export type Fields = Map<string, unknown[]>;

/** Reads remembered parts by label. `build` functions use nothing else, so they never see tokens. */
export interface Read {
  readonly span: Span;
  has(label: string): boolean;
  name(label: string): Name;
  nameOrNull(label: string): Name | null;
  names(label: string): readonly Name[];
  number(label: string): NumberValue;
  numberOrNull(label: string): NumberValue | null;
  numbers(label: string): readonly NumberValue[];
  groups(label: string): readonly Read[];
  group(label: string): Read | null;
  /** What a rule built. */
  built<T>(label: string): T;
  builtAll<T>(label: string): readonly T[];
  /** The word remembered under a label, or null. */
  word(label: string): string | null;
}

/** A build function found something wrong that the syntax cannot say. */
export class BuildProblem extends Error {
  readonly code: string;
  readonly advice: string;
  readonly span: Span;
  constructor(code: string, message: string, advice: string, span: Span) {
    super(message);
    this.code = code;
    this.advice = advice;
    this.span = span;
  }
}

export function readerOf(fields: Fields, span: Span): Read {
  const all = (label: string): readonly unknown[] => fields.get(label) ?? [];
  const one = (label: string): unknown => {
    const found = all(label);
    if (found.length > 1) {
      const second = found[1] as { span?: Span };
      throw new BuildProblem(
        "said-twice",
        `"${label}" is said twice in one statement.`,
        "Keep one of them.",
        second.span ?? span,
      );
    }
    return found[0];
  };
  const needed = (label: string): unknown => {
    const found = one(label);
    if (found === undefined) throw new Error(`the syntax has no part "${label}"`);
    return found;
  };
  return {
    span,
    has: (label) => all(label).length > 0,
    name: (label) => needed(label) as Name,
    nameOrNull: (label) => (one(label) as Name | undefined) ?? null,
    names: (label) => all(label) as readonly Name[],
    number: (label) => needed(label) as NumberValue,
    numberOrNull: (label) => (one(label) as NumberValue | undefined) ?? null,
    numbers: (label) => all(label) as readonly NumberValue[],
    groups: (label) => all(label) as readonly Read[],
    group: (label) => (one(label) as Read | undefined) ?? null,
    built: <T>(label: string) => needed(label) as T,
    builtAll: <T>(label: string) => all(label) as readonly T[],
    word: (label) => (all(label)[0] as { text: string } | undefined)?.text ?? null,
  };
}
