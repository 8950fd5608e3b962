/** The published methods of this room. Help texts, docstrings and the report's references share these entries. */
export const sources = {
  "benjamini-hochberg-1995":
    "Benjamini, Y., & Hochberg, Y. (1995). Controlling the false discovery rate: a practical and powerful approach to multiple testing. Journal of the Royal Statistical Society B, 57, 289-300.",
  "benjamini-yekutieli-2001":
    "Benjamini, Y., & Yekutieli, D. (2001). The control of the false discovery rate in multiple testing under dependency. Annals of Statistics, 29, 1165-1188.",
  "benjamini-yekutieli-2005":
    "Benjamini, Y., & Yekutieli, D. (2005). False discovery rate-adjusted multiple confidence intervals for selected parameters. Journal of the American Statistical Association, 100, 71-81.",
  "bretz-2009":
    "Bretz, F., Maurer, W., Brannath, W., & Posch, M. (2009). A graphical approach to sequentially rejective multiple test procedures. Statistics in Medicine, 28, 586-604.",
  "conneely-boehnke-2007":
    "Conneely, K. N., & Boehnke, M. (2007). So many correlated tests, so little time! Rapid adjustment of P values for multiple correlated tests. American Journal of Human Genetics, 81, 1158-1168.",
  "conover-iman-1979":
    "Conover, W. J., & Iman, R. L. (1979). On multiple-comparisons procedures. Los Alamos Scientific Laboratory, LA-7677-MS.",
  "dunn-1961":
    "Dunn, O. J. (1961). Multiple comparisons among means. Journal of the American Statistical Association, 56, 52-64.",
  "dunn-1964": "Dunn, O. J. (1964). Multiple comparisons using rank sums. Technometrics, 6, 241-252.",
  "dunnett-1955":
    "Dunnett, C. W. (1955). A multiple comparison procedure for comparing several treatments with a control. Journal of the American Statistical Association, 50, 1096-1121.",
  "games-howell-1976":
    "Games, P. A., & Howell, J. F. (1976). Pairwise multiple comparison procedures with unequal n's and/or variances: a Monte Carlo study. Journal of Educational Statistics, 1, 113-125.",
  "genz-bretz-2002":
    "Genz, A., & Bretz, F. (2002). Comparison of methods for the computation of multivariate t probabilities. Journal of Computational and Graphical Statistics, 11, 950-971.",
  "hayter-1984":
    "Hayter, A. J. (1984). A proof of the conjecture that the Tukey-Kramer multiple comparisons procedure is conservative. Annals of Statistics, 12, 61-75.",
  "hochberg-1988":
    "Hochberg, Y. (1988). A sharper Bonferroni procedure for multiple tests of significance. Biometrika, 75, 800-802.",
  "holm-1979":
    "Holm, S. (1979). A simple sequentially rejective multiple test procedure. Scandinavian Journal of Statistics, 6, 65-70.",
  "hommel-1988":
    "Hommel, G. (1988). A stagewise rejective multiple test procedure based on a modified Bonferroni test. Biometrika, 75, 383-386.",
  "hsu-1994":
    "Hsu, J. C., Hwang, J. T. G., Liu, H.-K., & Ruberg, S. J. (1994). Confidence intervals associated with tests for bioequivalence. Biometrika, 81, 103-114.",
  "kramer-1956":
    "Kramer, C. Y. (1956). Extension of multiple range tests to group means with unequal numbers of replications. Biometrics, 12, 307-310.",
  "marcus-1976":
    "Marcus, R., Peritz, E., & Gabriel, K. R. (1976). On closed testing procedures with special reference to ordered analysis of variance. Biometrika, 63, 655-660.",
  "maurer-1995":
    "Maurer, W., Hothorn, L. A., & Lehmacher, W. (1995). Multiple comparisons in drug clinical trials and preclinical assays: a-priori ordered hypotheses. In J. Vollmar (Ed.), Biometrie in der chemisch-pharmazeutischen Industrie 6. Fischer.",
  "nemenyi-1963": "Nemenyi, P. (1963). Distribution-free multiple comparisons. Doctoral thesis, Princeton University.",
  "sarkar-1998":
    "Sarkar, S. K. (1998). Some probability inequalities for ordered MTP2 random variables: a proof of the Simes conjecture. Annals of Statistics, 26, 494-504.",
  "scheffe-1953":
    "Scheffe, H. (1953). A method for judging all contrasts in the analysis of variance. Biometrika, 40, 87-104.",
  "schuirmann-1987":
    "Schuirmann, D. J. (1987). A comparison of the two one-sided tests procedure and the power approach for assessing the equivalence of average bioavailability. Journal of Pharmacokinetics and Biopharmaceutics, 15, 657-680.",
  "shaffer-1986":
    "Shaffer, J. P. (1986). Modified sequentially rejective multiple test procedures. Journal of the American Statistical Association, 81, 826-831.",
  "sidak-1967":
    "Sidak, Z. (1967). Rectangular confidence regions for the means of multivariate normal distributions. Journal of the American Statistical Association, 62, 626-633.",
  "slepian-1962":
    "Slepian, D. (1962). The one-sided barrier problem for Gaussian noise. Bell System Technical Journal, 41, 463-501.",
  "somerville-1998":
    "Somerville, P. N. (1998). Numerical computation of multivariate normal and multivariate-t probabilities over convex regions. Journal of Computational and Graphical Statistics, 7, 529-544.",
  "strassburger-bretz-2008":
    "Strassburger, K., & Bretz, F. (2008). Compatible simultaneous lower confidence bounds for the Holm procedure and other Bonferroni-based closed tests. Statistics in Medicine, 27, 4914-4927.",
  "tukey-1953":
    "Tukey, J. W. (1953). The problem of multiple comparisons. Unpublished manuscript, Princeton University.",
  "westfall-1997":
    "Westfall, P. H. (1997). Multiple testing of general contrasts using logical constraints and correlations. Journal of the American Statistical Association, 92, 299-306.",
  "westfall-young-1993":
    "Westfall, P. H., & Young, S. S. (1993). Resampling-based multiple testing: examples and methods for p-value adjustment. Wiley.",
  "wiens-2003":
    "Wiens, B. L. (2003). A fixed sequence Bonferroni procedure for testing multiple endpoints. Pharmaceutical Statistics, 2, 211-215.",
} as const satisfies Record<string, string>;

export type SourceKey = keyof typeof sources;
