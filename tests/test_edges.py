"""Fresnel's tail and Sommerfeld's half-plane against published and library values."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.special import erfc

from models.edges import hard, root, seen_part, shed, soft, spread, still, tail, transition, turn


@pytest.mark.parametrize(
    ("x", "value"),
    [
        (0.01, 0.1242 + 0.1066j),
        (0.1, 0.3681 + 0.2345j),
        (0.5, 0.6768 + 0.2682j),
        (1.0, 0.8095 + 0.2322j),
        (2.3, 0.9240 + 0.1577j),
        (5.5, 0.9797 + 0.0828j),
    ],
)
def test_transition_function(x: float, value: complex) -> None:
    # F(x) of Kouyoumjian & Pathak, Proc. IEEE 62 (1974), from its definition; derived.
    assert complex(transition(x)) == pytest.approx(value, abs=1e-4)


def test_tail_is_the_complementary_error_function() -> None:
    # Q(ζ) = ½ erfc(e^{jπ/4} ζ); scipy is the reference.
    zeta = np.linspace(0.0, 31.0, 40_001).astype(np.float32)
    exact = 0.5 * erfc(np.exp(0.25j * np.pi) * zeta.astype(np.float64))
    assert np.abs(tail(zeta) - exact).max() < 3e-5
    far = np.array([40.0, 1e4])
    size = 1.0 / (2.0 * np.sqrt(np.pi) * far)  # leading term, Abramowitz & Stegun 7.1.23
    np.testing.assert_allclose(np.abs(still(far.astype(np.float32))), size, rtol=0.02, atol=2e-5)


def test_root_of_a_detour_that_rounding_made_negative() -> None:
    assert root(np.array([-1e-5, 4.0], dtype=np.float32)) == pytest.approx([0.0, 2.0], abs=1e-5)


def test_turn_is_a_phase() -> None:
    phase = np.linspace(-300.0, 300.0, 10_001).astype(np.float32)
    assert np.abs(turn(phase) - np.exp(-1j * phase.astype(np.float64))).max() < 1e-6


def half_plane_current(
    zeta_max: float, incidence: float
) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Sommerfeld's total field on both faces of a half-plane, E along the edge, by differences."""
    kr = np.linspace(0.2, zeta_max, 30)

    def u(kr: np.ndarray, psi: np.ndarray | float) -> np.ndarray:
        argument = -np.sqrt(2.0 * kr) * np.cos(np.asarray(psi) / 2.0)
        return np.asarray(
            0.5 * np.exp(1j * kr * np.cos(psi)) * erfc(np.exp(0.25j * np.pi) * argument)
        )

    def slope(kr: np.ndarray, phi: float) -> np.ndarray:
        step = 1e-5
        total = [u(kr, p - incidence) - u(kr, p + incidence) for p in (phi - step, phi + step)]
        return np.asarray((total[1] - total[0]) / (2.0 * step))

    current = slope(kr, 0.0) - slope(kr, 2.0 * np.pi)
    optics = 2j * kr * np.sin(incidence) * np.exp(1j * kr * np.cos(incidence))
    zeta = np.sqrt(2.0 * kr) * np.cos(incidence / 2.0)
    return zeta, current, optics


@pytest.mark.parametrize("incidence", [0.5, 1.4, 2.3])
def test_soft_is_the_half_plane_current(incidence: float) -> None:
    # Sommerfeld 1896: both faces of the half-plane together, from the field itself.
    zeta, current, optics = half_plane_current(30.0, incidence)
    np.testing.assert_allclose(
        soft(zeta.astype(np.float32)) * optics, current, rtol=3e-3, atol=2e-3
    )


def test_hard_vanishes_at_the_edge_and_is_one_far_from_it() -> None:
    assert abs(hard(np.zeros(1, dtype=np.float32))[0]) < 1e-6
    assert abs(hard(np.array([25.0], dtype=np.float32))[0] - 1.0) < 0.03
    assert abs(soft(np.array([25.0], dtype=np.float32))[0] - 1.0) < 1e-4


def test_seen_part_is_continuous_where_the_ray_meets_the_edge() -> None:
    zeta = np.array([1e-4], dtype=np.float32)
    inside = seen_part(zeta, np.array([1.0], dtype=np.float32))
    beyond = seen_part(zeta, np.array([-1.0], dtype=np.float32))
    assert abs(inside - beyond)[0] < 3e-4
    assert inside[0] == pytest.approx(0.5, abs=1e-3)


def test_shed_and_spread() -> None:
    one = np.ones(1, dtype=np.float32)
    assert abs(shed(one)[0]) == pytest.approx(1.0 / np.sqrt(np.pi), rel=1e-6)
    assert spread(one, one)[0] == pytest.approx(1.0)
    assert spread(one, 2.0 * one)[0] == pytest.approx(np.sqrt(2.0 / 6.0))
