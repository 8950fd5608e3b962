import type { ComparisonRow, ComparisonsResult } from "../../results/index.ts";
import { conclusionOf } from "../conclusion.ts";
import { counted, dfText, fixed, intervalText, listed, pClause, placesFor } from "../numbers.ts";
import { comparedResponse, meanOf, shown, stateMark } from "../response-words.ts";
import { capitalised, holdingClause, intervalName, tied } from "./words.ts";

/** Places for a family: those that show its smallest standard error with two digits, so that one column has one form. */
export function familyPlaces(result: ComparisonsResult, digits: number | null): number {
  if (digits !== null) return digits;
  if (comparedResponse(result).scale === "log") return 3;
  const errors = result.rows
    .map((row) => row.standardError)
    .filter((error): error is number => error !== null && error > 0);
  return errors.length === 0 ? 3 : (placesFor(Math.min(...errors)) ?? 3);
}

/** A row's name taken apart, as far as its words allow. */
type Claim =
  | { readonly of: "pair"; readonly first: string; readonly second: string; readonly at: string }
  | { readonly of: "against mean"; readonly first: string; readonly at: string }
  | { readonly of: "trend"; readonly name: string }
  | { readonly of: "contrast"; readonly name: string };

function claimOf(comparison: string): Claim {
  const trend = /^.+ trend of .+$/.exec(comparison);
  if (trend !== null && !comparison.includes(" - ")) return { of: "trend", name: comparison };
  const found = /^(.+) - (.+?)( at .+)?$/.exec(comparison);
  // Where a level's own name holds the sign, the name is not taken apart.
  if (found === null || comparison.split(" - ").length !== 2) return { of: "contrast", name: comparison };
  const at = found[3] ?? "";
  return found[2] === "mean"
    ? { of: "against mean", first: found[1]!, at }
    : { of: "pair", first: found[1]!, second: found[2]!, at };
}

interface Setting {
  readonly row: ComparisonRow;
  readonly result: ComparisonsResult;
  readonly log: boolean;
  readonly ranks: boolean;
  readonly places: number;
  readonly claim: Claim;
}

const unitOf = ({ result, log }: Setting): string =>
  log || result.response.unit === null ? "" : ` ${result.response.unit}`;
const nameOf = ({ result, ranks }: Setting): string => meanOf(result.response, ranks);
const value = (setting: Setting, number: number): string =>
  `${fixed(shown(number, setting.result.response), setting.places)}${unitOf(setting)}`;

/** ", which is better": said only where the response says what better is, and only of a difference that was shown. */
function betterClause({ row, result, claim }: Setting): string {
  if (result.response.better === null || row.estimate === 0 || claim.of === "trend" || claim.of === "contrast")
    return "";
  return row.estimate > 0 === (result.response.better === "higher") ? " (better)" : " (worse)";
}

function intervalClause(setting: Setting): string {
  const { row, result, places } = setting;
  const [lower, upper] = [shown(row.lower, result.response), shown(row.upper, result.response)];
  if (result.intervals === "none" || (lower === null && upper === null)) return "";
  const unit = unitOf(setting);
  const name = intervalName(result);
  if (lower === null) return `, ${name} up to ${fixed(upper, places)}${unit}, without a lower limit`;
  if (upper === null) return `, ${name} from ${fixed(lower, places)}${unit} on, without an upper limit`;
  return `, ${name} ${intervalText(lower, upper, places)}${unit}`;
}

function statisticClause({ row, result, ranks }: Setting): string {
  if (row.statistic === null || result.margin !== null) return "";
  if (row.df === null) return ranks ? `, z = ${fixed(row.statistic, 2)}` : "";
  return `, t(${dfText(row.df)}) = ${fixed(row.statistic, 2)}`;
}

function effectSizeClause({ row, log }: Setting): string {
  const size = row.effectSize;
  if (size === null || log) return "";
  return `, ${size.name} = ${fixed(size.value, 2)}${size.lower === null && size.upper === null ? "" : ` ${intervalText(size.lower, size.upper, 2)}`}`;
}

const numbers = (setting: Setting): string =>
  `${intervalClause(setting)}${statisticClause(setting)}, ${pClause(setting.row.adjustedP, setting.result.correction === "none" ? "p" : "adjusted p")}${effectSizeClause(setting)}`;

const zero = ({ log }: Setting): string => (log ? "one" : "zero");
const gap = (setting: Setting): string =>
  `${setting.log ? "ratio " : setting.claim.of === "pair" || setting.claim.of === "against mean" ? "difference " : "estimate "}${value(setting, setting.row.estimate)}`;

function equivalenceSentence(setting: Setting): string {
  const { row, log, places, claim } = setting;
  const { margin, equivalent } = row.equivalence!;
  const name = nameOf(setting);
  const within = log
    ? `within a ratio of ${fixed(Math.exp(-margin), places)} to ${fixed(Math.exp(margin), places)}`
    : `within \u00b1${fixed(margin, places)}${unitOf(setting)}`;
  const ending = `: ${gap(setting)}${numbers(setting)}`;
  if (claim.of === "trend" || claim.of === "contrast") {
    const what = claim.of === "trend" ? `the ${claim.name}` : `the contrast "${claim.name}"`;
    return `${capitalised(what)} in ${name} was ${equivalent ? "" : "not "}shown to lie ${within}${ending}`;
  }
  const both =
    claim.of === "pair"
      ? `${claim.first} and ${claim.second}${claim.at}`
      : `${claim.first} and the mean of all levels${claim.at}`;
  return equivalent
    ? `${capitalised(name)} was shown to be equivalent for ${both}, ${within}${ending}`
    : `Equivalence of ${both} in ${name}, ${within}, was not shown${ending}`;
}

function notWorseSentence(setting: Setting): string {
  const { row, result, log, places, claim } = setting;
  const margin = result.margin!.value;
  const by = log ? `a ratio of ${fixed(Math.exp(margin), places)}` : `${fixed(margin, places)}${unitOf(setting)}`;
  const verb = row.rejected ? "was shown to be" : "was not shown to be";
  const text =
    claim.of === "pair"
      ? `${nameOf(setting)} for ${claim.first} ${verb} not worse than for ${claim.second}${claim.at} by ${by} or more`
      : claim.of === "against mean"
        ? `${nameOf(setting)} for ${claim.first}${claim.at} ${verb} not worse than the mean of all levels by ${by} or more`
        : `"${claim.name}" in ${nameOf(setting)} ${verb} not worse by ${by} or more`;
  return `${capitalised(text)}: ${gap(setting)}${numbers(setting)}`;
}

function differenceSentence(setting: Setting): string {
  const { row, result, log, claim } = setting;
  const direction = row.estimate > 0 ? "higher" : "lower";
  const sided = result.sides === "two-sided" ? null : result.sides === "upper" ? "higher" : "lower";
  const name = nameOf(setting);
  const amount = log ? `ratio ${value(setting, row.estimate)}` : null;
  const by = amount === null ? ` by ${fixed(Math.abs(row.estimate), setting.places)}${unitOf(setting)}` : `, ${amount}`;
  if (claim.of === "trend" || claim.of === "contrast") {
    const what = claim.of === "trend" ? `the ${claim.name}` : `the contrast "${claim.name}"`;
    if (row.rejected) {
      const way =
        claim.of === "trend" && claim.name.startsWith("linear ") ? (row.estimate > 0 ? "upward" : "downward") : null;
      return `${capitalised(what)} in ${name} was ${way ?? `${row.estimate > 0 ? "above" : "below"} ${zero(setting)}`}: ${value(setting, row.estimate)}${numbers(setting)}`;
    }
    const differ =
      sided === null
        ? `to differ from ${zero(setting)}`
        : `to be ${sided === "higher" ? "above" : "below"} ${zero(setting)}`;
    return `${capitalised(what)} in ${name} was not shown ${differ}: ${value(setting, row.estimate)}${numbers(setting)}`;
  }
  const other = claim.of === "pair" ? `for ${claim.second}${claim.at}` : `the mean of all levels${claim.at}`;
  if (row.rejected)
    return `${capitalised(name)} was ${direction}${betterClause(setting)} for ${claim.first} than ${other}${by}${numbers(setting)}`;
  if (sided !== null)
    return `${capitalised(name)} was not shown to be ${sided} for ${claim.first} than ${other}: ${gap(setting)}${numbers(setting)}`;
  return claim.of === "pair"
    ? `No difference in ${name} between ${claim.first} and ${claim.second}${claim.at} was shown: ${gap(setting)}${numbers(setting)}`
    : `No difference in ${name} between ${claim.first} and ${other} was shown: ${gap(setting)}${numbers(setting)}`;
}

/** One comparison as a careful author would write it, with its state in front. */
export function comparisonSentence(
  row: ComparisonRow,
  result: ComparisonsResult,
  digits: number | null = null,
): string {
  const response = comparedResponse(result);
  const setting: Setting = {
    row,
    result: { ...result, response },
    log: response.scale === "log",
    ranks: result.errorTerm === "ranks",
    places: familyPlaces(result, digits),
    claim: claimOf(row.comparison),
  };
  const state = `${stateMark(row.state)}: `;
  if (conclusionOf(row, result) === "not tested") return `${state}${row.comparison} was not tested.`;
  const sentence =
    row.equivalence !== undefined
      ? equivalenceSentence(setting)
      : result.margin?.type === "not worse"
        ? notWorseSentence(setting)
        : differenceSentence(setting);
  return `${state}${tied(sentence, response.unit)}.`;
}

/** What the family as a whole came to, before its rows. */
export function familySentences(result: ComparisonsResult): string[] {
  const { family, state } = result;
  if (result.after !== null && !result.after.open && result.rows.every((row) => !row.rejected))
    return [
      `The ${state} family "${family}" was not tested, because not every comparison of "${result.after.family}" was shown.`,
    ];
  const found = result.rows.filter((row) => row.rejected).length;
  const all = result.rows.length;
  const where = family === null ? "" : ` of the family "${family}"`;
  const verdict =
    result.margin === null
      ? "shown"
      : result.margin.type === "equivalence"
        ? "shown to be within the margin"
        : "shown to be not worse";
  const states = new Set(result.rows.map((row) => row.state));
  const of = states.size < 2 ? `${state} ` : "";
  const count =
    all === 1
      ? `The one ${of}comparison${where} was ${found === 1 ? "" : "not "}${verdict}`
      : found === 0
        ? `${all === 2 ? "Neither of the 2" : `None of the ${all}`} ${of}comparisons${where} was ${verdict}`
        : found === all
          ? `${all === 2 ? "Both" : `All ${all}`} ${of}comparisons${where} were ${verdict}`
          : `Of the ${all} ${of}comparisons${where}, ${found} ${found === 1 ? "was" : "were"} ${verdict}`;
  const sides =
    result.sides === "two-sided" || result.margin !== null
      ? ""
      : ` The claims are one-sided: ${result.sides === "upper" ? "above" : "below"} ${result.response.scale === "log" ? "one" : "zero"}.`;
  const caveat = found < all ? ` What was not shown is not thereby shown to be absent.` : "";
  const byState =
    states.size < 2
      ? ""
      : ` By state: ${listed([...states].map((each) => counted(result.rows.filter((row) => row.state === each).length, each, each)))}.`;
  return [`${count}; ${holdingClause(result)}.${sides}${byState}${caveat}`];
}
