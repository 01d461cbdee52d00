"""What the fitness of an analysis stands on."""

REFERENCES = {
    "analytical_practice": "Common practice of whole-rock analysis, no single source: which digestion carries what, "
    "and the windows for totals and loss on ignition that petrologists accept.",
    "deer2013": "Deer, W.A., Howie, R.A., Zussman, J. 2013. An Introduction to the Rock-Forming Minerals, 3rd edition. "
    "Mineralogical Society, London.",
}
