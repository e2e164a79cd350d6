"""The exact infinite corner against closed forms and image sums."""

from __future__ import annotations

import numpy as np
import pytest

from models.images import image_field
from models.wedge import field

HALF_WAVE = np.pi  # kS at S = λ/2


@pytest.mark.parametrize(
    ("angle", "value"), [(50, 3.1073), (70, 4.2920), (80, 4.2237), (120, 2.7470)]
)
def test_on_axis_field_at_half_a_wavelength(angle: float, value: float) -> None:
    # The wedge series summed by hand; derived.
    assert abs(field(np.radians(angle), HALF_WAVE, 0.0)) == pytest.approx(value, abs=1e-4)


@pytest.mark.parametrize("n", [1, 2, 3, 4, 6])
def test_series_is_the_image_sum_where_images_exist(n: int) -> None:
    phi = np.linspace(0.0, 0.49 * np.pi / n, 9)
    spacing = np.array([0.4, 3.0, 9.0])[:, None]
    images = image_field(n, spacing, phi)
    np.testing.assert_allclose(field(np.pi / n, spacing, phi), images, atol=1e-9)


def test_known_values_of_the_right_angle() -> None:
    # Balanis §15.3, from memory: on axis 4 at S = λ/2 and 0 at S = λ.
    assert abs(field(np.pi / 2.0, np.pi, 0.0)) == pytest.approx(4.0)
    assert abs(field(np.pi / 2.0, 2.0 * np.pi, 0.0)) == pytest.approx(0.0, abs=1e-9)


@pytest.mark.parametrize(
    ("n", "spacing", "value"),
    [(3, 0.667, 3.0 * np.sqrt(3.0)), (4, 0.847, 6.397), (6, 1.194, 8.499)],
)
def test_first_maximum_on_axis(n: int, spacing: float, value: float) -> None:
    # Image sums; derived.
    near = np.abs(field(np.pi / n, 2.0 * np.pi * np.linspace(0.9, 1.1, 81) * spacing, 0.0))
    assert near.max() == pytest.approx(value, abs=2e-3)
    assert abs(np.linspace(0.9, 1.1, 81)[near.argmax()] - 1.0) < 0.006


def test_nothing_outside_the_corner_and_continuous_in_the_angle() -> None:
    assert field(np.radians(80.0), 3.0, np.radians(41.0)) == 0.0
    alpha = np.radians([89.999, 90.0, 90.001])
    values = field(alpha, 3.0, 0.3)
    assert np.abs(np.diff(values)).max() < 1e-3
