"""The publications that methods on this site go back to."""

from __future__ import annotations

# as it is cited -> in full
REFERENCES: dict[str, str] = {
    "Bryce, Gaudard & Joiner 1997": (
        "Bryce, G. R., Gaudard, M. A. & Joiner, B. L. (1997). Estimating the standard deviation for "
        "individuals control charts. Quality Engineering 10(2), 331–341."
    ),
    "Burr 1969": (
        "Burr, I. W. (1969). Control charts for measurements with varying sample sizes. Journal of "
        "Quality Technology 1(3), 163–167."
    ),
    "Champ & Woodall 1987": (
        "Champ, C. W. & Woodall, W. H. (1987). Exact results for Shewhart control charts with "
        "supplementary runs rules. Technometrics 29(4), 393–399."
    ),
    "David & Nagaraja 2003": (
        "David, H. A. & Nagaraja, H. N. (2003). Order Statistics, 3rd edition. Wiley, Hoboken."
    ),
    "Fisher 1921": (
        "Fisher, R. A. (1921). On the ‘probable error’ of a coefficient of correlation deduced from a "
        "small sample. Metron 1, 3–32."
    ),
    "ISO 7870-2:2013": (
        "ISO 7870-2:2013. Control charts – Part 2: Shewhart control charts. International Organization "
        "for Standardization, Geneva."
    ),
    "Laney 2002": (
        "Laney, D. B. (2002). Improved control charts for attributes. Quality Engineering 14(4), 531–537."
    ),
    "Mahmoud, Henderson, Epprecht & Woodall 2010": (
        "Mahmoud, M. A., Henderson, G. R., Epprecht, E. K. & Woodall, W. H. (2010). Estimating the "
        "standard deviation in quality-control applications. Journal of Quality Technology 42(4), "
        "348–357."
    ),
    "Nelson 1984": (
        "Nelson, L. S. (1984). The Shewhart control chart – tests for special causes. Journal of Quality "
        "Technology 16(4), 237–239."
    ),
    "Rigdon, Cruthis & Champ 1994": (
        "Rigdon, S. E., Cruthis, E. N. & Champ, C. W. (1994). Design strategies for individuals and "
        "moving range control charts. Journal of Quality Technology 26(4), 274–287."
    ),
    "Roes, Does & Schurink 1993": (
        "Roes, K. C. B., Does, R. J. M. M. & Schurink, Y. (1993). Shewhart-type control charts for "
        "individual observations. Journal of Quality Technology 25(3), 188–198."
    ),
    "Samuel, Pignatiello & Calvin 1998": (
        "Samuel, T. R., Pignatiello, J. J. & Calvin, J. A. (1998). Identifying the time of a step change "
        "with X̄ control charts. Quality Engineering 10(3), 521–527."
    ),
    "Shewhart 1931": (
        "Shewhart, W. A. (1931). Economic Control of Quality of Manufactured Product. Van Nostrand, New York."
    ),
    "Tippett 1925": (
        "Tippett, L. H. C. (1925). On the extreme individuals and the range of samples taken from a "
        "normal population. Biometrika 17, 364–387."
    ),
    "Welch 1947": (
        "Welch, B. L. (1947). The generalization of ‘Student’s’ problem when several different population "
        "variances are involved. Biometrika 34, 28–35."
    ),
    "Western Electric 1956": (
        "Western Electric Co. (1956). Statistical Quality Control Handbook. Western Electric, Indianapolis."
    ),
}
