/** Texts by their bytes, numbered in order of first appearance; no text is made before it is asked for. */
export class LabelTable {
  #arena = new Uint8Array(1 << 12);
  #ends = new Int32Array(256);
  #hashes = new Int32Array(256);
  #slots = new Int32Array(512).fill(-1);
  count = 0;

  /** Hash of a range of bytes, as `find` expects it. */
  static hash(bytes: Uint8Array, start: number, end: number): number {
    let hash = 0x811c9dc5 | 0;
    for (let position = start; position < end; position++) hash = Math.imul(hash ^ bytes[position]!, 0x01000193);
    return hash;
  }

  /** Number of the text; a new one gets the next number. */
  find(bytes: Uint8Array, start: number, end: number, hash: number): number {
    const mask = this.#slots.length - 1;
    const length = end - start;
    for (let slot = (hash ^ (hash >>> 15)) & mask; ; slot = (slot + 1) & mask) {
      const label = this.#slots[slot]!;
      if (label < 0) return this.#add(bytes, start, end, hash, slot);
      if (this.#hashes[label] !== hash) continue;
      const from = label === 0 ? 0 : this.#ends[label - 1]!;
      if (this.#ends[label]! - from !== length) continue;
      let same = 0;
      while (same < length && this.#arena[from + same] === bytes[start + same]) same++;
      if (same === length) return label;
    }
  }

  #add(bytes: Uint8Array, start: number, end: number, hash: number, slot: number): number {
    const from = this.count === 0 ? 0 : this.#ends[this.count - 1]!;
    const to = from + (end - start);
    if (to > this.#arena.length) {
      const next = new Uint8Array(Math.max(to, this.#arena.length * 2));
      next.set(this.#arena.subarray(0, from));
      this.#arena = next;
    }
    this.#arena.set(bytes.subarray(start, end), from);
    if (this.count === this.#ends.length) {
      const ends = new Int32Array(this.count * 2);
      ends.set(this.#ends);
      this.#ends = ends;
      const hashes = new Int32Array(this.count * 2);
      hashes.set(this.#hashes);
      this.#hashes = hashes;
    }
    const label = this.count++;
    this.#ends[label] = to;
    this.#hashes[label] = hash;
    this.#slots[slot] = label;
    if (this.count * 2 > this.#slots.length) this.#widen();
    return label;
  }

  #widen(): void {
    const slots = new Int32Array(this.#slots.length * 4).fill(-1);
    const mask = slots.length - 1;
    for (let label = 0; label < this.count; label++) {
      const hash = this.#hashes[label]!;
      let slot = (hash ^ (hash >>> 15)) & mask;
      while (slots[slot]! >= 0) slot = (slot + 1) & mask;
      slots[slot] = label;
    }
    this.#slots = slots;
  }

  text(label: number): string {
    return labelText(this.#arena.subarray(label === 0 ? 0 : this.#ends[label - 1]!, this.#ends[label]!));
  }

  /** All texts' bytes one behind the other, and where each ends. */
  packed(): PackedLabels {
    const length = this.count === 0 ? 0 : this.#ends[this.count - 1]!;
    return { bytes: this.#arena.slice(0, length), ends: this.#ends.slice(0, this.count) };
  }
}

export interface PackedLabels {
  readonly bytes: Uint8Array<ArrayBuffer>;
  readonly ends: Int32Array<ArrayBuffer>;
}

const decoder = new TextDecoder("utf-8", { fatal: true });
const olderDecoder = new TextDecoder("windows-1252");

/** UTF-8 where it is, otherwise Windows-1252, as the reader of small files has it. */
function labelText(bytes: Uint8Array): string {
  // Most labels are short and plain, for which the decoder's own cost would be the larger part.
  if (bytes.length <= 24 && bytes.every((code) => code < 128)) return String.fromCharCode(...bytes);
  try {
    return decoder.decode(bytes);
  } catch {
    return olderDecoder.decode(bytes);
  }
}
