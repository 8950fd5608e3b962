import type { CellStatistics } from "../../design/types.ts";
import type { Note } from "../../results/index.ts";
import type { Condition, Expression } from "../types.ts";

export interface FactorLevels {
  readonly name: string;
  readonly levels: readonly string[];
}

/** What is asked of the rows, wherever they are: a file or a table of a database. */
export interface CellQuestion {
  readonly response: string;
  readonly factors: readonly FactorLevels[];
  /** Column that names the subjects, for designs with factors within them; null or left out: cells only. */
  readonly subject?: string | null;
  /** Rows that meet one of these are left out; each is counted for the first one that it meets. */
  readonly exclude?: readonly Condition[];
  /** Columns made by arithmetic, in this order, before anything is excluded. */
  readonly derive?: readonly { readonly name: string; readonly expression: Expression }[];
  /** Texts that stand for nothing, beside the empty value. */
  readonly missing?: readonly string[];
  readonly rename?: readonly { readonly from: string; readonly to: string }[];
  /** Rows drawn at random for pictures: how many at most, and the seed. */
  readonly sample?: { readonly size: number; readonly seed: number } | null;
}

export interface FileQuestion extends CellQuestion {
  readonly path: string;
  readonly format: "csv" | "tsv" | "parquet";
  readonly separator?: string;
  readonly decimal?: "." | ",";
  /** Threads to work with; all cores when left out, 0 for none beside the caller's own. */
  readonly threads?: number;
  /** Length of the parts that a file is cut into; only tests have a reason to choose it. */
  readonly partBytes?: number;
  /** File of the worker; only for running from sources. */
  readonly workerFile?: string;
}

/** Cells are numbered as in `ModelData`: last factor fastest. Means and sums of squares are of value minus `center`. */
export interface SubjectCells {
  /** In the order of the file's rows; sorted where an engine or a database did the counting. */
  readonly labels: readonly string[];
  /** Subjects x cells, a row per subject; 0 where the subject has no value in the cell. */
  readonly n: Float64Array;
  readonly mean: Float64Array;
  readonly sumOfSquares: Float64Array;
}

export interface CellAnswer {
  /** Rows of the source, header not counted. */
  readonly rows: number;
  /** Rows that entered the cells. */
  readonly entered: number;
  readonly statistics: CellStatistics;
  readonly subjects: SubjectCells | null;
  /** Rows left out by each condition of `exclude`. */
  readonly excluded: readonly number[];
  readonly missingResponse: number;
  /** Rows left out because a factor or the subject is missing, by column; a row counts for the first one. */
  readonly missingColumn: readonly { readonly column: string; readonly rows: number }[];
  /** Levels that nobody declared; their rows are left out. `firstRow` is null where rows have no order (a database). */
  readonly undeclared: readonly {
    readonly factor: string;
    readonly level: string;
    readonly rows: number;
    readonly firstRow: number | null;
  }[];
  /** Rows drawn at random among those that entered. */
  readonly sample: { readonly cells: Int32Array; readonly offsets: Float64Array; readonly of: number };
  readonly notes: readonly Note[];
}
