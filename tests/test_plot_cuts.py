"""The cuts are drawn at the angles and levels of the pattern, with its half-power points."""

from __future__ import annotations

import numpy as np
import pytest
from matplotlib.figure import Figure

from models import Reflectors, Terms, radiate
from models.conventions import ETA0
from models.dipole import far_field
from models.pattern import CUT_ANGLES, Pattern
from optim.plot_cuts import FLOOR_DB, draw_cuts, relative_level_db
from tests.picture_checks import assert_readable, words_of

_FREQUENCIES = np.array([800.0e6, 868.0e6, 930.0e6])
_BT419 = ((0.0, 0.0), (np.radians(20.0), 0.0), (np.radians(60.0), -16.0), (np.pi, -16.0))


def _corner(terms: Terms | None = None, apex_angle: float = np.pi / 2.0) -> Figure:
    design = Reflectors(
        apex_angle=apex_angle,
        spacing=0.17,
        plate_width=0.35,
        plate_length=0.35,
        dipole_length=0.16,
        dipole_diameter=0.006,
    )
    return draw_cuts(
        title="smallest",
        pattern=radiate(design, _FREQUENCIES, model="image"),
        frequencies_hz=_FREQUENCIES,
        terms=terms,
        model="image",
    )


def _half_wave_dipole() -> Figure:
    e_field = far_field(2.0 * np.pi, 0.5, np.cos(CUT_ANGLES), np.sin(CUT_ANGLES))
    one = np.ones((1, 1))
    pattern = Pattern(
        angles=CUT_ANGLES,
        h_field=np.ones((1, 1, CUT_ANGLES.size), dtype=np.complex128),
        e_field=e_field[None, None, :].astype(np.complex128),
        power=np.pi / ETA0 * 73.13 * one,
        resistance=73.1 * one,
        reactance=42.5 * one,
        efficiency=one,
        doubt_db=0.0 * one,
    )
    return draw_cuts(title="dipole", pattern=pattern, frequencies_hz=np.array([300e6]))


def test_half_wave_dipole_is_drawn_as_the_textbook_has_it() -> None:
    # E-plane half-power beamwidth 78.1°, 2.15 dBi: Balanis, Antenna Theory, §4.6.
    figure = _half_wave_dipole()
    (marks,) = [ln for ln in figure.axes[2].lines if ln.get_marker() == "s"]
    assert np.degrees(np.asarray(marks.get_xdata())) == pytest.approx([-39.05, 39.05], abs=0.1)
    assert np.asarray(marks.get_ydata()) == pytest.approx(-3.01, abs=0.01)
    (words,) = [w.text for w in words_of(figure) if "MHz" in w.text]
    assert "gain 2.15 dBi" in words
    assert "E 78.1°" in words


def test_an_omnidirectional_cut_has_no_half_power_marks() -> None:
    assert not [ln for ln in _half_wave_dipole().axes[0].lines if ln.get_marker() == "s"]


def test_levels_are_relative_to_boresight() -> None:
    level = relative_level_db(np.array([[2.0, 1.0, 0.0]]) + 0j)
    np.testing.assert_allclose(level, [[0.0, -6.0206, -np.inf]], atol=1e-4)


def test_three_frequencies_in_both_planes_and_both_kinds() -> None:
    figure = _corner()
    assert len(figure.axes) == 4
    for axes in figure.axes:
        curves = [ln for ln in axes.lines if np.asarray(ln.get_xdata()).size >= CUT_ANGLES.size]
        assert len(curves) == 3
        assert (
            min(float(np.min(np.asarray(c.get_ydata(), dtype=float))) for c in curves) == FLOOR_DB
        )


def test_envelope_is_drawn_through_its_corners() -> None:
    # Corners after ITU-R BT.419-3, bands IV and V.
    flat = _corner(Terms(mask_h=_BT419)).axes[1]
    (mask,) = [ln for ln in flat.lines if np.asarray(ln.get_xdata()).size == 4]
    assert np.asarray(mask.get_xdata()) == pytest.approx([0.0, 20.0, 60.0, 180.0])
    assert np.asarray(mask.get_ydata()) == pytest.approx([0.0, 0.0, -16.0, -16.0])


@pytest.mark.parametrize(
    "figure",
    [
        _corner,
        lambda: _corner(Terms(mask_h=_BT419, mask_e=_BT419)),
        lambda: _corner(apex_angle=1.3),  # no image system: nothing but NaN
        lambda: _corner(apex_angle=np.pi / 6.0),  # splits its beam: above 0 dB off boresight
        _half_wave_dipole,
    ],
)
def test_readable(figure: object) -> None:
    assert callable(figure)
    assert_readable(figure())
