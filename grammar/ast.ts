import type { Span } from "./span.ts";

/** A name as written, with its place. Quoted names lose their quotes; `""` inside becomes one quote. */
export interface Name {
  readonly text: string;
  readonly span: Span;
  readonly quoted: boolean;
}

/** A quoted text such as a title, a path or a reason; `quoted` is true. */
export type Text = Name;

/** A number as written: `5%` has the value 0.05, `1/3` a third. */
export interface NumberValue {
  readonly value: number;
  readonly text: string;
  readonly span: Span;
}

export interface LevelPlace {
  readonly level: Name;
  readonly factor: Name | null;
}

export type AtPart = LevelPlace | { readonly each: Name };

export type ContrastNode =
  | { readonly type: "level"; readonly level: Name; readonly factor: Name | null }
  | { readonly type: "mean"; readonly of: readonly ContrastNode[] }
  | { readonly type: "number"; readonly number: NumberValue }
  | { readonly type: "negate"; readonly operand: ContrastNode }
  | {
      readonly type: "arithmetic";
      readonly operator: "+" | "-" | "*" | "/";
      readonly left: ContrastNode;
      readonly right: ContrastNode;
    }
  | { readonly type: "at"; readonly operand: ContrastNode; readonly at: readonly LevelPlace[] }
  | { readonly type: "weights"; readonly weights: readonly { readonly level: Name; readonly weight: NumberValue }[] };

export type MemberNode = { readonly at: readonly AtPart[]; readonly span: Span } & (
  | { readonly type: "contrast"; readonly name: Name }
  | { readonly type: "each against level"; readonly factor: Name; readonly level: Name }
  | { readonly type: "each against mean"; readonly factor: Name }
  | { readonly type: "all pairs"; readonly factor: Name }
  | { readonly type: "neighbours"; readonly factor: Name }
  | { readonly type: "trend"; readonly factor: Name; readonly degrees: readonly number[] }
);

export type MethodWord =
  | "none"
  | "bonferroni"
  | "sidak"
  | "holm"
  | "hochberg"
  | "hommel"
  | "shaffer"
  | "tukey"
  | "games-howell"
  | "dunnett"
  | "scheffe"
  | "single-step"
  | "step-down"
  | "resampling"
  | "fixed sequence"
  | "fallback"
  | "graph"
  | "bh"
  | "by"
  | "dunn"
  | "conover"
  | "nemenyi";

export interface Hold {
  readonly rate: NumberValue;
  readonly method: MethodWord;
  readonly holds: "family" | "false discovery";
}

/** Same shape as the data room's expressions, with places beside. */
export type ExpressionNode = { readonly span: Span } & (
  | { readonly type: "number"; readonly value: number; readonly text: string }
  | { readonly type: "string"; readonly value: string }
  | { readonly type: "name"; readonly name: string }
  | { readonly type: "missing" }
  | { readonly type: "negate"; readonly operand: ExpressionNode }
  | {
      readonly type: "arithmetic";
      readonly operator: "+" | "-" | "*" | "/" | "^";
      readonly left: ExpressionNode;
      readonly right: ExpressionNode;
    }
  | {
      readonly type: "function";
      readonly function: "log" | "log10" | "root" | "abs" | "exp" | "round";
      readonly operand: ExpressionNode;
    }
  | {
      readonly type: "choice";
      readonly condition: ConditionNode;
      readonly then: ExpressionNode;
      readonly otherwise: ExpressionNode;
    }
);

export type ConditionNode = { readonly span: Span } & (
  | {
      readonly type: "compare";
      readonly operator: "=" | "!=" | "<" | "<=" | ">" | ">=";
      readonly left: ExpressionNode;
      readonly right: ExpressionNode;
    }
  | {
      readonly type: "among";
      readonly left: ExpressionNode;
      readonly values: readonly ExpressionNode[];
      readonly negated: boolean;
    }
  | {
      readonly type: "between";
      readonly left: ExpressionNode;
      readonly low: ExpressionNode;
      readonly high: ExpressionNode;
    }
  | { readonly type: "is missing"; readonly left: ExpressionNode; readonly negated: boolean }
  | { readonly type: "and" | "or"; readonly left: ConditionNode; readonly right: ConditionNode }
  | { readonly type: "not"; readonly operand: ConditionNode }
);

/** What `size`, `power`, `detectable`, `calibrate` are about: a family by name, or the omnibus test (null). */
export interface Aim {
  readonly family: Name | null;
}
export type Goal = "every" | "any" | "each";

type Spanned = { readonly span: Span };

export type StudyStatement = Spanned & { readonly kind: "study"; readonly title: Text; readonly caution: Text | null };
export type ResponseStatement = Spanned & {
  readonly kind: "response";
  readonly name: Name;
  readonly label: Text | null;
  readonly unit: Text | null;
  readonly better: "lower" | "higher" | null;
  readonly scale: "linear" | "log";
};
interface UnitParts {
  readonly name: Name;
  /** Innermost first. */
  readonly nestedIn: readonly Name[];
  readonly slopes: readonly Name[];
}
export type SubjectsStatement = Spanned & UnitParts & { readonly kind: "subjects" };
export type ItemsStatement = Spanned & UnitParts & { readonly kind: "items" };
export type BlocksStatement = Spanned & UnitParts & { readonly kind: "blocks" };
export type FactorStatement = Spanned & {
  readonly kind: "factor";
  readonly name: Name;
  readonly varies: "within" | "between";
  readonly unit: Name;
  readonly betweenUnit: Name | null;
  readonly levels: readonly Name[];
  readonly ordered: boolean;
  readonly measured: boolean;
  readonly positions: readonly NumberValue[] | null;
  readonly reference: Name | null;
};
export type CovariateStatement = Spanned & {
  readonly kind: "covariate";
  readonly name: Name;
  /** Null where the statement does not say. */
  readonly varies: "within" | "between" | null;
  readonly unit: Name | null;
  readonly centred: boolean;
};
export type ContrastStatement = Spanned & {
  readonly kind: "contrast";
  readonly name: Name;
  readonly expression: ContrastNode;
};
export interface MarginClause {
  readonly type: "equivalence" | "not worse";
  readonly value: NumberValue;
}
export type FamilyStatement = Spanned & {
  readonly kind: "family";
  readonly name: Name;
  readonly members: readonly MemberNode[];
  readonly hold: Hold | null;
  readonly sides: "two-sided" | "upper" | "lower";
  readonly after: { readonly family: Name; readonly any: boolean } | null;
  readonly margin: MarginClause | null;
  readonly weights: readonly { readonly member: Name; readonly weight: NumberValue }[] | null;
  readonly passes: readonly { readonly from: Name; readonly to: Name; readonly share: NumberValue }[] | null;
};
export type AssumeStatement = Spanned & {
  readonly kind: "assume";
  readonly what: "equal variances" | "unequal variances" | "sphericity" | "compound symmetry" | "unstructured";
};
/** `allocation shift 2:1`: how many subjects each level of a between factor gets, in proportion. */
export interface Allocation {
  readonly factor: Name | null;
  readonly shares: readonly NumberValue[];
}
export interface ExpectedLevels {
  /** Factors crossed: `glove by shift bare day 41, ...`; one name for a main effect. */
  readonly factors: readonly Name[];
  readonly values: readonly { readonly levels: readonly Name[]; readonly value: NumberValue }[];
}
export type ExpectStatement = Spanned & {
  readonly kind: "expect";
  readonly response: Name;
  readonly means: readonly ExpectedLevels[];
  readonly spread: { readonly common: NumberValue | null; readonly byLevel: ExpectedLevels | null } | null;
  /** One correlation, or the lower triangle row by row (2 with 1, 3 with 1, 3 with 2 ...). */
  readonly correlation: readonly NumberValue[] | null;
  readonly dropout: NumberValue | null;
  readonly missing: NumberValue | null;
  readonly shape: "normal" | "skewed" | "heavy tails" | null;
  readonly allocation: Allocation | null;
  /** Of one more subject, in whatever currency. */
  readonly cost: NumberValue | null;
};
export type ReadStatement = Spanned & {
  readonly kind: "read";
  readonly path: Text;
  /** `read table "trials" from "postgresql://..."`: then `path` is the connection. */
  readonly table: Text | null;
  readonly sheet: Text | null;
  readonly folds: readonly { readonly columns: readonly Name[]; readonly response: Name; readonly factor: Name }[];
  readonly renames: readonly { readonly from: Name; readonly to: Name }[];
  readonly missing: readonly Text[];
  readonly separator: Text | null;
  readonly encoding: Text | null;
  readonly decimal: "comma" | "point" | null;
};
export type DataStatement = Spanned & { readonly kind: "data"; readonly rows: readonly (readonly Name[])[] };
export type DeriveStatement = Spanned & {
  readonly kind: "derive";
  readonly name: Name;
  readonly expression: ExpressionNode;
};
export type ExcludeStatement = Spanned & {
  readonly kind: "exclude";
  readonly condition: ConditionNode;
  readonly reason: Text;
};
export type AverageStatement = Spanned & {
  readonly kind: "average";
  readonly response: Name;
  readonly over: readonly Name[];
  readonly by: "mean" | "median";
};
export type ShowStatement = Spanned & {
  readonly kind: "show";
  readonly what: "data" | "design" | "plan" | "families" | "ledger" | "settings";
};
export type CheckStatement = Spanned & { readonly kind: "check" };
export type DescribeStatement = Spanned & {
  readonly kind: "describe";
  readonly response: Name | null;
  readonly by: readonly Name[];
  readonly quartiles: boolean;
};
export type OmnibusMethod =
  | "multilevel model"
  | "variance analysis"
  | "welch"
  | "brown-forsythe"
  | "ranks"
  | "resampling"
  | "multivariate";
export type OmnibusStatement = Spanned & {
  readonly kind: "omnibus";
  readonly method: OmnibusMethod | null;
  readonly effects: readonly (readonly Name[])[] | null;
  readonly marginality: boolean;
  readonly degrees: "kenward-roger" | "satterthwaite" | null;
  /** `with 999 bootstrap studies`: parametric bootstrap of the likelihood ratio. */
  readonly bootstrap: NumberValue | null;
  /** `with 9999 resamples`. */
  readonly resamples: NumberValue | null;
  readonly seed: NumberValue | null;
};
export type CompareStatement = Spanned & { readonly kind: "compare"; readonly family: Name; readonly beside: boolean };
export type ExploreStatement = Spanned & {
  readonly kind: "explore";
  readonly members: readonly MemberNode[];
  readonly method: MethodWord | null;
  readonly rate: NumberValue | null;
  readonly holds: "family" | "false discovery";
  readonly sides: "two-sided" | "upper" | "lower";
  readonly margin: MarginClause | null;
  readonly beside: boolean;
};
export type DrawStatement = Spanned & {
  readonly kind: "draw";
  readonly what:
    | "means"
    | "profiles"
    | "distributions"
    | "residuals"
    | "comparisons"
    | "power"
    | "passing"
    | "calibration";
  readonly response: Name | null;
  readonly by: readonly Name[];
  readonly family: Name | null;
  readonly omnibus: boolean;
  readonly from: NumberValue | null;
  readonly to: NumberValue | null;
};
/** Clauses that planning statements share; null where `expect` or the default stands. */
interface PlanningOptions {
  readonly allocation: Allocation | null;
  readonly cost: NumberValue | null;
  readonly studies: NumberValue | null;
  readonly seed: NumberValue | null;
}
export type SizeStatement = Spanned &
  PlanningOptions & { readonly kind: "size"; readonly aim: Aim; readonly power: NumberValue; readonly goal: Goal };
export type PowerStatement = Spanned &
  PlanningOptions & { readonly kind: "power"; readonly aim: Aim; readonly subjects: readonly NumberValue[] };
export type DetectableStatement = Spanned &
  PlanningOptions & {
    readonly kind: "detectable";
    readonly aim: Aim;
    readonly subjects: readonly NumberValue[];
    readonly power: NumberValue;
    readonly goal: Goal;
  };
export type RehearseStatement = Spanned & {
  readonly kind: "rehearse";
  readonly subjects: NumberValue;
  readonly seed: NumberValue | null;
};
export type CalibrateStatement = Spanned & {
  readonly kind: "calibrate";
  readonly aim: Aim;
  readonly studies: NumberValue | null;
  readonly seed: NumberValue | null;
  readonly subjects: NumberValue | null;
  /** `from data` or `from plan`: whose sizes, spreads and shape the simulated studies have. */
  readonly basis: "data" | "plan" | null;
  /** `shard 2 of 8`. */
  readonly shard: { readonly index: NumberValue; readonly of: NumberValue } | null;
};
export type SealStatement = Spanned & { readonly kind: "seal"; readonly name: Text };
export type OpenStatement = Spanned & { readonly kind: "open"; readonly name: Text };
export type DropPart = Spanned & {
  readonly kind: "drop";
  readonly what: "contrast" | "family" | "factor" | "covariate";
  readonly name: Name;
};
export type AmendStatement = Spanned & {
  readonly kind: "amend";
  readonly change: Declaration | DropPart;
  readonly reason: Text;
};
export type ReportStatement = Spanned & { readonly kind: "report"; readonly path: Text | null };
/** `audit with head "..."`: the digest that somebody kept of the record's last entry. */
export type AuditStatement = Spanned & { readonly kind: "audit"; readonly head: Text | null };
export type ExportedResult =
  | "comparisons"
  | "omnibus"
  | "description"
  | "check"
  | "data"
  | "picture"
  | "power"
  | "size"
  | "detectable"
  | "calibration"
  | "ledger"
  | "plan";
/** The latest result of that kind; `name` narrows `comparisons` to a family. */
export type ExportStatement = Spanned & {
  readonly kind: "export";
  readonly what: ExportedResult;
  readonly name: Name | null;
  readonly path: Text;
};
export type SetStatement = Spanned & {
  readonly kind: "set";
  readonly setting:
    | { readonly name: "digits"; readonly value: NumberValue }
    | { readonly name: "seed"; readonly value: NumberValue }
    | { readonly name: "interval"; readonly value: NumberValue }
    | { readonly name: "resamples"; readonly value: NumberValue }
    | { readonly name: "studies"; readonly value: NumberValue }
    | { readonly name: "show"; readonly what: "adjusted p" | "thresholds" | "both" }
    | {
        readonly name: "standardiser";
        readonly value: "pooled spread" | "average spread" | "control spread" | "difference spread" | "default";
      };
};
export type HelpStatement = Spanned & { readonly kind: "help"; readonly topic: Name | null };

export type Declaration =
  | StudyStatement
  | ResponseStatement
  | SubjectsStatement
  | ItemsStatement
  | BlocksStatement
  | FactorStatement
  | CovariateStatement
  | ContrastStatement
  | FamilyStatement
  | AssumeStatement
  | ExpectStatement;

export type Statement =
  | Declaration
  | ReadStatement
  | DataStatement
  | DeriveStatement
  | ExcludeStatement
  | AverageStatement
  | ShowStatement
  | CheckStatement
  | DescribeStatement
  | OmnibusStatement
  | CompareStatement
  | ExploreStatement
  | DrawStatement
  | SizeStatement
  | PowerStatement
  | DetectableStatement
  | RehearseStatement
  | CalibrateStatement
  | SealStatement
  | OpenStatement
  | AmendStatement
  | ReportStatement
  | AuditStatement
  | ExportStatement
  | SetStatement
  | HelpStatement;

export type StatementOf<K extends Statement["kind"]> = Extract<Statement, { kind: K }>;

export interface Comment {
  /** With its `#`, without the line end. */
  readonly text: string;
  readonly span: Span;
}

/** A mistake in a cell, with its place: the grammar's, and in the same shape the session's. */
export interface Problem {
  readonly code: string;
  readonly message: string;
  /** What to do. */
  readonly advice: string;
  readonly span: Span;
}

export interface ParsedCell {
  /** The statements that are whole; do not run them while there are problems. */
  readonly statements: readonly Statement[];
  /** In order of their places; empty when the cell may run. */
  readonly problems: readonly Problem[];
  readonly comments: readonly Comment[];
}
