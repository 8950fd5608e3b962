import type { CheckResult, DescribeCell, DescribeResult } from "../../results/index.ts";
import { counted, fixed, listed, placesFor } from "../numbers.ts";
import { meanOf, shown, withUnit } from "../response-words.ts";
import { capitalised, tied } from "./words.ts";

/** Places that show the smallest standard error of the cells with two digits. */
export function cellPlaces(result: DescribeResult, digits: number | null): number {
  if (digits !== null) return digits;
  if (result.response.scale === "log") return 2;
  const errors = result.cells
    .map((cell) => cell.standardError)
    .filter((error): error is number => error !== null && error > 0);
  return errors.length === 0 ? 2 : (placesFor(Math.min(...errors)) ?? 2);
}

const cellName = (cell: DescribeCell): string => Object.values(cell.levels).join(", ");

/** Where the means lie, and what is missing. */
export function describeSentences(result: DescribeResult, digits: number | null = null): string[] {
  const { response } = result;
  const places = cellPlaces(result, digits);
  const name = meanOf(response);
  const filled = result.cells.filter((cell) => cell.mean !== null).sort((left, right) => left.mean! - right.mean!);
  const unit = (text: string) => (response.unit === null ? text : `${text} ${response.unit}`);
  const mean = (cell: DescribeCell) => unit(fixed(shown(cell.mean, response), places));
  const spread = (cell: DescribeCell) =>
    cell.sd === null || response.scale === "log"
      ? ""
      : `, standard deviation ${withUnit(fixed(cell.sd, places), response)}`;
  const told = (cell: DescribeCell) => `${mean(cell)}${spread(cell)}, n = ${cell.n}`;
  const sentences: string[] = [];
  const state = result.rehearsal ? "\u25c7 rehearsal: " : "";
  const [lowest, highest] = [filled[0], filled.at(-1)];
  if (lowest === undefined) sentences.push(`${state}No cell has a value.`);
  else if (filled.length === 1)
    sentences.push(
      `${state}${capitalised(name)} was ${mean(lowest)}${cellName(lowest) === "" ? "" : ` for ${cellName(lowest)}`} (n = ${lowest.n}${spread(lowest)}).`,
    );
  else if (lowest.mean === highest!.mean)
    sentences.push(
      `${state}${capitalised(name)} was the same in ${filled.length === 2 ? "both" : `all ${filled.length}`} cells, ${mean(lowest)}.`,
    );
  else
    sentences.push(
      `${state}${capitalised(name)} was lowest for ${cellName(lowest)} (${told(lowest)}) and highest for ${cellName(highest!)} (${told(highest!)}).`,
    );
  const empty = result.cells.filter((cell) => cell.n === 0);
  if (empty.length > 0 && empty.length < result.cells.length)
    sentences.push(
      `There are no data for ${listed(empty.slice(0, 6).map(cellName))}${empty.length > 6 ? ` and ${counted(empty.length - 6, "more cell")}` : ""}.`,
    );
  const missing = result.cells.reduce((sum, cell) => sum + cell.missing, 0);
  if (missing > 0) sentences.push(`${counted(missing, "value is", "values are")} missing.`);
  return sentences.map((text) => tied(text, response.unit));
}

/** What the check came to. */
export function checkSentences(result: CheckResult): string[] {
  const { design } = result;
  const errors = design.problems.filter((problem) => problem.severity === "error").length;
  const concerns = result.assumptions.filter((finding) => finding.finding === "concern").length;
  const unclear = result.assumptions.filter((finding) => finding.finding === "cannot tell").length;
  const sentences = [
    `${counted(design.observations, "observation")} of ${counted(design.subjects, "subject")} in ${counted(design.cells, "cell")}.`,
    errors === 0
      ? "The data have the structure that the design declares."
      : `${counted(errors, "finding")} must be settled before anything is tested.`,
  ];
  if (design.missingCells > 0)
    sentences.push(`${counted(design.missingCells, "cell of a subject is", "cells of subjects are")} missing.`);
  if (result.assumptions.length > 0)
    sentences.push(
      concerns === 0
        ? unclear === 0
          ? "No assumption gave concern."
          : `No assumption gave concern, and of ${counted(unclear, "assumption")} these data cannot tell.`
        : `${counted(concerns, "assumption gives", "assumptions give")} concern; the table says what to do.`,
    );
  return sentences;
}
