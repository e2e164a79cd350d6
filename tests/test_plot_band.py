"""The band picture has a panel for what is known or asked, and shades what is ruled out."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
import pytest

from models import Figures, Reflectors, evaluate
from optim.plot_band import PANELS, draw_band
from tests.picture_checks import assert_readable, words_of

_BAND = np.linspace(863e6, 870e6, 5)
_NAMES = ("smallest", "balanced", "most_margin")


@dataclass(frozen=True)
class _Bound:
    figure: str
    sense: str
    value: float


def _figures() -> Figures:
    designs = Reflectors(
        apex_angle=np.pi / 2.0,
        spacing=[0.16, 0.17, 0.18],
        plate_width=0.35,
        plate_length=0.35,
        dipole_length=0.16,
        dipole_diameter=0.006,
    )
    return evaluate(designs, _BAND, model="image")


def _titles(bounds: tuple[_Bound, ...] = (), figures: Figures | None = None) -> list[str]:
    picture = draw_band(
        title="Band",
        frequencies_hz=_BAND,
        figures=figures or _figures(),
        names=_NAMES,
        bounds=bounds,
    )
    assert_readable(picture)
    return [axes.get_title(loc="left") for axes in picture.axes]


def test_panels_are_those_that_the_model_gives() -> None:
    titles = _titles()
    assert "gain (dBi)" in titles
    assert "front-to-back ratio (dB)" not in titles  # infinite plates have no rear


def test_what_is_asked_has_a_panel_even_if_the_model_cannot_give_it() -> None:
    assert "front-to-back ratio (dB)" in _titles((_Bound("front_to_back_db", "min", 20.0),))


def test_requirements_on_sizes_are_passed_over() -> None:
    assert _titles((_Bound("width", "max", 0.3),)) == _titles()


def test_limits_are_drawn_at_their_values() -> None:
    bounds = (_Bound("beamwidth_h_deg", "min", 30.0), _Bound("beamwidth_h_deg", "max", 50.0))
    picture = draw_band(
        title="", frequencies_hz=_BAND, figures=_figures(), names=_NAMES, bounds=bounds
    )
    (axes,) = [a for a in picture.axes if "H-plane beamwidth" in a.get_title(loc="left")]
    ends = [np.asarray(line.get_ydata(), dtype=float) for line in axes.lines]
    assert [y.tolist() for y in ends if y.size == 2] == [[30.0, 30.0], [50.0, 50.0]]
    assert len(axes.patches) == 2
    assert any(w.text == "ruled out by a requirement" for w in words_of(picture))


def test_every_panel_is_a_figure_with_its_unit() -> None:
    assert set(PANELS) <= set(Figures.names())
    assert all("(" in label for name, label in PANELS.items() if name != "vswr")


def test_an_infinite_figure_breaks_the_curve_only() -> None:
    vswr = np.full((3, 5), 1.5)
    vswr[0, 2] = np.inf
    assert "VSWR" in _titles(figures=replace(_figures(), vswr=vswr))


@pytest.mark.parametrize("count", [1, 2])
def test_few_frequencies(count: int) -> None:
    picture = draw_band(
        title="",
        frequencies_hz=_BAND[:count],
        figures=evaluate(
            Reflectors(
                apex_angle=np.pi / 2.0,
                spacing=0.17,
                plate_width=0.35,
                plate_length=0.35,
                dipole_length=0.16,
                dipole_diameter=0.006,
            ),
            _BAND[:count],
            model="image",
        ),
        names=("smallest",),
    )
    assert_readable(picture)
