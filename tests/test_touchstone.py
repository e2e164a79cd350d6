"""The file is read back by a library of networks and gives the run's own match."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
import skrf

from models import Figures, Reflectors, Terms, evaluate
from optim.touchstone import one_port

DESIGN = Reflectors(
    apex_angle=np.radians(90.0),
    spacing=0.35,
    plate_width=0.8,
    plate_length=1.0,
    dipole_length=0.45,
    dipole_diameter=0.01,
)
FREQUENCIES = np.linspace(290e6, 310e6, 5)


def _figures(terms: Terms, model: str = "moment") -> Figures:
    return evaluate(DESIGN, FREQUENCIES, model=model, terms=terms)


@pytest.mark.parametrize("terms", [Terms(), Terms(reference_ohm=75.0, impedance_ratio=4.0)])
def test_read_back(terms: Terms, tmp_path: Path) -> None:
    figures = _figures(terms)
    text = one_port(figures, FREQUENCIES, reference_ohm=terms.reference_ohm, about="a corner")
    assert text is not None
    path = tmp_path / "match.s1p"
    path.write_text(text, encoding="ascii")
    network = skrf.Network(str(path))
    np.testing.assert_allclose(network.f, FREQUENCIES, rtol=1e-9)
    assert network.z0[0, 0].real == terms.reference_ohm
    np.testing.assert_allclose(network.s_vswr[:, 0, 0], figures.vswr[0], rtol=1e-4)
    impedance = figures.resistance_ohm[0] + 1j * figures.reactance_ohm[0]
    np.testing.assert_allclose(network.z[:, 0, 0], impedance, rtol=1e-4)


def test_a_comment_stays_a_comment() -> None:
    about = "Größe\n300 0.5 0\r# GHz Z RI R 1"
    text = one_port(_figures(Terms()), FREQUENCIES, reference_ohm=50.0, about=about)
    assert text is not None
    assert text.isascii()
    lines = text.splitlines()
    assert lines[0].startswith("! Gr??e?300")
    assert lines[1] == "# MHz S MA R 50"
    assert len(lines) == 2 + FREQUENCIES.size


def test_no_impedance_no_file() -> None:
    figures = _figures(Terms(), model="image")
    empty = Figures(**{**vars(figures), "reactance_ohm": np.full((1, 5), np.nan)})
    assert one_port(empty, FREQUENCIES, reference_ohm=50.0, about="") is None
