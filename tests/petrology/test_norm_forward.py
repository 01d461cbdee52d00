"""Ten thousand invented assemblages turned into analyses, and their norms back into the assemblages.

Nothing here is published: the assemblages are invented so that every branch of the sequence is taken, and the analyses
are added up from mineral formulas written down here on their own.
"""

from __future__ import annotations

from collections import Counter

import numpy as np
import pytest

from registry.petrology.norm import NORM_COLUMNS, NORM_MINERALS, cipw_norm
from registry.petrology.norm_warnings import norm_shortfalls

ROWS = 10_000
#: Formulas in oxides; capitals FE, CA, NA, FE3 are the groups that Mn, Ni, Sr, Ba, Li and V share.
FORMULAS = {
    "q": {"SiO2": 1}, "c": {"Al2O3": 1}, "z": {"ZrO2": 1, "SiO2": 1}, "or": {"K2O": 1, "Al2O3": 1, "SiO2": 6},
    "ab": {"NA": 1, "Al2O3": 1, "SiO2": 6}, "an": {"CA": 1, "Al2O3": 1, "SiO2": 2},
    "lc": {"K2O": 1, "Al2O3": 1, "SiO2": 4}, "ne": {"NA": 1, "Al2O3": 1, "SiO2": 2},
    "kp": {"K2O": 1, "Al2O3": 1, "SiO2": 2}, "hl": {"NA": 0.5, "Cl": 1, "O": -0.5}, "th": {"NA": 1, "SO3": 1},
    "ac": {"NA": 1, "FE3": 1, "SiO2": 4}, "ns": {"NA": 1, "SiO2": 1}, "ks": {"K2O": 1, "SiO2": 1},
    "di_wo": {"CA": 1, "SiO2": 1}, "di_en": {"MgO": 1, "SiO2": 1}, "di_fs": {"FE": 1, "SiO2": 1},
    "hy_en": {"MgO": 1, "SiO2": 1}, "hy_fs": {"FE": 1, "SiO2": 1}, "ol_fo": {"MgO": 2, "SiO2": 1},
    "ol_fa": {"FE": 2, "SiO2": 1}, "wo": {"CA": 1, "SiO2": 1}, "cs": {"CA": 2, "SiO2": 1}, "mt": {"FE": 1, "FE3": 1},
    "cm": {"FE": 1, "Cr2O3": 1}, "hm": {"FE3": 1}, "il": {"FE": 1, "TiO2": 1}, "tn": {"CA": 1, "TiO2": 1, "SiO2": 1},
    "pf": {"CA": 1, "TiO2": 1}, "ru": {"TiO2": 1}, "ap": {"CA": 10 / 3, "P2O5": 1}, "fluorine": {"F": 1, "O": -0.5},
    "fr": {"CA": 1, "F": 2, "O": -1}, "pr": {"FE": 1, "S": 2, "O": -1}, "cc": {"CA": 1, "CO2": 1},
}  # fmt: skip
#: Molar masses from the atomic weights in five figures, typed in from a periodic table on its own.
MASSES = {
    "SiO2": 60.083, "TiO2": 79.865, "Al2O3": 101.961, "Fe2O3": 159.687, "FeO": 71.844, "MnO": 70.937, "MgO": 40.304,
    "CaO": 56.077, "Na2O": 61.979, "K2O": 94.195, "P2O5": 141.943, "Cr2O3": 151.989, "NiO": 74.692, "ZrO2": 123.222,
    "V2O3": 149.881, "BaO": 153.329, "SrO": 103.619, "Li2O": 29.879, "CO2": 44.009, "S": 32.06, "F": 18.998,
    "Cl": 35.45, "SO3": 80.057, "O": 15.999,
}  # fmt: skip
GROUPS = {"FE": ("FeO", "MnO", "NiO"), "CA": ("CaO", "SrO", "BaO"), "NA": ("Na2O", "Li2O"), "FE3": ("Fe2O3", "V2O3")}
LEVELS = range(9)


def _saturated(rng: np.random.Generator) -> tuple[dict[str, float], float, str, list[int]]:
    """Moles of a silica-saturated assemblage, Mg/(Mg + Fe), its branch, and the silica levels it can sink to."""
    some = lambda: float(rng.uniform(0.005, 0.05))  # noqa: E731
    alumina = str(rng.choice(["corundum", "anorthite", "acmite", "metasilicate", "perpotassic"]))
    iron = str(rng.choice(["ferrous", "magnetite+hematite", "titanium left"]))
    if alumina == "metasilicate" and iron == "magnetite+hematite":
        iron = "ferrous"
    m = {"or": some(), "il": some()}
    if alumina != "perpotassic":
        m["ab"] = some()
    m |= {
        "corundum": lambda: {"c": some(), "an": some()},
        "anorthite": lambda: {"an": some()},
        "acmite": lambda: {"ac": some()},
        "metasilicate": lambda: {"ac": some(), "ns": some()},
        "perpotassic": lambda: {"ks": some(), "ac": some()},
    }[alumina]()
    if alumina != "metasilicate":
        if iron != "titanium left":
            m["mt"] = some()
        if iron != "ferrous":
            m["hm"] = some()
    lime = "none" if alumina == "corundum" else str(rng.choice(["hypersthene", "wollastonite", "none"]))
    if iron == "titanium left":
        if alumina == "corundum" or lime == "none":
            m["ru"] = some()
        if alumina != "corundum":
            m["tn"] = some()
    if lime != "none":
        m["di"] = some()
    m["wo" if lime == "wollastonite" else "hy"] = some()
    can = {1: "hy" in m, 2: "tn" in m, 3: "ab" in m, 5: "wo" in m, 6: "di" in m}
    levels = [level for level in LEVELS if can.get(level, True)]
    mg_share = float(rng.uniform(0.05, 0.95)) if iron == "ferrous" else 1.0
    return m, mg_share, f"{alumina}, {iron}, lime {lime}", levels


def _sink(m: dict[str, float], level: int, rng: np.random.Generator) -> None:
    """Take silica away down to the level: all of the earlier reactions, part of the one of that level."""

    def part(of_level: int) -> float:
        return 0.0 if level < of_level else 1.0 if level > of_level else float(rng.uniform(0.1, 0.9))

    def react(of_level: int, gone: str, made: dict[str, float]) -> None:
        amount = part(of_level) * m.get(gone, 0.0)
        if amount:
            m[gone] -= amount
            for mineral, number in made.items():
                m[mineral] = m.get(mineral, 0.0) + number * amount

    react(1, "hy", {"ol": 0.5})
    react(2, "tn", {"pf": 1.0})
    react(3, "ab", {"ne": 1.0})
    react(4, "or", {"lc": 1.0})
    react(5, "wo", {"cs": 0.5})
    react(6, "di", {"cs": 0.5, "ol": 0.5})
    react(7, "lc", {"kp": 1.0})
    if level == 0:
        m["q"] = float(rng.uniform(0.01, 0.5))


def _accessories(m: dict[str, float], rng: np.random.Generator) -> None:
    for mineral in ("z", "cm", "hl", "th", "pr", "cc", "ap"):
        if rng.random() < 0.5:
            m[mineral] = float(rng.uniform(0.001, 0.01))
    if "ap" in m and rng.random() < 0.7:
        m["fluorine"] = m["ap"] * 2 / 3
        if rng.random() < 0.5:
            m["fr"] = float(rng.uniform(0.001, 0.01))
        else:
            m["fluorine"] *= float(rng.uniform(0.1, 1.0))


def _analysis(m: dict[str, float], mg_share: float, lack: float, rng: np.random.Generator) -> tuple[dict, dict]:
    """The analysis in wt% (sum 100) and the mineral weights of an assemblage."""
    split = {key: value for key, value in m.items() if key not in ("di", "hy", "ol")}
    split |= {"di_wo": m.get("di", 0.0)}
    for group, en, fs in (("di", "di_en", "di_fs"), ("hy", "hy_en", "hy_fs"), ("ol", "ol_fo", "ol_fa")):
        split |= {en: m.get(group, 0.0) * mg_share, fs: m.get(group, 0.0) * (1.0 - mg_share)}
    shares = {}
    for group, members in GROUPS.items():
        part = rng.random(len(members)) * ([1.0] + [0.2] * (len(members) - 1))
        shares[group] = dict(zip(members, part / part.sum(), strict=True))
    mass = MASSES | {g: sum(share * MASSES[o] for o, share in parts.items()) for g, parts in shares.items()}
    moles: Counter[str] = Counter()
    weights = {}
    for mineral, amount in split.items():
        weights[mineral] = amount * sum(number * mass[part] for part, number in FORMULAS[mineral].items())
        for part, number in FORMULAS[mineral].items():
            for oxide, share in shares.get(part, {part: 1.0}).items():
                moles[oxide] += amount * number * share
    moles["SiO2"] -= lack * moles["SiO2"]
    weights["ap"] = weights.get("ap", 0.0) + weights.pop("fluorine", 0.0)
    for group, parts in (("di", ("wo", "en", "fs")), ("hy", ("en", "fs")), ("ol", ("fo", "fa"))):
        weights[group] = sum(weights[f"{group}_{part}"] for part in parts)
    oxygen = -moles.pop("O", 0.0) * MASSES["O"]
    wt = {oxide: amount * MASSES[oxide] for oxide, amount in moles.items()}
    factor = 100.0 / sum(wt.values())
    weights = {mineral: weight * factor for mineral, weight in weights.items()}
    weights["oxygen"] = oxygen * factor
    return {oxide: weight * factor for oxide, weight in wt.items()}, weights


@pytest.fixture(scope="module")
def forward() -> tuple[dict[str, np.ndarray], dict[str, np.ndarray], list[str]]:
    rng = np.random.default_rng(20260101)
    analyses, weights, branches = [], [], []
    for _ in range(ROWS):
        minerals, mg_share, branch, levels = _saturated(rng)
        level = int(rng.choice(levels))
        _sink(minerals, level, rng)
        _accessories(minerals, rng)
        lack = float(rng.uniform(0.05, 0.5)) if level == 8 else 0.0
        analysis, weight = _analysis(minerals, mg_share, lack, rng)
        analyses.append(analysis)
        weights.append(weight)
        branches.append(f"{branch}, level {level}")
    oxides = {f"{o.lower()}_wt": np.array([a.get(o, 0.0) for a in analyses]) for o in MASSES if o != "O"}
    names = [column.removesuffix("_wt") for column in NORM_COLUMNS[:-2]] + ["oxygen"]
    return oxides, {f"{n}_wt": np.array([w.get(n, 0.0) for w in weights]) for n in names}, branches


def test_forward_assemblages_take_every_branch(forward) -> None:
    _, _, branches = forward
    alumina, iron, lime, level = ({b.split(", ")[part] for b in branches} for part in range(4))

    assert len(alumina) == 5
    assert len(iron) == 3
    assert len(lime) == 3
    assert level == {f"level {number}" for number in LEVELS}
    assert len(set(branches)) >= 240


@pytest.mark.parametrize("column", NORM_COLUMNS[:-2])
def test_forward_mineral_recovered(forward, column: str) -> None:
    oxides, expected, branches = forward
    found = cipw_norm(oxides)[column]

    assert expected[column].max() > 0.1, "no assemblage holds this mineral"
    worst = int(np.argmax(np.abs(found - expected[column])))
    np.testing.assert_allclose(found, expected[column], rtol=0, atol=1e-6, err_msg=branches[worst])


def test_forward_total_residual_and_shortfalls_recovered(forward) -> None:
    oxides, expected, branches = forward
    norm = cipw_norm(oxides)
    minerals = sum(expected[column] for column in NORM_MINERALS)
    shortfalls = norm_shortfalls(oxides, norm)
    deficient = np.array([branch.endswith("level 8") for branch in branches])

    np.testing.assert_allclose(norm["norm_total_wt"], minerals, rtol=0, atol=1e-6)
    np.testing.assert_allclose(norm["norm_residual_wt"], 100.0 - minerals, rtol=0, atol=1e-6)
    np.testing.assert_allclose(shortfalls["oxygen_set_free"], expected["oxygen_wt"], rtol=0, atol=1e-6)
    np.testing.assert_allclose(
        shortfalls["silica_deficit"], minerals - 100.0 + expected["oxygen_wt"], rtol=0, atol=1e-6
    )
    assert (shortfalls["silica_deficit"][deficient] > 0.01).all()
    assert (shortfalls["silica_deficit"][~deficient] < 1e-6).all()
