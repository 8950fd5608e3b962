/**
 * An orthonormal basis that grows column by column. Each column is cleared of the basis twice, after which it is orthogonal to
 * working precision whatever the columns are.
 * @source giraud-langou-rozloznik-2005 (Comput. Math. Appl. 50, 1069-1075): twice is enough
 */
export interface OrthonormalSpan {
  readonly columns: Float64Array[];
}

export function newSpan(): OrthonormalSpan {
  return { columns: [] };
}

/** A column whose part outside the span is below this share of it adds nothing but rounding. */
const dependenceShare = 1e-10;

export function dotProduct(left: Float64Array, right: Float64Array): number {
  let sum = 0;
  for (let index = 0; index < left.length; index++) sum += left[index]! * right[index]!;
  return sum;
}

function clearOf(column: Float64Array, basis: readonly Float64Array[]): void {
  for (const direction of basis) {
    const along = dotProduct(direction, column);
    if (along === 0) continue;
    for (let index = 0; index < column.length; index++) column[index]! -= along * direction[index]!;
  }
}

/**
 * Adds the part of a column that is new to the span.
 * @returns the new direction, or null where the column depends on those before it
 */
export function extend(span: OrthonormalSpan, column: ArrayLike<number>): Float64Array | null {
  const rest = Float64Array.from(column);
  const before = Math.sqrt(dotProduct(rest, rest));
  if (before === 0) return null;
  clearOf(rest, span.columns);
  clearOf(rest, span.columns);
  const length = Math.sqrt(dotProduct(rest, rest));
  if (length <= dependenceShare * before) return null;
  for (let index = 0; index < rest.length; index++) rest[index]! /= length;
  span.columns.push(rest);
  return rest;
}

/** What is left of a vector outside the span. */
export function outside(span: OrthonormalSpan, vector: ArrayLike<number>): Float64Array {
  const rest = Float64Array.from(vector);
  clearOf(rest, span.columns);
  clearOf(rest, span.columns);
  return rest;
}

/** Squared length of the part of a vector inside the given orthonormal directions. */
export function squaredLengthWithin(directions: readonly Float64Array[], vector: Float64Array): number {
  return directions.reduce((sum, direction) => sum + dotProduct(direction, vector) ** 2, 0);
}
