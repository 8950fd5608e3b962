/** Random numbers of a counter-based generator: the n-th number of a study is a function of seed, purpose, study and n. */
import { DomainError } from "./domain-error.ts";

// Salmon, Moraes, Dror & Shaw (2011), table 2 and section 3: multipliers and the increments of the key (golden ratio, sqrt(3) - 1).
const firstMultiplier = 0xd2511f53;
const secondMultiplier = 0xcd9e8d57;
const firstWeyl = 0x9e3779b9;
const secondWeyl = 0xbb67ae85;

/**
 * One block of Philox 4x32 with 10 rounds, written over the first four entries of `out`.
 *
 * @param out at least 4 entries; receives the block as signed 32-bit integers
 * @source Salmon, Moraes, Dror & Shaw (2011), Parallel random numbers: as easy as 1, 2, 3
 */
export function philoxBlock(
  counter0: number,
  counter1: number,
  counter2: number,
  counter3: number,
  key0: number,
  key1: number,
  out: Int32Array,
): void {
  let c0 = counter0 | 0;
  let c1 = counter1 | 0;
  let c2 = counter2 | 0;
  let c3 = counter3 | 0;
  let k0 = key0 | 0;
  let k1 = key1 | 0;
  for (let round = 0; round < 10; round++) {
    // high halves of the 64-bit products, from 16-bit halves; written out because a call costs more than the work
    let low = c0 & 0xffff;
    let high = c0 >>> 16;
    let middle = (Math.imul(high, firstMultiplier & 0xffff) + (Math.imul(low, firstMultiplier & 0xffff) >>> 16)) | 0;
    const high0 =
      (Math.imul(high, firstMultiplier >>> 16) +
        (middle >>> 16) +
        (((Math.imul(low, firstMultiplier >>> 16) + (middle & 0xffff)) | 0) >>> 16)) |
      0;
    low = c2 & 0xffff;
    high = c2 >>> 16;
    middle = (Math.imul(high, secondMultiplier & 0xffff) + (Math.imul(low, secondMultiplier & 0xffff) >>> 16)) | 0;
    const high2 =
      (Math.imul(high, secondMultiplier >>> 16) +
        (middle >>> 16) +
        (((Math.imul(low, secondMultiplier >>> 16) + (middle & 0xffff)) | 0) >>> 16)) |
      0;
    const low0 = Math.imul(c0, firstMultiplier);
    const low2 = Math.imul(c2, secondMultiplier);
    c0 = high2 ^ c1 ^ k0;
    c1 = low2;
    c2 = high0 ^ c3 ^ k1;
    c3 = low0;
    k0 = (k0 + firstWeyl) | 0;
    k1 = (k1 + secondWeyl) | 0;
  }
  out[0] = c0;
  out[1] = c1;
  out[2] = c2;
  out[3] = c3;
}

/** FNV-1a over the code units of a text, 32 bits; names a purpose. */
function hashOf(text: string): number {
  let hash = 0x811c9dc5;
  for (let i = 0; i < text.length; i++) {
    const unit = text.charCodeAt(i);
    hash = Math.imul(hash ^ (unit & 0xff), 0x01000193);
    hash = Math.imul(hash ^ (unit >>> 8), 0x01000193);
  }
  return hash;
}

// Ziggurat of 256 layers of equal area under exp(-x^2/2) (Marsaglia & Tsang 2000). The right end of the lowest full layer closes the
// stack at the top; solved in 30 digits. Layer 0 is the lowest: the strip up to that end, and the tail beyond it.
const layers = 256;
const tailStart = 3.654152885361009;
const twoToThe33 = 8589934592;
const layerArea = tailStart * Math.exp(-0.5 * tailStart * tailStart) + 0.0003233957646633213;
const layerWidth = new Float64Array(layers); // width per unit of the 33-bit magnitude
const layerInside = new Float64Array(layers); // magnitudes below this lie in the rectangle under the curve
const layerHeight = new Float64Array(layers + 1); // density at the right end of a layer, rising
{
  let x = tailStart;
  let height = Math.exp(-0.5 * x * x);
  layerWidth[0] = layerArea / height / twoToThe33;
  layerInside[0] = (tailStart * height * twoToThe33) / layerArea;
  layerHeight[1] = height;
  for (let layer = 1; layer < layers; layer++) {
    height += layerArea / x;
    const next = layer === layers - 1 ? 0 : Math.sqrt(-2 * Math.log(height));
    layerWidth[layer] = x / twoToThe33;
    layerInside[layer] = (next / x) * twoToThe33;
    layerHeight[layer + 1] = layer === layers - 1 ? 1 : height;
    x = next;
  }
}

/** Random numbers of one study; made by `randomStream`. The state is the place in the stream, nothing else. */
export class RandomStream {
  readonly #key0: number;
  readonly #key1: number;
  readonly #seedHigh: number;
  readonly #study0: number;
  readonly #study1: number;
  #block = 0;
  readonly #words = new Int32Array(4);
  #wordsUsed = 4;
  readonly #normals = new Float64Array(3);
  #normalsUsed = 3;

  constructor(seed: number, purpose: number | string, study: number) {
    if (!(Number.isSafeInteger(seed) && seed >= 0))
      throw new DomainError("seed", seed, "a whole number from 0 to 2^53 - 1");
    if (!(Number.isSafeInteger(study) && study >= 0))
      throw new DomainError("study", study, "a whole number from 0 to 2^53 - 1");
    if (typeof purpose === "number" && !(Number.isInteger(purpose) && purpose >= 0 && purpose < 4294967296)) {
      throw new DomainError("purpose", purpose, "a word, or a whole number from 0 to 2^32 - 1");
    }
    this.#key0 = seed | 0;
    this.#key1 = typeof purpose === "string" ? hashOf(purpose) : purpose | 0;
    this.#seedHigh = Math.floor(seed / 4294967296);
    this.#study0 = study | 0;
    this.#study1 = Math.floor(study / 4294967296);
  }

  /** The next four words. Counter: 43 bits of block and 21 upper bits of the seed, 64 bits of study. */
  #advance(words: Int32Array): void {
    const block = this.#block++;
    const counter1 = (Math.floor(block / 4294967296) << 21) | this.#seedHigh;
    philoxBlock(block | 0, counter1, this.#study0, this.#study1, this.#key0, this.#key1, words);
  }

  #nextWord(): number {
    if (this.#wordsUsed === 4) {
      this.#advance(this.#words);
      this.#wordsUsed = 0;
    }
    return this.#words[this.#wordsUsed++]!;
  }

  /** A whole number, uniform from 0 to 2^32 - 1. */
  nextUint32(): number {
    return this.#nextWord() >>> 0;
  }

  /** Uniform on the open interval (0, 1), on a grid of 2^-53 offset by half a step. */
  uniform(): number {
    const high = this.#nextWord() >>> 6;
    const low = this.#nextWord() >>> 6;
    return (high * 67108864 + low + 0.5) * 2.220446049250313e-16;
  }

  /**
   * Uniform whole number from 0 to `below` - 1, without the bias of a remainder.
   * @param below from 1 to 2^32
   * @throws DomainError when `below` is not such a whole number
   */
  integer(below: number): number {
    if (!(Number.isInteger(below) && below >= 1 && below <= 4294967296)) {
      throw new DomainError("below", below, "a whole number from 1 to 2^32");
    }
    const usable = 4294967296 - (4294967296 % below);
    for (;;) {
      const word = this.#nextWord() >>> 0;
      if (word < usable) return word % below;
    }
  }

  /** Puts the entries into a random order, in place; every order is equally likely (Durstenfeld 1964). */
  shuffle(array: Int32Array): void {
    for (let last = array.length - 1; last > 0; last--) {
      const other = this.integer(last + 1);
      const held = array[last]!;
      array[last] = array[other]!;
      array[other] = held;
    }
  }

  /** One standard normal variate; see `fillNormals`. */
  normal(): number {
    if (this.#normalsUsed === 3) {
      this.fillNormals(this.#normals);
      this.#normalsUsed = 0;
    }
    return this.#normals[this.#normalsUsed++]!;
  }

  /**
   * Fills an array with independent standard normal variates: ziggurat with its exact tail. Each block of the generator
   * makes three, with 33 random bits of magnitude within one of 256 layers and a sign; the rare rest draws further words.
   *
   * @param array any length; every entry is overwritten
   * @source Marsaglia & Tsang (2000), tail by Marsaglia (1964); layer and magnitude from different bits (Doornik 2005)
   */
  fillNormals(array: Float64Array): void {
    const block = new Int32Array(4);
    const length = array.length;
    for (let at = 0; at < length; ) {
      this.#advance(block);
      const spare = block[3]!;
      for (let k = 0; k < 3 && at < length; k++) {
        const word = block[k]!;
        const layer = word & 255;
        const magnitude = (word >>> 9) * 1024 + ((spare >>> (10 * k)) & 1023);
        let x = magnitude * layerWidth[layer]!;
        if (magnitude >= layerInside[layer]!) x = this.#beyond(layer, x);
        array[at++] = (word & 256) === 0 ? x : -x;
      }
    }
  }

  /** Decides a point outside the rectangle of its layer: the wedge above it, or the tail; when it is refused, a fresh variate. */
  #beyond(firstLayer: number, firstX: number): number {
    let layer = firstLayer;
    let x = firstX;
    for (;;) {
      if (layer === 0) {
        // Marsaglia's tail: exponential of rate tailStart, kept with probability exp(-excess^2 / 2)
        for (;;) {
          const excess = -Math.log(this.uniform()) / tailStart;
          if (-2 * Math.log(this.uniform()) > excess * excess) return tailStart + excess;
        }
      }
      const height = layerHeight[layer]! + this.uniform() * (layerHeight[layer + 1]! - layerHeight[layer]!);
      if (height < Math.exp(-0.5 * x * x)) return x;
      const word = this.#nextWord();
      layer = word & 255;
      const magnitude = (word >>> 9) * 1024 + (this.#nextWord() & 1023);
      x = magnitude * layerWidth[layer]!;
      if (magnitude < layerInside[layer]!) return x;
    }
  }
}

/**
 * The random stream of one study: the same whatever ran before, on whichever worker. Streams with a different seed,
 * purpose or study never share a block (words for purposes: unless their 32-bit hashes agree).
 *
 * @param seed whole number from 0 to 2^53 - 1
 * @param purpose what the numbers are for, a word or a whole number below 2^32
 * @param study which repetition, whole number from 0 to 2^53 - 1
 * @throws DomainError for any other argument
 */
export function randomStream(seed: number, purpose: number | string, study: number): RandomStream {
  return new RandomStream(seed, purpose, study);
}
