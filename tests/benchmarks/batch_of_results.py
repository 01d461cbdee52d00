"""Invented lab file for the speed ratios: n samples x 55 analytes, 2 % censored cells, deterministic."""

from __future__ import annotations

from pathlib import Path

import numpy as np

MAJORS = {
    "SiO2": 62.0, "TiO2": 0.7, "Al2O3": 16.0, "Fe2O3T": 5.5, "MnO": 0.1, "MgO": 2.4, "CaO": 4.6, "Na2O": 3.8,
    "K2O": 2.6, "P2O5": 0.2, "LOI": 1.4,
}  # fmt: skip
WORDS = (
    "Li Be Sc V Cr Co Ni Cu Zn Ga Rb Sr Y Zr Nb Mo Ag Cd Sn Sb Cs Ba La Ce Pr Nd Sm Eu Gd Tb Dy Ho Er Tm Yb Lu Hf Ta "
    "W Tl Pb Bi Th U"
)
TRACES = WORDS.split()
COLUMNS = [*(f"{oxide} (%)" for oxide in MAJORS), *(f"{element} (ppm)" for element in TRACES)]
assert len(COLUMNS) == 55


def values_of(n: int) -> np.ndarray:
    """Invented values (n, 55): majors that sum to about 100, lognormal traces."""
    random = np.random.default_rng(20261201)
    majors = np.array(list(MAJORS.values())) * random.lognormal(0.0, 0.12, (n, len(MAJORS)))
    majors *= (random.normal(99.8, 0.5, n) / majors.sum(axis=1))[:, None]
    traces = random.lognormal(2.5, 1.0, (n, len(TRACES)))
    return np.round(np.hstack([majors, traces]), 3)


def censored_of(n: int) -> np.ndarray:
    """Which cells are below their limit: 2 % of the traces."""
    random = np.random.default_rng(7)
    mask = random.random((n, len(COLUMNS))) < 0.02
    mask[:, : len(MAJORS)] = False
    return mask


def write_files(folder: Path, n: int) -> tuple[Path, Path]:
    """A sample list and a results file of n invented samples."""
    samples, results = folder / "samples.csv", folder / "results.csv"
    codes = [f"BM{number:07d}" for number in range(n)]
    with samples.open("w") as file:
        file.write("sample_code,sample_kind,lithology\n")
        file.writelines(f"{code},outcrop,granodiorite\n" for code in codes)
    values, censored = values_of(n), censored_of(n)
    with results.open("w") as file:
        file.write(",".join(["Sample", *COLUMNS]) + "\n")
        for code, row, marks in zip(codes, values.tolist(), censored.tolist(), strict=True):
            cells = [f"<{value}" if mark else str(value) for value, mark in zip(row, marks, strict=True)]
            file.write(",".join([code, *cells]) + "\n")
    return samples, results
