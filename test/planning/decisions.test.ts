// Decisions in simulation are those of the families room, shortcut or not, alone and after another family.
import { describe, expect, it } from "vitest";
import { type CorrectionName, comparisonP, gatekeep, holdFamily } from "../../src/families/index.ts";
import { silentWatch } from "../../src/host/index.ts";
import { randomStream } from "../../src/numeric/index.ts";
import { contrastErrors } from "../../src/planning/contrast-errors.ts";
import { chainDecider, familyChain, templateOf } from "../../src/planning/decisions.ts";
import { studyDrawer } from "../../src/planning/draw-study.ts";
import { layoutOf, placedWeights } from "../../src/planning/layout.ts";
import type { FamilyPlan } from "../../src/planning/index.ts";
import { against, allPairs, design, factor, family } from "./designs.ts";

const factors = [factor("a", 3, "between")];
const layout = layoutOf(design(factors, [0, 0.6, 1.1]));
const truthsOf = (plan: FamilyPlan) =>
  plan.contrasts.map((one) =>
    placedWeights(layout, one.weights).reduce((sum, w, at) => sum + w * layout.means[at]!, 0),
  );

/** Decisions of both routes over some studies. */
function compared(plan: FamilyPlan, studies: number): { ours: boolean[][]; theirs: boolean[][] } {
  const chain = familyChain(plan).map((one) => {
    const blank = () => new Float64Array(one.contrasts.length);
    const errors = contrastErrors(
      layout,
      one.contrasts.map((contrast) => placedWeights(layout, contrast.weights)),
    );
    return { plan: one, layout, errors, evidence: { deviations: blank(), standardErrors: blank(), df: blank() } };
  });
  const { decide, newStudy } = chainDecider(chain, silentWatch);
  const draw = studyDrawer(layout, [14, 14, 14], false);
  const ours: boolean[][] = [];
  const theirs: boolean[][] = [];
  for (let study = 0; study < studies; study++) {
    const drawn = draw(randomStream(3, "decisions", study));
    newStudy(drawn.df);
    for (const { errors, evidence } of chain) errors.fill(drawn, evidence);
    ours.push([...decide(chain.map((one) => truthsOf(one.plan)))]);
    const gated = chain.map(({ plan: one, errors, evidence }) => {
      const estimates = truthsOf(one).map((truth, i) => truth + evidence.deviations[i]!);
      const standardErrors = Array.from(evidence.standardErrors);
      const { sides, margin } = one;
      const p = estimates.map((estimate, i) =>
        comparisonP({ estimate, standardError: standardErrors[i]!, df: drawn.df, sides, margin }),
      );
      const template = templateOf(one, layout, {
        correlation: errors.correlation(),
        commonDf: drawn.df,
        watch: silentWatch,
      });
      const after = one.after === null ? null : { family: one.after.family.name, any: one.after.any };
      return {
        name: one.name,
        correction: one.correction,
        after,
        problem: { ...template, estimates, standardErrors, p, df: p.map(() => drawn.df) },
      };
    });
    theirs.push([
      ...(gated.length === 1 ? holdFamily(gated[0]!.correction, gated[0]!.problem) : gatekeep(gated).at(-1)!.answer)
        .rejected,
    ]);
  }
  return { ours, theirs };
}

describe("decisions", () => {
  const methods: CorrectionName[] = [
    "none",
    "bonferroni",
    "sidak",
    "holm",
    "hochberg",
    "hommel",
    "shaffer",
    "tukey",
    "scheffe",
    "single-step",
    "step-down",
    "bh",
    "fixed sequence",
    "fallback",
  ];
  it.each(methods)("by %s are those of the family held in full", (method) => {
    const graph =
      method === "fallback"
        ? {
            weights: [0.5, 0.3, 0.2],
            passes: [
              [0, 1, 0],
              [0, 0, 1],
              [0, 0, 0],
            ],
          }
        : null;
    for (const sides of ["two-sided", "lower"] as const) {
      if (sides === "lower" && ["tukey", "scheffe", "shaffer", "sidak"].includes(method)) continue;
      const { ours, theirs } = compared(family(factors, [allPairs("a")], method, { graph, sides }), 60);
      expect(ours).toEqual(theirs);
    }
  });
  it.each([false, true])("of a family after another one (any: %s)", (any) => {
    const first = family(factors, [against("a", "a1")], "holm");
    const second = family(factors, [allPairs("a")], "holm", { name: "secondary", after: { family: first, any } });
    const { ours, theirs } = compared(second, 60);
    expect(ours).toEqual(theirs);
    expect(ours.flat()).toContain(true);
    expect(ours.flat()).toContain(false);
  });
});
