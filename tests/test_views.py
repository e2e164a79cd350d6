"""The views carry the numbers of the design, and shapes are the design's at the scale."""

from __future__ import annotations

import numpy as np
import pytest

from models import Reflectors
from optim.drawing import draw_sheet
from optim.views import shape_of, words_of
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
    # Closed forms: box width 2w sin 45° = 487.9 mm, depth w cos 45° = 244.0 mm.
    numbers = {"345", "690", "173", "162", "487.9", "244", "dipole ⌀ 6", "apex angle 90°"}
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
    assert words_of(_corner(angle_deg)).bend == bend


def test_shape_is_the_design_at_the_scale() -> None:
    shape = shape_of(_corner(60.0), 5.0)
    # 345 mm at 1:5 is 69 mm; sin 30° and cos 30° of it are the half width and the rim.
    assert (shape.plate, shape.half_width, shape.rim) == pytest.approx(
        (69.0, 34.5, 59.756), abs=1e-3
    )
    assert (shape.spacing, shape.dipole, shape.height) == pytest.approx((34.6, 32.4, 69.0))
