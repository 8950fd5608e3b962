import { EigenvalueDecomposition, Matrix } from "ml-matrix";

/**
 * The part of a hypothesis that data with empty cells can still answer: combinations of the given contrasts that put no weight
 * on an empty cell. For a main effect with an empty cell that is nothing; for an interaction it is what the filled cells leave.
 *
 * @param basis cells x df, row per cell, columns independent
 * @param empty which cells have no data
 * @returns cells x (at most df), columns orthonormal combinations of the given ones; zero columns where nothing is estimable
 */
export function estimablePart(basis: readonly (readonly number[])[], empty: readonly boolean[]): number[][] {
  const df = basis[0]?.length ?? 0;
  const rows = basis.filter((_, cell) => empty[cell] === true);
  if (rows.length === 0 || df === 0) return basis.map((row) => [...row]);
  const gram = new Matrix(df, df);
  for (let i = 0; i < df; i++) {
    for (let j = 0; j < df; j++)
      gram.set(
        i,
        j,
        rows.reduce((sum, row) => sum + row[i]! * row[j]!, 0),
      );
  }
  const decomposition = new EigenvalueDecomposition(gram, { assumeSymmetric: true });
  const kept = decomposition.realEigenvalues.flatMap((root, index) => (Math.abs(root) < 1e-10 ? [index] : []));
  const vectors = decomposition.eigenvectorMatrix;
  return basis.map((row, cell) =>
    kept.map((column) =>
      empty[cell] === true ? 0 : row.reduce((sum, value, index) => sum + value * vectors.get(index, column), 0),
    ),
  );
}
