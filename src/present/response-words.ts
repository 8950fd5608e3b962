import type { ComparisonsResult, ResponseFacts, State } from "../results/index.ts";

/** "assembly time (s)": label or name, with its unit. */
export function responseTitle(response: ResponseFacts): string {
  const unit = response.unit === null ? "" : ` (${response.unit})`;
  return `${response.label ?? response.name}${unit}`;
}

/**
 * What a sentence says something about: "mean assembly time", or "the mean of errors" where the word is a plural and the verb must not be.
 */
export function meanOf(response: ResponseFacts, ranks = false): string {
  const name = response.label ?? response.name;
  if (ranks) return name;
  const mean = response.scale === "log" ? "geometric mean" : "mean";
  return /[^s]s$/i.test(name) ? `the ${mean} of ${name}` : `${mean} ${name}`;
}

/** "4.2 s": a value with its unit. */
export const withUnit = (value: string, response: ResponseFacts): string =>
  response.unit === null || response.scale === "log" ? value : `${value} ${response.unit}`;

const stateWords: Readonly<Record<State, string>> = {
  planned: "planned",
  declared: "declared",
  exploratory: "exploratory",
  rehearsal: "rehearsal",
};
/** Shape beside the word, so that neither colour nor word alone carries it. */
const stateShapes: Readonly<Record<State, string>> = {
  planned: "\u25a0",
  declared: "\u25b2",
  exploratory: "\u25cb",
  rehearsal: "\u25c7",
};
export const stateMark = (state: State): string => `${stateShapes[state]}\u00a0${stateWords[state]}`;

export const stateSentence: Readonly<Record<State, string>> = {
  planned: "Planned: in a plan that was sealed before data were read.",
  declared: "Declared in the notebook before any result was seen; not sealed.",
  exploratory: "Exploratory: not committed to before results were seen. It suggests; it does not confirm.",
  rehearsal: "Rehearsal: simulated data. Nothing here is a finding.",
};

/** From the analysis scale to the one that is shown: ratios and geometric means on log scale. */
export const shown = (value: number | null, response: ResponseFacts): number | null =>
  value === null || response.scale === "linear" ? value : Math.exp(value);

/** What comparisons are about: comparisons of ranks have no unit, and nothing to give back from a log scale. */
export const comparedResponse = (result: ComparisonsResult): ResponseFacts =>
  result.errorTerm === "ranks"
    ? {
        ...result.response,
        label: `mean rank of ${result.response.label ?? result.response.name}`,
        unit: null,
        scale: "linear",
      }
    : result.response;

/** Title of an axis or column of comparisons: "difference in assembly time (s)", "ratio of turbidity". */
export const differenceTitle = (response: ResponseFacts): string =>
  response.scale === "log" ? `ratio of ${response.label ?? response.name}` : `difference in ${responseTitle(response)}`;
