import type { ResidualsPicture } from "../../results/index.ts";
import { responseTitle } from "../response-words.ts";
import { inLines, levelTitle, measured, rangeOf, type Specification, stateTitle, ticksAcross } from "./axes.ts";
import { hueOf, titleSize } from "./look.ts";

/** Standardised residuals against fitted values, and against the quantiles that a normal distribution would show. */
export function residualsSpecification(picture: ResidualsPicture, width: number): Specification {
  const beside = width > 500;
  const plot = (beside ? width / 2 - 15 : width) - 42;
  const order = picture.residuals
    .map((_, index) => index)
    .sort((a, b) => picture.residuals[a]! - picture.residuals[b]!);
  const quantiles = picture.normalQuantiles.slice().sort((left, right) => left - right);
  const points = picture.fitted.map((fitted, index) => ({ fitted, residual: picture.residuals[index] }));
  const normal = order.map((index, place) => ({ expected: quantiles[place], residual: picture.residuals[index] }));
  const most = (values: readonly number[]) => values.reduce((far, value) => Math.max(far, Math.abs(value)), 0);
  const reach = Math.max(2.5, most(picture.residuals), most(quantiles)) * 1.06;
  const ticks = ticksAcross(-reach, reach, 6);
  const across = ticksAcross(-reach, reach, plot > 200 ? 6 : 4);
  // Fitted values stand on the scale of the analysis: for a response on log scale that is the logarithm.
  const linear = { ...picture.response, scale: "linear" as const };
  const fitted = rangeOf(picture.fitted, linear, Math.max(3, Math.floor(plot / 70)));
  const fittedTitle = `fitted ${picture.response.scale === "log" ? "logarithm of " : ""}${responseTitle(picture.response)}`;
  const title = inLines("residual (standard deviations)", plot, titleSize);
  const vertical = (field = "residual") => measured(field, ticks, title, levelTitle(ticks, 1));
  const mark = { type: "point", filled: true, shape: "circle", size: 20, opacity: 0.6, color: hueOf(0) };
  const height = beside ? 230 : 200;
  return {
    ...stateTitle(picture),
    columns: beside ? 2 : 1,
    spacing: beside ? 30 : 24,
    concat: [
      {
        width: plot,
        height,
        layer: [
          {
            data: { values: [{ zero: 0 }] },
            mark: { type: "rule", strokeDash: [4, 3] },
            encoding: { y: vertical("zero") },
          },
          {
            data: { values: points },
            mark,
            encoding: { x: measured("fitted", fitted, inLines(fittedTitle, plot, titleSize)), y: vertical() },
          },
        ],
      },
      {
        width: plot,
        height,
        layer: [
          {
            data: { values: [{ from: -reach, to: reach }] },
            mark: { type: "rule", strokeDash: [4, 3] },
            encoding: {
              x: measured("from", across, "normal quantile"),
              x2: { field: "to" },
              y: vertical("from"),
              y2: { field: "to" },
            },
          },
          {
            data: { values: normal },
            mark,
            encoding: { x: measured("expected", across, "normal quantile"), y: vertical() },
          },
        ],
      },
    ],
  };
}
