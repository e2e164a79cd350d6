"""Blanks against the closed forms of bending, and sheets against counting by hand."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from models import Build, Reflectors
from optim.cutting import GAP, Blank, blank_of, plate_of, sheet_use

BUILD = Build(sheet_thickness=2e-3)


def _design(angle_deg: float, width: float = 0.345, spacing: float = 0.173) -> Reflectors:
    return Reflectors(
        apex_angle=np.radians(angle_deg),
        spacing=spacing,
        plate_width=width,
        plate_length=0.4,
        dipole_length=0.16,
        dipole_diameter=0.006,
    )


def _blank(angle_deg: float, width: float = 0.345) -> Blank:
    blank = blank_of(_design(angle_deg, width), BUILD)
    assert blank is not None
    return blank


def test_right_angle() -> None:
    # By hand: inside radius 2 mm, neutral line at 2 + 0.84 = 2.84 mm, a quarter turn of it is
    # 4.461 mm; the sharp faces lose 2 mm each: 690 − 4 + 4.461.
    blank = _blank(90.0)
    assert blank.width == pytest.approx(0.690461, abs=1e-6)
    assert blank.length == 0.4
    assert np.degrees(blank.bend_angle) == pytest.approx(90.0)
    # On the bisector the inside of a round of radius r is (√2 − 1)·r in front of the sharp apex.
    assert blank.to_feed == pytest.approx(0.173 - (np.sqrt(2.0) - 1.0) * 2e-3)


@pytest.mark.parametrize("angle_deg", [40.0, 60.0, 90.0, 120.0, 150.0])
def test_bent_up_again_the_rims_stand_where_the_design_has_them(angle_deg: float) -> None:
    # Walk along the inside face: flat, arc of the bend, flat; the flats keep their length.
    blank = _blank(angle_deg)
    flat = (blank.width - blank.bend_zone) / 2.0
    turn, half = blank.bend_angle, np.radians(angle_deg) / 2.0
    centre = np.array([blank.radius / np.sin(half), 0.0])
    tangent = centre + blank.radius * np.array([-np.cos(turn / 2.0), np.sin(turn / 2.0)])
    rim = tangent + flat * np.array([np.cos(half), np.sin(half)])
    np.testing.assert_allclose(rim, 0.345 * np.array([np.cos(half), np.sin(half)]), atol=1e-12)
    # The inside of the round on the bisector, from which the dipole is measured.
    assert centre[0] - blank.radius + blank.to_feed == pytest.approx(0.173)


def test_flat_sheet_has_no_bend() -> None:
    blank = _blank(180.0)
    assert not blank.bent
    assert (blank.width, blank.bend_zone, blank.to_feed) == (0.69, 0.0, 0.173)


def test_bend_that_takes_a_whole_plate_is_refused() -> None:
    # At 5° the round's tangent is 2 mm · tan 87.5° = 45.8 mm from the apex.
    assert blank_of(_design(5.0, width=0.045), BUILD) is None
    assert blank_of(_design(5.0, width=0.047), BUILD) is not None


def test_two_plates_need_no_allowance() -> None:
    plate = plate_of(_design(70.0), BUILD)
    assert (plate.width, plate.length, plate.pieces) == (0.345, 0.4, 2)
    assert not plate.holes


def test_holes_are_on_the_flat_apart_and_inside() -> None:
    blank = _blank(70.0)
    boom, *bracket = blank.holes
    assert (boom.x, boom.y, boom.diameter) == (0.0, 0.0, 0.012)
    assert len(bracket) == 4
    for hole in bracket:
        assert abs(hole.x) - hole.diameter / 2.0 > blank.bend_zone / 2.0
        assert np.hypot(hole.x, hole.y) > (hole.diameter + boom.diameter) / 2.0
        assert abs(hole.x) + hole.diameter < blank.width / 2.0
        assert abs(hole.y) + hole.diameter < blank.length / 2.0
    assert sum(hole.x for hole in bracket) == sum(hole.y for hole in bracket) == 0.0


def test_plates_too_small_for_a_bracket_get_no_holes() -> None:
    assert _blank(90.0, width=0.03).holes == ()


@pytest.mark.parametrize(
    ("width", "length", "count"),
    [
        (0.69, 0.4, 5),  # two by two in 1.39 m of the long side, one turned in the 0.61 m left
        (0.495, 0.495, 8),  # 2 × 4 squares of 0.5 with their gap
        (1.0, 2.0, 1),
        (1.001, 2.0, 0),
        (2.0, 1.0, 1),
    ],
)
def test_sheet_of_one_by_two_metres(width: float, length: float, count: int) -> None:
    piece = Blank(width=width, length=length, thickness=2e-3, to_feed=0.1)
    assert sheet_use(piece, (1.0, 2.0)).count == count


@settings(derandomize=True, max_examples=60, deadline=None)
@given(width=st.floats(0.05, 1.5), length=st.floats(0.05, 1.5))
def test_pieces_never_take_more_than_the_sheet(width: float, length: float) -> None:
    piece = Blank(width=width, length=length, thickness=1e-3, pieces=2, to_feed=0.1)
    turned = Blank(width=length, length=width, thickness=1e-3, pieces=2, to_feed=0.1)
    use = sheet_use(piece, (1.25, 2.5))
    assert 0.0 <= use.used <= 1.0
    assert use.count == sheet_use(turned, (1.25, 2.5)).count
    one_way = int((1.25 + GAP) / (width + GAP)) * int((2.5 + GAP) / (length + GAP))
    assert use.count >= one_way
    assert use.needed * use.count >= (2 if use.count else 0)
