import type { ComparisonRow, ComparisonsResult } from "../../results/index.ts";
import { fixed, intervalText, pClause, percentText, placesFor } from "../numbers.ts";
import { shown, withUnit } from "../response-words.ts";

/** Places for a family: those that show its smallest standard error with two digits, so that one column has one form. */
export function familyPlaces(result: ComparisonsResult, digits: number | null): number {
  if (digits !== null) return digits;
  if (result.response.scale === "log") return 3;
  const errors = result.rows
    .map((row) => row.standardError)
    .filter((error): error is number => error !== null && error > 0);
  return errors.length === 0 ? 3 : (placesFor(Math.min(...errors)) ?? 3);
}

const better = (row: ComparisonRow, result: ComparisonsResult): string => {
  if (result.response.better === null || row.estimate === 0) return "";
  const improves = row.estimate > 0 === (result.response.better === "higher");
  return improves ? ", the better direction" : ", the worse direction";
};

function simpleDifference(
  row: ComparisonRow,
): { readonly plus: string; readonly minus: string; readonly at: string } | null {
  const found = /^(.+) - (.+?)( at .+)?$/.exec(row.comparison);
  if (found === null || found[1]!.includes(" - ") || found[2]!.includes(" - ")) return null;
  return { plus: found[1]!, minus: found[2]!, at: found[3] ?? "" };
}

function effectSizeText(row: ComparisonRow, log: boolean): string {
  const size = row.effectSize;
  if (size === null || log) return "";
  return `, ${size.name} = ${fixed(size.value, 2)}${size.lower === null || size.upper === null ? "" : ` ${intervalText(size.lower, size.upper, 2)}`}`;
}

/** One comparison as a careful author would write it. */
export function comparisonSentence(
  row: ComparisonRow,
  result: ComparisonsResult,
  digits: number | null = null,
): string {
  const places = familyPlaces(result, digits);
  const log = result.response.scale === "log";
  const parts = simpleDifference(row);
  const size = fixed(shown(row.estimate, result.response), places);
  const interval =
    row.lower === null && row.upper === null
      ? ""
      : `, ${percentText(result.intervalLevel)} interval ${intervalText(shown(row.lower, result.response), shown(row.upper, result.response), places)}`;
  const name = result.correction === "none" ? "p" : "adjusted p";
  const numbers = `${interval}, ${pClause(row.adjustedP, name)}${effectSizeText(row, log)}`;
  const prefix = row.state === "exploratory" ? "Exploratory: " : row.state === "rehearsal" ? "Rehearsal: " : "";
  const sentence = (text: string) => {
    const whole = `${text}${numbers}.`;
    return prefix + (prefix === "" ? `${whole[0]!.toUpperCase()}${whole.slice(1)}` : whole);
  };
  const gap = log ? `ratio ${size}` : `difference ${withUnit(size, result.response)}`;
  if (row.equivalence !== undefined) {
    const margin = fixed(log ? Math.exp(row.equivalence.margin) : row.equivalence.margin, places);
    return sentence(
      row.equivalence.equivalent
        ? `${row.comparison} was shown to lie within the margin of ${withUnit(margin, result.response)} (${gap})`
        : `${row.comparison} was not shown to lie within the margin of ${withUnit(margin, result.response)} (${gap})`,
    );
  }
  if (result.margin?.type === "not worse") {
    const margin = fixed(log ? Math.exp(result.margin.value) : result.margin.value, places);
    return sentence(
      `${row.comparison} was ${row.rejected ? "" : "not "}shown to be not worse by ${withUnit(margin, result.response)} (${gap})`,
    );
  }
  if (!row.rejected) {
    return sentence(
      parts === null
        ? `no ${row.comparison} was shown (${gap})`
        : `no difference between ${parts.plus} and ${parts.minus}${parts.at} was shown (${gap})`,
    );
  }
  if (parts === null)
    return sentence(
      `${row.comparison} was ${row.estimate > 0 ? "above" : "below"} ${log ? "one" : "zero"} (${gap}${better(row, result)})`,
    );
  const direction = row.estimate > 0 ? "higher" : "lower";
  const amount = log
    ? `by a factor of ${size}`
    : `by ${withUnit(fixed(Math.abs(row.estimate), places), result.response)}`;
  return sentence(`${parts.plus} was ${direction} than ${parts.minus}${parts.at} ${amount}${better(row, result)}`);
}

/** What the family as a whole came to, before its rows. */
export function familySentence(result: ComparisonsResult): string {
  const found = result.rows.filter((row) => row.rejected).length;
  const all = result.rows.length;
  const held =
    result.holds === "nothing"
      ? "no error is held over the family"
      : result.holds === "false discovery rate"
        ? `false discovery held at ${percentText(result.error)} by ${result.correction}`
        : `family error held at ${percentText(result.error)} by ${result.correction}`;
  const name = result.family === null ? "Of the comparisons looked at" : `Of the family "${result.family}"`;
  if (result.after !== null && !result.after.open)
    return `The family "${result.family}" was not tested: it waits for every comparison of "${result.after.family}" to be shown.`;
  const count =
    found === 0
      ? "none"
      : found === all
        ? all === 1
          ? "the one comparison"
          : `all ${all} comparisons`
        : `${found} of ${all} comparisons`;
  return `${name}, ${count} ${found > 1 || (found === all && all > 1) ? "were" : "was"} shown (${held}).`;
}
