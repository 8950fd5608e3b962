import type { Note } from "../results/index.ts";
import { counted, fixed, listed, percentText, plural, pText } from "./numbers.ts";

type Facts = Note["facts"];
const text = (value: Facts[string] | undefined): string =>
  Array.isArray(value) ? listed(value.map(String)) : String(value ?? "");
const count = (value: Facts[string] | undefined): number => Number(value ?? 0);
const quoted = (value: Facts[string] | undefined): string =>
  Array.isArray(value) ? listed(value.map((part) => `"${part}"`)) : `"${text(value)}"`;

const reasons: Readonly<Record<string, string>> = {
  "missing-cells": "some cells are missing and no subject is dropped",
  "several-units": "more than one kind of sampling unit is declared",
  "trials-kept": "repeated trials are kept",
  covariate: "a covariate is declared beside a within factor",
};

/** The one list of sentences for notes: what a reader must know, by code. */
const sentences: Readonly<Record<string, (it: Facts) => string>> = {
  // Data
  "encoding-detected": (it) => `The file's encoding was read as ${text(it.encoding)}.`,
  "separator-detected": (it) =>
    `Values are separated by ${text(it.separator) === "bar" ? "bars" : `a ${text(it.separator)}`}.`,
  "decimal-comma-detected": (it) => `Numbers are written with a decimal comma (${quoted(it.columns)}).`,
  "perhaps-missing": (it) =>
    `Column ${quoted(it.column)} is text because of ${quoted(it.texts)}. If that stands for a missing value, add under read: missing ${(it.texts as readonly string[]).map((part) => `"${part}"`).join(", ")}`,
  "data-changed-since-last-read": (it) =>
    `${quoted(it.source)} has changed since it was last read here: its digest was ${text(it.before).slice(0, 12)}, now ${text(it.now).slice(0, 12)}.`,
  "data-put-aside": () => "The data that were held are put aside; read them again after the rehearsal.",
  "rehearsal-dropped": () => "The rehearsal's simulated data are dropped.",
  "step-already-taken": () => "This step was already taken on these data; nothing changed.",
  "nothing-excluded": () => "No row meets the condition.",
  "everything-excluded": () => "No row is left.",
  averaged: (it) =>
    `${counted(count(it.before), "row")} became ${counted(count(it.after), "row")}: the ${text(it.by)} over ${listed((it.over as readonly string[]).map(String))} for each subject and cell.`,
  "rows-averaged-within-subjects": (it) =>
    `${counted(count(it.rows), "row")} were averaged to ${counted(count(it.values), "value")}, one for each subject and cell shown, so that no subject counts twice.`,
  "beyond-exact-decimals": (it) =>
    `Column ${quoted(it.column)} has more digits than are kept exactly (38); it was read as binary numbers of about 16 digits.`,
  "rounded-to-places": (it) => `Column ${quoted(it.column)} was read to ${counted(count(it.places), "decimal place")}.`,
  // Models
  "model-chosen": (it) =>
    `The multilevel model was chosen because ${reasons[text(it.reason)] ?? "the design calls for it"}.`,
  "omnibus-not-required": () => "Planned comparisons do not wait for the omnibus test: each holds its own error.",
  "within-intervals-of-complete-subjects": (it) =>
    `Within-subject intervals rest on the ${count(it.complete)} of ${counted(count(it.of), text(it.unit))} with every cell.`,
  "incomplete-subjects-left-out": (it) =>
    `${counted(count(it.leftOut), text(it.unit))} of ${count(it.of)} lack a cell and are left out of this analysis; the multilevel model keeps them.`,
  "trials-averaged": (it) => `Repeated trials were averaged within ${text(it.unit)} and cell.`,
  "effect-not-estimable": (it) => `${text(it.effect)} cannot be estimated: cells that it needs are empty.`,
  "effect-partly-estimable": (it) =>
    `${text(it.effect)} is tested on ${count(it.df)} of ${count(it.of)} degrees of freedom, because cells are empty.`,
  "covariates-not-used": (it) =>
    `The repeated-measures analysis does not use ${quoted(it.covariates)}; the multilevel model does.`,
  "sphericity-not-testable": (it) =>
    `Sphericity of ${text(it.effect)} cannot be tested: ${count(it.contrasts)} contrasts on ${count(it.errorDf)} degrees of freedom.`,
  "multivariate-not-available": (it) =>
    `Multivariate tests of ${text(it.effect)} need more subjects than contrasts (${count(it.contrasts)} contrasts, ${count(it.errorDf)} degrees of freedom).`,
  "no-error-variance": (it) =>
    `${text(it.effect)} has no error variance at all: every subject shows it alike, so that no F can be formed.`,
  "empty-cells": (it) =>
    it.cells === undefined
      ? `${counted(count(it.count), "cell")} of ${count(it.of)} are empty.`
      : `Empty: ${quoted(it.cells)}.`,
  "standardiser-not-defined": (it) =>
    `The effect size by ${text(it.standardiser)} is not defined for ${quoted(it.comparisons)}.`,
  "nothing-to-rearrange": (it) =>
    `${text(it.effect)} cannot be tested by rearranging: there is nothing to exchange under its hypothesis.`,
  "residuals-rearranged": (it) => `For ${text(it.effect)} residuals were rearranged, which is approximate.`,
  rearranged: (it) =>
    `Rearranged: ${text(it.what)}${count(it.strata) > 1 ? `, within ${count(it.strata)} strata` : ""}.`,
  "profile-not-followed": () => "A profile-likelihood interval could not be followed to its end.",
  "no-component-intervals": (it) =>
    `Variance components have no intervals here${it.reason === undefined ? "" : ` (${text(it.reason)})`}.`,
  "no-intraclass-correlation": () =>
    "With slopes or unequal residual variances there is no single intraclass correlation.",
  "effect-not-testable": (it) =>
    `${text(it.effect)} could not be tested: its precision cannot be estimated from these data.`,
  "satterthwaite-instead": (it) =>
    `For ${text(it.effect ?? it.comparison)} Satterthwaite's degrees of freedom stand in, since Kenward and Roger's are not defined there.`,
  "likelihood-ratio-not-found": (it) =>
    `The likelihood-ratio test of ${text(it.effect)} did not converge and is not shown.`,
  "unit-is-row": (it) => `Each row is a ${text(it.unit)} of its own, so that its variance is the residual one.`,
  "one-unit": (it) => `There is only one ${text(it.unit)}, which therefore has no variance.`,
  "term-confounded": (it) =>
    `The variance of ${text(it.term)} by ${text(it.unit)} cannot be told from that of ${text(it.with)}.`,
  "sphericity-taken-for-granted": (it) =>
    `The model takes differences between levels of ${quoted(it.factors)} to spread alike among subjects; the corrected tests beside it do not, nor does assume unstructured.`,
  "component-at-zero": (it) =>
    `The variance of ${text(it.term)} between ${plural(text(it.unit))} is estimated at zero and was dropped for the tests.`,
  "covariance-at-boundary": (it) =>
    `Effects of ${text(it.unit)} are perfectly correlated in the fit: the data cannot tell them apart.`,
  // Families
  "family-of-one": () => "The family has one comparison; there is nothing to correct.",
  "limits-at-threshold": () =>
    "Each interval is the comparison's own, at the level of its threshold: it agrees with the decision, and together the intervals need not hold jointly.",
  "limits-of-steps": (it) =>
    it.all === true
      ? "Everything was rejected, so that the limits are informative for every comparison."
      : "A rejected comparison is bounded by its claim until all are rejected.",
  "own-p-not-from-t": () => "Own p come from the method itself, so that there are no intervals that agree with them.",
  "statistics-not-t": () => "The resampled statistics give no intervals that agree with the decisions.",
  "needs-positive-dependence": () => "The method holds its error for independent or positively dependent comparisons.",
  "false-discovery-not-family-error": () =>
    "What is held is the expected share of false ones among those found, not the error of the family.",
  "logical-relations": (it) =>
    `Logical relations between the comparisons leave ${counted(count(it.sets), "set")} of hypotheses that can be true together.`,
  "contrast-space": (it) =>
    `The error is held over every contrast in a space of ${counted(count(it.dimension), "dimension")}.`,
  resamples: (it) =>
    it.exact === true
      ? `All ${counted(count(it.count), "arrangement")} were taken: the p is exact.`
      : `${counted(count(it.count), "arrangement")} were drawn.`,
  "joint-normal-scores": () =>
    "Comparisons have error terms of their own: own p are right, and their joint distribution is approximated.",
  "approximate-df": () => "Each pair has its own approximate degrees of freedom.",
  "gate-closed": (it) => `Not tested, since not every comparison of ${quoted(it.after)} was rejected.`,
  // Check
  "assumptions-wait-for-design": () => "The assumptions are looked at once the design fits.",
  "assumptions-not-checked": (it) => `The assumptions could not be looked at: ${text(it.reason) || "no reason given"}`,
  // Plan and record
  "plan-already-sealed": (it) => `The same plan was already sealed on ${text(it.at)}; that seal stands.`,
  "plan-already-open": () => "This plan is already open.",
  "sealed-after-results": () =>
    "Results had already been seen when this plan was sealed: its comparisons are not planned.",
  "sealed-after-reading": () => "Data had already been read when this plan was sealed.",
  "opened-after-reading": () =>
    "Data had already been read when the plan was opened: its comparisons count as declared, not as planned.",
  "plan-read-differently": (it) =>
    `This version reads the family ${quoted(it.family)} differently from Meanwise ${text(it.version)}, which sealed it.`,
  "planned-family-not-compared": (it) => `The planned family ${quoted(it.family)} was never compared.`,
  "declared-family-dropped": (it) => `The family ${quoted(it.family)} was declared and never compared.`,
  "declared-after-results": (it) => `The family ${quoted(it.family)} was declared after results had been seen.`,
  "family-changed": (it) =>
    `The family ${quoted(it.family)} was changed ${it.afterResults === true ? "after" : "before"} results had been seen.`,
  amended: (it) => `The plan was amended before results were seen: ${text(it.statement)} (${text(it.reason)}).`,
  "amended-after-results": (it) =>
    it.statement === undefined
      ? "Results had been seen when the plan was amended: what it adds is exploratory."
      : `The plan was amended after results had been seen: ${text(it.statement)} (${text(it.reason)}).`,
  "excluded-after-results": (it) =>
    `Rows were excluded after results had been seen: ${text(it.statement)} (${text(it.reason)}; ${counted(count(it.rows), "row")}).`,
  "plan-opened-after-reading": () => "The plan was opened after data had been read.",
  "data-read-again": (it) => `Other data were read later: ${quoted(it.source)} after ${quoted(it.before)}.`,
  "data-changed": (it) => `The data file ${quoted(it.source)} changed between two readings.`,
  "compared-on-other-data": (it) =>
    `The family ${quoted(it.family)} was compared on ${text(it.times)} different states of the data: after other exclusions, steps or readings.`,
  "no-plan": () => "No plan was sealed or opened: no comparison counts as planned.",
  "ledger-not-kept": (it) =>
    `The ledger is not kept in a file (${text(it.reason)}): this session's record lives only as long as the session.`,
  // Planning
  "simulated-shape": (it) => `The simulated values have the shape ${quoted(it.shape)} rather than the normal one.`,
  "coverage-not-computed": (it) =>
    `Whether intervals cover was not counted: the method ${quoted(it.method)} has none that could be counted here.`,
  "omnibus-effects-not-corrected": (it) =>
    `The omnibus tests of ${counted(count(it.effects), "effect")} are not corrected for one another: the family error counts a false one among any of them.`,
  "planned-on-complete-subjects": (it) =>
    `Planned as if every subject were complete, although ${percentText(count(it.missing))} of cells are expected to be missing.`,
  "planned-with-contrast-scores": () =>
    "Planned with each comparison's own contrast scores, since the covariance within subjects is unstructured.",
  "planned-with-epsilon": (it) =>
    `The power of ${text(it.effect)} allows for departures from sphericity: epsilon ${fixed(count(it.epsilon), 3)}.`,
  "resampling-planned-as-step-down": (it) =>
    `The family ${quoted(it.family)} is to be tested by resampling; its power was found with the step-down joint distribution, which it comes near to.`,
  "planned-dropout": (it) => `With ${percentText(count(it.dropout))} dropout expected, enrol ${text(it.enrolled)}.`,
  "monte-carlo": (it) => `Estimated by simulation; Monte Carlo error ${pText(Number(it.error))}.`,
};

/** Codes that have a sentence of their own. */
export const noteCodes: readonly string[] = Object.keys(sentences);

const spaced = (code: string): string => code.replace(/-/g, " ");

/** The sentence of a note. A code without one is still readable: its words, with its facts. */
export function noteText(note: Note): string {
  const sentence = sentences[note.code];
  if (sentence !== undefined) return sentence(note.facts);
  const facts = Object.entries(note.facts).map(([name, value]) => `${name}: ${text(value)}`);
  const words = spaced(note.code);
  return `${words[0]!.toUpperCase()}${words.slice(1)}${facts.length > 0 ? ` (${facts.join("; ")})` : ""}.`;
}

/** Sentences of several notes, each once. */
export const noteTexts = (notes: readonly Note[]): string[] => [...new Set(notes.map(noteText))];
