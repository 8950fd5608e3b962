/** Linear algebra, optimiser, root and quadrature against closed forms, each other and random cases with a fixed seed. */
import { describe, expect, it } from "vitest";
import * as numeric from "../../src/numeric/index.ts";

const stream = numeric.randomStream(3, "linear algebra", 0);
const random = (rows: number, columns: number) =>
  Array.from({ length: rows }, () => Array.from({ length: columns }, () => stream.normal()));
const product = (a: numeric.Matrix, b: numeric.Matrix) =>
  a.map((row) => b[0]!.map((_, j) => row.reduce((sum, value, k) => sum + value * b[k]![j]!, 0)));
const transposed = (a: numeric.Matrix) => a[0]!.map((_, j) => a.map((row) => row[j]!));
const largest = (a: numeric.Matrix) => Math.max(...a.flat().map(Math.abs));
const minus = (a: numeric.Matrix, b: numeric.Matrix) => a.map((row, i) => row.map((value, j) => value - b[i]![j]!));

describe("dense matrices", () => {
  it("Cholesky rebuilds and solves; eigenvectors diagonalise; determinants agree by three routes", () => {
    for (const size of [1, 3, 8, 20]) {
      const half = random(size, size + 2);
      const matrix = product(half, transposed(half));
      const factor = numeric.choleskyFactor(matrix);
      expect(largest(minus(product(factor, transposed(factor)), matrix))).toBeLessThan(1e-12 * largest(matrix));
      const x = random(size, 1).flat();
      const right = product(
        matrix,
        x.map((value) => [value]),
      ).flat();
      numeric.choleskySolve(factor, right).forEach((value, i) => expect(Math.abs(value - x[i]!)).toBeLessThan(1e-7));
      const { values, vectors } = numeric.symmetricEigen(matrix);
      const rebuilt = product(
        transposed(vectors),
        vectors.map((vector, i) => vector.map((value) => value * values[i]!)),
      );
      expect(largest(minus(rebuilt, matrix))).toBeLessThan(1e-12 * largest(matrix));
      expect([...values].sort((a, b) => b - a)).toEqual(values);
      const logs = [
        Math.log(numeric.determinant(matrix)),
        2 * factor.reduce((sum, row, i) => sum + Math.log(row[i]!), 0),
        values.reduce((sum, value) => sum + Math.log(value), 0),
      ];
      for (const log of logs) expect(Math.abs(log - logs[0]!)).toBeLessThan(1e-8);
    }
    // rational entries: determinant of the 3 x 3 Hilbert matrix is 1 / 2160 (common practice)
    const hilbert = [0, 1, 2].map((i) => [0, 1, 2].map((j) => 1 / (i + j + 1)));
    expect(Math.abs(numeric.determinant(hilbert) * 2160 - 1)).toBeLessThan(1e-12);
  });

  it("semidefinite factors have the rank and rebuild the matrix; indefinite matrices are refused", () => {
    for (const [size, rank] of [
      [5, 2],
      [9, 8],
      [12, 5],
    ] as const) {
      const half = random(size, rank);
      const matrix = product(half, transposed(half));
      const found = numeric.semidefiniteFactor(matrix);
      expect(found.rank).toBe(rank);
      expect(largest(minus(product(found.factor, transposed(found.factor)), matrix))).toBeLessThan(
        1e-11 * largest(matrix),
      );
    }
    expect(() =>
      numeric.semidefiniteFactor([
        [1, 2],
        [2, 1],
      ]),
    ).toThrow(numeric.DomainError);
    expect(() =>
      numeric.choleskyFactor([
        [1, 2],
        [2, 1],
      ]),
    ).toThrow(numeric.DomainError);
    expect(() =>
      numeric.choleskyFactor([
        [1, 2],
        [3, 9],
      ]),
    ).toThrow(numeric.DomainError);
  });

  it("least squares: normal equations hold, dependent columns are found, sums of squares add up", () => {
    const design = random(30, 5).map((row) => [1, ...row, row[0]! - 2 * row[3]!]);
    const response = random(30, 1).flat();
    const fit = numeric.qrLeastSquares(design, response);
    expect(fit.rank).toBe(6);
    expect(fit.columns).toEqual([0, 1, 2, 3, 4, 5]);
    expect(fit.coefficients[6]).toBe(0);
    for (let j = 0; j < 7; j++) {
      expect(Math.abs(design.reduce((sum, row, i) => sum + row[j]! * fit.residuals[i]!, 0))).toBeLessThan(1e-12);
    }
    const total = response.reduce((sum, value) => sum + value * value, 0);
    const explained = fit.effects.slice(0, fit.rank).reduce((sum, value) => sum + value * value, 0);
    expect(Math.abs(explained + fit.residualSumOfSquares - total)).toBeLessThan(1e-12 * total);
    expect(
      Math.abs(fit.residuals.reduce((sum, value) => sum + value * value, 0) - fit.residualSumOfSquares),
    ).toBeLessThan(1e-12);
  });
});

describe("sparse Cholesky", () => {
  it("agrees with the dense factor and keeps an arrow and a grid sparse", () => {
    for (const size of [1, 10, 80]) {
      const entries: [number, number, number][] = [];
      for (let i = 0; i < size; i++) {
        entries.push([i, i, 8]);
        for (let k = 0; k < 3; k++) {
          const j = stream.integer(size);
          if (j !== i) entries.push([i, j, stream.uniform() - 0.5]);
        }
      }
      const dense = random(size, size).map((row) => row.map(() => 0));
      for (const [i, j, value] of entries) {
        dense[i]![j]! += value;
        if (i !== j) dense[j]![i]! += value;
      }
      const factor = numeric.sparseCholesky(numeric.sparseSymmetric(size, entries));
      const right = random(size, 1).flat();
      const expected = numeric.choleskySolve(numeric.choleskyFactor(dense), right);
      numeric
        .sparseSolve(factor, right)
        .forEach((value, i) => expect(Math.abs(value - expected[i]!)).toBeLessThan(1e-13));
      expect(Math.abs(factor.logDeterminant - Math.log(numeric.determinant(dense)))).toBeLessThan(1e-10);
    }
    // an arrow with its head first fills completely without a good order, and not at all with one
    const size = 500;
    const arrow: [number, number, number][] = [];
    for (let i = 0; i < size; i++) {
      arrow.push([i, i, i === 0 ? size : 2]);
      if (i > 0) arrow.push([i, 0, 1]);
    }
    expect(numeric.sparseCholesky(numeric.sparseSymmetric(size, arrow)).values.length).toBe(2 * size - 1);
    const side = 20;
    const grid: [number, number, number][] = [];
    for (let i = 0; i < side * side; i++) {
      grid.push([i, i, 4.1]);
      if (i % side > 0) grid.push([i, i - 1, -1]);
      if (i >= side) grid.push([i, i - side, -1]);
    }
    // by rows the factor would have about 20^3 = 8000 entries
    expect(numeric.sparseCholesky(numeric.sparseSymmetric(side * side, grid)).values.length).toBeLessThan(4500);
    expect(() =>
      numeric.sparseCholesky(
        numeric.sparseSymmetric(2, [
          [0, 0, 1],
          [1, 1, 1],
          [1, 0, 2],
        ]),
      ),
    ).toThrow(numeric.DomainError);
  });
});

describe("optimiser, root, quadrature", () => {
  it("finds the minimum of Rosenbrock's valley (1960), free, bounded and without a gradient; a start at a bound that pushes stays", () => {
    const value = ([x, y]: readonly number[]) => 100 * (y! - x! * x!) ** 2 + (1 - x!) ** 2;
    const gradient = ([x, y]: readonly number[]) => [-400 * x! * (y! - x! * x!) - 2 * (1 - x!), 200 * (y! - x! * x!)];
    const free = numeric.minimize({ value, gradient, start: [-1.2, 1] });
    expect(free.converged).toBe(true);
    expect(Math.abs(free.x[0]! - 1)).toBeLessThan(1e-6);
    const bounded = numeric.minimize({ value, gradient, start: [-1.2, 1], upper: [0.5, 10] });
    expect(bounded.converged).toBe(true);
    expect(bounded.x[0]).toBe(0.5);
    expect(Math.abs(bounded.x[1]! - 0.25)).toBeLessThan(1e-8);
    expect(bounded.atBound).toEqual([0]);
    const plain = numeric.minimize({ value, start: [-1.2, 1] });
    expect(plain.converged).toBe(true);
    expect(Math.abs(plain.x[1]! - 1)).toBeLessThan(1e-5);
    // no minimum: must not claim one
    expect(
      numeric.minimize({ value: ([x]) => x!, gradient: () => [1], start: [0], maximumIterations: 30 }).converged,
    ).toBe(false);
    expect(() => numeric.minimize({ value: () => Number.NaN, start: [0] })).toThrow(numeric.DomainError);
  });

  it("roots to the last digit, none without a change of sign", () => {
    expect(Math.abs(numeric.findRoot(Math.cos, 1, 2).x - Math.PI / 2)).toBeLessThan(4e-16);
    expect(Math.abs(numeric.findRoot((x) => x ** 3 - 2, 0, 5).x - Math.cbrt(2))).toBeLessThan(4e-16);
    expect(Math.abs(numeric.findRoot((x) => Math.expm1(x) ** 9, -1, 2.5).x)).toBeLessThan(1e-12);
    expect(() => numeric.findRoot((x) => x * x + 1, -1, 1)).toThrow(numeric.DomainError);
  });

  it("integrals with closed forms, singular and infinite ends included", () => {
    const cases: [(x: number) => number, number, number, number][] = [
      [(x) => Math.exp(-x * x), Number.NEGATIVE_INFINITY, Number.POSITIVE_INFINITY, Math.sqrt(Math.PI)],
      [(x) => 1 / Math.sqrt(x), 0, 1, 2],
      [(x) => Math.log(x), 0, 1, -1],
      [(x) => Math.exp(-x), 0, Number.POSITIVE_INFINITY, 1],
      [(x) => 1 / (1 + x * x), Number.NEGATIVE_INFINITY, 0, Math.PI / 2],
      [(x) => Math.sin(x), 0, Math.PI, 2],
    ];
    for (const [integrand, low, high, expected] of cases) {
      const found = numeric.integrate(integrand, low, high);
      expect(found.converged).toBe(true);
      expect(Math.abs(found.value / expected - 1)).toBeLessThan(1e-11);
    }
    for (const count of [1, 2, 5, 20, 64]) {
      const { nodes, weights } = numeric.gaussLegendre(count);
      // exact for polynomials up to degree 2 count - 1 (DLMF 3.5.15)
      for (const degree of [0, 2 * count - 2]) {
        const sum = nodes.reduce((total, x, i) => total + weights[i]! * x ** degree, 0);
        expect(Math.abs(sum - 2 / (degree + 1))).toBeLessThan(1e-14);
      }
    }
  });
});
