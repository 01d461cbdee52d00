"""What the fitness of an analysis stands on."""

REFERENCES = {
    "analytical_practice": "Common practice of whole-rock analysis, no single source: which digestion carries what, "
    "and the windows for totals and loss on ignition that petrologists accept.",
}
