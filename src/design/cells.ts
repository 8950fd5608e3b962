import type { FactorDeclaration } from "./types.ts";

/** Number of cells of the full cross of the factors (1 when there are none). */
export function cellCount(factors: readonly Pick<FactorDeclaration, "levels">[]): number {
  return factors.reduce((count, factor) => count * factor.levels.length, 1);
}

/**
 * Level indices of a cell, one per factor, in declaration order (last factor fastest).
 * @param cell index, 0 <= cell < cellCount(factors)
 */
export function levelsOfCell(factors: readonly Pick<FactorDeclaration, "levels">[], cell: number): number[] {
  const levels = new Array<number>(factors.length);
  let rest = cell;
  for (let index = factors.length - 1; index >= 0; index--) {
    const count = factors[index]!.levels.length;
    levels[index] = rest % count;
    rest = Math.floor(rest / count);
  }
  return levels;
}

/** Level names of a cell keyed by factor, for results. */
export function cellLabels(
  factors: readonly Pick<FactorDeclaration, "name" | "levels">[],
  cell: number,
): Readonly<Record<string, string>> {
  const levels = levelsOfCell(factors, cell);
  return Object.fromEntries(factors.map((factor, index) => [factor.name, factor.levels[levels[index]!]!]));
}

/** The coarser cell, over the factors kept, that each cell of the full cross belongs to. */
export function coarserCells(
  factors: readonly Pick<FactorDeclaration, "name" | "levels">[],
  kept: readonly string[],
): { readonly cellOf: Int32Array; readonly factors: readonly Pick<FactorDeclaration, "name" | "levels">[] } {
  const keptFactors = kept.map((name) => factors.find((factor) => factor.name === name)!);
  const keptIndices = kept.map((name) => factors.findIndex((factor) => factor.name === name));
  const total = cellCount(factors);
  const cellOf = new Int32Array(total);
  for (let cell = 0; cell < total; cell++) {
    const levels = levelsOfCell(factors, cell);
    let coarse = 0;
    for (const [position, index] of keptIndices.entries()) {
      coarse = coarse * keptFactors[position]!.levels.length + levels[index]!;
    }
    cellOf[cell] = coarse;
  }
  return { cellOf, factors: keptFactors };
}
