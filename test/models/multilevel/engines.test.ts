import { describe, expect, it } from "vitest";
import { silentWatch } from "../../../src/host/index.ts";
import { collapseRows } from "../../../src/models/multilevel/collapsed-rows.ts";
import { covarianceStructure } from "../../../src/models/multilevel/covariance-structure.ts";
import { crossedEngine } from "../../../src/models/multilevel/crossed-units.ts";
import { directEngine } from "../../../src/models/multilevel/direct-blocks.ts";
import type { Engine } from "../../../src/models/multilevel/engine.ts";
import { effectHypotheses, fixedPart, nullBasis } from "../../../src/models/multilevel/fixed-part.ts";
import { reducedEngine } from "../../../src/models/multilevel/reduced-blocks.ts";
import { caseData, cases } from "./fixtures/cases.ts";
import { normals } from "./random-inputs.ts";

// Three ways to the same likelihood: dense covariances of collapsed rows, elimination of random effects, reduced cross-products.
// They must agree at any parameters, not only at the optimum.
function closeArrays(actual: Float64Array, expected: Float64Array, what: string, relative = 1e-8): void {
  const scale = expected.reduce((most, value) => Math.max(most, Math.abs(value)), 0);
  for (let at = 0; at < expected.length; at++) {
    expect(
      Math.abs(actual[at]! - expected[at]!),
      `${what}[${at}]: ${actual[at]} for ${expected[at]}`,
    ).toBeLessThanOrEqual(relative * Math.max(scale, 1e-6));
  }
}

const oneResidual = cases.filter((own) => covarianceStructure(caseData(own)).residual.strata === 1);

it("has most of the data sets to compare on", () => expect(oneResidual.length).toBeGreaterThanOrEqual(12));

describe.each(oneResidual)("$name", (own) => {
  const data = caseData(own);
  const structure = covarianceStructure(data);
  const fixed = fixedPart(data);
  const rows = collapseRows(data, structure, fixed);
  const direct = directEngine(data, structure, fixed, rows, silentWatch);
  const others: [string, Engine][] = [["reduced", reducedEngine(data, structure, fixed, rows, silentWatch)]];
  if (structure.terms.every((term) => !term.correlated)) {
    others.push(["eliminated", crossedEngine(data, structure, fixed, rows, silentWatch)]);
  }
  const active = direct.parameters.map((_, index) => index);
  const theta = Float64Array.from(direct.parameters, (parameter, index) =>
    parameter.kind === "random" && parameter.row !== parameter.column ? 0.3 : 1.5 + 0.7 * index,
  );
  const [hypothesis] = effectHypotheses(data, fixed).filter(({ df }) => df > 0);
  it.each(others)("%s cross-products give what dense blocks give", (_, engine) => {
    for (const [criterion, basis] of [
      ["REML", null],
      ["ML", null],
      ["ML", nullBasis(hypothesis!, fixed.columns)],
    ] as const) {
      const expected = direct.evaluate(theta, active, criterion, basis)!;
      const actual = engine.evaluate(theta, active, criterion, basis)!;
      expect(actual.deviance / expected.deviance).toBeCloseTo(1, 11);
      closeArrays(actual.beta, expected.beta, "beta");
      closeArrays(actual.phi, expected.phi, "phi");
      closeArrays(actual.gradient, expected.gradient, "gradient");
      if (actual.hessian === null) continue;
      closeArrays(actual.information, expected.information, "information");
      closeArrays(actual.hessian, expected.hessian!, "hessian");
    }
    const expected = direct.pieces(theta, active);
    const actual = engine.pieces(theta, active);
    closeArrays(actual.information, expected.information, "expected information");
    for (const [k, matrix] of expected.p.entries()) closeArrays(actual.p[k]!, matrix, `P${k}`);
    for (const [k, line] of expected.q.entries()) {
      for (const [l, matrix] of line.entries()) closeArrays(actual.q[k]![l]!, matrix, `Q${k},${l}`, 1e-7);
    }
  });

  // Drawn responses have a restricted score of mean zero at the parameters they were drawn with.
  const drawn = /^(tasters crossed with sessions|intercept and slope that go together)$/.test(own.name)
    ? [["direct", direct] as [string, Engine], ...others]
    : [];
  it.each(drawn)("%s draws responses from the model", (_, engine) => {
    const normal = normals(5);
    const beta = Float64Array.from({ length: fixed.columns }, (__, column) => 3 * column);
    const studies = 40;
    const mean = new Float64Array(active.length);
    for (let study = 0; study < studies; study++) {
      const { gradient } = engine.simulated(theta, beta, normal).evaluate(theta, active, "REML", null)!;
      for (const index of active) mean[index]! += gradient[index]! / studies;
    }
    const { information } = direct.pieces(theta, active);
    for (const index of active) {
      // The variance of the deviance's gradient is four times the information.
      const error = Math.sqrt((4 * information[index * active.length + index]!) / studies);
      expect(Math.abs(mean[index]!)).toBeLessThan(4.5 * error);
    }
  });

  it.skipIf(data.rows > 130)("has the gradient and second derivatives of its own deviance", () => {
    const at = direct.evaluate(theta, active, "REML", null)!;
    for (const index of active) {
      const step = 1e-5;
      const moved = (sign: number) => {
        const other = theta.slice();
        other[index]! += sign * step;
        return direct.evaluate(other, active, "REML", null)!;
      };
      const [up, down] = [moved(1), moved(-1)];
      const gap = (up.deviance - down.deviance) / (2 * step) - at.gradient[index]!;
      expect(Math.abs(gap)).toBeLessThanOrEqual(1e-6 * Math.max(1, Math.abs(at.gradient[index]!)));
      for (const other of active) {
        const slope = (up.gradient[other]! - down.gradient[other]!) / (2 * step);
        const curvature = at.hessian![index * active.length + other]!;
        expect(Math.abs(slope - curvature)).toBeLessThanOrEqual(1e-6 * Math.max(1, Math.abs(curvature)));
      }
    }
  });
});
