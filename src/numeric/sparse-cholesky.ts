/** Cholesky factor of sparse symmetric matrices with an order that keeps it sparse. */
import { DomainError } from "./domain-error.ts";

/** Lower triangle of a symmetric matrix by columns: rows `rowIndex[columnStart[j]] ...`, row >= column, any order, no repeats. */
export interface SparseSymmetric {
  readonly size: number;
  readonly columnStart: Int32Array;
  readonly rowIndex: Int32Array;
  readonly values: Float64Array;
}

/** Order and pattern of the factor; depends on the places of the entries only, so one serves all matrices of a pattern. */
export interface SparsePattern {
  readonly size: number;
  /** order[k] is the variable eliminated k-th. */
  readonly order: Int32Array;
  /** position[v] is when variable v is eliminated. */
  readonly position: Int32Array;
  readonly columnStart: Int32Array;
  readonly rowIndex: Int32Array;
}

export interface SparseFactor {
  readonly pattern: SparsePattern;
  /** Entries of L by the columns of the pattern, diagonal first. */
  readonly values: Float64Array;
  /** Logarithm of the determinant of the matrix. */
  readonly logDeterminant: number;
}

/**
 * Lower triangle from a list of entries (row, column, value); both triangles allowed, entries of one place are added up.
 * @throws DomainError when an index is out of range
 */
export function sparseSymmetric(
  size: number,
  entries: Iterable<readonly [row: number, column: number, value: number]>,
): SparseSymmetric {
  const columns: Map<number, number>[] = Array.from({ length: size }, () => new Map());
  for (const [row, column, value] of entries) {
    for (const index of [row, column]) {
      if (!(Number.isInteger(index) && index >= 0 && index < size))
        throw new DomainError("entries", index, `indices from 0 to ${size - 1}`);
    }
    const held = columns[Math.min(row, column)]!;
    const at = Math.max(row, column);
    held.set(at, (held.get(at) ?? 0) + value);
  }
  let count = 0;
  for (const column of columns) count += column.size;
  const columnStart = new Int32Array(size + 1);
  const rowIndex = new Int32Array(count);
  const values = new Float64Array(count);
  let at = 0;
  for (let j = 0; j < size; j++) {
    columnStart[j] = at;
    for (const [row, value] of [...columns[j]!].sort((a, b) => a[0] - b[0])) {
      rowIndex[at] = row;
      values[at++] = value;
    }
  }
  columnStart[size] = at;
  return { size, columnStart, rowIndex, values };
}

/**
 * Order of elimination by minimum degree on the quotient graph (elements absorb their variables; degrees are exact), and the pattern of the factor.
 * @source George & Liu (1989), SIAM Review 31, 1-19; Davis (2006), Direct Methods for Sparse Linear Systems, 4, 7
 */
export function analyzeSparse(matrix: SparseSymmetric): SparsePattern {
  const { size, columnStart, rowIndex } = matrix;
  const neighbours: Set<number>[] = Array.from({ length: size }, () => new Set());
  for (let j = 0; j < size; j++) {
    for (let k = columnStart[j]!; k < columnStart[j + 1]!; k++) {
      const i = rowIndex[k]!;
      if (i !== j) {
        neighbours[i]!.add(j);
        neighbours[j]!.add(i);
      }
    }
  }
  // elements: eliminated variables, each with the variables its column still reaches
  const elementsOf: Set<number>[] = Array.from({ length: size }, () => new Set());
  const reach: (Set<number> | null)[] = new Array(size).fill(null);
  const reachableFrom = (v: number): Set<number> => {
    const all = new Set(neighbours[v]!);
    for (const element of elementsOf[v]!) for (const w of reach[element]!) all.add(w);
    all.delete(v);
    return all;
  };
  // variables by degree; buckets are lists from which stale entries are skipped
  const degree = new Int32Array(size);
  const buckets: number[][] = Array.from({ length: size + 1 }, () => []);
  for (let v = size - 1; v >= 0; v--) {
    degree[v] = neighbours[v]!.size;
    buckets[degree[v]!]!.push(v);
  }
  const order = new Int32Array(size);
  const position = new Int32Array(size).fill(-1);
  const columns: Set<number>[] = new Array(size);
  let least = 0;
  for (let k = 0; k < size; k++) {
    let v = -1;
    for (; v < 0; least++) {
      const bucket = buckets[least]!;
      while (bucket.length > 0) {
        const candidate = bucket.pop()!;
        if (position[candidate]! < 0 && degree[candidate] === least) {
          v = candidate;
          break;
        }
      }
      if (v >= 0) break;
    }
    order[k] = v;
    position[v] = k;
    const reached = reachableFrom(v);
    columns[k] = reached;
    const absorbed = elementsOf[v]!;
    reach[v] = reached.size > 0 ? new Set(reached) : null;
    for (const w of reached) {
      for (const element of absorbed) elementsOf[w]!.delete(element);
      // an edge inside the new element is carried by the element
      neighbours[w]!.delete(v);
      if (neighbours[w]!.size < reached.size) {
        for (const u of neighbours[w]!) if (reached.has(u)) neighbours[w]!.delete(u);
      } else for (const u of reached) neighbours[w]!.delete(u);
      for (const element of elementsOf[w]!) reach[element]!.delete(v);
      elementsOf[w]!.add(v);
    }
    for (const element of absorbed) reach[element] = null;
    for (const w of reached) {
      degree[w] = reachableFrom(w).size;
      buckets[degree[w]!]!.push(w);
      if (degree[w]! < least) least = degree[w]!;
    }
  }
  const starts = new Int32Array(size + 1);
  for (let k = 0; k < size; k++) starts[k + 1] = starts[k]! + 1 + columns[k]!.size;
  const rows = new Int32Array(starts[size]!);
  for (let k = 0; k < size; k++) {
    rows[starts[k]!] = k;
    rows.set(Int32Array.from(columns[k]!, (v) => position[v]!).sort(), starts[k]! + 1);
  }
  return { size, order, position, columnStart: starts, rowIndex: rows };
}

/**
 * L with P matrix P' = L L', left-looking, one column after the other.
 * @param pattern of a matrix with entries at the same places (or more)
 * @throws DomainError when a pivot is not positive or an entry has no place in the pattern
 */
export function sparseCholesky(matrix: SparseSymmetric, pattern: SparsePattern = analyzeSparse(matrix)): SparseFactor {
  const { size, columnStart, rowIndex, position } = pattern;
  if (matrix.size !== size) throw new DomainError("pattern", `size ${size}`, `size ${matrix.size}`);
  const values = new Float64Array(rowIndex.length);
  const place = new Int32Array(size).fill(-1);
  // entries of the matrix at their places in the factor
  const byColumn: number[][] = Array.from({ length: size }, () => []);
  for (let j = 0; j < size; j++) {
    for (let k = matrix.columnStart[j]!; k < matrix.columnStart[j + 1]!; k++) {
      byColumn[Math.min(position[j]!, position[matrix.rowIndex[k]!]!)]!.push(
        Math.max(position[j]!, position[matrix.rowIndex[k]!]!),
        k,
      );
    }
  }
  // linked lists: for each column, the earlier columns whose next entry lies in it
  const next = new Int32Array(size).fill(-1);
  const head = new Int32Array(size).fill(-1);
  const cursor = new Int32Array(size);
  let logDeterminant = 0;
  for (let j = 0; j < size; j++) {
    const start = columnStart[j]!;
    const end = columnStart[j + 1]!;
    for (let p = start; p < end; p++) place[rowIndex[p]!] = p;
    const entries = byColumn[j]!;
    for (let e = 0; e < entries.length; e += 2) {
      const p = place[entries[e]!]!;
      if (p < start)
        throw new DomainError("pattern", `no place for an entry in row ${entries[e]}`, "the pattern of this matrix");
      values[p]! += matrix.values[entries[e + 1]!]!;
    }
    for (let k = head[j]!; k >= 0; ) {
      const following = next[k]!;
      const from = cursor[k]!;
      const factor = values[from]!;
      const last = columnStart[k + 1]!;
      for (let p = from; p < last; p++) values[place[rowIndex[p]!]!]! -= factor * values[p]!;
      if (from + 1 < last) {
        cursor[k] = from + 1;
        const row = rowIndex[from + 1]!;
        next[k] = head[row]!;
        head[row] = k;
      }
      k = following;
    }
    const pivot = values[start]!;
    if (!(pivot > 0)) throw new DomainError("matrix", `pivot ${pivot}`, "a positive definite matrix");
    const root = Math.sqrt(pivot);
    logDeterminant += Math.log(pivot);
    values[start] = root;
    for (let p = start + 1; p < end; p++) values[p]! /= root;
    if (start + 1 < end) {
      cursor[j] = start + 1;
      const row = rowIndex[start + 1]!;
      next[j] = head[row]!;
      head[row] = j;
    }
    for (let p = start; p < end; p++) place[rowIndex[p]!] = -1;
  }
  return { pattern, values, logDeterminant };
}

/** Solves matrix x = right with its factor. @param right one value per variable, in the caller's order @returns x in the same order */
export function sparseSolve(factor: SparseFactor, right: ArrayLike<number>): Float64Array {
  const { size, order, columnStart, rowIndex } = factor.pattern;
  if (right.length !== size) throw new DomainError("right", `${right.length} values`, `${size} values`);
  const { values } = factor;
  const x = new Float64Array(size);
  for (let k = 0; k < size; k++) x[k] = right[order[k]!]!;
  for (let j = 0; j < size; j++) {
    const start = columnStart[j]!;
    const value = x[j]! / values[start]!;
    x[j] = value;
    for (let p = start + 1; p < columnStart[j + 1]!; p++) x[rowIndex[p]!]! -= values[p]! * value;
  }
  for (let j = size - 1; j >= 0; j--) {
    const start = columnStart[j]!;
    let sum = x[j]!;
    for (let p = start + 1; p < columnStart[j + 1]!; p++) sum -= values[p]! * x[rowIndex[p]!]!;
    x[j] = sum / values[start]!;
  }
  const answer = new Float64Array(size);
  for (let k = 0; k < size; k++) answer[order[k]!] = x[k]!;
  return answer;
}
