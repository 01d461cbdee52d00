"""What the digestions carry. Common practice of laboratories, no single source, unless a line says otherwise."""

import numpy as np
import pytest

from registry.petrology.analytes import CHOSEN_COLUMNS
from registry.petrology.digestion import (
    CARRIES,
    DIGESTION_CODE,
    DIGESTION_LETTERS,
    DIGESTION_RANKS,
    DIGESTIONS,
    MINIMUM,
    REFUSED,
    TOTAL,
    carries,
    pack_letters,
    settle_unknown,
    unpack_letters,
)


@pytest.mark.parametrize(
    ("digestion", "column", "expected"),
    [
        # resistate minerals stay behind after four acids
        ("four_acid", "zr_ppm", "minimum"),
        ("four_acid", "sn_ppm", "minimum"),
        ("four_acid", "tio2_wt", "minimum"),
        ("four_acid", "lu_ppm", "minimum"),
        ("four_acid", "sm_ppm", "total"),
        ("four_acid", "la_ppm", "total"),
        ("four_acid", "sr_ppm", "total"),
        ("four_acid", "sio2_wt", "refused"),  # SiF4
        # the flux is no analyte
        ("fusion", "li_ppm", "refused"),
        ("fusion", "b_ppm", "refused"),
        ("fusion", "zr_ppm", "total"),
        ("peroxide_fusion", "na2o_wt", "refused"),
        ("peroxide_fusion", "li_ppm", "total"),
        ("peroxide_fusion", "sn_ppm", "total"),
        ("xrf", "b_ppm", "refused"),
        ("aqua_regia", "k2o_wt", "refused"),
        ("aqua_regia", "rb_ppm", "refused"),
        ("aqua_regia", "zr_ppm", "refused"),
        ("aqua_regia", "sn_ppm", "refused"),
        ("aqua_regia", "cu_ppm", "minimum"),
        ("aqua_regia", "au_ppm", "minimum"),
        ("combustion", "s_wt", "total"),
        ("combustion", "ni_ppm", "refused"),
        ("fire_assay", "pd_ppm", "total"),
        ("fire_assay", "cu_ppm", "refused"),
        ("titration", "feo_titrated_wt", "total"),
        ("titration", "rb_ppm", "refused"),
        ("titration", "pb_ppm", "total"),  # ore grade
        ("titration", "zn_ppm", "total"),
        ("aqua_regia", "loi_wt", "total"),  # weighed
        ("unknown", "zr_ppm", "total"),
        ("unknown_without_silica", "zr_ppm", "minimum"),
    ],
)
def test_carries_known_digestion_gives_laboratory_practice(digestion, column, expected):
    assert carries(digestion, column) == expected
    assert carries(DIGESTION_CODE[digestion], column) == expected


def test_carries_without_digestion_refuses_every_column():
    assert CARRIES.shape == (len(DIGESTIONS), len(CHOSEN_COLUMNS))
    assert (CARRIES[0] == REFUSED).all()
    assert set(np.unique(CARRIES)) == {REFUSED, MINIMUM, TOTAL}


def test_carries_aqua_regia_major_oxides_all_refused():
    majors = [
        "sio2_wt",
        "tio2_wt",
        "al2o3_wt",
        "mno_wt",
        "mgo_wt",
        "cao_wt",
        "na2o_wt",
        "k2o_wt",
        "p2o5_wt",
        "fe2o3t_reported_wt",
    ]
    assert {carries("aqua_regia", column) for column in majors} == {"refused"}


def test_ranks_order_whole_rock_methods_before_partial_ones():
    order = ["xrf", "peroxide_fusion", "four_acid", "unknown", "portable_xrf", "aqua_regia", ""]
    ranks = [int(DIGESTION_RANKS[DIGESTION_CODE[name]]) for name in order]
    assert ranks == sorted(set(ranks))
    assert DIGESTION_RANKS[DIGESTION_CODE["fusion"]] == DIGESTION_RANKS[DIGESTION_CODE["inaa"]]


def test_settle_unknown_without_silica_counts_as_four_acid():
    codes = np.array([DIGESTION_CODE["unknown"], DIGESTION_CODE["unknown"], DIGESTION_CODE["fusion"]], dtype=np.uint8)
    settled = settle_unknown(codes, np.array([True, False, False]))
    assert [DIGESTIONS[code] for code in settled] == ["unknown", "unknown_without_silica", "fusion"]
    without, four_acid = CARRIES[DIGESTION_CODE["unknown_without_silica"]], CARRIES[DIGESTION_CODE["four_acid"]]
    np.testing.assert_array_equal(without, np.maximum(four_acid, MINIMUM))  # unknown is never refused


def test_letters_packed_and_read_again_give_the_same_codes():
    codes = np.random.default_rng(4).integers(0, len(DIGESTIONS), (len(CHOSEN_COLUMNS), 7)).astype(np.uint8)
    texts = pack_letters(codes)
    assert len(texts) == 7 and all(len(text) == len(CHOSEN_COLUMNS) for text in texts)
    assert texts[2][5] == DIGESTION_LETTERS[codes[5, 2]]
    np.testing.assert_array_equal(unpack_letters(texts), codes)
