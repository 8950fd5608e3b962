/** Philox 4x32-10 in WebAssembly. Printed by test/numeric/fixtures/generate-philox-module.py; not to be edited. */

const module = [
  "AGFzbQEAAAABCwFgB39/f39/f38AAwIBAAUEAQEBAQcJAgFtAgABZgAACqcHAaQHAgd/An4CQCAGRQ0AA0AgACEHIAEhCCACIQkg",
  "AyEKIAQhCyAFIQwgB61C077Ekg1+IQ4gCa1C15r67Ax+IQ8gD0IgiKcgCHMgC3MhByAPpyEIIA5CIIinIApzIAxzIQkgDqchCiAL",
  "Qbnz3fF5aiELIAxBhd2e23tqIQwgB61C077Ekg1+IQ4gCa1C15r67Ax+IQ8gD0IgiKcgCHMgC3MhByAPpyEIIA5CIIinIApzIAxz",
  "IQkgDqchCiALQbnz3fF5aiELIAxBhd2e23tqIQwgB61C077Ekg1+IQ4gCa1C15r67Ax+IQ8gD0IgiKcgCHMgC3MhByAPpyEIIA5C",
  "IIinIApzIAxzIQkgDqchCiALQbnz3fF5aiELIAxBhd2e23tqIQwgB61C077Ekg1+IQ4gCa1C15r67Ax+IQ8gD0IgiKcgCHMgC3Mh",
  "ByAPpyEIIA5CIIinIApzIAxzIQkgDqchCiALQbnz3fF5aiELIAxBhd2e23tqIQwgB61C077Ekg1+IQ4gCa1C15r67Ax+IQ8gD0Ig",
  "iKcgCHMgC3MhByAPpyEIIA5CIIinIApzIAxzIQkgDqchCiALQbnz3fF5aiELIAxBhd2e23tqIQwgB61C077Ekg1+IQ4gCa1C15r6",
  "7Ax+IQ8gD0IgiKcgCHMgC3MhByAPpyEIIA5CIIinIApzIAxzIQkgDqchCiALQbnz3fF5aiELIAxBhd2e23tqIQwgB61C077Ekg1+",
  "IQ4gCa1C15r67Ax+IQ8gD0IgiKcgCHMgC3MhByAPpyEIIA5CIIinIApzIAxzIQkgDqchCiALQbnz3fF5aiELIAxBhd2e23tqIQwg",
  "B61C077Ekg1+IQ4gCa1C15r67Ax+IQ8gD0IgiKcgCHMgC3MhByAPpyEIIA5CIIinIApzIAxzIQkgDqchCiALQbnz3fF5aiELIAxB",
  "hd2e23tqIQwgB61C077Ekg1+IQ4gCa1C15r67Ax+IQ8gD0IgiKcgCHMgC3MhByAPpyEIIA5CIIinIApzIAxzIQkgDqchCiALQbnz",
  "3fF5aiELIAxBhd2e23tqIQwgB61C077Ekg1+IQ4gCa1C15r67Ax+IQ8gD0IgiKcgCHMgC3MhByAPpyEIIA5CIIinIApzIAxzIQkg",
  "DqchCiALQbnz3fF5aiELIAxBhd2e23tqIQwgDSAHNgIAIA0gCDYCBCANIAk2AgggDSAKNgIMIA1BEGohDSAAQQFqIQAgBkF/aiIG",
  "DQALCws=",
].join("");

export interface NativeBlocks {
  /** As `philoxBlocks`; the words are at the start of `words` until the next call. */
  readonly fill: (c0: number, c1: number, c2: number, c3: number, key0: number, key1: number, blocks: number) => void;
  /** Room for 4096 blocks. */
  readonly words: Int32Array;
}

/** The compiled generator with its own memory; null where WebAssembly is missing or forbidden. */
export function nativeBlocks(): NativeBlocks | null {
  try {
    const bytes = Uint8Array.from(atob(module), (letter) => letter.charCodeAt(0));
    const { m, f } = new WebAssembly.Instance(new WebAssembly.Module(bytes)).exports;
    return { fill: f as NativeBlocks["fill"], words: new Int32Array((m as WebAssembly.Memory).buffer) };
  } catch {
    return null;
  }
}
