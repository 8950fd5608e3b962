import type { Name, NumberValue } from "./ast.ts";
import { problem } from "./problems.ts";
import type { Problem } from "./ast.ts";
import type { Span } from "./span.ts";

/** Reads the parts that the parser remembered under the labels of a syntax. `build` functions use nothing else: they never see tokens. */
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
  /** What a rule or an inner statement built. */
  built<T>(label: string): T;
  builtOrNull<T>(label: string): T | null;
  builtAll<T>(label: string): readonly T[];
  /** The fixed words remembered under a label, as the syntax has them, or null. */
  word<W extends string = string>(label: string): W | null;
  /** A share between 0 and 1, both excluded unless told otherwise. */
  share(label: string, what: string, including?: "zero"): NumberValue;
  shareOrNull(label: string, what: string, including?: "zero"): NumberValue | null;
  /** A whole number, 1 or more unless told otherwise. */
  whole(label: string, what: string, atLeast?: number, atMost?: number): NumberValue;
  wholeOrNull(label: string, what: string, atLeast?: number, atMost?: number): NumberValue | null;
  wholes(label: string, what: string, atLeast?: number): readonly NumberValue[];
}

/** Something a build function found wrong that the syntax cannot say. */
export class BuildProblem extends Error {
  readonly problem: Problem;
  constructor(found: Problem) {
    super(found.message);
    this.problem = found;
  }
}

/** What stands under a label: built when it is asked for, so that nothing is built from a broken statement. */
export type Field =
  | { readonly kind: "name"; readonly value: Name }
  | { readonly kind: "number"; readonly value: NumberValue }
  | { readonly kind: "word"; readonly value: string; readonly span: Span }
  | { readonly kind: "group"; readonly value: Read }
  | { readonly kind: "rule"; readonly build: (read: Read) => unknown; readonly read: Read };

const spanOf = (field: Field): Span => {
  switch (field.kind) {
    case "word":
      return field.span;
    case "rule":
      return field.read.span;
    default:
      return field.value.span;
  }
};

export type Fields = ReadonlyMap<string, readonly Field[]>;

/** Largest whole number that is exact. */
const largestWhole = Number.MAX_SAFE_INTEGER;

export function readerOf(fields: Fields, span: Span): Read {
  const all = (label: string): readonly Field[] => fields.get(label) ?? [];
  const one = (label: string): Field | undefined => {
    const found = all(label);
    if (found.length > 1) throw new BuildProblem(problem("said-twice", spanOf(found[1]!), { what: said(label) }));
    return found[0];
  };
  const needed = (label: string): Field => {
    const found = one(label);
    if (found === undefined) throw new Error(`the syntax has no part "${label}"`);
    return found;
  };
  const nameIn = (field: Field): Name => {
    if (field.kind === "name") return field.value;
    throw new Error("the syntax has no name here");
  };
  const numberIn = (field: Field): NumberValue => {
    if (field.kind !== "number") throw new Error("the syntax has no number here");
    if (Number.isFinite(field.value.value)) return field.value;
    throw new BuildProblem(problem("number-unusable", field.value.span, { value: field.value.text }));
  };
  const readIn = (field: Field): Read => {
    if (field.kind === "group") return field.value;
    throw new Error("the syntax has no group here");
  };
  const builtIn = (field: Field): unknown => {
    if (field.kind === "rule") return field.build(field.read);
    throw new Error("the syntax has no rule here");
  };
  const inShare = (value: NumberValue, what: string, including?: "zero"): NumberValue => {
    const low = including === "zero" ? value.value >= 0 : value.value > 0;
    if (low && value.value < 1) return value;
    throw new BuildProblem(
      problem("number-range", value.span, {
        what,
        value: value.text,
        allowed: including === "zero" ? "from 0% to less than 100%" : "between 0% and 100%",
        percent: value.value >= 1 && value.value < 100 && !value.text.includes("%") ? `${value.text}%` : null,
      }),
    );
  };
  const inWholes = (value: NumberValue, what: string, atLeast = 1, atMost = largestWhole): NumberValue => {
    if (Number.isInteger(value.value) && value.value >= atLeast && value.value <= atMost) return value;
    const allowed =
      atMost === largestWhole ? `a whole number, ${atLeast} or more` : `a whole number from ${atLeast} to ${atMost}`;
    throw new BuildProblem(problem("number-range", value.span, { what, value: value.text, allowed, percent: null }));
  };
  const read: Read = {
    span,
    has: (label) => all(label).length > 0,
    name: (label) => nameIn(needed(label)),
    nameOrNull: (label) => (one(label) === undefined ? null : nameIn(needed(label))),
    names: (label) => all(label).map(nameIn),
    number: (label) => numberIn(needed(label)),
    numberOrNull: (label) => (one(label) === undefined ? null : numberIn(needed(label))),
    numbers: (label) => all(label).map(numberIn),
    groups: (label) => all(label).map(readIn),
    group: (label) => (one(label) === undefined ? null : readIn(needed(label))),
    built: <T>(label: string) => builtIn(needed(label)) as T,
    builtOrNull: <T>(label: string) => (one(label) === undefined ? null : (builtIn(needed(label)) as T)),
    builtAll: <T>(label: string) => all(label).map((field) => builtIn(field) as T),
    word: <W extends string>(label: string) => {
      const found = one(label);
      return found?.kind === "word" ? (found.value as W) : null;
    },
    share: (label, what, including) => inShare(numberIn(needed(label)), what, including),
    shareOrNull: (label, what, including) => (one(label) === undefined ? null : read.share(label, what, including)),
    whole: (label, what, atLeast, atMost) => inWholes(numberIn(needed(label)), what, atLeast, atMost),
    wholeOrNull: (label, what, atLeast, atMost) =>
      one(label) === undefined ? null : read.whole(label, what, atLeast, atMost),
    wholes: (label, what, atLeast) => all(label).map((field) => inWholes(numberIn(field), what, atLeast)),
  };
  return read;
}

/** `heldBy` -> `held by`. */
const said = (label: string): string => label.replace(/([A-Z])/g, (letter) => ` ${letter.toLowerCase()}`);
