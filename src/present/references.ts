/** The one list of references: keys as they stand in the sources, texts as a reference list prints them. */
export const references: Readonly<Record<string, string>> = {
  "fisher-1925": "Fisher, R. A. (1925). Statistical Methods for Research Workers. Oliver and Boyd.",
  "yates-1934":
    "Yates, F. (1934). The analysis of multiple classifications with unequal numbers in the different classes. Journal of the American Statistical Association, 29, 51\u201366.",
  "welch-1951":
    "Welch, B. L. (1951). On the comparison of several mean values: an alternative approach. Biometrika, 38, 330\u2013336.",
  "brown-forsythe-1974":
    "Brown, M. B., & Forsythe, A. B. (1974). The small sample behavior of some statistics which test the equality of several means. Technometrics, 16, 129\u2013132.",
  "kenward-roger-1997":
    "Kenward, M. G., & Roger, J. H. (1997). Small sample inference for fixed effects from restricted maximum likelihood. Biometrics, 53, 983\u2013997.",
  "fai-cornelius-1996":
    "Fai, A. H.-T., & Cornelius, P. L. (1996). Approximate F-tests of multiple degree of freedom hypotheses in generalized least squares analyses of unbalanced split-plot experiments. Journal of Statistical Computation and Simulation, 54, 363\u2013378.",
  "greenhouse-geisser-1959":
    "Greenhouse, S. W., & Geisser, S. (1959). On methods in the analysis of profile data. Psychometrika, 24, 95\u2013112.",
  "huynh-feldt-1976":
    "Huynh, H., & Feldt, L. S. (1976). Estimation of the Box correction for degrees of freedom from sample data in randomized block and split-plot designs. Journal of Educational Statistics, 1, 69\u201382.",
  "lecoutre-1991":
    "Lecoutre, B. (1991). A correction for the \u03b5 approximate test in repeated measures designs with two or more independent groups. Journal of Educational Statistics, 16, 371\u2013372.",
  "mauchly-1940":
    "Mauchly, J. W. (1940). Significance test for sphericity of a normal n-variate distribution. Annals of Mathematical Statistics, 11, 204\u2013209.",
  "kruskal-wallis-1952":
    "Kruskal, W. H., & Wallis, W. A. (1952). Use of ranks in one-criterion variance analysis. Journal of the American Statistical Association, 47, 583\u2013621.",
  "friedman-1937":
    "Friedman, M. (1937). The use of ranks to avoid the assumption of normality implicit in the analysis of variance. Journal of the American Statistical Association, 32, 675\u2013701.",
  "hedges-1981":
    "Hedges, L. V. (1981). Distribution theory for Glass's estimator of effect size and related estimators. Journal of Educational Statistics, 6, 107\u2013128.",
  "olejnik-algina-2003":
    "Olejnik, S., & Algina, J. (2003). Generalized eta and omega squared statistics: measures of effect size for some common research designs. Psychological Methods, 8, 434\u2013447.",
  "cousineau-2005":
    "Cousineau, D. (2005). Confidence intervals in within-subject designs: a simpler solution to Loftus and Masson's method. Tutorials in Quantitative Methods for Psychology, 1, 42\u201345.",
  "morey-2008":
    "Morey, R. D. (2008). Confidence intervals from normalized data: a correction to Cousineau (2005). Tutorials in Quantitative Methods for Psychology, 4, 61\u201364.",
  "holm-1979":
    "Holm, S. (1979). A simple sequentially rejective multiple test procedure. Scandinavian Journal of Statistics, 6, 65\u201370.",
  "hochberg-1988":
    "Hochberg, Y. (1988). A sharper Bonferroni procedure for multiple tests of significance. Biometrika, 75, 800\u2013802.",
  "hommel-1988":
    "Hommel, G. (1988). A stagewise rejective multiple test procedure based on a modified Bonferroni test. Biometrika, 75, 383\u2013386.",
  "shaffer-1986":
    "Shaffer, J. P. (1986). Modified sequentially rejective multiple test procedures. Journal of the American Statistical Association, 81, 826\u2013831.",
  "sidak-1967":
    "\u0160id\u00e1k, Z. (1967). Rectangular confidence regions for the means of multivariate normal distributions. Journal of the American Statistical Association, 62, 626\u2013633.",
  "tukey-1953": "Tukey, J. W. (1953). The problem of multiple comparisons. Princeton University (mimeographed).",
  "kramer-1956":
    "Kramer, C. Y. (1956). Extension of multiple range tests to group means with unequal numbers of replications. Biometrics, 12, 307\u2013310.",
  "games-howell-1976":
    "Games, P. A., & Howell, J. F. (1976). Pairwise multiple comparison procedures with unequal n's and/or variances. Journal of Educational Statistics, 1, 113\u2013125.",
  "dunnett-1955":
    "Dunnett, C. W. (1955). A multiple comparison procedure for comparing several treatments with a control. Journal of the American Statistical Association, 50, 1096\u20131121.",
  "scheffe-1953":
    "Scheff\u00e9, H. (1953). A method for judging all contrasts in the analysis of variance. Biometrika, 40, 87\u2013104.",
  "genz-bretz-2002":
    "Genz, A., & Bretz, F. (2002). Comparison of methods for the computation of multivariate t probabilities. Journal of Computational and Graphical Statistics, 11, 950\u2013971.",
  "westfall-1997":
    "Westfall, P. H. (1997). Multiple testing of general contrasts using logical constraints and correlations. Journal of the American Statistical Association, 92, 299\u2013306.",
  "westfall-young-1993": "Westfall, P. H., & Young, S. S. (1993). Resampling-Based Multiple Testing. Wiley.",
  "bretz-2009":
    "Bretz, F., Maurer, W., Brannath, W., & Posch, M. (2009). A graphical approach to sequentially rejective multiple test procedures. Statistics in Medicine, 28, 586\u2013604.",
  "wiens-2003":
    "Wiens, B. L. (2003). A fixed sequence Bonferroni procedure for testing multiple endpoints. Pharmaceutical Statistics, 2, 211\u2013215.",
  "benjamini-hochberg-1995":
    "Benjamini, Y., & Hochberg, Y. (1995). Controlling the false discovery rate: a practical and powerful approach to multiple testing. Journal of the Royal Statistical Society B, 57, 289\u2013300.",
  "benjamini-yekutieli-2001":
    "Benjamini, Y., & Yekutieli, D. (2001). The control of the false discovery rate in multiple testing under dependency. Annals of Statistics, 29, 1165\u20131188.",
  "schuirmann-1987":
    "Schuirmann, D. J. (1987). A comparison of the two one-sided tests procedure and the power approach for assessing the equivalence of average bioavailability. Journal of Pharmacokinetics and Biopharmaceutics, 15, 657\u2013680.",
  "dunn-1961":
    "Dunn, O. J. (1961). Multiple comparisons among means. Journal of the American Statistical Association, 56, 52\u201364.",
  "dunn-1964": "Dunn, O. J. (1964). Multiple comparisons using rank sums. Technometrics, 6, 241\u2013252.",
  "conover-iman-1979":
    "Conover, W. J., & Iman, R. L. (1979). On multiple-comparisons procedures. Los Alamos Scientific Laboratory, LA-7677-MS.",
  "nemenyi-1963":
    "Nemenyi, P. (1963). Distribution-free multiple comparisons. Doctoral dissertation, Princeton University.",
  "fisher-1935": "Fisher, R. A. (1935). The Design of Experiments. Oliver and Boyd.",
};

/** References that each correction rests on. */
export const correctionReferences: Readonly<Record<string, readonly string[]>> = {
  none: [],
  bonferroni: ["dunn-1961"],
  sidak: ["sidak-1967"],
  holm: ["holm-1979"],
  hochberg: ["hochberg-1988"],
  hommel: ["hommel-1988"],
  shaffer: ["shaffer-1986"],
  tukey: ["tukey-1953", "kramer-1956"],
  "games-howell": ["games-howell-1976"],
  dunnett: ["dunnett-1955"],
  scheffe: ["scheffe-1953"],
  "single-step": ["genz-bretz-2002"],
  "step-down": ["westfall-1997", "genz-bretz-2002"],
  resampling: ["westfall-young-1993"],
  "fixed sequence": ["bretz-2009"],
  fallback: ["wiens-2003", "bretz-2009"],
  graph: ["bretz-2009"],
  bh: ["benjamini-hochberg-1995"],
  by: ["benjamini-yekutieli-2001"],
  dunn: ["dunn-1964"],
  conover: ["conover-iman-1979"],
  nemenyi: ["nemenyi-1963"],
};
