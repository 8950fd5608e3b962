import type { ComparisonsResult, EffectMethod } from "../../results/index.ts";
import { type Block, paragraph } from "../blocks.ts";
import { counted, listed } from "../numbers.ts";
import { correctionReferences, references } from "../references.ts";
import { holdingClause } from "../sentences/words.ts";
import { ofKind } from "./results-of.ts";
import type { ReportFacts } from "./document.ts";

interface Described {
  readonly sentence: string;
  readonly references: readonly string[];
}

const methods: Readonly<Record<EffectMethod, Described>> = {
  "one-way": { sentence: "Group means were compared by one-way analysis of variance.", references: ["fisher-1925"] },
  welch: {
    sentence: "Group means were compared by Welch's test, which does not pool variances.",
    references: ["welch-1951", "johansen-1980"],
  },
  "brown-forsythe": {
    sentence: "Group means were compared by Brown and Forsythe's test, which lets variances differ.",
    references: ["brown-forsythe-1974"],
  },
  factorial: {
    sentence:
      "Effects were tested by factorial analysis of variance; cells weighed equally, so that omnibus tests and comparisons ask about the same means, unless a table says otherwise.",
    references: ["fisher-1925", "yates-1934"],
  },
  covariance: {
    sentence: "Adjusted means were compared by analysis of covariance.",
    references: ["fisher-1932", "cochran-1957"],
  },
  "repeated measures": {
    sentence:
      "Repeated-measures F tests were corrected for departures from sphericity by Greenhouse and Geisser's and by Huynh and Feldt's epsilon, the latter with Lecoutre's correction; sphericity was tested by Mauchly's criterion.",
    references: ["greenhouse-geisser-1959", "huynh-feldt-1976", "lecoutre-1991", "mauchly-1940"],
  },
  multivariate: {
    sentence:
      "Within factors were also tested by the multivariate criteria of Pillai, Wilks, Hotelling and Lawley, and Roy.",
    references: ["pillai-1955", "rao-1951", "mckeon-1974", "roy-1953"],
  },
  multilevel: {
    sentence:
      "Effects were tested in a multilevel model fitted by restricted maximum likelihood, with Kenward and Roger's adjusted covariance and degrees of freedom.",
    references: ["kenward-roger-1997"],
  },
  "kruskal-wallis": {
    sentence: "Groups were compared by Kruskal and Wallis's test on ranks.",
    references: ["kruskal-wallis-1952"],
  },
  friedman: {
    sentence: "Conditions were compared by Friedman's test on ranks within subjects.",
    references: ["friedman-1937", "conover-1999"],
  },
  resampling: {
    sentence: "Effects were tested by rearranging the data in the ways that the design makes equally likely.",
    references: ["fisher-1935", "edgington-onghena-2007"],
  },
};

/** Words and sources of the checks of assumptions, by the beginning of their method's name. */
const checks: readonly (readonly [RegExp, string, readonly string[]])[] = [
  [/^Brown-Forsythe/, "equal spread by Brown and Forsythe's test", ["brown-forsythe-1974b"]],
  [/^Levene/, "equal spread by Levene's test", ["levene-1960"]],
  [/^Shapiro-Wilk/, "normality of residuals by Shapiro and Wilk's test", ["shapiro-wilk-1965", "royston-1995"]],
  [/^Mauchly/, "sphericity by Mauchly's criterion", ["mauchly-1940"]],
  [/^Box's M/, "equal covariance matrices by Box's M", ["box-1949"]],
  [/^studentised residuals/, "outliers by studentised residuals with Bonferroni's correction", ["beckman-cook-1983"]],
  [/^Cook/, "influence by Cook's distance", ["cook-1977"]],
];

function checkMethods(facts: ReportFacts): Described | null {
  const used = ofKind(facts.results, "check").flatMap((result) => result.assumptions.map((finding) => finding.method));
  const found = checks.filter(([pattern]) => used.some((method) => pattern.test(method)));
  if (found.length === 0) return null;
  return {
    sentence: `Assumptions were looked at in pictures and tested: ${listed(found.map(([, words]) => words))}.`,
    references: found.flatMap(([, , keys]) => keys),
  };
}

function familyMethod(result: ComparisonsResult): Described {
  const after =
    result.after === null
      ? ""
      : `, and the family was to be tested only after every comparison of "${result.after.family}" had been shown`;
  const what =
    result.family === null
      ? `Over ${counted(result.rows.length, "exploratory comparison")}`
      : `Over the ${counted(result.rows.length, "comparison")} of the family "${result.family}"`;
  return {
    sentence: `${what} ${holdingClause(result).replace(" over them", "")}${after}.`,
    references: correctionReferences[result.correction] ?? [],
  };
}

/** Sentences that hold for several results at once, each with its condition. */
function furtherMethods(facts: ReportFacts): Described[] {
  const comparisons = ofKind(facts.results, "comparisons");
  const omnibus = ofKind(facts.results, "omnibus");
  const effects = omnibus.flatMap((result) => result.effects);
  const described: Described[] = [];
  const add = (when: boolean, sentence: string, keys: readonly string[]) => {
    if (when) described.push({ sentence, references: keys });
  };
  add(
    effects.some((effect) => effect.likelihoodRatio !== undefined) ||
      omnibus.some((result) => result.likelihoodRatio !== undefined),
    "Likelihood-ratio tests compare the model with an effect against the same model without it, both fitted by maximum likelihood.",
    ["wilks-1938"],
  );
  add(
    effects.some((effect) => effect.generalizedEtaSquared !== undefined || effect.omegaSquared !== undefined),
    "Generalised eta squared and omega squared are as Olejnik and Algina define them.",
    ["olejnik-algina-2003"],
  );
  add(
    effects.some((effect) => effect.partialEtaSquaredInterval !== undefined),
    "Intervals of partial eta squared invert the noncentral F distribution.",
    ["steiger-2004"],
  );
  add(
    comparisons.some((result) => result.errorTerm === "contrast scores"),
    "Comparisons within subjects rest on each subject's own contrast score, which needs no sphericity.",
    [],
  );
  add(
    comparisons.some((result) => result.errorTerm === "unequal variances"),
    "Each comparison has its own error and degrees of freedom, since variances are not pooled.",
    ["welch-1947", "satterthwaite-1946"],
  );
  add(
    comparisons.some((result) => result.rows.some((row) => row.effectSize?.name === "g")),
    "Effect sizes g are standardised differences with Hedges's factor; their intervals invert the noncentral t distribution.",
    ["hedges-1981", "steiger-fouladi-1997"],
  );
  add(
    comparisons.some((result) => result.margin !== null),
    "Claims of equivalence and of being not worse were tested by one-sided tests against the declared margin, inside the error of the family.",
    ["schuirmann-1987"],
  );
  add(
    ofKind(facts.results, "describe").some((result) =>
      result.cells.some((cell) => typeof cell.withinLower === "number"),
    ),
    "Within-subject intervals remove differences between subjects and correct for the number of conditions.",
    ["cousineau-2005", "morey-2008"],
  );
  return described;
}

/** The methods paragraph, with the reference of each method that was used and of none that was not. */
export function methodsBlocks(facts: ReportFacts): { readonly methods: Block[]; readonly references: Block[] } {
  const used = [
    ...new Set(ofKind(facts.results, "omnibus").flatMap((result) => result.effects.map((effect) => effect.method))),
  ];
  const check = checkMethods(facts);
  const described = [
    ...(check === null ? [] : [check]),
    ...used.map((method) => methods[method]),
    ...ofKind(facts.results, "comparisons").map(familyMethod),
    ...furtherMethods(facts),
  ];
  const sentences = [...new Set(described.map((each) => each.sentence)), `Computed with Meanwise ${facts.version}.`];
  const texts = [...new Set(described.flatMap((each) => each.references))]
    .map((key) => references[key])
    .filter((text): text is string => text !== undefined)
    .sort((left, right) => left.localeCompare(right, "en"));
  return {
    methods: [paragraph(sentences.join(" "))],
    references: texts.length === 0 ? [] : [{ type: "list", items: texts }],
  };
}

/** Keys of every reference that the report can print, for tests of completeness. */
export const reportReferenceKeys = (): string[] => [
  ...Object.values(methods).flatMap((each) => each.references),
  ...checks.flatMap(([, , keys]) => keys),
  ...Object.values(correctionReferences).flat(),
];
