"""What is said of redox: its witnesses by name, why it is not known although one was measured, what then helps."""

from __future__ import annotations

from registry.targets.intervals import Known

CONFLICT = "titrated FeO and magnetic susceptibility contradict each other"
MAGNETITE_DESTROYED = "magnetic susceptibility is low, but alteration may have destroyed magnetite"
LOI_TOO_HIGH = "loss on ignition is too high for the iron to be the magma's"
#: Why the redox series is not known where there is a measurement, each with what settles it.
REMEDIES = {
    CONFLICT: "titrated FeO or the susceptibility once more, on fresh rock, since the two contradict each other",
    MAGNETITE_DESTROYED: "titrated FeO of fresh rock, since alteration may have destroyed the magnetite",
    LOI_TOO_HIGH: "titrated FeO or a susceptibility reading of fresh rock, since the loss on ignition is too high here",
}
_WITNESSES = {"feo_titrated_wt": "titrated FeO", "magnetic_susceptibility_si": "magnetic susceptibility"}


def ground_of(known: Known) -> str:
    """Why the redox series of one sample is not known; an empty text where nothing was measured or it is known."""
    if not known.words("redox_series").missing[0]:
        return ""
    why = known.why_unknown("redox_series")
    return why.labels[int(why.codes[0])]


def state_of(known: Known, unknown: str) -> str:
    """The series of one sample, 'not settled' where its witnesses contradict each other, else ``unknown``."""
    words = known.words("redox_series")
    series = words.labels[int(words.codes[0])]
    return series or ("not settled" if ground_of(known) == CONFLICT else unknown)


def source_of(known: Known, evidence: object) -> str:
    """What redox rests on: the stored ``evidence``, else the witnesses by name, or why they do not tell."""
    if isinstance(evidence, str):
        return evidence
    present = [words for name, words in _WITNESSES.items() if not known.number(name).missing[0]]
    if not present:
        return "neither titrated FeO nor a susceptibility reading"
    if not known.words("redox_series").missing[0]:
        return " and ".join(present)
    ground = ground_of(known)
    if ground == CONFLICT:
        is_magnetite = known.raw("magnetic_susceptibility_si")[0] >= known.conventions.magnetite_series_si
        iron, magnetic = ("ilmenite", "magnetite") if is_magnetite else ("magnetite", "ilmenite")
        return (
            f"titrated FeO says {iron} series, magnetic susceptibility {magnetic} series: the two contradict each "
            "other; repeat one of them on fresh rock"
        )
    return ground or f"{' and '.join(present)} alone does not tell"
