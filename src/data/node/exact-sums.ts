import type { CellStatistics } from "../../design/types.ts";
import { ratioToNumber } from "../decimal.ts";

/** Squares below this are exact integers with room for one more addition. */
const carryAt = 2 ** 52;
const half = 2 ** 26;

/**
 * Sums of integers and of their squares by cell, exactly, in doubles that hand a carry on before they could round. So
 * any number of workers in any order gives the same answer to the last bit. Integers of 2^52 and more go to BigInt.
 */
export class ExactSums {
  readonly n: Float64Array;
  readonly #sum: Float64Array;
  /** Sum of squares of integers below 2^26, and how often it was carried. */
  readonly #square: Float64Array;
  readonly #squareCarry: Float64Array;
  /** Larger integers are high * 2^26 + low: sums of high^2, high * low, low^2, and what was carried. */
  readonly #wide: Float64Array;
  readonly #wideSum: Float64Array;
  #hasWide = false;
  readonly #big = new Map<number, { sum: bigint; square: bigint }>();
  constructor(cells: number) {
    this.n = new Float64Array(cells);
    this.#sum = new Float64Array(cells);
    this.#square = new Float64Array(cells);
    this.#squareCarry = new Float64Array(cells);
    this.#wide = new Float64Array(cells * 6);
    this.#wideSum = new Float64Array(cells * 2);
  }

  /** @param value an integer, below 2^52 in size */
  add(cell: number, value: number): void {
    this.n[cell]!++;
    if (value < half && value > -half) {
      // Fewer than 2^27 rows a chunk: the plain sum stays below 2^53.
      this.#sum[cell]! += value;
      const square = this.#square[cell]! + value * value;
      if (square < carryAt) this.#square[cell] = square;
      else {
        this.#square[cell] = square - carryAt;
        this.#squareCarry[cell]!++;
      }
    } else this.#addWide(cell, value);
  }

  #addWide(cell: number, value: number): void {
    this.#hasWide = true;
    const high = Math.floor(value / half);
    const low = value - high * half;
    carried(this.#wideSum, cell * 2, value);
    carried(this.#wide, cell * 6, high * high);
    carried(this.#wide, cell * 6 + 2, high * low);
    carried(this.#wide, cell * 6 + 4, low * low);
  }

  addBig(cell: number, value: bigint): void {
    this.n[cell]!++;
    const had = this.#big.get(cell) ?? { sum: 0n, square: 0n };
    this.#big.set(cell, { sum: had.sum + value, square: had.square + value * value });
  }

  /** The sums as they are, for adding up across chunks. */
  totals(): CellTotals {
    const sum: bigint[] = [];
    const square: bigint[] = [];
    const carry = BigInt(carryAt);
    const split = BigInt(half);
    const pair = (array: Float64Array, index: number) => BigInt(array[index]!) + BigInt(array[index + 1]!) * carry;
    for (let cell = 0; cell < this.n.length; cell++) {
      const big = this.#big.get(cell);
      let ownSum = BigInt(this.#sum[cell]!) + (big?.sum ?? 0n);
      let ownSquare = BigInt(this.#square[cell]!) + BigInt(this.#squareCarry[cell]!) * carry + (big?.square ?? 0n);
      if (this.#hasWide) {
        ownSum += pair(this.#wideSum, cell * 2);
        const [hh, hl, ll] = [
          pair(this.#wide, cell * 6),
          pair(this.#wide, cell * 6 + 2),
          pair(this.#wide, cell * 6 + 4),
        ];
        ownSquare += hh * split * split + 2n * hl * split + ll;
      }
      sum.push(ownSum);
      square.push(ownSquare);
    }
    return { n: this.n, sum, square };
  }
}

/** Adds an integer of at most 2^52 in size; what passes 2^52 is carried to the next place of the array. */
function carried(array: Float64Array, index: number, value: number): void {
  let sum = array[index]! + value;
  if (sum >= carryAt) {
    sum -= carryAt;
    array[index + 1]!++;
  } else if (sum <= -carryAt) {
    sum += carryAt;
    array[index + 1]!--;
  }
  array[index] = sum;
}

export interface CellTotals {
  readonly n: Float64Array;
  readonly sum: readonly bigint[];
  readonly square: readonly bigint[];
}

export function addTotals(left: CellTotals, right: CellTotals): CellTotals {
  return {
    n: left.n.map((count, cell) => count + right.n[cell]!),
    sum: left.sum.map((value, cell) => value + right.sum[cell]!),
    square: left.square.map((value, cell) => value + right.square[cell]!),
  };
}

/** Mean and sum of squared deviations from exact sums of (value - center) * scale, each rounded once. */
export function statisticsOf(totals: CellTotals, center: number, scale: bigint): CellStatistics {
  const cells = totals.n.length;
  const mean = new Float64Array(cells);
  const sumOfSquares = new Float64Array(cells);
  for (let cell = 0; cell < cells; cell++) {
    if (totals.n[cell] === 0) continue;
    const n = BigInt(totals.n[cell]!);
    const sum = totals.sum[cell]!;
    mean[cell] = ratioToNumber(sum, n * scale);
    sumOfSquares[cell] = ratioToNumber(totals.square[cell]! * n - sum * sum, n * scale * scale);
  }
  return { center, n: totals.n, mean, sumOfSquares };
}
