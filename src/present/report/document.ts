import type { DataResult, ResponseFacts, Result } from "../../results/index.ts";
import type { Block } from "../blocks.ts";

/** What the session tells the report beside the results. */
export interface ReportFacts {
  readonly title: string;
  readonly caution: string | null;
  readonly response: ResponseFacts | null;
  readonly units: readonly {
    readonly name: string;
    readonly role: "subjects" | "items" | "blocks";
    readonly nestedIn: readonly string[];
  }[];
  readonly factors: readonly {
    readonly name: string;
    readonly levels: readonly string[];
    readonly varies: "within" | "between";
    readonly unit: string;
    readonly measured: boolean;
  }[];
  readonly covariates: readonly { readonly name: string; readonly varies: "within" | "between" }[];
  readonly assumptions: { readonly variances: "equal" | "unequal"; readonly covariance: string | null };
  readonly plan: {
    readonly name: string;
    readonly digest: string;
    readonly sealedAt: string;
    readonly statements: readonly string[];
  } | null;
  readonly amendments: readonly {
    readonly at: string;
    readonly statement: string;
    readonly reason: string;
    readonly afterResults: boolean;
  }[];
  readonly data: {
    readonly source: string | null;
    readonly digest: string;
    readonly rowsRead: number;
    readonly rows: number;
    readonly rehearsal: boolean;
    readonly seed: number | null;
    readonly exclusions: readonly {
      readonly text: string;
      readonly reason: string;
      readonly rows: number;
      readonly byCell: DataResult["excludedByCell"];
      readonly afterResults: boolean;
    }[];
    readonly steps: readonly string[];
  } | null;
  readonly results: readonly Result[];
  readonly deviations: readonly {
    readonly code: string;
    readonly facts: Readonly<Record<string, string | number | boolean | null>>;
  }[];
  readonly head: string | null;
  readonly version: string;
  readonly environment: Readonly<Record<string, string>>;
  readonly writtenAt: string;
}

export interface ReportSection {
  readonly id: string;
  readonly title: string;
  readonly blocks: readonly Block[];
}

export interface ReportDocument {
  readonly title: string;
  /** Sentences that stand at the top: what state the work is in. */
  readonly banner: readonly string[];
  readonly sections: readonly ReportSection[];
  readonly writtenAt: string;
  readonly version: string;
}
