"""Sources of the constants, the iron split, the closure and the norms."""

from __future__ import annotations

REFERENCES = {
    "prohaska2022": "Prohaska, T. et al. 2022. Standard atomic weights of the elements 2021 (IUPAC Technical Report). "
    "Pure and Applied Chemistry 94, 573-600.",
    "lemaitre1976a": "Le Maitre, R.W. 1976. Some problems of the projection of chemical data into mineralogical "
    "classifications. Contributions to Mineralogy and Petrology 56, 181-189.",
    "lemaitre1976b": "Le Maitre, R.W. 1976. The chemical variability of some common igneous rocks. "
    "Journal of Petrology 17, 589-637.",
    "middlemost1989": "Middlemost, E.A.K. 1989. Iron oxidation ratios, norms and the classification of volcanic rocks. "
    "Chemical Geology 77, 19-26.",
    "brooks1976": "Brooks, C.K. 1976. The Fe2O3/FeO ratio of basalt analyses: an appeal for a standardized procedure. "
    "Bulletin of the Geological Society of Denmark 25, 117-120.",
    "kress1991": "Kress, V.C., Carmichael, I.S.E. 1991. The compressibility of silicate liquids containing Fe2O3 and "
    "the effect of composition, temperature, oxygen fugacity and pressure on their redox states. "
    "Contributions to Mineralogy and Petrology 108, 82-92.",
    "borisov2018": "Borisov, A., Behrens, H., Holtz, F. 2018. Ferric/ferrous ratio in silicate melts: a new model for "
    "1 atm data with special emphasis on the effects of melt composition. "
    "Contributions to Mineralogy and Petrology 173, 98.",
    "frost1991": "Frost, B.R. 1991. Introduction to oxygen fugacity and its petrologic importance. "
    "Reviews in Mineralogy 25, 1-9.",
    "myers1983": "Myers, J., Eugster, H.P. 1983. The system Fe-Si-O: oxygen buffer calibrations to 1,500 K. "
    "Contributions to Mineralogy and Petrology 82, 75-90.",
    "cross1902": "Cross, W., Iddings, J.P., Pirsson, L.V., Washington, H.S. 1902. A quantitative chemico-mineralogical "
    "classification and nomenclature of igneous rocks. Journal of Geology 10, 555-690.",
    "washington1917": "Washington, H.S. 1917. Chemical analyses of igneous rocks. "
    "United States Geological Survey Professional Paper 99.",
    "kelsey1965": "Kelsey, C.H. 1965. Calculation of the C.I.P.W. norm. Mineralogical Magazine 34, 276-282.",
    "cox1979": "Cox, K.G., Bell, J.D., Pankhurst, R.J. 1979. The Interpretation of Igneous Rocks. "
    "Allen and Unwin, London, appendix 3.",
    "verma2003": "Verma, S.P., Torres-Alvarado, I.S., Velasco-Tapia, F. 2003. A revised CIPW norm. "
    "Schweizerische Mineralogische und Petrographische Mitteilungen 83, 197-216.",
    "pruseth2009": "Pruseth, K.L. 2009. Calculation of the CIPW norm: new formulas. "
    "Journal of Earth System Science 118, 101-113.",
    "barth1962": "Barth, T.F.W. 1962. Theoretical Petrology, 2nd edition. Wiley, New York.",
    "niggli1936": "Niggli, P. 1936. Ueber Molekularnormen zur Gesteinsberechnung. "
    "Schweizerische Mineralogische und Petrographische Mitteilungen 16, 295-317.",
}
