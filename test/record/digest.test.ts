import { createHash } from "node:crypto";
import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { canonicalJson, digestOf, digestOfValue } from "../../src/record/index.ts";

/** RFC 8785 (Rundgren, Jordan, Erdtman 2020), sections 3.2.2 and 3.2.3 and appendix B; recalled. */
describe("canonical JSON by the vectors of RFC 8785", () => {
  it("writes the sample of section 3.2.2", () => {
    const sample = JSON.parse(
      String.raw`{"numbers":[333333333.33333329,1E30,4.50,2e-3,0.000000000000000000000000001],"string":"\u20ac$\u000F\u000aA'\u0042\u0022\u005c\\\"\/","literals":[null,true,false]}`,
    );
    expect(canonicalJson(sample)).toBe(
      String.raw`{"literals":[null,true,false],"numbers":[333333333.3333333,1e+30,4.5,0.002,1e-27],"string":"€$\u000f\nA'B\"\\\\\"/"}`,
    );
  });

  it("sorts names by UTF-16 units (section 3.2.3)", () => {
    const names = ["\u20ac", "\r", "\ufb33", "1", "\ud83d\ude00", "\u0080", "\u00f6"];
    const written = canonicalJson(Object.fromEntries(names.map((name) => [name, 0])));
    expect(Object.keys(JSON.parse(written))).toEqual([
      "1",
      "\r",
      "\u0080",
      "\u00f6",
      "\u20ac",
      "\ud83d\ude00",
      "\ufb33",
    ]);
    expect(written.indexOf('"\\r"')).toBeLessThan(written.indexOf('"1"'));
  });

  const numbers: readonly (readonly [string, string])[] = [
    ["0000000000000000", "0"],
    ["8000000000000000", "0"],
    ["0000000000000001", "5e-324"],
    ["8000000000000001", "-5e-324"],
    ["7fefffffffffffff", "1.7976931348623157e+308"],
    ["ffefffffffffffff", "-1.7976931348623157e+308"],
    ["4340000000000000", "9007199254740992"],
    ["c340000000000000", "-9007199254740992"],
    ["4430000000000000", "295147905179352830000"],
    ["44b52d02c7e14af5", "9.999999999999997e+22"],
    ["44b52d02c7e14af6", "1e+23"],
    ["44b52d02c7e14af7", "1.0000000000000001e+23"],
    ["444b1ae4d6e2ef4e", "999999999999999700000"],
    ["444b1ae4d6e2ef4f", "999999999999999900000"],
    ["444b1ae4d6e2ef50", "1e+21"],
    ["3eb0c6f7a0b5ed8c", "9.999999999999997e-7"],
    ["3eb0c6f7a0b5ed8d", "0.000001"],
    ["41b3de4355555553", "333333333.3333332"],
    ["41b3de4355555554", "333333333.33333325"],
    ["41b3de4355555555", "333333333.3333333"],
    ["41b3de4355555556", "333333333.3333334"],
    ["41b3de4355555557", "333333333.33333343"],
    ["becbf647612f3696", "-0.0000033333333333333333"],
    ["43143ff3c1cb0959", "1424953923781206.2"],
  ];
  it.each(numbers)("number %s is written %s", (hexadecimal, written) => {
    expect(canonicalJson(Buffer.from(hexadecimal, "hex").readDoubleBE())).toBe(written);
  });

  it("refuses what JSON cannot say", () => {
    for (const value of [Number.NaN, Number.POSITIVE_INFINITY, undefined]) expect(() => canonicalJson(value)).toThrow();
  });

  it("says the same for one value however its names are ordered, and reads back as that value", () => {
    fc.assert(
      fc.property(fc.dictionary(fc.string(), fc.jsonValue()), (value) => {
        const turned = Object.fromEntries(Object.entries(value).reverse());
        expect(canonicalJson(turned)).toBe(canonicalJson(value));
        expect(canonicalJson(JSON.parse(canonicalJson(value)))).toBe(canonicalJson(value));
      }),
      { numRuns: 200 },
    );
  });
});

describe("digests", () => {
  it("are SHA-256 (FIPS 180-4 appendix example, recalled)", () => {
    expect(digestOf("abc")).toBe("ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad");
  });
  it("agree with the platform's own SHA-256", () => {
    fc.assert(
      fc.property(fc.uint8Array({ maxLength: 300 }), (bytes) => {
        expect(digestOf(bytes)).toBe(createHash("sha256").update(bytes).digest("hex"));
      }),
    );
    expect(digestOfValue({ b: 1, a: "é" })).toBe(createHash("sha256").update('{"a":"é","b":1}').digest("hex"));
  });
});
