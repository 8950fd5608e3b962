/**
 * Orthonormal contrasts of a factor with `levels` levels: levels x (levels - 1), row per level, by Helmert's rule (each level
 * against the mean of those before it). Any other orthonormal basis spans the same space and gives the same tests.
 */
export function orthonormalContrasts(levels: number): number[][] {
  return Array.from({ length: levels }, (_, level) =>
    Array.from({ length: levels - 1 }, (__, column) => {
      const before = column + 1;
      const length = Math.sqrt(before * (before + 1));
      if (level < before) return -1 / length;
      return level === before ? before / length : 0;
    }),
  );
}

/** Left Kronecker product: rows and columns of `right` run fastest. */
function kronecker(left: readonly (readonly number[])[], right: readonly (readonly number[])[]): number[][] {
  return left.flatMap((leftRow) =>
    right.map((rightRow) => leftRow.flatMap((leftValue) => rightRow.map((rightValue) => leftValue * rightValue))),
  );
}

/**
 * Orthonormal basis of one effect over the cells of a cross of factors: cells x df, row per cell. Factors that do not take part
 * are averaged over with equal weights.
 * @param levels number of levels of each factor, in order (last fastest)
 * @param takesPart which factors the effect names
 */
export function effectBasis(levels: readonly number[], takesPart: readonly boolean[]): number[][] {
  return levels.reduce<number[][]>(
    (basis, count, index) =>
      kronecker(
        basis,
        takesPart[index] === true
          ? orthonormalContrasts(count)
          : Array.from({ length: count }, () => [1 / Math.sqrt(count)]),
      ),
    [[1]],
  );
}

/** Every non-empty subset of `count` things as flags, smaller subsets first, in order of position. */
export function subsets(count: number): boolean[][] {
  const all = Array.from({ length: 2 ** count - 1 }, (_, index) =>
    Array.from({ length: count }, (__, position) => (((index + 1) >> position) & 1) === 1),
  );
  const size = (flags: readonly boolean[]) => flags.filter(Boolean).length;
  const positions = (flags: readonly boolean[]) =>
    flags.flatMap((flag, index) => (flag ? [String.fromCharCode(65 + index)] : [])).join("");
  return all.sort((left, right) => size(left) - size(right) || (positions(left) < positions(right) ? -1 : 1));
}
