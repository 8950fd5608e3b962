import type { Table } from "../data/types.ts";
import type {
  Assumptions,
  ContrastExpression,
  CovariateDeclaration,
  DesignDeclaration,
  FactorDeclaration,
  FoundDesign,
  Layout,
  Member,
  ResponseDeclaration,
  UnitDeclaration,
} from "../design/index.ts";
import { emptyLedger, type Ledger, type SealedPlan } from "../record/index.ts";
import type { Result } from "../results/index.ts";

export type Standardiser = "default" | "pooled spread" | "average spread" | "control spread" | "difference spread";

export interface Settings {
  readonly digits: number | null;
  readonly seed: number | null;
  /** As a fraction: 0.95. */
  readonly intervalLevel: number;
  readonly showAdjustedP: boolean;
  readonly showThresholds: boolean;
  readonly standardiser: Standardiser;
  /** Arrangements drawn by resampling; null: as built in. */
  readonly resamples: number | null;
  /** Simulated studies; null: as built in. */
  readonly studies: number | null;
}

export interface FamilyDeclaration {
  readonly name: string;
  readonly members: readonly Member[];
  readonly correction: string;
  readonly holds: "family" | "false discovery";
  /** As a fraction. */
  readonly error: number;
  readonly sides: "two-sided" | "upper" | "lower";
  readonly margin: { readonly type: "equivalence" | "not worse"; readonly value: number } | null;
  readonly after: { readonly family: string; readonly any: boolean } | null;
  /** Weight by comparison name, for `fallback` and `graph`. */
  readonly weights: readonly { readonly name: string; readonly weight: number }[] | null;
  readonly passes: readonly { readonly from: string; readonly to: string; readonly share: number }[] | null;
}

/** A declaration as it stands in the plan: one statement of the language, keyed by what it declares. */
export interface DeclaredStatement {
  readonly key: string;
  readonly text: string;
}

export interface Amendment {
  readonly at: string;
  readonly statement: string;
  readonly reason: string;
  readonly afterResults: boolean;
}

export interface Exclusion {
  readonly text: string;
  readonly reason: string;
  readonly rows: number;
  readonly byCell: readonly { readonly levels: Readonly<Record<string, string>>; readonly rows: number }[];
  readonly afterResults: boolean;
}

export interface HeldData {
  readonly table: Table;
  readonly source: string | null;
  readonly digest: string;
  readonly rehearsal: boolean;
  readonly seed: number | null;
  readonly rowsRead: number;
  readonly exclusions: readonly Exclusion[];
  /** Statements that changed the table after it was read, in order: a repeated one changes nothing more. */
  readonly steps: readonly string[];
  /** Digest of the data and every step since: two results with the same one come from the same numbers. */
  readonly stateDigest: string;
  /** Laid out once for each declared design; filled on first use. */
  readonly laidOut: { key: string; layout: Layout; found: FoundDesign } | null;
}

export interface KeptResult {
  readonly cell: number;
  readonly statement: string;
  readonly text: string;
  readonly result: Result;
}

/** What a session holds: a value, which each statement turns into the next one. */
export interface Study {
  readonly title: string | null;
  readonly caution: string | null;
  readonly response: ResponseDeclaration | null;
  readonly units: readonly UnitDeclaration[];
  readonly factors: readonly FactorDeclaration[];
  readonly covariates: readonly CovariateDeclaration[];
  readonly assumptions: Assumptions;
  readonly contrasts: ReadonlyMap<string, ContrastExpression>;
  readonly families: ReadonlyMap<string, FamilyDeclaration>;
  /** The `expect` statement as read, for planning. */
  readonly expectation: unknown;
  readonly declarations: readonly DeclaredStatement[];
  readonly plan: SealedPlan | null;
  readonly amendments: readonly Amendment[];
  readonly data: HeldData | null;
  readonly results: readonly KeptResult[];
  readonly settings: Settings;
  readonly ledger: Ledger;
}

export const emptyStudy: Study = {
  title: null,
  caution: null,
  response: null,
  units: [],
  factors: [],
  covariates: [],
  assumptions: { variances: "equal", covariance: null },
  contrasts: new Map(),
  families: new Map(),
  expectation: null,
  declarations: [],
  plan: null,
  amendments: [],
  data: null,
  results: [],
  settings: {
    digits: null,
    seed: null,
    intervalLevel: 0.95,
    showAdjustedP: true,
    showThresholds: true,
    standardiser: "default",
    resamples: null,
    studies: null,
  },
  ledger: emptyLedger,
};

/** The design of the study, or null while no response is declared. */
export function designOf(study: Study): DesignDeclaration | null {
  if (study.response === null) return null;
  return {
    response: study.response,
    units: study.units,
    factors: study.factors,
    covariates: study.covariates,
    assumptions: study.assumptions,
  };
}
