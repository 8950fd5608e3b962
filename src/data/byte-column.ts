import { isNumberText } from "./decimal.ts";
import { plainNumber, mostTexts, centredDecimals, parsed, parseSmall, refuseInfinite, spread } from "./numbers.ts";
import type { Column, TextCodes } from "./types.ts";

/** Past so many distinct values, most of them numbers, a column stops looking for repeats. */
const mostDistinct = 50_000;

/**
 * One column of delimited text: which bytes stand in which row. Equal values share a category; no text is made until
 * it is known that somebody needs it.
 */
export class ByteColumn {
  #bytes: Uint8Array;
  #codes = new Int32Array(1024);
  #rows = 0;
  #starts = new Int32Array(256);
  #ends = new Int32Array(256);
  #hashes = new Int32Array(256);
  #categories = 0;
  #table = new Int32Array(1024).fill(-1);
  #unique = false;
  #checkedAt = mostDistinct;
  constructor(bytes: Uint8Array) {
    this.#bytes = bytes;
  }

  get rows(): number {
    return this.#rows;
  }

  /** The same positions hold the same values in `bytes`, which may have grown behind them. */
  moveTo(bytes: Uint8Array): void {
    this.#bytes = bytes;
  }

  add(from: number, to: number): void {
    const bytes = this.#bytes;
    let start = from;
    let end = to;
    while (start < end) {
      const code = bytes[start]!;
      if (code === 32 || code === 9 || code === 13) start++;
      else if (code === 0xc2 && bytes[start + 1] === 0xa0) start += 2;
      else break;
    }
    while (end > start) {
      const code = bytes[end - 1]!;
      if (code === 32 || code === 9 || code === 13) end--;
      else if (code === 0xa0 && end - start >= 2 && bytes[end - 2] === 0xc2) end -= 2;
      else break;
    }
    if (this.#rows === this.#codes.length) this.#codes = grown(this.#codes);
    this.#codes[this.#rows++] = start >= end ? -1 : this.#unique ? this.#append(start, end, 0) : this.#find(start, end);
  }

  #find(start: number, end: number): number {
    const bytes = this.#bytes;
    let hash = 0x811c9dc5 | 0;
    for (let position = start; position < end; position++) hash = Math.imul(hash ^ bytes[position]!, 0x01000193);
    hash ^= hash >>> 15;
    const mask = this.#table.length - 1;
    const length = end - start;
    for (let slot = hash & mask; ; slot = (slot + 1) & mask) {
      const category = this.#table[slot]!;
      if (category < 0) {
        this.#table[slot] = this.#categories;
        const code = this.#append(start, end, hash);
        if (this.#categories * 2 > this.#table.length) this.#rehash();
        if (this.#categories >= this.#checkedAt) this.#considerUnique();
        return code;
      }
      if (this.#hashes[category] !== hash) continue;
      const other = this.#starts[category]!;
      if (this.#ends[category]! - other !== length) continue;
      let same = 0;
      while (same < length && bytes[other + same] === bytes[start + same]) same++;
      if (same === length) return category;
    }
  }

  #append(start: number, end: number, hash: number): number {
    const code = this.#categories++;
    if (code === this.#starts.length) {
      this.#starts = grown(this.#starts);
      this.#ends = grown(this.#ends);
      this.#hashes = grown(this.#hashes);
    }
    this.#starts[code] = start;
    this.#ends[code] = end;
    this.#hashes[code] = hash;
    return code;
  }

  #rehash(): void {
    const table = new Int32Array(this.#table.length * 4).fill(-1);
    const mask = table.length - 1;
    for (let category = 0; category < this.#categories; category++) {
      let slot = this.#hashes[category]! & mask;
      while (table[slot]! >= 0) slot = (slot + 1) & mask;
      table[slot] = category;
    }
    this.#table = table;
  }

  #considerUnique(): void {
    this.#checkedAt *= 8;
    const sample = Math.max(1, Math.floor(this.#categories / 1000));
    let numbers = 0;
    let looked = 0;
    for (let category = 0; category < this.#categories; category += sample, looked++)
      if (this.#parse(category, 46, scratch, 0) !== parsed.notNumber) numbers++;
    // Repeats still pay where values come back often; a column of measurements hardly repeats.
    this.#unique = numbers >= looked * 0.9 && this.#categories * 4 > this.#rows;
  }

  #parse(category: number, point: number, into: typeof scratch, index: number): number {
    return parseSmall(this.#bytes, this.#starts[category]!, this.#ends[category]!, point, into, index);
  }

  textOf(category: number): string {
    return decoder.decode(this.#bytes.subarray(this.#starts[category]!, this.#ends[category]!));
  }

  /** The distinct values that hold a comma, at most `count` of them; for finding out what a comma means. */
  *textsWithComma(): Generator<string> {
    for (let category = 0; category < this.#categories; category++) {
      if (this.#bytes.subarray(this.#starts[category]!, this.#ends[category]!).includes(44))
        yield this.textOf(category);
    }
  }

  /** Whether every value would be a number with this decimal sign. */
  allNumbers(decimal: "." | ","): boolean {
    for (let category = 0; category < this.#categories; category++)
      if (this.#parse(category, decimal === "," ? 44 : 46, scratch, 0) === parsed.notNumber) return false;
    return true;
  }

  /** Takes the declared texts for nothing; to be called once all rows are in. */
  dropMissing(missing: ReadonlySet<string>): void {
    if (missing.size === 0) return;
    const encoded = [...missing].map((text) => new TextEncoder().encode(text));
    const next = new Int32Array(this.#categories);
    let kept = 0;
    for (let category = 0; category < this.#categories; category++) {
      const value = this.#bytes.subarray(this.#starts[category]!, this.#ends[category]!);
      const gone = encoded.some((text) => text.length === value.length && text.every((code, at) => code === value[at]));
      if (!gone) {
        this.#starts[kept] = this.#starts[category]!;
        this.#ends[kept] = this.#ends[category]!;
      }
      next[category] = gone ? -1 : kept++;
    }
    if (kept === this.#categories) return;
    this.#categories = kept;
    for (let row = 0; row < this.#rows; row++) if (this.#codes[row]! >= 0) this.#codes[row] = next[this.#codes[row]!]!;
  }

  /**
   * The finished column: numeric when every value present is a number, otherwise text.
   * @throws DataProblem "number-too-large" with the row
   */
  column(name: string, decimal: "." | ",", sourceRows: Int32Array): Column {
    const point = decimal === "," ? 44 : 46;
    const count = this.#categories;
    const small = { units: new Float64Array(count), places: new Int8Array(count).fill(-1) };
    let numeric = count > 0;
    for (let category = 0; numeric && category < count; category++)
      numeric = this.#parse(category, point, small, category) !== parsed.notNumber;
    const codes = this.#codes.slice(0, this.#rows);
    const plain = (text: string) => plainNumber(text, decimal);
    if (!numeric) {
      // A few stray texts among decimal commas: the numbers are kept as numbers are written elsewhere, for when the strays are excluded.
      const pointed = (text: string) => (isNumberText(plain(text)) ? plain(text) : text);
      return { kind: "text", name, ...this.#texts(codes, decimal === "," ? pointed : (text) => text) };
    }
    const numberText = (category: number) => plain(this.textOf(category));
    const { center, values, decimals } = centredDecimals(small, numberText);
    const rowOf = (category: number) => sourceRows[codes.indexOf(category)]!;
    refuseInfinite(name, values, (category) => this.textOf(category), rowOf);
    const texts = count <= mostTexts ? this.#texts(codes, decimal === "," ? plain : (text) => text) : null;
    return { kind: "number", name, center, offsets: spread(codes, values), texts, decimals };
  }

  #texts(codes: Int32Array, written: (text: string) => string): TextCodes {
    const categories: string[] = [];
    if (!this.#unique) {
      for (let category = 0; category < this.#categories; category++) categories.push(written(this.textOf(category)));
      return { codes, categories };
    }
    const places = new Map<string, number>();
    const next = new Int32Array(this.#categories);
    for (let category = 0; category < this.#categories; category++) {
      const text = written(this.textOf(category));
      let place = places.get(text);
      if (place === undefined) {
        place = categories.length;
        places.set(text, place);
        categories.push(text);
      }
      next[category] = place;
    }
    return { codes: codes.map((code) => (code < 0 ? -1 : next[code]!)), categories };
  }
}

const decoder = new TextDecoder("utf-8");
const scratch = { units: new Float64Array(1), places: new Int8Array(1) };

function grown(array: Int32Array<ArrayBuffer>): Int32Array<ArrayBuffer> {
  const next = new Int32Array(array.length * 2);
  next.set(array);
  return next;
}
