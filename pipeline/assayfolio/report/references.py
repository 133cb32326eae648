"""Where the methods are published. The entries were written from memory of the publications."""

REFERENCES: dict[str, str] = {
    "scheffe": "H. Scheffé, The Analysis of Variance, Wiley, New York, 1959 (one-way layout, chapter 3).",
    "iso3534": "ISO 3534-3:2013, Statistics – Vocabulary and symbols – Part 3: Design of experiments.",
    "welch1951": (
        "B. L. Welch, On the comparison of several mean values: an alternative approach, Biometrika 38 "
        "(1951) 330–336."
    ),
    "brown-forsythe-means": (
        "M. B. Brown and A. B. Forsythe, The small sample behavior of some statistics which test the "
        "equality of several means, Technometrics 16 (1974) 129–132."
    ),
    "mehrotra": (
        "D. V. Mehrotra, Improving the Brown–Forsythe solution to the generalized Behrens–Fisher problem, "
        "Communications in Statistics – Simulation and Computation 26 (1997) 1139–1145."
    ),
    "cohen": (
        "J. Cohen, Statistical Power Analysis for the Behavioral Sciences, 2nd edition, Erlbaum, Hillsdale, "
        "1988."
    ),
    "kelley": (
        "T. L. Kelley, An unbiased correlation ratio measure, Proceedings of the National Academy of "
        "Sciences 21 (1935) 554–559."
    ),
    "hays": "W. L. Hays, Statistics for Psychologists, Holt, Rinehart and Winston, New York, 1963.",
    "steiger": (
        "J. H. Steiger, Beyond the F test: effect size confidence intervals and tests of close fit in the "
        "analysis of variance and contrast analysis, Psychological Methods 9 (2004) 164–182."
    ),
    "welch1947": (
        "B. L. Welch, The generalization of ‘Student’s’ problem when several different population variances "
        "are involved, Biometrika 34 (1947) 28–35."
    ),
    "satterthwaite": (
        "F. E. Satterthwaite, An approximate distribution of estimates of variance components, Biometrics "
        "Bulletin 2 (1946) 110–114."
    ),
    "tukey": (
        "J. W. Tukey, The problem of multiple comparisons, 1953; in The Collected Works of John W. Tukey, "
        "vol. VIII, Chapman & Hall, New York, 1994."
    ),
    "kramer": (
        "C. Y. Kramer, Extension of multiple range tests to group means with unequal numbers of "
        "replications, Biometrics 12 (1956) 307–310."
    ),
    "hayter": (
        "A. J. Hayter, A proof of the conjecture that the Tukey–Kramer multiple comparisons procedure is "
        "conservative, Annals of Statistics 12 (1984) 61–75."
    ),
    "games-howell": (
        "P. A. Games and J. F. Howell, Pairwise multiple comparison procedures with unequal N’s and/or "
        "variances: a Monte Carlo study, Journal of Educational Statistics 1 (1976) 113–125."
    ),
    "dunnett1955": (
        "C. W. Dunnett, A multiple comparison procedure for comparing several treatments with a control, "
        "Journal of the American Statistical Association 50 (1955) 1096–1121."
    ),
    "dunnett1964": (
        "C. W. Dunnett, New tables for multiple comparisons with a control, Biometrics 20 (1964) 482–491."
    ),
    "dunnett-tamhane": (
        "C. W. Dunnett and A. C. Tamhane, Step-down multiple tests for comparing treatments with a control "
        "in unbalanced one-way layouts, Statistics in Medicine 10 (1991) 939–947."
    ),
    "dunn": (
        "O. J. Dunn, Multiple comparisons among means, Journal of the American Statistical Association 56 "
        "(1961) 52–64."
    ),
    "sidak": (
        "Z. Šidák, Rectangular confidence regions for the means of multivariate normal distributions, "
        "Journal of the American Statistical Association 62 (1967) 626–633."
    ),
    "holm": (
        "S. Holm, A simple sequentially rejective multiple test procedure, Scandinavian Journal of "
        "Statistics 6 (1979) 65–70."
    ),
    "hochberg": (
        "Y. Hochberg, A sharper Bonferroni procedure for multiple tests of significance, Biometrika 75 "
        "(1988) 800–802."
    ),
    "sarkar": (
        "S. K. Sarkar, Some probability inequalities for ordered MTP₂ random variables: a proof of the Simes "
        "conjecture, Annals of Statistics 26 (1998) 494–504."
    ),
    "scheffe1953": (
        "H. Scheffé, A method for judging all contrasts in the analysis of variance, Biometrika 40 (1953) "
        "87–104."
    ),
    "forsythe": (
        "G. E. Forsythe, Generation and use of orthogonal polynomials for data-fitting with a digital "
        "computer, Journal of the Society for Industrial and Applied Mathematics 5 (1957) 74–88."
    ),
    "schuirmann": (
        "D. J. Schuirmann, A comparison of the two one-sided tests procedure and the power approach for "
        "assessing the equivalence of average bioavailability, Journal of Pharmacokinetics and "
        "Biopharmaceutics 15 (1987) 657–680."
    ),
    "fieller": (
        "E. C. Fieller, Some problems in interval estimation, Journal of the Royal Statistical Society B 16 "
        "(1954) 175–185."
    ),
    "brown-forsythe": (
        "M. B. Brown and A. B. Forsythe, Robust tests for the equality of variances, Journal of the "
        "American Statistical Association 69 (1974) 364–367."
    ),
    "levene": (
        "H. Levene, Robust tests for equality of variances, in Contributions to Probability and Statistics: "
        "Essays in Honor of Harold Hotelling, Stanford University Press, 1960, 278–292."
    ),
    "bartlett": (
        "M. S. Bartlett, Properties of sufficiency and statistical tests, Proceedings of the Royal Society "
        "of London A 160 (1937) 268–282."
    ),
    "cochran": (
        "W. G. Cochran, The distribution of the largest of a set of estimated variances as a fraction of "
        "their total, Annals of Eugenics 11 (1941) 47–52."
    ),
    "tlam": (
        "R. U. E. ’t Lam, Scrutiny of variance results for outliers: Cochran’s test optimized, Analytica "
        "Chimica Acta 659 (2010) 68–84."
    ),
    "shapiro-wilk": (
        "S. S. Shapiro and M. B. Wilk, An analysis of variance test for normality (complete samples), "
        "Biometrika 52 (1965) 591–611."
    ),
    "wilk-shapiro-joined": (
        "M. B. Wilk and S. S. Shapiro, The joint assessment of normality of several independent samples, "
        "Technometrics 10 (1968) 825–839."
    ),
    "royston": (
        "P. Royston, Remark AS R94: a remark on algorithm AS 181, Applied Statistics 44 (1995) 547–551."
    ),
    "anderson-darling": (
        "T. W. Anderson and D. A. Darling, Asymptotic theory of certain ‘goodness of fit’ criteria based on "
        "stochastic processes, Annals of Mathematical Statistics 23 (1952) 193–212."
    ),
    "stephens": (
        "R. B. D’Agostino and M. A. Stephens (editors), Goodness-of-Fit Techniques, Marcel Dekker, New York, "
        "1986 (chapter 4)."
    ),
    "grubbs1950": (
        "F. E. Grubbs, Sample criteria for testing outlying observations, Annals of Mathematical Statistics "
        "21 (1950) 27–58."
    ),
    "grubbs1969": (
        "F. E. Grubbs, Procedures for detecting outlying observations in samples, Technometrics 11 (1969) "
        "1–21."
    ),
    "grubbs1972": (
        "F. E. Grubbs and G. Beck, Extension of sample sizes and percentage points for significance tests of "
        "outlying observations, Technometrics 14 (1972) 847–854."
    ),
    "iso5725": (
        "ISO 5725-2:2019, Accuracy (trueness and precision) of measurement methods and results – Part 2: "
        "Basic method for the determination of repeatability and reproducibility of a standard measurement "
        "method."
    ),
    "williams": (
        "J. S. Williams, A confidence interval for variance components, Biometrika 49 (1962) 278–281."
    ),
    "tukey1951": "J. W. Tukey, Components in regression, Biometrics 7 (1951) 33–69.",
    "thomas-hultquist": (
        "J. D. Thomas and R. A. Hultquist, Interval estimation for the unbalanced case of the one-way random "
        "effects model, The Annals of Statistics 6 (1978) 582–587."
    ),
    "graybill-wang": (
        "F. A. Graybill and C.-M. Wang, Confidence intervals on nonnegative linear combinations of "
        "variances, Journal of the American Statistical Association 75 (1980) 869–873."
    ),
    "burdick-graybill": (
        "R. K. Burdick and F. A. Graybill, Confidence Intervals on Variance Components, Marcel Dekker, New "
        "York, 1992."
    ),
    "wald": (
        "A. Wald, A note on the analysis of variance with unequal class frequencies, Annals of Mathematical "
        "Statistics 11 (1940) 96–100."
    ),
    "gum": (
        "JCGM 100:2008, Evaluation of measurement data – Guide to the expression of uncertainty in "
        "measurement (GUM), annex H.5: Analysis of variance."
    ),
    "ramsey": (
        "P. H. Ramsey, Power differences between pairwise multiple comparisons, Journal of the American "
        "Statistical Association 73 (1978) 479–485."
    ),
    "phillips": (
        "K. F. Phillips, Power of the two one-sided tests procedure in bioequivalence, Journal of "
        "Pharmacokinetics and Biopharmaceutics 18 (1990) 137–144."
    ),
    "blom": "G. Blom, Statistical Estimates and Transformed Beta-Variables, Wiley, New York, 1958.",
    "chambers": (
        "J. M. Chambers, W. S. Cleveland, B. Kleiner and P. A. Tukey, Graphical Methods for Data Analysis, "
        "Wadsworth, Belmont, 1983."
    ),
    "heckbert": (
        "P. S. Heckbert, Nice numbers for graph labels, in Graphics Gems, Academic Press, Boston, 1990."
    ),
}
