"""Drawings are to the scale that they state, say the design's numbers, and no text hits another."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import Phase, given, settings
from hypothesis import strategies as st
from matplotlib.figure import Figure
from matplotlib.patches import Polygon

from models import Build, Reflectors
from optim.drafting import millimetres, reach
from optim.drawing import SHEET, draw_sheet, draw_sketches, scale_for
from optim.style import text_width
from optim.views import piece_of
from tests.picture_checks import assert_readable, words_of


def _design(
    angle_deg: float, spacing: float, width: float, length: float, dipole: float, diameter: float
) -> Reflectors:
    return Reflectors(
        apex_angle=np.radians(angle_deg),
        spacing=spacing,
        plate_width=width,
        plate_length=length,
        dipole_length=dipole,
        dipole_diameter=diameter,
    )


CORNER = _design(90.0, 0.173, 0.345, 0.345, 0.162, 0.006)
ODD = {
    "narrow": _design(40.0, 0.4125, 0.5, 0.3, 0.16, 0.006),
    "flat": _design(180.0, 0.087, 0.1725, 0.345, 0.165, 0.006),
    "tall": _design(60.0, 0.02, 0.03, 0.6, 0.025, 0.001),
    "broad": _design(110.0, 0.2, 1.2, 0.1, 0.3, 0.01),
    "tiny": _design(75.25, 0.005, 0.0085, 0.01, 0.0042, 0.0003),
    "feed far out": _design(180.0, 0.3, 0.05, 0.6, 0.16, 0.02),
    "needle": _design(20.0, 0.9, 1.0, 0.3, 0.16, 0.006),
    "hall": _design(90.0, 20.0, 40.0, 50.0, 18.0, 0.5),
}


def _texts(figure: Figure) -> list[str]:
    return [words.text for words in words_of(figure)]


@pytest.mark.parametrize("name", ODD)
def test_no_text_hits_another(name: str) -> None:
    assert_readable(draw_sheet(ODD[name], title="A title " * 40, name="most_margin"), air=1.0)


# A failing sheet is as good as a smaller one, and drawing is slow: no shrinking.
@settings(max_examples=8, deadline=None, derandomize=True, phases=(Phase.explicit, Phase.generate))
@given(
    angle=st.floats(25.0, 180.0),
    spacing=st.floats(0.1, 1.2),
    width=st.floats(0.2, 3.0),
    length=st.floats(0.2, 4.0),
    dipole=st.floats(0.2, 0.6),
    diameter=st.floats(0.001, 0.05),
    wavelength=st.floats(0.05, 3.0),
)
def test_any_geometry_is_readable(
    angle: float,
    spacing: float,
    width: float,
    length: float,
    dipole: float,
    diameter: float,
    wavelength: float,
) -> None:
    sizes = (wavelength * x for x in (spacing, width, length, dipole, diameter))
    assert_readable(draw_sheet(_design(angle, *sizes), title="Any"))


@pytest.mark.parametrize("name", ["narrow", "flat", "tiny", "hall"])
def test_outlines_are_to_scale(name: str) -> None:
    design = ODD[name]
    paper = 1e3 / scale_for(design, Build())
    axes = draw_sheet(design, title="").axes[0]
    assert axes.get_window_extent().width / 100.0 * 25.4 == pytest.approx(SHEET[0])
    assert np.diff(axes.get_xlim()).item() == pytest.approx(SHEET[0])
    boxes = [np.ptp(p.get_xy(), axis=0) for p in axes.patches if isinstance(p, Polygon)]

    def drawn(width: float, height: float) -> bool:
        return any(np.allclose(box, (width * paper, height * paper)) for box in boxes)

    assert drawn(float(design.width[0]), float(design.plate_length[0]))
    piece = piece_of(design, Build())
    assert drawn(piece.width, piece.length)
    plates = [
        np.stack([ln.get_xdata(), ln.get_ydata()], axis=1)
        for ln in axes.lines
        if ln.get_linewidth() == pytest.approx(2.0)
    ]
    left, apex, right = plates[0]
    a, b = left - apex, right - apex
    np.testing.assert_allclose(
        [np.hypot(*a), np.hypot(*b)], float(design.plate_width[0]) * paper, rtol=1e-9
    )
    angle = np.arccos(np.clip(a @ b / np.hypot(*a) / np.hypot(*b), -1.0, 1.0))
    assert angle == pytest.approx(float(design.apex_angle[0]), abs=1e-6)


def test_mass_follows_the_build() -> None:
    # 2 · 0.345 m · 0.345 m · 3 mm · 8000 kg/m³ = 5.713 kg, and a rod of 0.037 kg.
    build = Build(sheet_thickness=3e-3, sheet_density=8000.0)
    assert "5.75 kg" in _texts(draw_sheet(CORNER, title="", build=build))


def test_stated_scale_is_that_of_the_bar() -> None:
    design = ODD["tiny"]
    texts = _texts(draw_sheet(design, title=""))
    assert f"scale {1.0 / scale_for(design, Build()):g}:1 on A4" in texts


def test_a_title_full_of_signs_is_shown_as_it_stands() -> None:
    assert "$a_1^2$ \\frac {x} & <y>" in _texts(
        draw_sheet(CORNER, title="$a_1^2$ \\frac {x} & <y>")
    )


def test_nothing_that_large_is_drawn() -> None:
    with pytest.raises(ValueError, match="no scale down to 1:"):
        scale_for(_design(90.0, 1e5, 1e6, 1e6, 1e5, 1.0), Build())


def test_sketches_share_one_scale() -> None:
    three = Reflectors.from_matrix(
        np.concatenate([d.matrix() for d in (CORNER, ODD["narrow"], ODD["flat"])])
    )
    figure = draw_sketches(three, ["smallest", "balanced", "most_margin"], title="Sizes")
    assert_readable(figure)
    boxes = [np.ptp(p.get_xy(), axis=0) for p in figure.axes[0].patches if isinstance(p, Polygon)]
    fronts = sorted(boxes, key=lambda box: -float(box.prod()))[:3]
    scale = float(three.width[0]) / fronts[0][0]
    ratio = sorted((float(box[0]) * scale for box in fronts), reverse=True)
    np.testing.assert_allclose(ratio, sorted(three.width, reverse=True))


@pytest.mark.parametrize("name", ["tall", "broad", "needle"])
def test_one_sketch_is_readable(name: str) -> None:
    assert_readable(draw_sketches(ODD[name], ["smallest"]))


def test_millimetres_carry_no_noise() -> None:
    assert millimetres(0.1 + 0.2) == "300"
    assert millimetres(0.12345) == "123.45"
    assert millimetres(0.12345, decimals=1) == "123.5"


def test_text_that_does_not_fit_reaches_out() -> None:
    assert reach("345", 60.0) == 0.0
    assert reach("345", 8.0) > text_width("345")
