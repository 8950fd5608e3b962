/** Rows drawn at random: those whose hash is lowest, so that any cut of the file into parts draws the same rows. */
export interface Sample {
  readonly keys: Float64Array<ArrayBuffer>;
  readonly cells: Int32Array<ArrayBuffer>;
  readonly offsets: Float64Array<ArrayBuffer>;
}

/** Mixes the place of a row and the seed to 32 bits (the finaliser of MurmurHash3, A. Appleby, public domain). */
function mixed(place: number, seed: number): number {
  let hash = ((place % 4294967296) ^ Math.imul(Math.floor(place / 4294967296) + 1, 0x9e3779b1) ^ seed) >>> 0;
  hash = Math.imul(hash ^ (hash >>> 16), 0x85ebca6b);
  hash = Math.imul(hash ^ (hash >>> 13), 0xc2b2ae35);
  return (hash ^ (hash >>> 16)) >>> 0;
}

export class SampleKeeper {
  readonly size: number;
  readonly #seed: number;
  #limit = 4294967296;
  readonly rows: { key: number; cell: number; offset: number }[] = [];
  constructor(size: number, seed: number) {
    this.size = size;
    this.#seed = seed;
    if (size === 0) this.#limit = -1;
  }

  /** @param place of the row in the file, no other row's */
  offer(place: number, cell: number, offset: number): void {
    const hash = mixed(place, this.#seed);
    if (hash >= this.#limit) return;
    // The place breaks ties, so that the order of rows is the same everywhere.
    this.rows.push({ key: hash * 2097152 + (place % 2097152), cell, offset });
    if (this.rows.length >= this.size * 2 + 64) this.trim();
  }

  trim(): void {
    if (this.rows.length <= this.size) return;
    this.rows.sort((left, right) => left.key - right.key);
    this.rows.length = this.size;
    this.#limit = Math.floor(this.rows.at(-1)!.key / 2097152) + 1;
  }
}

export function lowestKept(keeper: SampleKeeper): Sample {
  keeper.trim();
  return {
    keys: Float64Array.from(keeper.rows.map((row) => row.key)),
    cells: Int32Array.from(keeper.rows.map((row) => row.cell)),
    offsets: Float64Array.from(keeper.rows.map((row) => row.offset)),
  };
}

/** The lowest of several samples, in random order. */
export function joinedSamples(
  samples: readonly Sample[],
  size: number,
): { readonly cells: Int32Array; readonly offsets: Float64Array } {
  const rows = samples.flatMap((sample) =>
    Array.from(sample.keys, (key, index) => ({ key, cell: sample.cells[index]!, offset: sample.offsets[index]! })),
  );
  rows.sort((left, right) => left.key - right.key);
  const kept = rows.slice(0, size);
  return {
    cells: Int32Array.from(kept.map((row) => row.cell)),
    offsets: Float64Array.from(kept.map((row) => row.offset)),
  };
}
