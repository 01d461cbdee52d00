"""Published average compositions, mineral compositions and partition coefficients that the suites are built from.

Status of every number here: from memory, rounded, with the publication it belongs to named. They give the invented
suites the proportions of real rocks; nothing else in Plutonbook leans on them.
"""

from __future__ import annotations

from itertools import pairwise

MAJORS = ("SiO2", "TiO2", "Al2O3", "Fe2O3T", "MnO", "MgO", "CaO", "Na2O", "K2O", "P2O5")
TRACES = (
    "Li", "Be", "Sc", "V", "Cr", "Co", "Ni", "Cu", "Zn", "Ga", "Rb", "Sr", "Y", "Zr", "Nb", "Mo", "Sn", "Cs", "Ba",
    "La", "Ce", "Pr", "Nd", "Sm", "Eu", "Gd", "Tb", "Dy", "Ho", "Er", "Tm", "Yb", "Lu", "Hf", "Ta", "W", "Pb", "Th",
    "U", "F", "Pt", "Pd", "Au",
)  # fmt: skip
RARE_EARTHS = TRACES[TRACES.index("La") : TRACES.index("Lu") + 1]
#: CI chondrite, ppm; McDonough & Sun 1995, Chem. Geol. 120, 223-253. Used to fill rare earths between printed ones.
CHONDRITE = dict(
    zip(
        RARE_EARTHS,
        (0.237, 0.613, 0.0928, 0.457, 0.148, 0.0563, 0.199, 0.0361, 0.246, 0.0546, 0.160, 0.0247, 0.161, 0.0246),
        strict=True,
    )
)


def _numbers(text: str) -> dict[str, float]:
    words = text.split()
    return {name: float(value) for name, value in zip(words[::2], words[1::2], strict=True)}


#: wt% and ppm.
AVERAGES: dict[str, dict[str, float]] = {
    # Le Maitre 1976, J. Petrol. 17, 589-637, average andesite (ferric and ferrous iron summed as Fe2O3).
    "andesite": _numbers(
        "SiO2 57.94 TiO2 0.87 Al2O3 17.02 Fe2O3T 7.76 MnO 0.14 MgO 3.33 CaO 6.79 Na2O 3.48 K2O 1.62 P2O5 0.21 "
        # Traces: typical calc-alkaline andesite, after Gill 1981, Orogenic Andesites and Plate Tectonics.
        "Li 14 Be 1.2 Sc 20 V 150 Cr 55 Co 22 Ni 30 Cu 45 Zn 80 Ga 18 Rb 42 Sr 400 Y 22 Zr 130 Nb 8 Mo 1.0 Sn 1.3 "
        "Cs 1.7 Ba 470 La 19 Ce 40 Nd 20 Sm 4.4 Eu 1.15 Gd 4.2 Dy 3.8 Er 2.2 Yb 2.2 Lu 0.34 Hf 3.5 Ta 0.55 W 0.6 "
        "Pb 8 Th 5.0 U 1.3"
    ),
    # Martin, Smithies, Rapp, Moyen & Champion 2005, Lithos 79, 1-24: average of the silicic adakites.
    "silicic_adakite": _numbers(
        "SiO2 64.8 TiO2 0.56 Al2O3 16.64 Fe2O3T 4.75 MnO 0.08 MgO 2.18 CaO 4.63 Na2O 4.19 K2O 1.97 P2O5 0.20 "
        "Rb 52 Ba 721 Nb 6 Sr 565 Zr 108 Y 10 Ni 20 Cr 41 V 95 La 19.2 Ce 37.7 Nd 18.2 Sm 3.4 Eu 0.9 Gd 2.8 Dy 1.9 "
        "Er 0.96 Yb 0.88 Lu 0.17 "
        # Not in that average; typical of arc dacite, common practice, no source.
        "Sc 9.5 Co 12 Cu 45 Zn 60 Cs 1.8 Th 4.5 U 1.4 Hf 3.0 Ta 0.42 Sn 1.2 W 0.7 Li 14 Be 1.4 Pb 9 Mo 1.2 Ga 19"
    ),
    # Le Maitre 1976, average granite (majors only).
    "granite": _numbers(
        "SiO2 71.30 TiO2 0.31 Al2O3 14.32 Fe2O3T 3.03 MnO 0.05 MgO 0.71 CaO 1.84 Na2O 3.68 K2O 4.07 P2O5 0.12"
    ),
    # Taylor & McLennan 1985, The Continental Crust: average post-Archaean shale (traces), as a metapelite source.
    "metapelite": _numbers(
        "Li 75 Be 3 Sc 16 V 150 Cr 110 Co 23 Ni 55 Cu 50 Zn 85 Ga 20 Rb 160 Sr 200 Y 27 Zr 210 Nb 19 Mo 1.0 Sn 4 "
        "Cs 15 Ba 650 La 38.2 Ce 79.6 Pr 8.83 Nd 33.9 Sm 5.55 Eu 1.08 Gd 4.66 Tb 0.774 Dy 4.68 Ho 0.991 Er 2.85 "
        "Tm 0.405 Yb 2.82 Lu 0.433 Hf 5 Ta 1.4 W 2.7 Pb 20 Th 14.6 U 3.1 "
        # Turekian & Wedepohl 1961, GSA Bulletin 72, 175-192: shale.
        "F 740"
    ),
    # Rudnick & Gao 2003, Treatise on Geochemistry 3, 1-64: middle continental crust (traces), as a source of rhyolite.
    "middle_crust": _numbers(
        "Li 12 Be 2.3 Sc 19 V 107 Cr 76 Co 22 Ni 33.5 Cu 26 Zn 69.5 Ga 17.5 Rb 65 Sr 282 Y 20 Zr 149 Nb 10 Mo 0.6 "
        "Sn 1.3 Cs 2.2 Ba 532 La 24 Ce 53 Pr 5.8 Nd 25 Sm 4.6 Eu 1.4 Gd 4.0 Tb 0.7 Dy 3.8 Ho 0.82 Er 2.3 Tm 0.32 "
        "Yb 2.2 Lu 0.4 Hf 4.4 Ta 0.6 W 0.6 Pb 15.2 Th 6.5 U 1.3 F 524"
    ),
    # Le Maitre 1976, average rhyolite (majors only).
    "rhyolite": _numbers(
        "SiO2 72.82 TiO2 0.28 Al2O3 13.27 Fe2O3T 2.71 MnO 0.06 MgO 0.39 CaO 1.14 Na2O 3.55 K2O 4.30 P2O5 0.07"
    ),
    # Le Fort et al. 1987, Tectonophysics 134, 39-57: two-mica leucogranite of a collision belt (majors only).
    "leucogranite": _numbers(
        "SiO2 73.60 TiO2 0.10 Al2O3 14.90 Fe2O3T 0.95 MnO 0.02 MgO 0.18 CaO 0.55 Na2O 4.00 K2O 4.55 P2O5 0.14"
    ),
    # Le Maitre 1976, average basalt (ferric and ferrous iron summed as Fe2O3).
    "basalt": _numbers(
        "SiO2 49.20 TiO2 1.84 Al2O3 15.74 Fe2O3T 11.71 MnO 0.20 MgO 6.73 CaO 9.47 Na2O 2.91 K2O 1.10 P2O5 0.35 "
        # Traces: typical continental tholeiite, common practice, no source.
        "Li 8 Be 0.9 Sc 33 V 280 Cr 180 Co 45 Ni 90 Cu 110 Zn 100 Ga 20 Rb 22 Sr 300 Y 28 Zr 150 Nb 11 Mo 1.0 Sn 1.2 "
        "Cs 0.6 Ba 280 La 16 Ce 36 Pr 4.8 Nd 21 Sm 5.0 Eu 1.6 Gd 5.3 Tb 0.85 Dy 5.0 Ho 1.0 Er 2.7 Tm 0.38 Yb 2.4 "
        "Lu 0.36 Hf 3.6 Ta 0.7 W 0.4 Pb 4 Th 2.0 U 0.5 F 450 Pt 0.008 Pd 0.008 Au 0.003"
    ),
    # Barnes, Maier & Curl 2010, Econ. Geol. 105, 1491-1511: magnesian basaltic andesite from the margin of a great
    # layered intrusion; it took crust up before it arrived (Th/Nb near 0.9).
    "magnesian_basaltic_andesite": _numbers(
        "SiO2 55.87 TiO2 0.35 Al2O3 12.55 Fe2O3T 10.17 MnO 0.21 MgO 12.65 CaO 7.29 Na2O 1.53 K2O 0.77 P2O5 0.10 "
        "Li 8 Be 0.7 Sc 29 V 170 Cr 965 Co 53 Ni 290 Cu 60 Zn 80 Ga 13 Rb 33 Sr 185 Y 13 Zr 75 Nb 4.2 Mo 0.7 Sn 1.0 "
        "Cs 1.5 Ba 320 La 17 Ce 33 Pr 3.7 Nd 14 Sm 2.7 Eu 0.75 Gd 2.4 Tb 0.37 Dy 2.2 Ho 0.46 Er 1.3 Tm 0.19 Yb 1.2 "
        "Lu 0.19 Hf 2.0 Ta 0.35 W 0.5 Pb 6 Th 3.6 U 0.8 F 250 Pt 0.016 Pd 0.012 Au 0.003"
    ),
}
#: Rudnick & Gao 2003: upper continental crust, ppm; stands in for what an average above does not print.
UPPER_CRUST = _numbers("F 557 Pt 0.0005 Pd 0.00052 Au 0.0015")

#: Share of a mineral that is each oxide, wt%; typical analyses, common practice, no source. Feldspars: stoichiometry.
_ALBITE = _numbers("SiO2 68.74 Al2O3 19.44 Na2O 11.82")
_ANORTHITE = _numbers("SiO2 43.19 Al2O3 36.65 CaO 20.16")
_ORTHOCLASE = _numbers("SiO2 64.76 Al2O3 18.32 K2O 16.92")


def _mixed(share: float, first: dict[str, float], second: dict[str, float]) -> dict[str, float]:
    return {name: share * first.get(name, 0.0) + (1.0 - share) * second.get(name, 0.0) for name in {**first, **second}}


MINERALS: dict[str, dict[str, float]] = {
    "plagioclase_55": _mixed(0.55, _ANORTHITE, _ALBITE),
    "plagioclase_45": _mixed(0.45, _ANORTHITE, _ALBITE),
    "oligoclase_30": _mixed(0.30, _ANORTHITE, _ALBITE),
    "oligoclase_25": _mixed(0.25, _ANORTHITE, _ALBITE),
    "oligoclase_10": _mixed(0.10, _ANORTHITE, _ALBITE),
    # Minerals of basaltic melts; olivine and calcic plagioclase by stoichiometry, the number is mol% Fo or An.
    "bytownite_75": _mixed(0.75, _ANORTHITE, _ALBITE),
    "bytownite_65": _mixed(0.65, _ANORTHITE, _ALBITE),
    "olivine_88": _numbers("SiO2 40.5 Fe2O3T 12.9 MnO 0.18 MgO 47.8"),
    "olivine_78": _numbers("SiO2 38.9 Fe2O3T 22.7 MnO 0.3 MgO 40.7"),
    "bronzite": _numbers("SiO2 54.8 TiO2 0.15 Al2O3 1.6 Fe2O3T 11.3 MnO 0.22 MgO 30.0 CaO 1.8 Na2O 0.03"),
    "augite": _numbers("SiO2 51.8 TiO2 0.7 Al2O3 2.8 Fe2O3T 9.3 MnO 0.2 MgO 15.9 CaO 19.6 Na2O 0.35"),
    "chromite": _numbers("TiO2 0.8 Al2O3 15.0 Fe2O3T 28.0 MnO 0.3 MgO 9.0"),
    "k_feldspar": _mixed(0.85, _ORTHOCLASE, _ALBITE),
    "quartz": {"SiO2": 100.0},
    "hornblende": _numbers("SiO2 44.9 TiO2 1.6 Al2O3 10.6 Fe2O3T 15.2 MnO 0.3 MgO 13.6 CaO 11.6 Na2O 1.6 K2O 0.6"),
    "clinopyroxene": _numbers("SiO2 51.4 TiO2 0.5 Al2O3 2.5 Fe2O3T 10.2 MnO 0.3 MgO 14.9 CaO 19.8 Na2O 0.4"),
    "orthopyroxene": _numbers("SiO2 52.6 TiO2 0.3 Al2O3 1.5 Fe2O3T 20.0 MnO 0.5 MgO 23.6 CaO 1.5"),
    "biotite": _numbers("SiO2 37.9 TiO2 3.5 Al2O3 15.2 Fe2O3T 21.3 MnO 0.2 MgO 12.1 Na2O 0.2 K2O 9.6"),
    "siderophyllite": _numbers("SiO2 36.2 TiO2 2.9 Al2O3 16.8 Fe2O3T 27.0 MnO 0.3 MgO 8.2 Na2O 0.2 K2O 9.4"),
    "muscovite": _numbers("SiO2 46.0 TiO2 0.5 Al2O3 34.5 Fe2O3T 2.2 MgO 0.6 Na2O 0.6 K2O 10.6"),
    "magnetite": _numbers("TiO2 6.0 Al2O3 1.5 Fe2O3T 91.5 MgO 1.0"),
    "ilmenite": _numbers("TiO2 50.5 Fe2O3T 47.5 MnO 2.0"),
    "apatite": _numbers("CaO 56.8 P2O5 43.2"),
    "garnet": _numbers("SiO2 37.5 Al2O3 21.5 Fe2O3T 34.0 MnO 1.0 MgO 5.0 CaO 1.0"),
    "sulphide": {"Fe2O3T": 100.0},
    "zircon": {"SiO2": 100.0},
    "cool_zircon": {"SiO2": 100.0},
    "monazite": {"P2O5": 100.0},
    "allanite": {"SiO2": 60.0, "Al2O3": 40.0},
}


def _rare_earths(light: float, middle: float, europium: float, heavy: float) -> dict[str, float]:
    """Coefficients from La over Gd to Lu, straight in the logarithm; Eu by itself."""
    left = {name: light * (middle / light) ** (step / 6.0) for step, name in enumerate(RARE_EARTHS[:7])}
    right = {name: middle * (heavy / middle) ** (step / 7.0) for step, name in enumerate(RARE_EARTHS[6:])}
    return {**left, **right, "Eu": europium}


#: Mineral/melt coefficients for intermediate to acid melts, typical of the tables in Rollinson 1993, Using
#: Geochemical Data; an element that is not listed is taken as 0.02 (incompatible).
PARTITION: dict[str, dict[str, float]] = {
    "plagioclase": {
        **_rare_earths(0.25, 0.09, 1.0, 0.05),
        **_numbers("Sr 3.0 Ba 0.45 Rb 0.07 Cs 0.05 Y 0.06 Ga 1.0 Pb 0.5 Li 0.3 Be 0.4"),
    },
    # Sodic plagioclase in cool acid melts: Sr and Ba by Blundy & Wood 1991, Geochim. Cosmochim. Acta 55, 193-209, at
    # An25 and 750 C; Eu as in rhyolites, Nash & Crecraft 1985, Geochim. Cosmochim. Acta 49, 2309-2322.
    "oligoclase": {
        **_rare_earths(0.35, 0.12, 3.0, 0.06),
        **_numbers("Sr 9.0 Ba 1.0 Rb 0.08 Cs 0.05 Y 0.1 Ga 1.0 Pb 0.7 Li 0.15 Be 0.4"),
    },
    "k_feldspar": {
        **_rare_earths(0.06, 0.02, 3.0, 0.01),
        **_numbers("Sr 4.5 Ba 6.0 Rb 0.6 Cs 0.1 Pb 1.0 Ga 0.8 Li 0.05"),
    },
    "quartz": {"Li": 0.2},
    "hornblende": {
        **_rare_earths(0.3, 2.2, 1.7, 1.8),
        **_numbers(
            "Sr 0.35 Ba 0.2 Rb 0.06 Cs 0.05 Y 2.3 Zr 0.4 Hf 0.5 Nb 0.6 Ta 0.5 V 6 Sc 8 Cr 15 Co 8 Ni 6 Zn 3 Sn 0.4 "
            "Cu 0.4"
        ),
    },
    "clinopyroxene": {
        **_rare_earths(0.15, 0.9, 0.8, 0.9),
        **_numbers("Sr 0.12 Y 1.0 Zr 0.2 Hf 0.3 V 3 Sc 8 Cr 15 Co 4 Ni 4 Zn 1 Cu 0.3"),
    },
    "orthopyroxene": {
        **_rare_earths(0.02, 0.2, 0.12, 0.5),
        **_numbers("Y 0.35 V 2 Sc 3 Cr 10 Co 8 Ni 8 Zn 2 Cu 0.3"),
    },
    "biotite": {
        **_rare_earths(0.05, 0.1, 0.15, 0.15),
        **_numbers(
            "Rb 3.0 Ba 8.0 Cs 1.5 Sr 0.3 Nb 2.0 Ta 1.2 Zr 0.2 V 10 Sc 5 Cr 10 Co 10 Ni 10 Zn 8 Sn 0.8 W 0.3 Li 1.2 "
            "Ga 1.5 Cu 0.5 F 1.5"
        ),
    },
    # Iron-rich biotite of cool peraluminous melts: alkalis by Icenhower & London 1995, Am. Mineral. 80, 1229-1251;
    # Nb, Ta after Acosta-Vigil et al. 2010, J. Petrol. 51, 785-821; transition metals by Nash & Crecraft 1985;
    # F by Icenhower & London 1997, Contrib. Mineral. Petrol. 127, 17-29; Sn such that biotite keeps most of the tin of
    # a metapelite until it breaks down itself (Wolf et al. 2018, Lithos 310-311, 20-30).
    "siderophyllite": {
        **_rare_earths(0.05, 0.1, 0.15, 0.15),
        **_numbers(
            "Rb 2.0 Ba 7.0 Cs 0.5 Sr 0.2 Nb 3.7 Ta 1.4 Zr 0.2 V 30 Sc 12 Cr 25 Co 25 Ni 25 Zn 12 Sn 2.0 W 0.3 Li 1.2 "
            "Ga 2.0 Cu 0.5 F 3.0"
        ),
    },
    # Raimbault & Burnol 1998, Can. Mineral. 36, 767-782: micas and acid melts rich in rare metals; Sn
    # as in the biotite beside it.
    "muscovite": _numbers(
        "Rb 1.8 Ba 2.5 Cs 0.3 Li 0.8 Be 0.7 Nb 3.5 Ta 0.4 Sn 2.0 W 1.4 Ga 1.5 V 5 Sc 3 Cr 5 Zn 3 F 0.8"
    ),
    "magnetite": _numbers("V 20 Sc 2 Cr 50 Co 10 Ni 10 Zn 8 Nb 0.6 Ta 0.5 Zr 0.3 Y 0.3 Sn 1.0 Mo 0.5 Ga 2 Cu 1.0"),
    "ilmenite": _numbers("V 12 Sc 5 Cr 5 Co 8 Ni 5 Zn 5 Nb 20 Ta 25 Zr 1.0 Hf 1.0 W 3 Sn 1.0"),
    "garnet": {**_rare_earths(0.02, 5.0, 0.5, 30.0), **_numbers("Y 20 Sc 15 V 5 Cr 10 Co 3 Ni 1 Zn 3 Zr 0.6 Hf 0.5")},
    # Peach, Mathez & Keays 1990, Geochim. Cosmochim. Acta 54, 3379-3389.
    "sulphide": _numbers("Cu 1000 Ni 500 Co 60 Zn 5 Mo 5 Pb 5 Pt 15000 Pd 20000 Au 4000"),
    "apatite": {**_rare_earths(15.0, 28.0, 15.0, 10.0), **_numbers("Y 22 Sr 1.5 Th 1.5 U 1.5 F 20")},
    "zircon": {**_rare_earths(1.0, 20.0, 5.0, 250.0), **_numbers("Zr 3000 Hf 2500 Th 25 U 90 Y 80 Nb 10 Ta 10 Sc 60")},
    # At saturation in a cool melt with about 100 ppm Zr; hafnon dissolves better (Linnen & Keppler 2002, GCA 66, 3293).
    "cool_zircon": {
        **_rare_earths(1.0, 20.0, 5.0, 250.0),
        **_numbers("Zr 5000 Hf 2750 Th 25 U 90 Y 80 Nb 10 Ta 10 Sc 60"),
    },
    "allanite": {**_rare_earths(1500.0, 300.0, 100.0, 15.0), **_numbers("Th 300 U 20 Y 60")},
    # Monazite at saturation in a cool peraluminous melt; Rapp & Watson 1986, CMP 94, 304-316, for its solubility.
    "monazite": {**_rare_earths(7000.0, 2500.0, 300.0, 120.0), **_numbers("Th 6000 U 300 Y 500")},
    # Basaltic melts.
    "olivine": _numbers("Ni 9 Co 5 Cr 0.7 Sc 0.2 V 0.06 Zn 0.9 Cu 0.1"),
    "bronzite": {
        **_rare_earths(0.005, 0.06, 0.05, 0.25),
        **_numbers("Ni 4 Co 2.8 Cr 6 Sc 1.2 V 0.7 Zn 0.9 Y 0.15 Cu 0.1"),
    },
    "augite": {
        **_rare_earths(0.08, 0.55, 0.45, 0.5),
        **_numbers("Ni 2.2 Co 1.2 Cr 8 Sc 3 V 2 Zn 0.6 Sr 0.1 Y 0.5 Zr 0.12 Hf 0.25"),
    },
    "bytownite": {
        **_rare_earths(0.12, 0.06, 0.5, 0.03),
        **_numbers("Sr 1.8 Ba 0.25 Rb 0.06 Pb 0.4 Ga 0.9 Y 0.03 Li 0.2 Be 0.3"),
    },
    "chromite": _numbers("Ni 6 Co 4 V 4 Zn 4 Sc 0.2 Ga 5 Pt 2"),
}
#: What a mineral of basaltic melts holds whatever the melt holds, ppm: stoichiometry (Cr2O3 45 %).
FIXED_TRACES: dict[str, dict[str, float]] = {"chromite": {"Cr": 308_000.0}}
#: Pyrrhotite, pentlandite and chalcopyrite together, wt%; typical, common practice, no source.
SULPHIDE_IRON_WT, SULPHIDE_SULPHUR_WT = 50.0, 37.0
#: Bulk behaviour of what no table lists.
INCOMPATIBLE = 0.02


def complete_rare_earths(composition: dict[str, float]) -> dict[str, float]:
    """An average with what it does not print: fluorine and precious metals of the upper crust, and rare earths straight
    in log(sample/chondrite) between neighbours, Eu left out."""
    known = [i for i, name in enumerate(RARE_EARTHS) if name in composition and name != "Eu"]
    full = UPPER_CRUST | composition
    for left, right in pairwise(known):
        for i in range(left + 1, right):
            name = RARE_EARTHS[i]
            if name in composition:
                continue
            ends = [composition[RARE_EARTHS[j]] / CHONDRITE[RARE_EARTHS[j]] for j in (left, right)]
            full[name] = CHONDRITE[name] * ends[0] * (ends[1] / ends[0]) ** ((i - left) / (right - left))
    return full
