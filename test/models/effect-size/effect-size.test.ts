import { describe, expect, it } from "vitest";
import {
  hedgesFactor,
  partialEtaSquaredInterval,
  partialOmegaSquared,
  standardisedContrast,
} from "../../../src/models/effect-size/index.ts";
import { fUpperTail, noncentralFUpperTail, noncentralTUpperTail } from "../../../src/numeric/index.ts";
import { expectClose } from "../between/close.ts";

describe("Hedges's factor (Hedges 1981)", () => {
  it.each([
    // gamma(1) / (sqrt(1) gamma(1/2)) and so on: closed forms.
    [2, 1 / Math.sqrt(Math.PI)],
    [3, Math.sqrt(Math.PI) / 2 / Math.sqrt(1.5)],
    [4, Math.sqrt(2 / Math.PI)],
    [Number.POSITIVE_INFINITY, 1],
  ])("df %f", (df, wanted) => expectClose(hedgesFactor(df), wanted, 1e-13));
  it.each([
    // mpmath, 40 digits: gamma(df / 2) / (sqrt(df / 2) gamma((df - 1) / 2))
    [100, "0.9924780549814448666"],
    [101, "0.99255274548746187935"],
    [1000, "0.99924978117971636752"],
    [1e6, "0.99999924999978124993"],
  ])("df %d against 40-digit arithmetic", (df, wanted) => expectClose(hedgesFactor(df), Number(wanted), 1e-13));
  it("takes the bias out: its mean over the distribution of 1 / s is 1 (trapezoidal sum over chi-square with 6 df)", () => {
    // E[1/s] for s^2 = chi-square_6 / 6, by the trapezoidal rule; chi-square_6 density x^2 exp(-x/2) / 16.
    let mean = 0;
    const step = 0.001;
    for (let x = step; x < 120; x += step) mean += step * Math.sqrt(6 / x) * ((x * x * Math.exp(-x / 2)) / 16);
    expectClose(hedgesFactor(6) * mean, 1, 1e-9);
  });
  it("does not exist at 1 df or less", () => expect(() => hedgesFactor(1)).toThrow("> 1"));
});

describe("a standardised comparison", () => {
  const question = {
    estimate: 2.4,
    standardError: 0.9,
    df: 18,
    sd: 2,
    sdDf: 18,
    standardiser: "pooled spread",
    level: 0.9,
  } as const;
  it("has limits at which the observed t has the tails of the level, both with the factor", () => {
    const found = standardisedContrast(question)!;
    const unit = (hedgesFactor(18) * 0.9) / 2;
    const t = 2.4 / 0.9;
    expectClose(found.value, hedgesFactor(18) * 1.2, 1e-13);
    expectClose(noncentralTUpperTail(t, 18, found.lower / unit), 0.05, 1e-9);
    expectClose(noncentralTUpperTail(t, 18, found.upper / unit), 0.95, 1e-9);
  });
  it("turns with the sign of the estimate", () => {
    const found = standardisedContrast(question)!;
    const turned = standardisedContrast({ ...question, estimate: -2.4 })!;
    expectClose(turned.value, -found.value, 1e-13);
    expectClose(turned.lower, -found.upper, 1e-9);
    expectClose(turned.upper, -found.lower, 1e-9);
  });
  it("goes on smoothly to a vast t, where the limits are the estimate over the spread's own limits", () => {
    for (const sign of [1, -1]) {
      const [near, far] = [0.999e7, 1.001e7].map(
        (t) => standardisedContrast({ ...question, estimate: sign * 0.9 * t })!,
      );
      expectClose(far!.lower / near!.lower, 1.001 / 0.999, 1e-10);
      expectClose(far!.upper / near!.upper, 1.001 / 0.999, 1e-10);
    }
    expect(standardisedContrast({ ...question, estimate: 1e14 })!.lower).toBeGreaterThan(1e12);
  });
  it("is null without df for the factor, and refuses spreads and levels out of range", () => {
    expect(standardisedContrast({ ...question, sdDf: 1 })).toBeNull();
    expect(() => standardisedContrast({ ...question, sd: 0 })).toThrow("sd is 0");
    expect(() => standardisedContrast({ ...question, level: 1 })).toThrow("level is 1");
  });
});

describe("shares of variance", () => {
  it("partial eta squared's limits are noncentralities at which the observed F has the tails of the level (Steiger 2004)", () => {
    const [lower, upper] = partialEtaSquaredInterval({ ratio: 5.2, df1: 3, df2: 40, observations: 44, level: 0.9 });
    const noncentrality = (share: number) => (44 * share) / (1 - share);
    expectClose(noncentralFUpperTail(5.2, 3, 40, noncentrality(lower)), 0.05, 1e-8);
    expectClose(noncentralFUpperTail(5.2, 3, 40, noncentrality(upper)), 0.95, 1e-8);
  });
  it("goes on smoothly to a vast F", () => {
    const ask = (ratio: number) => partialEtaSquaredInterval({ ratio, df1: 2, df2: 12, observations: 15, level: 0.95 });
    const [near, far] = [ask(0.999e8), ask(1.001e8)];
    for (const end of [0, 1] as const) expectClose((1 - near[end]) / (1 - far[end]), 1.001 / 0.999, 1e-5);
    expect(ask(1e19)[0]).toBeLessThanOrEqual(1);
  });
  it("the lower limit is 0 exactly when the F test does not reject at half of 1 - level", () => {
    for (const ratio of [0.4, 1, 2.2, 2.8, 3.4, 3.9]) {
      const [lower] = partialEtaSquaredInterval({ ratio, df1: 2, df2: 27, observations: 30, level: 0.95 });
      expect(lower === 0).toBe(fUpperTail(ratio, 2, 27) >= 0.025);
    }
  });
  it("omega squared is (SS - df MS) / (total + MS), Hays's form, and never negative", () => {
    // Sums 30 between 3 groups, 54 within 27 df: MS 2, F 7.5.
    expectClose(partialOmegaSquared(7.5, 2, 30), (30 - 2 * 2) / (84 + 2), 1e-13);
    expect(partialOmegaSquared(0.3, 2, 30)).toBe(0);
  });
});
