/** Numbers kept side by side for a subject's cell: count, sum, sum of squares, and what the squares' rounding lost. */
export const fields = 4;

/** Integer sums by subject and cell: `fields` numbers a cell, cells of a subject side by side. */
export type SubjectArray = Float64Array<ArrayBuffer>;

/**
 * Count, sum and sum of squares by subject and cell, growing with the subjects. Squares are kept as a double and what
 * its rounding lost, good for thirty digits, so that taking the mean's share off costs none.
 */
export class SubjectSums {
  readonly #cells: number;
  #values: SubjectArray;
  /** Place in the file of each subject's first row, one up; 0 where there is none. */
  #firsts: SubjectArray;
  constructor(cells: number, subjects = 256) {
    this.#cells = cells;
    this.#values = new Float64Array(cells * subjects * fields);
    this.#firsts = new Float64Array(subjects);
  }

  #reserve(size: number): void {
    if (size <= this.#values.length) return;
    const next = new Float64Array(Math.max(size, this.#values.length * 2));
    next.set(this.#values);
    this.#values = next;
  }

  /**
   * @param value an integer; its sums must stay below 2^53
   * @param at place of the row in the file
   */
  add(subject: number, cell: number, value: number, at: number): void {
    const place = (subject * this.#cells + cell) * fields;
    if (place >= this.#values.length) this.#reserve(place + fields);
    if (this.#values[place]!++ === 0) this.#met(subject, at);
    this.#values[place + 1]! += value;
    const square = value * value;
    // Below 2^26 the square is exact; beyond, its rounding is kept as well.
    const rest = value < 67108864 && value > -67108864 ? 0 : productRest(value, value, square);
    this.#addSquare(place, square, rest);
  }

  #met(subject: number, at: number): void {
    if (subject >= this.#firsts.length) {
      const next = new Float64Array(Math.max(subject + 1, this.#firsts.length * 2));
      next.set(this.#firsts);
      this.#firsts = next;
    }
    const first = this.#firsts[subject]!;
    if (at !== Number.POSITIVE_INFINITY && (first === 0 || at + 1 < first)) this.#firsts[subject] = at + 1;
  }

  #addSquare(place: number, square: number, rest: number): void {
    const had = this.#values[place + 2]!;
    const next = had + square;
    this.#values[place + 3]! += (had >= square ? had - next + square : square - next + had) + rest;
    this.#values[place + 2] = next;
  }

  /** Makes the integers those of more decimal places. */
  rescale(factor: number): void {
    for (let place = 0; place < this.#values.length; place += fields) {
      this.#values[place + 1]! *= factor;
      const square = this.#values[place + 2]!;
      const lost = this.#values[place + 3]!;
      const once = square * factor;
      const twice = once * factor;
      this.#values[place + 2] = twice;
      const rests = productRest(square, factor, once) * factor + productRest(once, factor, twice);
      this.#values[place + 3] = lost * factor * factor + rests;
    }
  }

  /** Takes in the sums of another part of the file, whose integers are `scale` times smaller. */
  merge({ sums: other, firsts }: SubjectParts, subjectOf: Int32Array, scale: number): void {
    const cells = this.#cells;
    for (let subject = 0; subject < subjectOf.length; subject++) {
      if (firsts[subject]! > 0) this.#met(subjectOf[subject]!, firsts[subject]! - 1);
      const target = subjectOf[subject]! * cells * fields;
      this.#reserve(target + cells * fields);
      for (let cell = 0; cell < cells; cell++) {
        const from = (subject * cells + cell) * fields;
        const place = target + cell * fields;
        if (other[from] === 0) continue;
        this.#values[place]! += other[from]!;
        this.#values[place + 1]! += other[from + 1]! * scale;
        this.#addSquare(place, other[from + 2]! * scale * scale, other[from + 3]! * scale * scale);
      }
    }
  }

  /** The sums themselves, at least for so many subjects; they are handed over, and this is not to be used any more. */
  parts(subjects: number): SubjectParts {
    this.#reserve(subjects * this.#cells * fields);
    if (this.#firsts.length < subjects) this.#met(subjects - 1, Number.POSITIVE_INFINITY);
    return { sums: this.#values, firsts: this.#firsts };
  }

  /** Sums that were handed over, taken up again. */
  static of(cells: number, { sums, firsts }: SubjectParts): SubjectSums {
    const own = new SubjectSums(cells, 0);
    own.#values = sums;
    own.#firsts = firsts;
    return own;
  }
}

export interface SubjectParts {
  readonly sums: SubjectArray;
  readonly firsts: SubjectArray;
}

/** What the rounding of a product lost, exactly, while nothing overflows (Dekker 1971). */
export function productRest(left: number, right: number, product: number): number {
  const leftSplit = 134217729 * left;
  const leftHigh = leftSplit - (leftSplit - left);
  const leftLow = left - leftHigh;
  const rightSplit = 134217729 * right;
  const rightHigh = rightSplit - (rightSplit - right);
  const rightLow = right - rightHigh;
  return leftHigh * rightHigh - product + leftHigh * rightLow + leftLow * rightHigh + leftLow * rightLow;
}
