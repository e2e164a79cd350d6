"""The views carry the numbers of the design, and shapes are the design's at the scale."""

from __future__ import annotations

import io

import numpy as np
import pytest
from ezdxf.entities.lwpolyline import LWPolyline
from ezdxf.filemanagement import read
from matplotlib.patches import Circle, Polygon

from models import Build, Reflectors
from optim.drawing import draw_sheet, scale_for
from optim.dxf import blank_dxf
from optim.views import piece_of, shape_of, words_of
from tests.picture_checks import words_of as texts_of


def _corner(angle_deg: float) -> Reflectors:
    return Reflectors(
        apex_angle=np.radians(angle_deg),
        spacing=0.173,
        plate_width=0.345,
        plate_length=0.345,
        dipole_length=0.162,
        dipole_diameter=0.006,
    )


def test_dimensions_say_the_designs_numbers() -> None:
    sheet = draw_sheet(_corner(90.0), title="", band_hz=(863e6, 870e6))
    texts = {words.text for words in texts_of(sheet)}
    # Flat: 690 − 2·2 + (π/2)·2.84 = 690.46 mm for sheet and inside radius of 2 mm.
    # Closed forms: box width 2w sin 45° = 487.9 mm, depth w cos 45° = 244.0 mm.
    numbers = {
        "345",
        "690.5",
        "345.2",
        "173",
        "162",
        "487.9",
        "244",
        "dipole ⌀ 6",
        "apex angle 90°",
    }
    assert numbers | {"bend line: bend by 90°", "863 to 870 MHz"} <= texts


@pytest.mark.parametrize(
    ("angle_deg", "bend"),
    [
        (40.0, "bend line: bend by 140°"),
        (122.5, "bend line: bend by 57.5°"),
        (180.0, "flat, no bend"),
    ],
)
def test_bend_is_what_the_sheet_is_turned_by(angle_deg: float, bend: str) -> None:
    assert words_of(_corner(angle_deg), Build()).bend == bend


def test_shape_is_the_design_at_the_scale() -> None:
    shape = shape_of(_corner(60.0), 5.0, Build())
    # 345 mm at 1:5 is 69 mm; sin 30° and cos 30° of it are the half width and the rim.
    assert (shape.plate, shape.half_width, shape.rim) == pytest.approx(
        (69.0, 34.5, 59.756), abs=1e-3
    )
    assert (shape.spacing, shape.dipole, shape.height) == pytest.approx((34.6, 32.4, 69.0))


def test_flat_sheet_is_that_of_the_drawing_for_the_machine() -> None:
    design, build = _corner(70.0), Build(sheet_thickness=3e-3)
    axes = draw_sheet(design, title="", build=build).axes[0]
    paper = 1.0 / scale_for(design, build)
    space = read(io.StringIO(blank_dxf(piece_of(design, build), name=""))).modelspace()
    (outline,) = space.query("LWPOLYLINE")
    assert isinstance(outline, LWPolyline)
    corners = np.array(outline.get_points("xy"))
    boxes = [np.ptp(p.get_xy(), axis=0) for p in axes.patches if isinstance(p, Polygon)]
    flat = np.ptp(corners, axis=0) * paper
    assert any(np.allclose(box, flat, atol=1e-6) for box in boxes)
    drawn = sorted(2.0 * p.get_radius() for p in axes.patches if isinstance(p, Circle))
    cut = sorted(2.0 * paper * hole.dxf.radius for hole in space.query("CIRCLE"))
    np.testing.assert_allclose(drawn, cut)
    texts = {words.text for words in texts_of(draw_sheet(design, title="", build=build))}
    assert f"{np.ptp(corners[:, 0]):.1f}" in texts


def test_plates_that_cannot_be_bent_from_one_sheet_are_drawn_as_two() -> None:
    words = words_of(_corner(0.3), Build())
    assert (words.flat, words.blank, words.bend) == ("One of two plates", "345", "flat, no bend")
