import type { OmnibusEffect, OmnibusResult } from "../../results/index.ts";
import { dfText, fixed, pClause } from "../numbers.ts";
import { responseTitle } from "../response-words.ts";

const statisticText = (effect: OmnibusEffect): string => {
  const df =
    effect.df1 === null
      ? ""
      : effect.df2 === null
        ? `(${dfText(effect.df1)})`
        : `(${dfText(effect.df1)}, ${dfText(effect.df2)})`;
  return `${effect.statistic}${df} = ${fixed(effect.value, 2)}, ${pClause(effect.p!)}`;
};

/** A sentence for each effect's leading test, at the usual 5% unless the design says otherwise. */
export function omnibusSentences(result: OmnibusResult, error = 0.05): string[] {
  const seen = new Set<string>();
  const sentences: string[] = [];
  for (const effect of result.effects) {
    if (seen.has(effect.effect)) continue;
    seen.add(effect.effect);
    const what = responseTitle(result.response);
    const parts = effect.effect.split(" x ");
    if (effect.p === null || effect.value === null) {
      sentences.push(`The effect of ${effect.effect} on ${what} could not be tested.`);
      continue;
    }
    const shows = effect.p <= error;
    const subject =
      parts.length === 1
        ? `${what} differed between the levels of ${parts[0]}`
        : `the effects of ${parts.slice(0, -1).join(", ")} on ${what} depended on ${parts.at(-1)}`;
    const none =
      parts.length === 1
        ? `no difference in ${what} between the levels of ${parts[0]} was shown`
        : `no dependence of the effect of ${parts[0]} on ${parts.slice(1).join(" and ")} was shown`;
    const sentence = shows ? subject : none;
    sentences.push(`${sentence[0]!.toUpperCase()}${sentence.slice(1)}, ${statisticText(effect)}.`);
  }
  return sentences;
}
