/** What the analyses do, assume and come from: the help topics beside statements and corrections. */
export interface TopicSection {
  readonly heading: string | null;
  readonly lines: readonly string[];
}

export const modelTopics: Readonly<Record<string, readonly TopicSection[]>> = {
  "variance analysis": [
    { heading: "Does", lines: ["Splits the variation into what each effect explains and what is left within cells."] },
    {
      heading: "Assumes",
      lines: [
        "Independent subjects, equal spread in all cells, residuals near normal; the latter matters least when groups are equal and not small.",
      ],
    },
    {
      heading: "Unequal groups",
      lines: [
        "Cells weigh equally, so that omnibus and comparisons ask about the same means. respecting marginality adjusts each effect only for those that do not contain it.",
      ],
    },
    { heading: "Source", lines: ["Fisher 1925; for unequal cells Yates 1934."] },
  ],
  welch: [
    { heading: "Does", lines: ["Compares means of independent groups without pooling their spreads."] },
    {
      heading: "Assumes",
      lines: ["Independent subjects, residuals near normal within groups; at least two subjects in every group."],
    },
    { heading: "Source", lines: ["Welch 1951."] },
  ],
  "brown-forsythe": [
    {
      heading: "Does",
      lines: [
        "The classical numerator over an error that lets spreads differ; its degrees of freedom by Satterthwaite.",
      ],
    },
    { heading: "Assumes", lines: ["As Welch's test; better than it when extreme means go with large spreads."] },
    { heading: "Source", lines: ["Brown and Forsythe 1974."] },
  ],
  "repeated measures": [
    { heading: "Does", lines: ["Tests each effect against its own error among subjects; complete subjects only."] },
    {
      heading: "Assumes",
      lines: ["Sphericity for the uncorrected p; the Greenhouse-Geisser and Huynh-Feldt corrections stand beside it."],
    },
    {
      heading: "Source",
      lines: ["Greenhouse and Geisser 1959; Huynh and Feldt 1976 with Lecoutre 1991; Mauchly 1940."],
    },
  ],
  "multilevel model": [
    {
      heading: "Does",
      lines: [
        "Fits subjects, items and larger units as random, keeps every row when cells are missing, and tests each effect by comparing the model with it against the same model without.",
      ],
    },
    {
      heading: "Assumes",
      lines: ["Random effects and residuals near normal; missing cells missing for reasons the data show."],
    },
    {
      heading: "Tests",
      lines: [
        "F with Kenward and Roger's degrees of freedom; Satterthwaite's on request; the likelihood-ratio test by maximum likelihood beside it rejects too often with few subjects (6.5 to 12.6% in the same simulations): let F lead, or add with 999 bootstrap studies.",
      ],
    },
    {
      heading: "Small samples",
      lines: [
        "The default random part takes sphericity for granted. By simulation (10,000 studies a design) the F test then rejects 6 to 7% where 5% is held and the spread of differences is uneven, and with 15% of cells missing a comparison of far conditions rejected 11%. The corrected repeated-measures p beside it, and assume unstructured, guard against that.",
      ],
    },
    { heading: "Source", lines: ["Kenward and Roger 1997; Fai and Cornelius 1996."] },
  ],
  ranks: [
    {
      heading: "Does",
      lines: ["Kruskal-Wallis between subjects, Friedman within; exact where the study is small enough, said so."],
    },
    { heading: "Assumes", lines: ["Same shape in all groups, when the conclusion is about centres."] },
    { heading: "Comparisons", lines: ["by dunn or conover between subjects, by nemenyi or conover within."] },
    {
      heading: "Source",
      lines: ["Kruskal and Wallis 1952; Friedman 1937; Dunn 1964; Conover and Iman 1979; Nemenyi 1963."],
    },
  ],
  sphericity: [
    {
      heading: "Is",
      lines: [
        "Differences between any two conditions spread alike among subjects. Comparisons on contrast scores do not need it; the pooled repeated-measures error does.",
      ],
    },
    { heading: "Source", lines: ["Huynh and Feldt 1970; tested by Mauchly 1940."] },
  ],
  "effect size": [
    {
      heading: "Is",
      lines: [
        "g: the difference over a spread, with Hedges's factor; its interval by inverting the noncentral t distribution. On log scale the ratio stands in its place.",
      ],
    },
    {
      heading: "Standardiser",
      lines: [
        "set standardiser pooled spread (between), average spread (within), control spread or difference spread.",
      ],
    },
    { heading: "Source", lines: ["Hedges 1981; Steiger and Fouladi 1997."] },
  ],
  planned: [
    {
      heading: "Is",
      lines: [
        "A comparison in a plan that was sealed before data were read. declared: in the notebook before any result of the response was seen. exploratory: anything else. The state is computed from the ledger, never typed.",
      ],
    },
  ],
};
