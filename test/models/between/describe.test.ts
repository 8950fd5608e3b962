import { describe, expect, it } from "vitest";
import { cellQuartiles, cellStatistics, describeCells, sampleQuantile } from "../../../src/models/index.ts";
import { factorData, groupData } from "./between-data.ts";
import { expectClose } from "./close.ts";

const values = [3.5, 1.25, 9, 4, 4.75, 10.5, 0.5];

describe("description of cells", () => {
  it("mean and spread as NumPy, t interval by mpmath (30 digits; the t quantile of the SciPy at hand is good to 9 digits only)", () => {
    const data = groupData(
      Array(7).fill("a"),
      values.map((value) => value - 100),
      100,
    );
    const [cell] = describeCells(cellStatistics(data), 0.95);
    expectClose(cell!.mean, values.reduce((sum, value) => sum + value, 0) / 7, 1e-13);
    expectClose(cell!.sd, 3.7317013865119537, 1e-12);
    expectClose(cell!.lower, 1.334466124406166, 1e-12);
    expectClose(cell!.upper, 8.236962447022405, 1e-12);
  });
  it("quartiles by definition 8 of Hyndman & Fan 1996, as NumPy's median-unbiased quantile", () => {
    for (const [count, lower, median, upper, tenth] of [
      [7, 1.625, 4, 8.291666666666666, 0.55],
      [4, 2.1875, 3.75, 6.916666666666668, 1.25],
      [5, 2.75, 4, 6.166666666666665, 1.25],
    ] as const) {
      const some = values.slice(0, count);
      const sorted = Float64Array.from(some).sort();
      expectClose(sampleQuantile(sorted, 0.1), tenth, 1e-13);
      const [cell] = cellQuartiles(groupData(Array(count).fill("a"), some));
      expectClose(cell!.lowerQuartile, lower, 1e-13);
      expectClose(cell!.median, median, 1e-13);
      expectClose(cell!.upperQuartile, upper, 1e-13);
    }
    expect(sampleQuantile([7], 0.25)).toBe(7);
    expect(sampleQuantile([1, 2], 1)).toBe(2);
  });
  it("one observation has a mean and no spread, an empty cell nothing", () => {
    const data = factorData({ a: ["x", "y", "y"] }, [1, 2, 4], { levels: { a: ["x", "y", "z"] } });
    const cells = describeCells(cellStatistics(data), 0.95);
    expect(cells[0]).toEqual({ cell: 0, n: 1, mean: 1, sd: null, standardError: null, lower: null, upper: null });
    expect(cells[2]).toEqual({ cell: 2, n: 0, mean: null, sd: null, standardError: null, lower: null, upper: null });
    expect(cellQuartiles(data)[2]).toEqual({ median: null, lowerQuartile: null, upperQuartile: null });
  });
  it("refuses values that are not numbers and levels out of range", () => {
    expect(() => cellStatistics(groupData(["a", "a"], [1, Number.NaN]))).toThrow("response in row 2");
    expect(() => describeCells(cellStatistics(groupData(["a", "a"], [1, 2])), 95)).toThrow("0 < level < 1");
  });
});
