"""The basis on the circle: moments against quadrature, static energies against their modal sums."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.integrate import quad
from scipy.special import eval_legendre

from models.aperture import moments, static_energy


@pytest.mark.parametrize("phase", [0.0, 1.3, 40.0])
def test_moments_by_adaptive_quadrature(phase: float) -> None:
    """QUADPACK on the definition, the basis from its closed form (P_{2i} − P_{2i+2})/(4i + 3)."""
    here = moments(np.array([phase]), 4)[0]
    for i, value in enumerate(here):

        def integrand(x: float, i: int = i) -> float:
            y = 2.0 / np.pi * np.arcsin(x)
            basis = (eval_legendre(2 * i, y) - eval_legendre(2 * i + 2, y)) / (4 * i + 3)
            return float(basis * np.cos(phase * x))

        assert value == pytest.approx(quad(integrand, 0.0, 1.0, limit=200)[0], abs=1e-7)


@pytest.mark.parametrize("alpha_deg", [35.0, 90.0, 180.0])
def test_energy_is_the_sum_over_modes(alpha_deg: float) -> None:
    """Logarithmic kernels against the plain sums, whose tails of 1/order are extrapolated away."""
    alpha, count = np.radians(alpha_deg), 3
    half, rest = alpha / 2.0, np.pi - alpha / 2.0

    def modal_sum(top: int) -> np.ndarray:
        # The outer sum in step with the inner ones: as many orders to the radian everywhere.
        mu = np.arange(np.pi, top * alpha, 2.0 * np.pi) / alpha
        nu = np.arange(np.pi, top * 2.0 * rest, 2.0 * np.pi) / (2.0 * rest)
        orders = np.arange(1.0, top)
        front, back = half * moments(mu * half, count), rest * moments(nu * rest, count)
        behind = (-1.0) ** orders[:, None] * rest * moments(orders * rest, count)
        around = np.concatenate([half * moments(orders * half, count), behind], axis=1)
        total = around.T @ (orders[:, None] / np.pi * around)
        total[:count, :count] += front.T @ (2.0 / alpha * mu[:, None] * front)
        total[count:, count:] += back.T @ (1.0 / rest * nu[:, None] * back)
        return np.asarray(total)

    coarse, fine = modal_sum(360), modal_sum(720)
    energy = static_energy(np.array([alpha]), count)[0]
    scale = np.abs(energy).max()
    np.testing.assert_allclose(2.0 * fine - coarse, energy, atol=2e-3 * scale)
    assert np.linalg.eigvalsh(energy).min() > 0.0
