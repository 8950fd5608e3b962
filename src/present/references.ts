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
  "algina-keselman-2003":
    "Algina, J., & Keselman, H. J. (2003). Approximate confidence intervals for effect sizes. Educational and Psychological Measurement, 63, 537–553.",
  "bartlett-1933":
    "Bartlett, M. S. (1933). On the theory of statistical regression. Proceedings of the Royal Society of Edinburgh, 53, 260–283.",
  "beckman-cook-1983": "Beckman, R. J., & Cook, R. D. (1983). Outlier..........s. Technometrics, 25, 119–149.",
  "beckman-trussell-1974":
    "Beckman, R. J., & Trussell, H. J. (1974). The distribution of an arbitrary studentized residual and the effects of updating in multiple regression. Journal of the American Statistical Association, 69, 199–201.",
  "benjamini-yekutieli-2005":
    "Benjamini, Y., & Yekutieli, D. (2005). False discovery rate-adjusted multiple confidence intervals for selected parameters. Journal of the American Statistical Association, 100, 71–81.",
  "blom-1958": "Blom, G. (1958). Statistical Estimates and Transformed Beta-Variables. Wiley.",
  "bonett-2008":
    "Bonett, D. G. (2008). Confidence intervals for standardized linear contrasts of means. Psychological Methods, 13, 99–109.",
  "box-1949":
    "Box, G. E. P. (1949). A general distribution theory for a class of likelihood criteria. Biometrika, 36, 317–346.",
  "box-1954":
    "Box, G. E. P. (1954). Some theorems on quadratic forms applied in the study of analysis of variance problems, II. Annals of Mathematical Statistics, 25, 484–498.",
  "brown-forsythe-1974b":
    "Brown, M. B., & Forsythe, A. B. (1974). Robust tests for the equality of variances. Journal of the American Statistical Association, 69, 364–367.",
  "chan-golub-leveque-1983":
    "Chan, T. F., Golub, G. H., & LeVeque, R. J. (1983). Algorithms for computing the sample variance: analysis and recommendations. The American Statistician, 37, 242–247.",
  "cochran-1957": "Cochran, W. G. (1957). Analysis of covariance: its nature and uses. Biometrics, 13, 261–281.",
  "conneely-boehnke-2007":
    "Conneely, K. N., & Boehnke, M. (2007). So many correlated tests, so little time! Rapid adjustment of P values for multiple correlated tests. American Journal of Human Genetics, 81, 1158–1168.",
  "conover-1999": "Conover, W. J. (1999). Practical Nonparametric Statistics (3rd ed.). Wiley.",
  "cook-1977":
    "Cook, R. D. (1977). Detection of influential observation in linear regression. Technometrics, 19, 15–18.",
  "davison-hinkley-1997":
    "Davison, A. C., & Hinkley, D. V. (1997). Bootstrap Methods and Their Application. Cambridge University Press.",
  "edgington-onghena-2007":
    "Edgington, E. S., & Onghena, P. (2007). Randomization Tests (4th ed.). Chapman and Hall/CRC.",
  "efron-1987":
    "Efron, B. (1987). Better bootstrap confidence intervals. Journal of the American Statistical Association, 82, 171–185.",
  "efron-tibshirani-1993": "Efron, B., & Tibshirani, R. J. (1993). An Introduction to the Bootstrap. Chapman and Hall.",
  "fisher-1930":
    "Fisher, R. A. (1930). The moments of the distribution for normal samples of measures of departure from normality. Proceedings of the Royal Society of London A, 130, 16–28.",
  "fisher-1932": "Fisher, R. A. (1932). Statistical Methods for Research Workers (4th ed.). Oliver and Boyd.",
  "forsythe-1957":
    "Forsythe, G. E. (1957). Generation and use of orthogonal polynomials for data-fitting with a digital computer. Journal of the Society for Industrial and Applied Mathematics, 5, 74–88.",
  "freedman-lane-1983":
    "Freedman, D., & Lane, D. (1983). A nonstochastic interpretation of reported significance levels. Journal of Business and Economic Statistics, 1, 292–298.",
  "gilmour-thompson-cullis-1995":
    "Gilmour, A. R., Thompson, R., & Cullis, B. R. (1995). Average information REML: an efficient algorithm for variance parameter estimation in linear mixed models. Biometrics, 51, 1440–1450.",
  "giraud-langou-rozloznik-2005":
    "Giraud, L., Langou, J., & Rozložník, M. (2005). The loss of orthogonality in the Gram-Schmidt orthogonalization process. Computers and Mathematics with Applications, 50, 1069–1075.",
  "halekoh-hojsgaard-2014":
    "Halekoh, U., & Højsgaard, S. (2014). Kenward-Roger approximation and parametric bootstrap methods for tests in linear mixed models. Journal of Statistical Software, 59(9).",
  "hays-1963": "Hays, W. L. (1963). Statistics for Psychologists. Holt, Rinehart and Winston.",
  "hayter-1984":
    "Hayter, A. J. (1984). A proof of the conjecture that the Tukey-Kramer multiple comparisons procedure is conservative. Annals of Statistics, 12, 61–75.",
  "hsu-1994":
    "Hsu, J. C., Hwang, J. T. G., Liu, H.-K., & Ruberg, S. J. (1994). Confidence intervals associated with tests for bioequivalence. Biometrika, 81, 103–114.",
  "hyndman-fan-1996":
    "Hyndman, R. J., & Fan, Y. (1996). Sample quantiles in statistical packages. The American Statistician, 50, 361–365.",
  "iman-davenport-1980":
    "Iman, R. L., & Davenport, J. M. (1980). Approximations of the critical region of the Friedman statistic. Communications in Statistics: Theory and Methods, 9, 571–595.",
  "jennrich-sampson-1976":
    "Jennrich, R. I., & Sampson, P. F. (1976). Newton-Raphson and related algorithms for maximum likelihood variance component estimation. Technometrics, 18, 11–17.",
  "joanes-gill-1998":
    "Joanes, D. N., & Gill, C. A. (1998). Comparing measures of sample skewness and kurtosis. The Statistician, 47, 183–189.",
  "johansen-1980":
    "Johansen, S. (1980). The Welch-James approximation to the distribution of the residual sum of squares in a weighted linear regression. Biometrika, 67, 85–92.",
  "levene-1960":
    "Levene, H. (1960). Robust tests for equality of variances. In I. Olkin (Ed.), Contributions to Probability and Statistics (pp. 278–292). Stanford University Press.",
  "marcus-1976":
    "Marcus, R., Peritz, E., & Gabriel, K. R. (1976). On closed testing procedures with special reference to ordered analysis of variance. Biometrika, 63, 655–660.",
  "marsaglia-tsang-2000":
    "Marsaglia, G., & Tsang, W. W. (2000). The ziggurat method for generating random variables. Journal of Statistical Software, 5(8).",
  "maurer-1995":
    "Maurer, W., Hothorn, L. A., & Lehmacher, W. (1995). Multiple comparisons in drug clinical trials and preclinical assays: a-priori ordered hypotheses. In J. Vollmar (Ed.), Biometrie in der chemisch-pharmazeutischen Industrie (Vol. 6, pp. 3–18). Fischer.",
  "mckeon-1974":
    "McKeon, J. J. (1974). F approximations to the distribution of Hotelling's T0². Biometrika, 61, 381–383.",
  "neumaier-1974":
    "Neumaier, A. (1974). Rundungsfehleranalyse einiger Verfahren zur Summation endlicher Summen. Zeitschrift für Angewandte Mathematik und Mechanik, 54, 39–51.",
  "phipson-smyth-2010":
    "Phipson, B., & Smyth, G. K. (2010). Permutation P-values should never be zero: calculating exact P-values when permutations are randomly drawn. Statistical Applications in Genetics and Molecular Biology, 9, article 39.",
  "pillai-1955":
    "Pillai, K. C. S. (1955). Some new test criteria in multivariate analysis. Annals of Mathematical Statistics, 26, 117–121.",
  "rao-1951":
    "Rao, C. R. (1951). An asymptotic expansion of the distribution of Wilks' criterion. Bulletin of the International Statistical Institute, 33, 177–180.",
  "roy-1953":
    "Roy, S. N. (1953). On a heuristic method of test construction and its use in multivariate analysis. Annals of Mathematical Statistics, 24, 220–238.",
  "royston-1995":
    "Royston, P. (1995). Remark AS R94: a remark on algorithm AS 181: the W-test for normality. Applied Statistics, 44, 547–551.",
  "sarkar-1998":
    "Sarkar, S. K. (1998). Some probability inequalities for ordered MTP2 random variables: a proof of the Simes conjecture. Annals of Statistics, 26, 494–504.",
  "satterthwaite-1946":
    "Satterthwaite, F. E. (1946). An approximate distribution of estimates of variance components. Biometrics Bulletin, 2, 110–114.",
  "searle-1971": "Searle, S. R. (1971). Linear Models. Wiley.",
  "shapiro-wilk-1965":
    "Shapiro, S. S., & Wilk, M. B. (1965). An analysis of variance test for normality (complete samples). Biometrika, 52, 591–611.",
  "slepian-1962":
    "Slepian, D. (1962). The one-sided barrier problem for Gaussian noise. Bell System Technical Journal, 41, 463–501.",
  "somerville-1998":
    "Somerville, P. N. (1998). Numerical computation of multivariate normal and multivariate-t probabilities over convex regions. Journal of Computational and Graphical Statistics, 7, 529–544.",
  "steiger-2004":
    "Steiger, J. H. (2004). Beyond the F test: effect size confidence intervals and tests of close fit in the analysis of variance and contrast analysis. Psychological Methods, 9, 164–182.",
  "steiger-fouladi-1997":
    "Steiger, J. H., & Fouladi, R. T. (1997). Noncentrality interval estimation and the evaluation of statistical models. In L. L. Harlow, S. A. Mulaik, & J. H. Steiger (Eds.), What If There Were No Significance Tests? (pp. 221–257). Erlbaum.",
  "strassburger-bretz-2008":
    "Strassburger, K., & Bretz, F. (2008). Compatible simultaneous lower confidence bounds for the Holm procedure and other Bonferroni-based closed tests. Statistics in Medicine, 27, 4914–4927.",
  "welch-1947":
    "Welch, B. L. (1947). The generalization of 'Student's' problem when several different population variances are involved. Biometrika, 34, 28–35.",
  "wilks-1938":
    "Wilks, S. S. (1938). The large-sample distribution of the likelihood ratio for testing composite hypotheses. Annals of Mathematical Statistics, 9, 60–62.",
};

/** References that each correction rests on. */
export const correctionReferences: Readonly<Record<string, readonly string[]>> = {
  none: [],
  bonferroni: ["dunn-1961"],
  sidak: ["sidak-1967"],
  holm: ["holm-1979", "strassburger-bretz-2008"],
  hochberg: ["hochberg-1988", "sarkar-1998"],
  hommel: ["hommel-1988", "sarkar-1998"],
  shaffer: ["shaffer-1986"],
  tukey: ["tukey-1953", "kramer-1956", "hayter-1984"],
  "games-howell": ["games-howell-1976"],
  dunnett: ["dunnett-1955"],
  scheffe: ["scheffe-1953"],
  "single-step": ["somerville-1998", "conneely-boehnke-2007"],
  "step-down": ["westfall-1997", "marcus-1976", "conneely-boehnke-2007"],
  resampling: ["westfall-young-1993"],
  "fixed sequence": ["maurer-1995", "bretz-2009", "strassburger-bretz-2008"],
  fallback: ["wiens-2003", "bretz-2009", "strassburger-bretz-2008"],
  graph: ["bretz-2009", "strassburger-bretz-2008"],
  bh: ["benjamini-hochberg-1995", "benjamini-yekutieli-2001", "benjamini-yekutieli-2005"],
  by: ["benjamini-yekutieli-2001"],
  dunn: ["dunn-1964"],
  conover: ["conover-iman-1979", "holm-1979"],
  nemenyi: ["nemenyi-1963"],
};
