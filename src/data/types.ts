/**
 * Columns as the rest of the house sees them. A table is immutable: each step (rename, fold, derive, exclude, average)
 * returns a new one.
 */

/** Texts by code: `categories[codes[row]]`; code -1 is missing. Categories in order of first appearance. */
export interface TextCodes {
  readonly codes: Int32Array;
  readonly categories: readonly string[];
}

export interface TextColumn extends TextCodes {
  readonly kind: "text";
  readonly name: string;
}

/**
 * Numbers with their exact decimal intake: the value of a row is `center + offsets[row]`, where `center` is exactly
 * representable and the subtraction was done in decimal arithmetic, before anything became binary; so
 * 1000000000000.4 keeps its .4 to full precision. NaN in `offsets` is missing.
 */
export interface NumberColumn {
  readonly kind: "number";
  readonly name: string;
  readonly center: number;
  readonly offsets: Float64Array;
  /** The texts as they stood in the file, so that a numeric column can serve as a factor or unit; null when there are too many distinct ones to keep. */
  readonly texts: TextCodes | null;
  /** Largest number of decimal places; null where the values are computed doubles and not decimals. */
  readonly decimals: number | null;
}

export type Column = TextColumn | NumberColumn;

export interface Table {
  readonly rows: number;
  readonly columns: readonly Column[];
  /** Line (or row) of the source that each row came from, from 1, header counted; for messages. */
  readonly sourceRows: Int32Array;
}

/**
 * Arithmetic and conditions over columns, as `derive` and `exclude where` use them. The grammar builds objects of
 * this shape (with spans beside); names are resolved against columns by exact match.
 */
export type Expression =
  | { readonly type: "number"; readonly value: number; readonly text: string }
  | { readonly type: "string"; readonly value: string }
  | { readonly type: "name"; readonly name: string }
  | { readonly type: "missing" }
  | { readonly type: "negate"; readonly operand: Expression }
  | {
      readonly type: "arithmetic";
      readonly operator: "+" | "-" | "*" | "/" | "^";
      readonly left: Expression;
      readonly right: Expression;
    }
  /** log (natural), log10, square root ("root"), abs, exp, round; in words of the language: `log of x`, `root of x` ... */
  | {
      readonly type: "function";
      readonly function: "log" | "log10" | "root" | "abs" | "exp" | "round";
      readonly operand: Expression;
    }
  /** `if CONDITION then A else B` */
  | {
      readonly type: "choice";
      readonly condition: Condition;
      readonly then: Expression;
      readonly otherwise: Expression;
    };

export type Condition =
  /** A bare word on the right of a comparison is a level (text) when no column has that name. */
  | {
      readonly type: "compare";
      readonly operator: "=" | "!=" | "<" | "<=" | ">" | ">=";
      readonly left: Expression;
      readonly right: Expression;
    }
  | {
      readonly type: "among";
      readonly left: Expression;
      readonly values: readonly Expression[];
      readonly negated: boolean;
    }
  | { readonly type: "between"; readonly left: Expression; readonly low: Expression; readonly high: Expression }
  | { readonly type: "is missing"; readonly left: Expression; readonly negated: boolean }
  | { readonly type: "and" | "or"; readonly left: Condition; readonly right: Condition }
  | { readonly type: "not"; readonly operand: Condition };
