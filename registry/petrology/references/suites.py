"""Sources of the suite models, the mass change and the search for swapped samples. Citations are from memory."""

from __future__ import annotations

REFERENCES = {
    "grant1986": "Grant, J.A. 1986. The isocon diagram - a simple solution to Gresens' equation for metasomatic "
    "alteration. Economic Geology 81, 1976-1982.",
    "gresens1967": "Gresens, R.L. 1967. Composition-volume relationships of metasomatism. Chemical Geology 2, 47-65.",
    "workman2005": "Workman, R.K., Hart, S.R. 2005. Major and trace element composition of the depleted MORB mantle. "
    "Earth and Planetary Science Letters 231, 53-72.",
    "spearman1904": "Spearman, C. 1904. The proof and measurement of association between two things. "
    "American Journal of Psychology 15, 72-101.",
    "aitchison1986": "Aitchison, J. 1986. The Statistical Analysis of Compositional Data. Chapman and Hall, London.",
    "egozcue2003": "Egozcue, J.J., Pawlowsky-Glahn, V., Mateu-Figueras, G., Barcelo-Vidal, C. 2003. Isometric logratio "
    "transformations for compositional data analysis. Mathematical Geology 35, 279-300.",
    "rousseeuw1999": "Rousseeuw, P.J., Van Driessen, K. 1999. A fast algorithm for the minimum covariance determinant "
    "estimator. Technometrics 41, 212-223.",
    "filzmoser2008": "Filzmoser, P., Hron, K. 2008. Outlier detection for compositional data using robust methods. "
    "Mathematical Geosciences 40, 233-248.",
}
