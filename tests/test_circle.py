"""Conservation of power for a line source before two plates, feed inside and outside the circle."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.special import jv

from models.circle import circle_for

TAU = 2.0 * np.pi


def radiated(harmonics: np.ndarray) -> np.ndarray:
    """Power over that of the line source alone: Parseval on Σ f_l cos lφ."""
    square = np.abs(harmonics) ** 2
    return np.asarray(square[:, 0] / 2.0 + square.sum(axis=1) / 2.0)


@pytest.mark.parametrize("alpha_deg", [30.0, 77.0, 90.0, 140.0, 180.0])
def test_feed_inside(alpha_deg: float) -> None:
    """Poynting's theorem: what the feed's own field takes in is what goes far away."""
    alpha = np.radians(alpha_deg)
    k = TAU * np.array([0.05, 0.6, 1.0])
    spacing, width = 0.45 * k, 0.9 * k
    circle = circle_for(alpha, spacing.max(), width.max())
    orders = np.arange(1.0, 400.0, 2.0) * np.pi / alpha
    corner = 4.0 * np.pi / alpha * (jv(orders, spacing[:, None]) ** 2).sum(axis=1)
    taken = corner + circle.reflected_inside(spacing, width).real
    np.testing.assert_allclose(radiated(circle.inside(spacing, width)), taken, atol=1e-7)


@pytest.mark.parametrize("alpha_deg", [30.0, 77.0, 90.0, 140.0, 180.0])
def test_feed_outside(alpha_deg: float) -> None:
    k = TAU * np.array([0.05, 0.6, 1.0])
    spacing, width = 0.8 * k, 0.5 * k
    circle = circle_for(np.radians(alpha_deg), spacing.max(), width.max())
    taken = 1.0 + circle.reflected_outside(spacing, width).real
    np.testing.assert_allclose(radiated(circle.outside(spacing, width)), taken, atol=1e-7)


def test_evanescent_fields_store_and_do_not_radiate() -> None:
    """At x = −jγ the reflected field is in quadrature with the feed's power, and dies away."""
    gamma = np.array([1.0, 5.0, 25.0])
    circle = circle_for(np.pi / 2.0, TAU, TAU)
    for spacing, width, carry in (
        (0.5, 1.0, circle.reflected_inside),
        (0.9, 0.6, circle.reflected_outside),
    ):
        reflected = carry(-1j * gamma * spacing, -1j * gamma * width)
        np.testing.assert_allclose(reflected.real, 0.0, atol=1e-12)
        assert np.all(np.diff(np.abs(reflected.imag)) < 0.0)
