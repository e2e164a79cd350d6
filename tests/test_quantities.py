"""What quantities are called: nothing missing, and units that are those of the keys."""

from __future__ import annotations

import math

import pytest

from models import Figures
from optim.margins import SIZES as IN_SI
from optim.quantities import FIGURES, MASKS, OF_A_MATCH, SIZES, number

UNITS = {"dbi": "dBi", "db": "dB", "deg": "°", "ohm": "Ω", "vswr": ""}


def test_every_figure_is_named_in_the_unit_of_its_key() -> None:
    assert [*FIGURES, *MASKS, "doubt_db"] == list(Figures.names())
    for name, about in (FIGURES | MASKS).items():
        assert about.unit == UNITS[name.rpartition("_")[2]]
    assert set(OF_A_MATCH) < set(FIGURES)


def test_every_size_is_named_in_the_unit_of_its_cap() -> None:
    assert list(SIZES) == list(IN_SI)
    assert {SIZES[name].unit for name, unit in IN_SI.items() if unit == 1e-3} == {"mm"}
    assert "mm" not in {SIZES[name].unit for name, unit in IN_SI.items() if unit == 1.0}


def test_labels_are_short_and_have_their_unit() -> None:
    assert FIGURES["beamwidth_h_deg"].label == "H-plane beamwidth (°)"
    assert SIZES["frontal_area"].label == "frontal area (m²)"
    assert FIGURES["vswr"].label == "VSWR"


@pytest.mark.parametrize(
    ("value", "text"), [(-0.125, "−0.12"), (1e3, "1000.00"), (math.nan, "–"), (math.inf, "–")]
)
def test_numbers_to_read(value: float, text: str) -> None:
    assert number(value, 2) == text
