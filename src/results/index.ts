/**
 * Every result that a statement can return: immutable plain objects with a `kind`, numbers unrounded, no prose, no
 * methods. The fields are a stable interface (a field may be added, none renamed); the command line writes them as they are.
 * What could not be computed is null, and a `notes` entry says why with a code.
 */

/** Something the reader must know about a result, as data: `src/present` has the sentence for each code. */
export interface Note {
  readonly code: string;
  readonly facts: Readonly<Record<string, string | number | boolean | null | readonly (string | number)[]>>;
}

export type State = "planned" | "declared" | "exploratory" | "rehearsal";

export interface ResponseFacts {
  readonly name: string;
  readonly label: string | null;
  readonly unit: string | null;
  readonly better: "lower" | "higher" | null;
  readonly scale: "linear" | "log";
}

export type EffectMethod =
  | "one-way"
  | "welch"
  | "brown-forsythe"
  | "factorial"
  | "covariance"
  | "repeated measures"
  | "multivariate"
  | "multilevel"
  | "kruskal-wallis"
  | "friedman"
  | "resampling";

export interface LikelihoodRatio {
  readonly statistic: number;
  readonly df: number;
  readonly p: number;
  readonly bootstrapP?: number;
  readonly bootstrapStudies?: number;
}

export interface EffectSizeValue {
  readonly name: string;
  readonly value: number;
  readonly lower: number | null;
  readonly upper: number | null;
}

export interface OmnibusEffect {
  /** Factor names joined by " x ". */
  readonly effect: string;
  readonly method: EffectMethod;
  /** Names the multivariate test, the kind of epsilon ... where one method has several forms. */
  readonly form?: string;
  /** Value of a multivariate criterion itself (`value` is its F). */
  readonly criterion?: number;
  readonly statistic: "F" | "chi-square" | "H" | "Q" | string;
  readonly value: number | null;
  readonly df1: number | null;
  readonly df2: number | null;
  readonly p: number | null;
  readonly sumOfSquares?: number;
  readonly meanSquare?: number;
  readonly errorSumOfSquares?: number;
  readonly errorMeanSquare?: number;
  readonly epsilonGreenhouseGeisser?: number;
  readonly epsilonHuynhFeldt?: number;
  readonly pGreenhouseGeisser?: number;
  readonly pHuynhFeldt?: number;
  readonly partialEtaSquared?: number;
  readonly partialEtaSquaredInterval?: readonly [number, number];
  readonly generalizedEtaSquared?: number;
  readonly omegaSquared?: number;
  readonly likelihoodRatio?: LikelihoodRatio;
  /** Exact enumeration, Monte Carlo size and the like. */
  readonly exact?: boolean;
  readonly resamples?: number;
  readonly monteCarloError?: number;
}

export interface VarianceComponent {
  readonly unit: string;
  readonly term: string;
  readonly variance: number;
  readonly sd: number;
  readonly lower?: number | null;
  readonly upper?: number | null;
  readonly boundary?: boolean;
  /** With the other effects of the same unit, where they may go together. */
  readonly correlations?: readonly { readonly with: string; readonly value: number }[];
}
export interface Sphericity {
  readonly effect: string;
  readonly w: number;
  readonly statistic: number;
  readonly df: number;
  readonly p: number;
}

export interface OmnibusResult {
  readonly kind: "omnibus";
  readonly method: EffectMethod;
  readonly response: ResponseFacts;
  readonly state: State;
  readonly effects: readonly OmnibusEffect[];
  readonly error?: { readonly df: number; readonly sumOfSquares: number; readonly meanSquare: number };
  readonly rSquared?: number;
  readonly residualSd?: number;
  readonly likelihoodRatio?: LikelihoodRatio;
  readonly varianceComponents?: readonly VarianceComponent[];
  readonly intraclassCorrelation?: readonly {
    readonly unit: string;
    readonly value: number;
    readonly lower: number | null;
    readonly upper: number | null;
  }[];
  readonly sphericity?: readonly Sphericity[];
  readonly observations: number;
  readonly subjects: number;
  readonly notes: readonly Note[];
}

export interface ComparisonRow {
  readonly comparison: string;
  readonly state: State;
  readonly estimate: number;
  readonly standardError: number | null;
  readonly df: number | null;
  readonly statistic: number | null;
  readonly p: number;
  readonly adjustedP: number;
  readonly threshold: number | null;
  readonly lower: number | null;
  readonly upper: number | null;
  readonly rejected: boolean;
  readonly effectSize: EffectSizeValue | null;
  readonly equivalence?: {
    readonly margin: number;
    readonly lowerP: number;
    readonly upperP: number;
    readonly equivalent: boolean;
  };
}

export interface ComparisonsResult {
  readonly kind: "comparisons";
  readonly family: string | null;
  readonly state: State;
  readonly response: ResponseFacts;
  /** The grammar's name of the method: "holm", "single-step" ... */
  readonly correction: string;
  /** What the method holds. */
  readonly holds: "family-wise error" | "false discovery rate" | "nothing";
  /** As a fraction. */
  readonly error: number;
  readonly sides: "two-sided" | "upper" | "lower";
  readonly margin: { readonly type: "equivalence" | "not worse"; readonly value: number } | null;
  readonly intervalLevel: number;
  /** Whether the intervals hold jointly and agree with the decisions; otherwise what they are. */
  readonly intervals: "simultaneous" | "individual" | "none";
  readonly after: { readonly family: string; readonly open: boolean } | null;
  readonly rows: readonly ComparisonRow[];
  /** Which error term the estimates used: "pooled", "unequal variances", "contrast scores", "multilevel" ... */
  readonly errorTerm: string;
  /** The sensitivity view, only where asked for. */
  readonly beside?: readonly {
    readonly correction: string;
    readonly declared: boolean;
    readonly adjustedP: readonly (number | null)[];
    readonly rejected: readonly (boolean | null)[];
    readonly unfit?: string;
  }[];
  readonly notes: readonly Note[];
}

export interface DescribeCell {
  readonly levels: Readonly<Record<string, string>>;
  readonly n: number;
  readonly missing: number;
  readonly mean: number | null;
  readonly sd: number | null;
  readonly standardError: number | null;
  readonly lower: number | null;
  readonly upper: number | null;
  readonly median?: number | null;
  readonly lowerQuartile?: number | null;
  readonly upperQuartile?: number | null;
  /** Within-subject interval (Cousineau 2005, Morey 2008), where the factor is within. */
  readonly withinLower?: number | null;
  readonly withinUpper?: number | null;
}

export interface DescribeResult {
  readonly kind: "describe";
  readonly response: ResponseFacts;
  readonly by: readonly string[];
  readonly intervalLevel: number;
  readonly cells: readonly DescribeCell[];
  readonly rehearsal: boolean;
  readonly notes: readonly Note[];
}

export interface DesignProblem {
  readonly code: string;
  readonly message: string;
  readonly advice: string;
  readonly severity: "error" | "note";
}

export interface AssumptionFinding {
  /** "spread", "normality", "sphericity", "outliers", "homogeneous slopes", "order" ... */
  readonly assumption: string;
  readonly method: string;
  readonly of: string;
  readonly statistic: number | null;
  readonly df1: number | null;
  readonly df2: number | null;
  readonly p: number | null;
  readonly finding: "no concern" | "concern" | "cannot tell";
  readonly facts: Readonly<Record<string, string | number | null | readonly (string | number)[]>>;
  /** A statement of the language that answers the finding, or null. */
  readonly statement: string | null;
}

export interface CheckResult {
  readonly kind: "check";
  readonly rehearsal: boolean;
  readonly design: {
    readonly subjects: number;
    readonly cells: number;
    readonly observations: number;
    readonly factors: readonly {
      readonly name: string;
      readonly declared: string;
      readonly found: string;
      readonly levels: readonly { readonly level: string; readonly subjects: number; readonly observations: number }[];
    }[];
    readonly subjectsPerCell: readonly {
      readonly levels: Readonly<Record<string, string>>;
      readonly subjects: number;
      readonly observations: number;
    }[];
    readonly missingCells: number;
    readonly problems: readonly DesignProblem[];
  };
  readonly assumptions: readonly AssumptionFinding[];
  readonly pictures: readonly Picture[];
  readonly notes: readonly Note[];
}

/** A picture as data; `src/present` turns it into Vega-Lite, SVG, PNG and words. */
export type Picture =
  | MeansPicture
  | ProfilesPicture
  | DistributionsPicture
  | ResidualsPicture
  | ComparisonsPicture
  | PowerPicture
  | PassingPicture
  | CalibrationPicture;

export interface PictureFrame {
  readonly response: ResponseFacts;
  readonly state: State;
  readonly notes: readonly Note[];
}
export interface MeansPicture extends PictureFrame {
  readonly picture: "means";
  /** First factor along the axis, second by shape, third and further as panels. */
  readonly factors: readonly { readonly name: string; readonly levels: readonly string[]; readonly ordered: boolean }[];
  readonly cells: readonly {
    readonly levels: Readonly<Record<string, string>>;
    readonly n: number;
    readonly mean: number | null;
    readonly lower: number | null;
    readonly upper: number | null;
  }[];
  /** Raw or per-subject values, at most 5,000 (then `sampled` says of how many). */
  readonly points: readonly { readonly levels: Readonly<Record<string, string>>; readonly value: number }[];
  readonly sampledFrom: number | null;
  readonly interval: "between" | "within";
  readonly intervalLevel: number;
}
export interface ProfilesPicture extends PictureFrame {
  readonly picture: "profiles";
  readonly factor: { readonly name: string; readonly levels: readonly string[] };
  readonly group: { readonly name: string; readonly levels: readonly string[] } | null;
  readonly lines: readonly {
    readonly subject: string;
    readonly group: string | null;
    readonly values: readonly (number | null)[];
  }[];
  readonly means: readonly { readonly group: string | null; readonly values: readonly (number | null)[] }[];
}
export interface DistributionsPicture extends PictureFrame {
  readonly picture: "distributions";
  readonly factor: { readonly name: string; readonly levels: readonly string[] };
  readonly values: readonly { readonly level: string; readonly values: readonly number[] }[];
  readonly sampledFrom: number | null;
}
export interface ResidualsPicture extends PictureFrame {
  readonly picture: "residuals";
  readonly fitted: readonly number[];
  /** Standardised residuals, in units of the residual standard deviation. */
  readonly residuals: readonly number[];
  /** Normal quantiles of the sorted residuals (Blom's plotting positions), same length. */
  readonly normalQuantiles: readonly number[];
  readonly sampledFrom: number | null;
}
export interface ComparisonsPicture extends PictureFrame {
  readonly picture: "comparisons";
  readonly comparisons: ComparisonsResult;
}
export interface PowerPicture extends PictureFrame {
  readonly picture: "power";
  readonly of: string;
  readonly goal: number | null;
  readonly curves: readonly {
    readonly name: string;
    readonly points: readonly {
      readonly subjects: number;
      readonly power: number;
      readonly monteCarloError: number | null;
    }[];
  }[];
}
export interface PassingPicture extends PictureFrame {
  readonly picture: "passing";
  readonly nodes: readonly {
    readonly name: string;
    readonly family: string;
    readonly weight: number;
    readonly rejected: boolean | null;
  }[];
  /** With `gate` from and to are families, and the pass opens once all of `from` is rejected; else they are nodes. */
  readonly passes: readonly {
    readonly from: string;
    readonly to: string;
    readonly share: number;
    readonly gate?: true;
  }[];
}
export interface CalibrationPicture extends PictureFrame {
  readonly picture: "calibration";
  readonly calibration: CalibrationResult;
}

export interface PictureResult {
  readonly kind: "picture";
  readonly picture: Picture;
}

export interface PowerResult {
  readonly kind: "power";
  readonly of: string;
  readonly method: "closed form" | "joint distribution" | "simulation";
  readonly errorRate: number;
  readonly correction: string | null;
  readonly points: readonly {
    readonly subjects: number;
    readonly subjectsPerGroup: readonly number[];
    readonly power?: number;
    readonly comparisons?: readonly { readonly comparison: string; readonly power: number }[];
    readonly every?: number;
    readonly any?: number;
    readonly monteCarloError?: number;
    readonly cost?: number;
  }[];
  readonly notes: readonly Note[];
}

export interface SizeResult {
  readonly kind: "size";
  readonly of: string;
  readonly target: number;
  readonly goal: "every" | "any" | "each" | "omnibus";
  readonly method: "closed form" | "joint distribution" | "simulation";
  readonly errorRate: number;
  readonly correction: string | null;
  readonly subjects: number;
  readonly subjectsPerGroup: readonly number[];
  /** To enrol, when dropout is expected. */
  readonly enrolled?: number;
  readonly achieved: number;
  readonly monteCarloError?: number;
  readonly comparisons?: readonly { readonly comparison: string; readonly power: number; readonly subjects?: number }[];
  readonly cost?: number;
  readonly notes: readonly Note[];
}

export interface DetectableResult {
  readonly kind: "detectable";
  readonly of: string;
  readonly target: number;
  readonly goal: "every" | "any" | "each" | "omnibus";
  readonly method: "closed form" | "joint distribution" | "simulation";
  readonly errorRate: number;
  readonly correction: string | null;
  readonly subjects: number;
  readonly subjectsPerGroup: readonly number[];
  /** By how much the expected differences are multiplied to reach the target. */
  readonly multiple: number;
  readonly comparisons?: readonly {
    readonly comparison: string;
    readonly estimate: number;
    readonly standardised: number;
  }[];
  readonly effectF?: number;
  readonly notes: readonly Note[];
}

export interface CalibrationScenario {
  /** "no difference", "as expected", "partly no difference" ... */
  readonly scenario: string;
  /** "plan" (from `expect`) or "data" (sizes, spreads and shape as observed). */
  readonly source: "plan" | "data";
  readonly studies: number;
  readonly familyError: number | null;
  readonly familyErrorMonteCarlo: number | null;
  readonly every: number | null;
  readonly any: number | null;
  /** Share of studies in which all intervals of the family cover. */
  readonly coverage: number | null;
  readonly coverageMonteCarlo: number | null;
  readonly comparisons: readonly {
    readonly comparison: string;
    readonly rejected: number;
    readonly trueDifference: number;
    readonly coverage: number | null;
  }[];
}
export interface CalibrationResult {
  readonly kind: "calibration";
  readonly of: string;
  readonly correction: string | null;
  readonly error: number;
  readonly seed: number;
  readonly studies: number;
  readonly asked: number;
  readonly shard: { readonly index: number; readonly of: number } | null;
  readonly scenarios: readonly CalibrationScenario[];
  /** "holds", "exceeds" or "cannot tell", from the family error and its Monte Carlo error. */
  readonly conclusion: "holds" | "exceeds" | "conservative" | "cannot tell";
  readonly notes: readonly Note[];
}

/** A table of words and numbers for statements that show what is held (`show ...`, `help`). */
export interface TableFacts {
  readonly title: string;
  readonly columns: readonly { readonly name: string; readonly type: "text" | "number" | "p" | "count" }[];
  readonly rows: readonly (readonly (string | number | null)[])[];
  readonly moreRows: number;
}

export interface DataResult {
  readonly kind: "data";
  readonly action: "read" | "typed" | "derive" | "exclude" | "average" | "rehearse" | "show";
  readonly source: string | null;
  readonly digest: string | null;
  readonly rows: number;
  readonly columns: readonly {
    readonly name: string;
    readonly type: "number" | "text";
    readonly role: string | null;
    readonly missing: number;
    readonly distinct: number;
  }[];
  readonly excluded: number;
  readonly excludedByCell: readonly { readonly levels: Readonly<Record<string, string>>; readonly rows: number }[];
  readonly reason: string | null;
  readonly afterResults: boolean;
  readonly seed: number | null;
  readonly rehearsal: boolean;
  readonly preview: TableFacts | null;
  readonly notes: readonly Note[];
}

export interface PlanResult {
  readonly kind: "plan";
  readonly action: "seal" | "open" | "amend" | "show";
  readonly name: string | null;
  readonly path: string | null;
  readonly digest: string | null;
  readonly sealedAt: string | null;
  /** The plan in statements of the language, a line each, as the formatter writes them. */
  readonly statements: readonly string[];
  readonly amendments: readonly {
    readonly at: string;
    readonly statement: string;
    readonly reason: string;
    readonly afterResults: boolean;
  }[];
  readonly notes: readonly Note[];
}

export interface LedgerResult {
  readonly kind: "ledger";
  readonly action: "audit" | "show";
  readonly path: string | null;
  readonly entries: readonly {
    readonly index: number;
    readonly at: string;
    readonly event: string;
    readonly summary: string;
    readonly digest: string;
  }[];
  readonly head: string | null;
  readonly whole: boolean;
  readonly problems: readonly {
    readonly entry: number | null;
    readonly code: string;
    readonly message: string;
    readonly advice: string;
  }[];
  readonly notes: readonly Note[];
}

export interface ReportResult {
  readonly kind: "report";
  readonly path: string;
  readonly format: "html" | "md" | "docx";
  readonly bytes: number;
  readonly sections: readonly string[];
  readonly notes: readonly Note[];
}
export interface ExportResult {
  readonly kind: "export";
  readonly path: string;
  readonly format: string;
  readonly bytes: number;
  readonly of: string;
  readonly notes: readonly Note[];
}
/** A statement that was taken in and has nothing to compute: declarations, settings. */
export interface MessageResult {
  readonly kind: "message";
  readonly code: string;
  readonly facts: Note["facts"];
  readonly notes: readonly Note[];
}
/** What `help` and `show ...` answer: sections of words, statements and tables. */
export interface HelpResult {
  readonly kind: "help";
  readonly topic: string;
  readonly sections: readonly {
    readonly heading: string | null;
    readonly lines: readonly string[];
    readonly example: string | null;
    readonly table: TableFacts | null;
  }[];
  readonly notes: readonly Note[];
}

export type Result =
  | OmnibusResult
  | ComparisonsResult
  | DescribeResult
  | CheckResult
  | PictureResult
  | PowerResult
  | SizeResult
  | DetectableResult
  | CalibrationResult
  | DataResult
  | PlanResult
  | LedgerResult
  | ReportResult
  | ExportResult
  | MessageResult
  | HelpResult;

/** A mistake of the user's, with its place (lines and columns from 1, columns in code points, end exclusive). */
export interface Problem {
  readonly cell: number;
  readonly line: number;
  readonly column: number;
  readonly endLine: number;
  readonly endColumn: number;
  readonly code: string;
  readonly message: string;
  readonly advice: string;
}
