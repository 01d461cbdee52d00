"""Lines for drawing come from the tables that classify, and each label stands in the field it names."""

import numpy as np
import pytest

from registry.petrology import granite_fields, series, tas
from registry.petrology.classification import alumina_class, fe_class, mali_class
from registry.petrology.field_lines import DIAGRAMS
from registry.petrology.references import REFERENCES

#: How a place (x, y) of a diagram is classified.
CLASSIFY = {
    "tas_volcanic": lambda x, y: tas.VOLCANIC_NAMES[int(tas.tas_field(x, y))],
    "tas_plutonic": lambda x, y: tas.PLUTONIC_NAMES[int(tas.tas_field(x, y))],
    "alkaline_divide": lambda x, y: series.alkalinity(x, y, 0.0),
    "k2o_sio2": series.k2o_series,
    "afm": lambda f, m: series.afm_series(100.0 - f - m, 0.0, f, m),
    "alumina": alumina_class,
    "ferroan": lambda x, y: fe_class(y, x),
    "alkali_lime": lambda x, y: mali_class(y, x),
    "granite_rb_y_nb": lambda x, y: granite_fields.granite_field_rb_y_nb(y, x, 0.0),
    "granite_nb_y": lambda x, y: granite_fields.granite_field_nb_y(y, x),
    "granite_rb_yb_ta": lambda x, y: granite_fields.granite_field_rb_yb_ta(y, x, 0.0),
    "granite_ta_yb": lambda x, y: granite_fields.granite_field_ta_yb(y, x),
}


def test_diagrams_each_has_a_classification():
    assert set(CLASSIFY) == set(DIAGRAMS)


@pytest.mark.parametrize("name", DIAGRAMS)
def test_diagram_labels_stand_in_their_fields(name):
    for label, x, y in DIAGRAMS[name].labels:
        assert CLASSIFY[name](x, y) == label


@pytest.mark.parametrize("name", DIAGRAMS)
def test_diagram_lines_are_finite_corners_with_a_known_source(name):
    diagram = DIAGRAMS[name]

    assert diagram.source in REFERENCES
    for line in diagram.lines:
        corners = np.array(line, dtype=float)
        assert corners.shape[0] >= 2 and corners.shape[1] == 2
        assert np.isfinite(corners).all()
        assert not diagram.is_log or (corners > 0.0).all()
