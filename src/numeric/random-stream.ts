/** Random numbers of a counter-based generator: the n-th number of a study is a function of seed, purpose, study and n. */
import { DomainError } from "./domain-error.ts";
import { nativeBlocks } from "./philox-module.ts";

// Salmon, Moraes, Dror & Shaw (2011), table 2 and section 3: multipliers and the increments of the key (golden ratio, sqrt(3) - 1).
/**
 * Blocks of Philox 4x32 with 10 rounds, for consecutive values of the first counter word.
 *
 * @param out receives 4 signed 32-bit integers per block
 * @param blocks how many; counter0 + blocks <= 2^32
 * @source Salmon, Moraes, Dror & Shaw (2011), Parallel random numbers: as easy as 1, 2, 3
 */
export function philoxBlocks(
  counter0: number,
  counter1: number,
  counter2: number,
  counter3: number,
  key0: number,
  key1: number,
  out: Int32Array,
  blocks: number,
): void {
  // literals in the function, as signed integers: then everything stays in 32-bit registers
  const firstMultiplier = 0xd2511f53 | 0;
  const secondMultiplier = 0xcd9e8d57 | 0;
  const firstWeyl = 0x9e3779b9 | 0;
  const secondWeyl = 0xbb67ae85 | 0;
  const firstLow = 0x1f53;
  const firstHigh = 0xd251;
  const secondLow = 0x8d57;
  const secondHigh = 0xcd9e;
  for (let block = 0; block < blocks; block++) {
    let c0 = (counter0 + block) | 0;
    let c1 = counter1 | 0;
    let c2 = counter2 | 0;
    let c3 = counter3 | 0;
    let k0 = key0 | 0;
    let k1 = key1 | 0;
    for (let round = 0; round < 10; round++) {
      // high halves of the 64-bit products, from 16-bit halves
      let low = c0 & 0xffff;
      let high = c0 >>> 16;
      let middle = (Math.imul(high, firstLow) + (Math.imul(low, firstLow) >>> 16)) | 0;
      const high0 =
        (Math.imul(high, firstHigh) + (middle >>> 16) + ((Math.imul(low, firstHigh) + (middle & 0xffff)) >>> 16)) | 0;
      low = c2 & 0xffff;
      high = c2 >>> 16;
      middle = (Math.imul(high, secondLow) + (Math.imul(low, secondLow) >>> 16)) | 0;
      const high2 =
        (Math.imul(high, secondHigh) + (middle >>> 16) + ((Math.imul(low, secondHigh) + (middle & 0xffff)) >>> 16)) | 0;
      const low0 = Math.imul(c0, firstMultiplier);
      const low2 = Math.imul(c2, secondMultiplier);
      c0 = high2 ^ c1 ^ k0;
      c1 = low2;
      c2 = high0 ^ c3 ^ k1;
      c3 = low0;
      k0 = (k0 + firstWeyl) | 0;
      k1 = (k1 + secondWeyl) | 0;
    }
    const at = 4 * block;
    out[at] = c0;
    out[at + 1] = c1;
    out[at + 2] = c2;
    out[at + 3] = c3;
  }
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
const signedWidth = new Float64Array(2 * layers); // width per unit of the 33-bit magnitude; negative in the second half
const layerInside = new Float64Array(layers); // magnitudes below this lie in the rectangle under the curve
const layerHeight = new Float64Array(layers + 1); // density at the right end of a layer, rising
{
  let x = tailStart;
  let height = Math.exp(-0.5 * x * x);
  signedWidth[0] = layerArea / height / twoToThe33;
  layerInside[0] = (tailStart * height * twoToThe33) / layerArea;
  layerHeight[1] = height;
  for (let layer = 1; layer < layers; layer++) {
    height += layerArea / x;
    const next = layer === layers - 1 ? 0 : Math.sqrt(-2 * Math.log(height));
    signedWidth[layer] = x / twoToThe33;
    layerInside[layer] = (next / x) * twoToThe33;
    layerHeight[layer + 1] = layer === layers - 1 ? 1 : height;
    x = next;
  }
  for (let layer = 0; layer < layers; layer++) signedWidth[layers + layer] = -signedWidth[layer]!;
}

const batchBlocks = 256;
/** The same blocks four times as fast, where WebAssembly is allowed. */
const native = nativeBlocks();
/** Room for the words of one batch, overwritten by each; nothing is read from it later. */
const scratch = native?.words ?? new Int32Array(4 * batchBlocks);

/** Random numbers of one study; made by `randomStream`. The state is the place in the stream, nothing else. */
export class RandomStream {
  readonly #key0: number;
  readonly #key1: number;
  readonly #seedHigh: number;
  readonly #study0: number;
  readonly #study1: number;
  #block = 0;
  #words: Int32Array | null = null;
  #wordsUsed = 4;
  #normals: Float64Array | null = null;
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

  /** The next blocks. Counter: 43 bits of block and 21 upper bits of the seed, 64 bits of study. */
  #advance(words: Int32Array, blocks: number): void {
    let done = 0;
    while (done < blocks) {
      const high = Math.floor(this.#block / 4294967296);
      const low = this.#block - high * 4294967296;
      const now = Math.min(blocks - done, 4294967296 - low);
      const counter1 = (high << 21) | this.#seedHigh;
      if (native !== null && words === scratch && done === 0) {
        native.fill(low | 0, counter1, this.#study0, this.#study1, this.#key0, this.#key1, now);
      } else {
        const target = done === 0 ? words : words.subarray(4 * done);
        philoxBlocks(low | 0, counter1, this.#study0, this.#study1, this.#key0, this.#key1, target, now);
      }
      this.#block += now;
      done += now;
    }
  }

  #nextWord(): number {
    this.#words ??= new Int32Array(4);
    if (this.#wordsUsed === 4) {
      this.#advance(this.#words, 1);
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
    this.#normals ??= new Float64Array(3);
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
    const length = array.length;
    const words = scratch;
    for (let at = 0; at < length; ) {
      const blocks = Math.min(batchBlocks, Math.ceil((length - at) / 3));
      this.#advance(words, blocks);
      const whole = Math.min(blocks, Math.floor((length - at) / 3));
      // the sign comes with the width: a branch on a random bit costs more than all the rest; three at a time, written out
      for (let block = 0; block < whole; block++) {
        const from = 4 * block;
        const word0 = words[from]!;
        const word1 = words[from + 1]!;
        const word2 = words[from + 2]!;
        const spare = words[from + 3]!;
        const magnitude0 = (word0 >>> 9) * 1024 + (spare & 1023);
        const magnitude1 = (word1 >>> 9) * 1024 + ((spare >>> 10) & 1023);
        const magnitude2 = (word2 >>> 9) * 1024 + ((spare >>> 20) & 1023);
        array[at] = magnitude0 * signedWidth[word0 & 511]!;
        array[at + 1] = magnitude1 * signedWidth[word1 & 511]!;
        array[at + 2] = magnitude2 * signedWidth[word2 & 511]!;
        if (magnitude0 >= layerInside[word0 & 255]!) array[at] = this.#beyond(word0 & 511, array[at]!);
        if (magnitude1 >= layerInside[word1 & 255]!) array[at + 1] = this.#beyond(word1 & 511, array[at + 1]!);
        if (magnitude2 >= layerInside[word2 & 255]!) array[at + 2] = this.#beyond(word2 & 511, array[at + 2]!);
        at += 3;
      }
      for (let k = 0; whole < blocks && at < length; k++) {
        const word = words[4 * whole + k]!;
        const magnitude = (word >>> 9) * 1024 + ((words[4 * whole + 3]! >>> (10 * k)) & 1023);
        const x = magnitude * signedWidth[word & 511]!;
        array[at++] = magnitude < layerInside[word & 255]! ? x : this.#beyond(word & 511, x);
      }
    }
  }

  /** Decides a point outside the rectangle of its layer: the wedge above it, or the tail; when it is refused, a fresh variate. */
  #beyond(layerAndSign: number, firstX: number): number {
    const sign = layerAndSign < layers ? 1 : -1;
    let layer = layerAndSign & 255;
    let x = Math.abs(firstX);
    for (;;) {
      if (layer === 0) {
        // Marsaglia's tail: exponential of rate tailStart, kept with probability exp(-excess^2 / 2)
        for (;;) {
          const excess = -Math.log(this.uniform()) / tailStart;
          if (-2 * Math.log(this.uniform()) > excess * excess) return sign * (tailStart + excess);
        }
      }
      const height = layerHeight[layer]! + this.uniform() * (layerHeight[layer + 1]! - layerHeight[layer]!);
      if (height < Math.exp(-0.5 * x * x)) return sign * x;
      const word = this.#nextWord();
      layer = word & 255;
      const magnitude = (word >>> 9) * 1024 + (this.#nextWord() & 1023);
      x = magnitude * signedWidth[layer]!;
      if (magnitude < layerInside[layer]!) return sign * x;
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
