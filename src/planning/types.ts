import type { Contrast, FactorDeclaration, MemberShape, UnitDeclaration } from "../design/types.ts";
import type { CorrectionName, FamilyProblem } from "../families/index.ts";
import type { Host, Watch } from "../host/index.ts";

export type ScoreShape = "normal" | "skewed" | "heavy tails";

/** Means by level of one factor or by cells of several crossed ones. */
export interface ExpectedMeans {
  readonly factors: readonly string[];
  readonly values: readonly { readonly levels: readonly string[]; readonly value: number }[];
}

/** What `expect` says, as plain data. Shares are fractions; null where nothing was said. */
export interface Expectation {
  readonly means: readonly ExpectedMeans[];
  readonly spread: { readonly common: number | null; readonly byLevel: ExpectedMeans | null } | null;
  /** One correlation of all within cells, or the lower triangle row by row over the within cells (2 with 1, 3 with 1, 3 with 2 ...). */
  readonly correlation: readonly number[] | null;
  /** Share of the subjects that are lost altogether. */
  readonly dropout: number | null;
  /** Share of single within cells that are missing, at random. */
  readonly missing: number | null;
  readonly shape: ScoreShape | null;
  /** How many subjects each level of a between factor gets, in proportion; `factor` null where there is only one. */
  readonly allocation: { readonly factor: string | null; readonly shares: readonly number[] } | null;
  /** Of one more subject. */
  readonly cost: number | null;
}

export interface PlannedDeclaration {
  readonly units: readonly UnitDeclaration[];
  readonly factors: readonly FactorDeclaration[];
  readonly scale: "linear" | "log";
  readonly variances: "equal" | "unequal";
  readonly covariance: "sphericity" | "compound symmetry" | "unstructured" | null;
}

/**
 * A design with everything that is expected of it. Cells are the full cross of all factors, between groups the cross of the between
 * factors, within cells the cross of the within factors, each in declaration order, last factor fastest.
 */
export interface PlanningDesign {
  readonly factors: readonly FactorDeclaration[];
  readonly scale: "linear" | "log";
  readonly variances: "equal" | "unequal";
  readonly covariance: "sphericity" | "compound symmetry" | "unstructured" | null;
  /** On the analysis scale, one per cell. */
  readonly cellMeans: readonly number[];
  /** Standard deviation between subjects, one per cell. */
  readonly cellSpread: readonly number[];
  /** Of the within cells of one subject: common to all pairs, or the whole matrix. Ignored where no factor is within. */
  readonly correlation: number | readonly (readonly number[])[];
  readonly shape: ScoreShape;
  readonly dropout: number;
  readonly missing: number;
  /** Positive shares, one per between group (one entry where no factor is between); only their proportions count. */
  readonly allocation: readonly number[];
  readonly cost: number | null;
  /** Unit of each subject's name, for rehearsals. */
  readonly unit: string;
}

/** A family as planned, with those it waits for. */
export interface FamilyPlan {
  readonly name: string;
  readonly contrasts: readonly Contrast[];
  readonly shape: MemberShape;
  readonly meansWeights: readonly (readonly number[])[];
  readonly correction: CorrectionName;
  readonly error: number;
  readonly sides: "two-sided" | "upper" | "lower";
  /** On the analysis scale. */
  readonly margin: FamilyProblem["margin"];
  readonly graph: FamilyProblem["graph"];
  readonly after: { readonly family: FamilyPlan; readonly any: boolean } | null;
}

export interface OmnibusPlan {
  /** Factor names of each effect; null: every effect of which a difference is expected. */
  readonly effects: readonly (readonly string[])[] | null;
  readonly error: number;
}

export type PlanAim = { readonly omnibus: OmnibusPlan } | { readonly family: FamilyPlan };

export type FamilyGoal = "every" | "any" | "each";

export interface PlanningOptions {
  readonly host: Pick<Host, "runJobs">;
  readonly watch: Watch;
  readonly seed: number;
  /** Simulated studies per number of subjects, where simulation is needed; default 10,000. */
  readonly studies?: number | undefined;
  /** Simulates also where an exact route exists (the agreement of both is tested). */
  readonly method?: "exact where possible" | "simulation" | undefined;
}

/** Sizes and spreads as found in data, for `calibrate ... from data`. */
export interface ObservedDesign {
  /** Subjects with a value in every within cell, per between group. */
  readonly groupSizes: readonly number[];
  /** One per cell of the full cross; the means that count as true in the scenario "as expected". */
  readonly cellMeans: readonly number[];
  /** Covariance of the within cells (within cells x within cells) in each between group; 1 x 1 where no factor is within. */
  readonly covariances: readonly (readonly (readonly number[])[])[];
  /** Standardised residuals of the data to draw from, or null for the declared shape: the shape as observed. */
  readonly residuals?: readonly number[] | null;
}
