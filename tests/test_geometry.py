"""Designs as arrays: broadcasting, refusals, and sizes by plane geometry."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from models import Reflectors

GOOD: dict[str, Any] = {
    "apex_angle": np.pi / 2.0,
    "spacing": 0.2,
    "plate_width": 0.5,
    "plate_length": 0.6,
    "dipole_length": 0.3,
    "dipole_diameter": 0.01,
}


def test_scalars_and_columns_broadcast() -> None:
    designs = Reflectors(**{**GOOD, "spacing": [0.1, 0.2, 0.3]})
    assert len(designs) == 3
    np.testing.assert_array_equal(designs.plate_width, [0.5, 0.5, 0.5])
    np.testing.assert_array_equal(designs[1].spacing, [0.2])
    np.testing.assert_array_equal(
        Reflectors.from_matrix(designs.matrix()).matrix(), designs.matrix()
    )


def test_sizes_of_a_right_angle() -> None:
    # Plane geometry: a square of side w/√2·2 across, w/√2 deep.
    designs = Reflectors(**GOOD)
    assert designs.width[0] == pytest.approx(0.5 * np.sqrt(2.0))
    assert designs.depth[0] == pytest.approx(0.5 / np.sqrt(2.0))
    assert designs.height[0] == pytest.approx(0.6)
    assert designs.frontal_area[0] == pytest.approx(0.5 * np.sqrt(2.0) * 0.6)
    assert designs.volume[0] == pytest.approx(0.5 * 0.5 * 0.6)
    assert designs.sheet_area[0] == pytest.approx(0.6)
    assert designs.longest_side[0] == pytest.approx(0.5 * np.sqrt(2.0))


def test_clearance_is_that_of_a_rod_between_planes() -> None:
    # 30-60-90 triangle: the axis is half the spacing off either plate.
    design = Reflectors(**{**GOOD, "apex_angle": np.pi / 3.0})
    assert design.clearance[0] == pytest.approx(0.1 - 0.005)


def test_the_dipole_counts_where_it_sticks_out() -> None:
    designs = Reflectors(**{**GOOD, "apex_angle": np.pi, "dipole_length": 0.7})
    assert designs.height[0] == pytest.approx(0.7)
    assert designs.depth[0] == pytest.approx(0.2 + 0.005)
    assert designs.width[0] == pytest.approx(1.0)


@pytest.mark.parametrize(
    ("name", "value", "message"),
    [
        ("apex_angle", 4.0, "apex_angle: 4.0 given, allowed: above 0 and at most π"),
        ("spacing", -0.1, "spacing: -0.1 given, allowed: finite, above 0"),
        ("plate_width", np.nan, "plate_width: nan given"),
        ("dipole_diameter", 0.0, "dipole_diameter: 0.0 given"),
        ("plate_length", [[1.0]], "one dimension"),
        ("spacing", [1.0, 2.0], "one length or scalars"),
    ],
)
def test_bad_columns_are_named(name: str, value: object, message: str) -> None:
    given: dict[str, Any] = {**GOOD, "plate_length": [0.6, 0.6, 0.6], name: value}
    with pytest.raises(ValueError, match=message):
        Reflectors(**given)


def test_designs_cannot_be_changed() -> None:
    designs = Reflectors(**GOOD)
    with pytest.raises(ValueError, match="read-only"):
        designs.spacing[0] = 1.0
