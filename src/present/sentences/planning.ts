import type { CalibrationResult, DetectableResult, PowerResult, SizeResult } from "../../results/index.ts";
import { counted, countText, fixed, listed, percentText, significant } from "../numbers.ts";
import { correctionWords } from "./words.ts";

export const aimText = (of: string): string => (of === "omnibus" ? "the omnibus test" : `the family "${of}"`);
export const errorText = (correction: string | null, error: number): string =>
  correction === null || correction === "none"
    ? `error ${percentText(error)}`
    : `error ${percentText(error)} held by ${correctionWords(correction)}`;

const methods = {
  "closed form": "computed in closed form",
  "joint distribution": "computed from the joint distribution of the comparisons",
  simulation: "estimated by simulation",
} as const;
export const methodText = (method: PowerResult["method"]): string => methods[method];

const goals = {
  every: " to show every comparison",
  any: " to show at least one comparison",
  each: " for each comparison by itself",
  omnibus: "",
} as const;

/** A power never reads as 100% unless it is. */
export function powerText(share: number | null | undefined): string {
  if (share === null || share === undefined) return "\u2013";
  if (share < 1 && share > 0.9995) return "> 99.9%";
  if (share > 0 && share < 0.0005) return "< 0.1%";
  return percentText(share, 1);
}

const spoken = (share: number): string => powerText(share).replace(">", "more than").replace("<", "less than");

const groups = (sizes: readonly number[]): string => {
  if (sizes.length <= 1) return "";
  return sizes.every((size) => size === sizes[0])
    ? `, ${sizes[0]} in each of ${sizes.length} groups,`
    : `, ${listed(sizes.map(String))} by group,`;
};

export function sizeSentence(result: SizeResult): string {
  const error =
    result.monteCarloError === undefined ? "" : `, Monte Carlo error ${percentText(result.monteCarloError, 2)}`;
  const enrol = result.enrolled === undefined ? "" : ` Allowing for dropout, enrol ${countText(result.enrolled)}.`;
  const cost = result.cost === undefined ? "" : ` The expected cost is ${significant(result.cost, 6)}.`;
  return `${counted(result.subjects, "subject")}${groups(result.subjectsPerGroup)} ${result.subjects === 1 ? "gives" : "give"} ${aimText(result.of)} a power of ${spoken(result.achieved)}${goals[result.goal]}, where ${percentText(result.target)} was asked (${errorText(result.correction, result.errorRate)}; ${methods[result.method]}${error}).${enrol}${cost}`;
}

export function powerSentences(result: PowerResult): string[] {
  return result.points.length > 3
    ? []
    : result.points.map((point) => {
        const parts = [
          ...(point.power === undefined ? [] : [`a power of ${spoken(point.power)}`]),
          ...(point.every === undefined ? [] : [`a power of ${spoken(point.every)} to show every comparison`]),
          ...(point.any === undefined ? [] : [`of ${spoken(point.any)} to show at least one`]),
        ];
        return `With ${counted(point.subjects, "subject")}${groups(point.subjectsPerGroup) || ","} ${aimText(result.of)} has ${parts.length === 0 ? "the power shown for each comparison" : parts.join(" and ")}.`;
      });
}

export function detectableSentence(result: DetectableResult): string {
  const f = result.effectF === undefined ? "" : ` (f = ${fixed(result.effectF, 3)})`;
  const size =
    result.multiple === 1 ? "of just the expected size" : `${fixed(result.multiple, 2)} times as large as expected`;
  return `With ${counted(result.subjects, "subject")}${groups(result.subjectsPerGroup) || ","} ${aimText(result.of)} reaches ${percentText(result.target)} power${goals[result.goal]} when the differences are ${size}${f} (${errorText(result.correction, result.errorRate)}; ${methods[result.method]}).`;
}

export function calibrationSentences(result: CalibrationResult): string[] {
  const held = percentText(result.error);
  const told = result.scenarios.find(
    (scenario) => scenario.scenario === "no difference" && scenario.familyError !== null,
  );
  const sentences: string[] = [];
  if (told !== undefined && told.familyError !== null)
    sentences.push(
      `Where nothing differs, ${result.of === "omnibus" ? "the omnibus test showed an effect" : "at least one comparison was shown"} falsely in ${percentText(told.familyError, 2)} of ${countText(told.studies)} simulated studies${told.familyErrorMonteCarlo === null ? "" : ` (Monte Carlo error ${percentText(told.familyErrorMonteCarlo, 2)})`}, against the ${held} held.`,
    );
  sentences.push(
    {
      holds: "The procedure holds its error on data like these, as far as the simulation can tell.",
      conservative:
        "The procedure stays below its error on data like these: it is on the safe side, at some cost in power.",
      exceeds:
        "The procedure exceeds its error on data like these. Take a method that assumes less: resampling, or assume unequal variances.",
      "cannot tell": "There are too few simulated studies to tell whether the procedure holds its error: run more.",
    }[result.conclusion],
  );
  if (result.studies < result.asked)
    sentences.push(`Stopped after ${countText(result.studies)} of ${countText(result.asked)} studies.`);
  return sentences;
}
