import type { ComparisonsResult } from "../../results/index.ts";
import { percentText } from "../numbers.ts";

/** Begins a sentence with a capital, unless the first word is a name that must stay as it is. */
export const capitalised = (text: string): string => {
  const [first = "", ...rest] = [...text];
  return first.toLocaleUpperCase("en") + rest.join("");
};

/**
 * Ties what must stay on one line: signs to their numbers, numbers to their unit, the ends of an interval, a statistic to its name.
 */
export const tied = (text: string, unit: string | null = null): string => {
  const signs = text
    .replace(/ ([=<>]) /g, "\u00a0$1\u00a0")
    .replace(/(\[[^\s\]]+,) ([^\s\]]+[\])])/g, "$1\u00a0$2")
    .replace(/(\(\d[\d.]*,) (\d)/g, "$1\u00a0$2")
    .replace(/\b(adjusted) (p)\b/g, "$1\u00a0$2")
    .replace(/ (\u03b7\u00b2)/g, "\u00a0$1");
  if (unit === null) return signs;
  return signs.replaceAll(` ${unit}`, (whole, at: number) =>
    /[\d\])]/.test(signs[at - 1] ?? "") ? `\u00a0${whole.slice(1)}` : whole,
  );
};

/** The methods as a methods paragraph names them: by their authors or by what they do. */
const corrections: Readonly<Record<string, string>> = {
  none: "no correction",
  bonferroni: "Bonferroni's method",
  sidak: "\u0160id\u00e1k's method",
  holm: "Holm's method",
  hochberg: "Hochberg's method",
  hommel: "Hommel's method",
  shaffer: "Shaffer's method with logical constraints",
  tukey: "Tukey and Kramer's method",
  "games-howell": "Games and Howell's method",
  dunnett: "Dunnett's method",
  scheffe: "Scheff\u00e9's method",
  "single-step": "the single-step joint distribution",
  "step-down": "the step-down joint distribution",
  resampling: "step-down resampling of the largest statistic",
  "fixed sequence": "testing in a fixed sequence",
  fallback: "the fallback method",
  graph: "the declared graph of weights and passes",
  bh: "Benjamini and Hochberg's method",
  by: "Benjamini and Yekutieli's method",
  dunn: "Dunn's method on ranks",
  conover: "Conover and Iman's method on ranks",
  nemenyi: "Nemenyi's method on ranks",
};
/** Names of corrections that have words of their own, for tests of completeness. */
export const correctionCodes: readonly string[] = Object.keys(corrections);
export const correctionWords = (name: string): string => corrections[name] ?? `the method "${name}"`;

/** "the family-wise error was held at 5% by Holm's method" */
export function holdingClause(result: ComparisonsResult): string {
  switch (result.holds) {
    case "nothing":
      return "no error was held over them";
    case "false discovery rate":
      return `the false discovery rate was held at ${percentText(result.error)} by ${correctionWords(result.correction)}`;
    case "family-wise error":
      return `the family-wise error was held at ${percentText(result.error)} by ${correctionWords(result.correction)}`;
  }
}

/** What the intervals of a result are called: a level is named only where every interval has it. */
export function intervalName(result: ComparisonsResult): string {
  if (result.notes.some((note) => note.code === "limits-at-threshold")) return "interval at its threshold";
  const level = percentText(result.intervalLevel);
  return result.intervals === "simultaneous" ? `${level} simultaneous interval` : `${level} interval`;
}
