import type { EffectMethod, Note, OmnibusEffect } from "../../results/index.ts";
import type { ErrorTerm } from "./cell-statistics.ts";

/** What every between-subjects omnibus analysis returns. */
export interface BetweenAnalysis {
  readonly method: EffectMethod;
  readonly effects: readonly OmnibusEffect[];
  /** Absent where the method has no one error term (Welch, Brown-Forsythe). */
  readonly error?: ErrorTerm;
  readonly rSquared?: number;
  /** Root of the error mean square, in the unit of the response. */
  readonly residualSd?: number;
  readonly observations: number;
  readonly notes: readonly Note[];
}

/** Groups are cells with data; those without are named by number of the cell where the caller gives no names. */
export interface GroupNaming {
  /** Name of the effect, the factor's; default "group". */
  readonly effect?: string;
  /** Name of each cell, for notes and errors. */
  readonly cellNames?: readonly string[];
}

export function cellName(naming: GroupNaming, cell: number): string {
  return naming.cellNames?.[cell] ?? `group ${cell + 1}`;
}

/** Says which groups have no data; they take no part. */
export function emptyCellNotes(n: ArrayLike<number>, naming: GroupNaming): Note[] {
  const empty = Array.from(n).flatMap((size, cell) => (size === 0 ? [cellName(naming, cell)] : []));
  return empty.length === 0 ? [] : [{ code: "empty-cells", facts: { count: empty.length, cells: empty } }];
}
