import type { OmnibusEffect, OmnibusResult } from "../../results/index.ts";
import { countText, dfText, fixed, intervalText, pClause, pText } from "../numbers.ts";
import { meanOf, stateMark } from "../response-words.ts";
import { capitalised, tied } from "./words.ts";

/** At what level an omnibus test is read where none was declared: the customary one, which the table's note says. */
export const customaryError = 0.05;

const symbols: Readonly<Record<string, string>> = { "chi-square": "\u03c7\u00b2" };
export const statisticName = (name: string): string => symbols[name] ?? name;

function testClause(effect: OmnibusEffect): string {
  const df =
    effect.df1 === null
      ? ""
      : effect.df2 === null
        ? `(${dfText(effect.df1)})`
        : `(${dfText(effect.df1)}, ${dfText(effect.df2)})`;
  const how =
    effect.exact === true
      ? " (exact)"
      : effect.resamples !== undefined
        ? ` (${countText(effect.resamples)} arrangements${effect.monteCarloError === undefined ? "" : `, Monte Carlo error ${fixed(effect.monteCarloError, 4)}`})`
        : "";
  return `${statisticName(effect.statistic)}${df} = ${fixed(effect.value, 2)}, ${pClause(effect.p!)}${how}`;
}

function sizeClause(effects: readonly OmnibusEffect[]): string {
  const sized = effects.find((effect) => effect.partialEtaSquared !== undefined);
  if (sized?.partialEtaSquared === undefined) return "";
  const interval = sized.partialEtaSquaredInterval;
  return `, partial \u03b7\u00b2 = ${fixed(sized.partialEtaSquared, 3)}${interval === undefined ? "" : ` ${intervalText(...interval, 3)}`}`;
}

function likelihoodClause(effect: OmnibusEffect): string {
  const ratio = effect.likelihoodRatio;
  if (ratio === undefined) return "";
  const boot = ratio.bootstrapP === undefined ? "" : `, by parametric bootstrap ${pText(ratio.bootstrapP)}`;
  return `; against the same model without it, \u03c7\u00b2(${dfText(ratio.df)}) = ${fixed(ratio.statistic, 2)}, ${pClause(ratio.p)}${boot}`;
}

/** Other tests of the same effect that would have decided otherwise are said, not hidden in a table. */
function disagreement(lead: OmnibusEffect, others: readonly OmnibusEffect[], error: number): string {
  const leading = lead.p! <= error;
  const names: string[] = [];
  for (const other of others) {
    const p = other.pGreenhouseGeisser ?? other.p;
    if (p === null || p <= error === leading) continue;
    const form =
      other.pGreenhouseGeisser !== undefined
        ? ", corrected for sphericity"
        : other.form === undefined
          ? ""
          : `, ${other.form}`;
    names.push(`${other.method}${form}: ${pClause(p)}`);
  }
  const own = lead.pGreenhouseGeisser;
  if (own !== undefined && own <= error !== leading) names.unshift(`corrected for sphericity: ${pClause(own)}`);
  return names.length === 0 ? "" : ` Other tests of it do not agree (${names.join("; ")}).`;
}

const ranked = new Set(["kruskal-wallis", "friedman"]);

/**
 * A sentence for each effect's leading test.
 *
 * @param error the level at which an effect is called shown, a fraction
 */
export function omnibusSentences(result: OmnibusResult, error = customaryError): string[] {
  const name = meanOf(result.response);
  const state = `${stateMark(result.state)}: `;
  const effects = [...new Set(result.effects.map((effect) => effect.effect))];
  return effects.map((title) => {
    const tests = result.effects.filter((effect) => effect.effect === title);
    const tested = tests.filter((effect) => effect.p !== null && effect.value !== null);
    const parts = title.split(" x ");
    const on = `${ranked.has(tests[0]!.method) ? `the rank of ${result.response.label ?? result.response.name}` : name}`;
    const lead = tested[0];
    if (lead === undefined) return `${state}The effect of ${parts.join(" with ")} on ${name} could not be tested.`;
    const shows = lead.p! <= error;
    const depended = shows ? "depended" : "was not shown to depend";
    const sentence =
      parts.length === 1
        ? `${on} ${depended} on ${parts[0]}`
        : `the effect of ${parts[0]} on ${on} ${depended} on ${parts.length === 2 ? parts[1] : `${parts.slice(1).join(" and ")} together`}`;
    const numbers = `${testClause(lead)}${sizeClause(tests)}${likelihoodClause(lead)}.${disagreement(lead, tested.slice(1), error)}`;
    return `${state}${capitalised(sentence)}, ${tied(numbers)}`;
  });
}
