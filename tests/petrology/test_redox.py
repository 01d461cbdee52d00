"""Oxygen buffers and redox models of melts; printed values stand in ``published/iron.csv``."""

from __future__ import annotations

import numpy as np
import pytest

from registry.petrology.redox import (
    buffer_log_fo2,
    ferric_fraction_borisov,
    ferric_fraction_kress,
    log_ferric_ferrous_kress,
    mole_fractions,
    ratio_kress,
)

#: Invented typical mid-ocean ridge glass.
GLASS = {
    "sio2_wt": 50.50, "tio2_wt": 1.60, "al2o3_wt": 14.80, "feot_wt": 10.20, "mno_wt": 0.18, "mgo_wt": 7.00,
    "cao_wt": 11.50, "na2o_wt": 2.80, "k2o_wt": 0.20, "p2o5_wt": 0.16,
}  # fmt: skip


def test_buffer_qfm_rows_meet_at_the_quartz_transition() -> None:
    """The two rows of Frost 1991 (from memory) must give one curve: 573 C within 0.003 log units."""
    below, above = buffer_log_fo2("QFM", np.array([572.999, 573.0]))

    assert below == pytest.approx(above, abs=0.004)
    assert below != above


def test_buffers_order_from_reduced_to_oxidised() -> None:
    """IW, WM, QFM, NNO at 1000 C: order of the buffers, common practice; MH is the most oxidised."""
    order = [float(buffer_log_fo2(buffer, 1000.0)) for buffer in ("IW", "WM", "QFM", "NNO")]
    order.append(float(buffer_log_fo2("MH", 1000.0, calibration="myers1983")))

    assert order == sorted(order)


def test_buffer_pressure_raises_oxygen_fugacity() -> None:
    assert buffer_log_fo2("NNO", 1000.0, 2000.0) > buffer_log_fo2("NNO", 1000.0)


def test_buffers_of_two_calibrations_agree_within_a_tenth_at_magmatic_temperature() -> None:
    for buffer in ("QFM", "IW"):
        difference = buffer_log_fo2(buffer, 1200.0) - buffer_log_fo2(buffer, 1200.0, calibration="myers1983")

        assert abs(float(difference)) < 0.3


@pytest.mark.parametrize(
    ("arguments", "message"),
    [
        (("FMQ", 1000.0), r"frost1991 has no buffer 'FMQ'; it has \['IW', 'NNO', 'QFM', 'WM'\]"),
        (("NNO", 1000.0, 1.0, "myers1983"), "myers1983 has no buffer 'NNO'"),
        (("QFM", 1000.0, 1.0, "mine"), r"unknown calibration 'mine' of oxygen buffers; known are \['frost1991'"),
    ],
)
def test_buffer_unknown_is_told(arguments: tuple, message: str) -> None:
    with pytest.raises(ValueError, match=message):
        buffer_log_fo2(*arguments)


def test_mole_fractions_sum_to_one_and_do_not_depend_on_closing() -> None:
    fractions = mole_fractions(GLASS)
    doubled = mole_fractions({name: 2.0 * value for name, value in GLASS.items()})

    assert float(sum(fractions.values())) == pytest.approx(1.0, abs=1e-12)
    np.testing.assert_allclose(list(doubled.values()), list(fractions.values()), rtol=1e-12)


def test_mole_fractions_unknown_oxide_is_told() -> None:
    with pytest.raises(ValueError, match=r"unknown oxides \['feo_wt'\]; mole fractions take \['sio2_wt'"):
        mole_fractions({"feo_wt": 1.0})


def test_kress_ratio_and_fraction_tell_the_same_iron() -> None:
    log_fo2 = np.array([-10.0, -8.0, -6.0])
    ratio = np.exp(log_ferric_ferrous_kress(GLASS, 1250.0, log_fo2))
    fraction = ferric_fraction_kress(GLASS, 1250.0, log_fo2)

    np.testing.assert_allclose(fraction / (1.0 - fraction), 2.0 * ratio, rtol=1e-12)
    np.testing.assert_allclose(ratio_kress(GLASS, 1250.0, log_fo2), ratio * 159.687 / 71.844, rtol=1e-6)
    assert (np.diff(fraction) > 0.0).all()


def test_kress_pressure_lowers_ferric_iron() -> None:
    """Kress and Carmichael 1991, abstract: pressure favours ferrous iron at a given fO2 (from memory)."""
    assert ferric_fraction_kress(GLASS, 1250.0, -8.0, 30_000.0) < ferric_fraction_kress(GLASS, 1250.0, -8.0)


def test_borisov_and_kress_agree_within_three_hundredths_for_a_basaltic_glass() -> None:
    borisov, kress = (float(model(GLASS, 1200.0, -8.301)) for model in (ferric_fraction_borisov, ferric_fraction_kress))

    assert borisov == pytest.approx(kress, abs=0.03)


def test_redox_missing_oxide_value_stays_in_its_row() -> None:
    oxides = GLASS | {"na2o_wt": np.array([2.8, np.nan])}
    for model in (ferric_fraction_borisov, ferric_fraction_kress):
        found = model(oxides, 1200.0, -8.301)

        assert np.isnan(found[1])
        np.testing.assert_array_equal(found[0], model(GLASS, 1200.0, -8.301))
