import { readFileSync } from "node:fs";
import { describe, expect, it } from "vitest";
import { chiSquareUpperTail, DomainError, normalUpperTail, randomStream } from "../../src/numeric/index.ts";
import { nativeBlocks } from "../../src/numeric/philox-module.ts";
import { philoxBlocks } from "../../src/numeric/random-stream.ts";

const fixture = JSON.parse(readFileSync(new URL("./fixtures/joint.json", import.meta.url), "utf8"));
const unsigned = (words: Int32Array) => Array.from(words, (word) => word >>> 0);

describe("Philox 4x32-10", () => {
  it("gives the known answers (recalled from the authors' test file; the first two digits of pi as last counter and key)", () => {
    const out = new Int32Array(4);
    philoxBlocks(0, 0, 0, 0, 0, 0, out, 1);
    expect(unsigned(out)).toEqual([0x6627e8d5, 0xe169c58d, 0xbc57ac4c, 0x9b00dbd8]);
    philoxBlocks(-1, -1, -1, -1, -1, -1, out, 1);
    expect(unsigned(out)).toEqual([0x408f276d, 0x41c83b0e, 0xa20bc7c6, 0x6d5451fd]);
    philoxBlocks(0x243f6a88, 0x85a308d3, 0x13198a2e, 0x03707344, 0xa4093822, 0x299f31d0, out, 1);
    expect(unsigned(out)).toEqual([0xd16cfe09, 0x94fdcceb, 0x5001e420, 0x24126ea1]);
  });

  it("agrees with an implementation from the definition, itself held against numpy's 4x64 (generate-joint.py); compiled and plain alike", () => {
    const native = nativeBlocks();
    expect(native).not.toBeNull();
    const out = new Int32Array(4);
    for (const { counter, key, block } of fixture.philox) {
      const [c0, c1, c2, c3] = counter;
      philoxBlocks(c0, c1, c2, c3, key[0], key[1], out, 1);
      expect(unsigned(out)).toEqual(block);
      native!.fill(c0, c1, c2, c3, key[0], key[1], 1);
      expect(unsigned(native!.words.slice(0, 4))).toEqual(block);
    }
    const many = new Int32Array(4 * 100);
    philoxBlocks(-50, 1, 2, 3, 4, 5, many, 100);
    native!.fill(-50, 1, 2, 3, 4, 5, 100);
    expect(native!.words.slice(0, 400)).toEqual(many);
  });
});

describe("a stream", () => {
  it("is a function of seed, purpose and study alone, and differs in each", () => {
    const first = (seed: number, purpose: string | number, study: number) => {
      const stream = randomStream(seed, purpose, study);
      return [stream.nextUint32(), stream.uniform(), stream.normal(), stream.integer(1000)];
    };
    const one = first(5, "power", 3);
    randomStream(5, "power", 2).fillNormals(new Float64Array(1000));
    expect(first(5, "power", 3)).toEqual(one);
    for (const other of [
      first(6, "power", 3),
      first(5, "bootstrap", 3),
      first(5, "power", 4),
      first(5 + 2 ** 40, "power", 3),
      first(5, "power", 3 + 2 ** 40),
    ]) {
      expect(other).not.toEqual(one);
    }
  });

  it("makes the same normals one by one, in one array, and in arrays of any length", () => {
    const whole = new Float64Array(2000);
    randomStream(1, "n", 0).fillNormals(whole);
    const stream = randomStream(1, "n", 0);
    const single = Array.from({ length: 1500 }, () => stream.normal());
    expect(single.slice(0, 30)).toEqual([...whole.slice(0, 30)]);
    const short = new Float64Array(7);
    randomStream(1, "n", 0).fillNormals(short);
    expect([...short]).toEqual([...whole.slice(0, 7)]);
  });

  it("normals have the normal distribution, tails beyond the ziggurat included (chi-square over 40 bins, 4 million)", () => {
    const values = new Float64Array(4_000_000);
    randomStream(11, "normals", 0).fillNormals(values);
    const edges = [...Array.from({ length: 33 }, (_, i) => -3.2 + 0.2 * i), 3.4, 3.6, 3.654152885361009, 3.7, 3.9, 4.2];
    const counts = new Float64Array(edges.length + 1);
    let negative = 0;
    for (const value of values) {
      let bin = Math.min(32, Math.max(0, Math.floor((value + 3.2) / 0.2) + 1));
      while (bin < edges.length && value >= edges[bin]!) bin++;
      while (bin > 0 && value < edges[bin - 1]!) bin--;
      counts[bin]!++;
      if (value < 0) negative++;
    }
    let statistic = 0;
    for (let bin = 0; bin <= edges.length; bin++) {
      const above = bin === 0 ? 1 : normalUpperTail(edges[bin - 1]!);
      const expected = values.length * (above - (bin === edges.length ? 0 : normalUpperTail(edges[bin]!)));
      statistic += (counts[bin]! - expected) ** 2 / expected;
    }
    expect(chiSquareUpperTail(statistic, edges.length)).toBeGreaterThan(0.001);
    expect(Math.abs(negative - values.length / 2)).toBeLessThan(3.3 * Math.sqrt(values.length / 4));
  });

  it("whole numbers are uniform and shuffles reach every order equally (chi-square)", () => {
    const stream = randomStream(12, "shuffle", 0);
    const counts = new Map<string, number>();
    for (let i = 0; i < 24000; i++) {
      const array = Int32Array.of(0, 1, 2, 3);
      stream.shuffle(array);
      counts.set(array.join(), (counts.get(array.join()) ?? 0) + 1);
    }
    expect(counts.size).toBe(24);
    let statistic = 0;
    for (const count of counts.values()) statistic += (count - 1000) ** 2 / 1000;
    expect(chiSquareUpperTail(statistic, 23)).toBeGreaterThan(0.001);
    for (let i = 0; i < 1000; i++) {
      const u = stream.uniform();
      expect(u > 0 && u < 1).toBe(true);
    }
  });

  it("refuses bad arguments", () => {
    expect(() => randomStream(-1, "x", 0)).toThrow(DomainError);
    expect(() => randomStream(1.5, "x", 0)).toThrow(DomainError);
    expect(() => randomStream(1, 2 ** 32, 0)).toThrow(DomainError);
    expect(() => randomStream(1, "x", -1)).toThrow(DomainError);
    expect(() => randomStream(1, "x", 0).integer(0)).toThrow(DomainError);
  });
});
