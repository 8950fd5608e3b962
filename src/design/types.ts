/** The declared design and the data laid out by it: what every model takes. Plain data, immutable. */

export interface UnitDeclaration {
  /** Name as declared, which is the column that identifies it. */
  readonly name: string;
  readonly role: "subjects" | "items" | "blocks";
  /** The larger units it is nested in, innermost first: `subjects animal nested in herd` gives ["herd"]. */
  readonly nestedIn: readonly string[];
  /** Within covariates whose slope varies by this unit (`slopes age`). */
  readonly slopes: readonly string[];
}

export interface FactorDeclaration {
  readonly name: string;
  readonly levels: readonly string[];
  /** `within UNIT` or `between UNITS`; unit is the declared name of the unit. */
  readonly varies: "within" | "between";
  readonly unit: string;
  /** `factor font within reader between passages`: the second unit; otherwise null. */
  readonly betweenUnit: string | null;
  readonly ordered: boolean;
  /** Numeric position of each level (`at 0, 10, 20`), or null. */
  readonly positions: readonly number[] | null;
  readonly reference: string | null;
  /** An attribute that nobody assigned, such as sex; generalised eta squared needs to know. */
  readonly measured: boolean;
}

export interface CovariateDeclaration {
  readonly name: string;
  readonly varies: "within" | "between";
  readonly centred: boolean;
}

export interface ResponseDeclaration {
  readonly name: string;
  readonly label: string | null;
  readonly unit: string | null;
  readonly better: "lower" | "higher" | null;
  readonly scale: "linear" | "log";
}

export interface Assumptions {
  readonly variances: "equal" | "unequal";
  /** null: nothing assumed (contrast scores). */
  readonly covariance: "sphericity" | "compound symmetry" | "unstructured" | null;
}

export interface DesignDeclaration {
  readonly response: ResponseDeclaration;
  readonly units: readonly UnitDeclaration[];
  readonly factors: readonly FactorDeclaration[];
  readonly covariates: readonly CovariateDeclaration[];
  readonly assumptions: Assumptions;
}

export interface CodedFactor extends FactorDeclaration {
  /** Level index per row. */
  readonly codes: Int32Array;
}
export interface CodedUnit extends UnitDeclaration {
  /** Unit index per row; nested units are distinct across the larger units. */
  readonly codes: Int32Array;
  readonly labels: readonly string[];
  readonly count: number;
}
export interface CodedCovariate extends CovariateDeclaration {
  /** Value minus `center` (the mean over rows when centred, else 0), per row. */
  readonly values: Float64Array;
  readonly center: number;
}

/**
 * The rows that enter an analysis: response present, all declared columns present, exclusions gone.
 * Cells are the cross product of the factors' levels in declaration order, last factor fastest:
 * cell = ((code0 * levels1) + code1) * levels2 + code2 ...
 */
export interface ModelData {
  readonly rows: number;
  /** Response minus `center`, per row (log of the response and center 0 for `on log scale`). */
  readonly response: { readonly center: number; readonly offsets: Float64Array };
  readonly factors: readonly CodedFactor[];
  readonly units: readonly CodedUnit[];
  readonly covariates: readonly CodedCovariate[];
  readonly assumptions: Assumptions;
  /** Cell index per row. */
  readonly cells: Int32Array;
  readonly cellCount: number;
}

/** What between-subjects work needs of the data, whatever their size. Means and sums of squares are of the offsets. */
export interface CellStatistics {
  readonly center: number;
  readonly n: Float64Array;
  readonly mean: Float64Array;
  /** Sum of squared deviations from the cell's own mean. */
  readonly sumOfSquares: Float64Array;
}

/** One comparison: weights over the cells (length cellCount, summing to zero), named as the report prints it. */
export interface Contrast {
  readonly name: string;
  readonly weights: Float64Array;
}

/** What a family's members look like, so that a correction knows whether it fits them. */
export interface MemberShape {
  readonly kind: "all pairs" | "against one" | "against mean" | "neighbours" | "trend" | "free";
  /** Factor that the members compare, where there is one. */
  readonly factor: string | null;
  /** Number of means compared (levels of that factor), where there is one. */
  readonly means: number | null;
  /** True when the members are repeated at several levels of other factors. */
  readonly repeated: boolean;
}
