import { describe, expect, it } from "vitest";
import {
  counted,
  dfText,
  fixed,
  intervalText,
  listed,
  pClause,
  percentText,
  placesFor,
  plainNumber,
  pText,
  significant,
} from "../../src/present/numbers.ts";

describe("numbers", () => {
  it.each([
    [0.05, "0.050"],
    [0.0004999, "< 0.001"],
    [0.001, "0.001"],
    [0.0334, "0.033"],
    [0.99951, "> 0.999"],
    [0, "< 0.001"],
    [1, "> 0.999"],
    [null, "\u2013"],
  ])("prints p = %s as %s", (p, text) => expect(pText(p)).toBe(text));

  it("takes a fourth decimal where three would hide on which side of 0.05 p lies", () => {
    expect([pText(0.0504), pText(0.0496), pText(0.05)]).toEqual(["0.0504", "0.0496", "0.050"]);
  });

  it.each([
    [0.91, 2],
    [12.3, 0],
    [0.0021, 4],
    [999, 0],
    [0, null],
    [null, null],
  ])("shows a standard error of %s with two digits: %s places", (error, places) =>
    expect(placesFor(error)).toBe(places),
  );

  it("sets the minus sign, and none before a rounded zero", () => {
    expect(fixed(-1.25, 1)).toMatch(/^\u22121\.[23]$/);
    expect(fixed(-0.001, 2)).toBe("0.00");
    expect(plainNumber(-3)).toBe("\u22123");
  });

  it("writes intervals in brackets, with an open end where there is no bound", () => {
    expect(intervalText(1, 2, 1)).toBe("[1.0, 2.0]");
    expect(intervalText(null, 2, 1)).toBe("(\u2212\u221e, 2.0]");
    expect(intervalText(1, null, 1)).toBe("[1.0, \u221e)");
    expect(intervalText(null, null, 1)).toBe("\u2013");
  });

  it("prints degrees of freedom, shares, counts and lists", () => {
    expect([dfText(3), dfText(23.456), dfText(2.9999999999), dfText(null)]).toEqual(["3", "23.46", "3", "\u221e"]);
    expect([percentText(0.05), percentText(0.025), percentText(1 / 3, 1)]).toEqual(["5%", "2.5%", "33.3%"]);
    expect([counted(1, "subject"), counted(2, "subject"), counted(20_000, "study", "studies")]).toEqual([
      "1 subject",
      "2 subjects",
      "20\u202f000 studies",
    ]);
    expect([listed([]), listed(["a"]), listed(["a", "b"]), listed(["a", "b", "c"])]).toEqual([
      "",
      "a",
      "a and b",
      "a, b and c",
    ]);
    expect(pClause(0.0001, "adjusted p")).toBe("adjusted p < 0.001");
    expect([significant(812.4, 5), significant(0.00001234, 3), significant(1.5e10, 3), significant(0)]).toEqual([
      "812.40",
      "0.0000123",
      "1.50 \u00d7 10\u00b9\u2070",
      "0",
    ]);
    expect(plainNumber(41.25)).toBe("41.25");
    expect(plainNumber(1000000000000.4)).toBe("1000000000000.4");
  });
});
