import type { Picture } from "../../results/index.ts";
import { counted, fixed, listed, percentText, placesFor, significant } from "../numbers.ts";
import { responseTitle, shown, stateMark } from "../response-words.ts";
import { curveName } from "./power.ts";
import { capitalised, correctionWords } from "../sentences/words.ts";
import { comparisonSentence } from "../sentences/comparison.ts";

const plain = (value: number | null, picture: Picture, places: number): string =>
  fixed(shown(value, picture.response), places);

/** The caption: what the picture is, with its state in word and shape. */
export function pictureCaption(picture: Picture): string {
  const state = `(${stateMark(picture.state)})`;
  switch (picture.picture) {
    case "means":
      return `Means of ${responseTitle(picture.response)} by ${listed(picture.factors.map((factor) => factor.name))} with ${percentText(picture.intervalLevel)} ${picture.interval === "within" ? "within-subject " : ""}intervals, over the single values ${state}.`;
    case "profiles":
      return `${capitalised(responseTitle(picture.response))} of each subject across ${picture.factor.name}, with the means ${state}.`;
    case "distributions":
      return `Distribution of ${responseTitle(picture.response)} by ${picture.factor.name}: every value, median and quartiles ${state}.`;
    case "residuals":
      return `Residuals against fitted values, and against normal quantiles ${state}.`;
    case "comparisons": {
      const { family, correction, margin } = picture.comparisons;
      return `${family === null ? "Comparisons" : `Family "${family}"`} by ${correctionWords(correction)}: estimates and intervals against ${margin === null ? (picture.response.scale === "log" ? "one" : "zero") : "the margin"} ${state}.`;
    }
    case "power":
      return `Power of ${picture.of === "omnibus" ? "the omnibus test" : `the family "${picture.of}"`} by number of subjects.`;
    case "passing":
      return "How the error passes: shares of it at each comparison, and where a share goes once its comparison is shown.";
    case "calibration":
      return `Calibration of ${picture.calibration.of === "omnibus" ? "the omnibus test" : `the family "${picture.calibration.of}"`}: shares of ${counted(picture.calibration.studies, "simulated study", "simulated studies")}, against the error held.`;
  }
}

/** What the picture shows, in words: for terminals, screen readers and captions. */
export function describePicture(picture: Picture): string {
  switch (picture.picture) {
    case "means": {
      const spans = picture.cells
        .map((cell) => (cell.upper !== null && cell.lower !== null ? (cell.upper - cell.lower) / 4 : null))
        .filter((span): span is number => span !== null && span > 0);
      const places = picture.response.scale === "log" || spans.length === 0 ? 2 : (placesFor(Math.min(...spans)) ?? 2);
      return `${picture.cells
        .filter((cell) => cell.mean !== null)
        .slice(0, 24)
        .map(
          (cell) =>
            `${Object.values(cell.levels).join(", ")}: ${plain(cell.mean, picture, places)}${cell.lower === null ? "" : ` [${plain(cell.lower, picture, places)}, ${plain(cell.upper, picture, places)}]`}`,
        )
        .join("; ")}.`;
    }
    case "profiles": {
      const { levels } = picture.factor;
      const told = picture.means.map((mean) => {
        const values = mean.values.flatMap((value, index) =>
          value === null ? [] : [`${levels[index]} ${significant(shown(value, picture.response), 4)}`],
        );
        return `${mean.group === null ? "means" : `means of ${mean.group}`}: ${values.slice(0, 24).join(", ")}`;
      });
      return `${counted(picture.lines.length, "line")}, one for each subject; ${told.join("; ")}.`;
    }
    case "distributions":
      return `${picture.values.map((entry) => `${entry.level}: ${counted(entry.values.length, "value")}`).join("; ")}.`;
    case "residuals":
      return `${counted(picture.residuals.length, "residual")}; the largest is ${fixed(
        picture.residuals.reduce((most, value) => Math.max(most, Math.abs(value)), 0),
        2,
      )} standard deviations from zero.`;
    case "comparisons":
      return picture.comparisons.rows
        .slice(0, 12)
        .map((row) => comparisonSentence(row, picture.comparisons))
        .join(" ");
    case "power":
      return picture.curves
        .map(
          (curve) =>
            `${curveName(curve.name)}: ${percentText(curve.points[0]?.power ?? 0, 0)} with ${curve.points[0]?.subjects ?? 0} subjects, ${percentText(curve.points.at(-1)?.power ?? 0, 0)} with ${curve.points.at(-1)?.subjects ?? 0}`,
        )
        .join("; ")
        .concat(".");
    case "passing":
      return picture.nodes
        .map((node) => `${node.name} (${node.family}) begins with ${percentText(node.weight)} of the error`)
        .join("; ")
        .concat(".");
    case "calibration":
      return picture.calibration.scenarios
        .map(
          (scenario) =>
            `${scenario.scenario} (${scenario.source}): family error ${scenario.familyError === null ? "\u2013" : percentText(scenario.familyError, 1)}`,
        )
        .join("; ")
        .concat(".");
  }
}
