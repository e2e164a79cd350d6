"""Amplitudes of diffracted waves: where closed forms or a library know them, and between points."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from scipy.integrate import quad

from models.ray_sources import Corners
from models.ray_waves import Waves, other_waves, own_waves, runs_of


def corners(angle_deg: list[float], s: np.ndarray, z: np.ndarray) -> Corners:
    """Return corners of w = 1.5, L = 1.2 and S = 0.45 wavelengths, lengths times k."""
    k, n = 2.0 * np.pi, len(angle_deg)
    columns = {
        "apex_angle": np.radians(angle_deg),
        "spacing": np.full(n, 0.45 * k),
        "plate_width": np.full(n, 1.5 * k),
        "plate_length": np.full(n, 1.2 * k),
        "dipole_length": np.full(n, np.pi),
        "s": np.repeat(1.5 * k * s[:, None, None], n, axis=2),
        "z": np.repeat(0.6 * k * z[None, :, None], n, axis=2),
    }
    return Corners(**{name: value.astype(np.float32) for name, value in columns.items()})


def part(waves: Waves, kind: str, order: float, row: int) -> np.ndarray:
    return np.asarray(waves.values[..., waves.starts[kind][order] + row])


PLACES = np.array([0.15, 0.4, 0.8]), np.array([0.1, 0.5, 0.9])


def test_apex_diffracts_nothing_where_images_suffice() -> None:
    # α = 180°/n: the image sum is exact (common practice).
    c = corners([59.5, 60.0, 90.0], *PLACES)
    waves = other_waves(c, 20)
    silent = [np.abs(part(waves, "apex", np.inf, row)).max() for row in range(3)]
    assert silent[0] > 1e-5
    assert max(silent[1:]) < 1e-8


@pytest.mark.parametrize("angle", [52.0, 72.0, 101.0, 127.0])
def test_apex_is_the_integral(angle: float) -> None:
    # scipy does the integral of Oberhettinger and of Biot & Tolstoy over the dipole's exact field.
    c = corners([angle], *PLACES)
    found = part(other_waves(c, 40), "apex", np.inf, 0)
    p, spacing = 180.0 / angle, 0.45 * 2.0 * np.pi

    def kernel(y: float, s: float, z: float) -> complex:
        rho = np.sqrt(spacing**2 + s**2 + 2.0 * spacing * s * np.cosh(y))
        ends = np.sqrt(rho**2 + (z + np.array([1.0, -1.0]) * np.pi / 2.0) ** 2)
        field = 1j / (4.0 * np.pi * rho) * np.exp(-1j * ends).sum()  # half a wave: no middle term
        weight = np.sinh(y) * np.sinh(p * y) / (np.sinh(p * y) ** 2 + np.cos(np.pi * p) ** 2)
        return complex(2.0 * weight * spacing / rho * field)

    for i, j in np.ndindex(3, 3):
        s, z = float(c.s[i, 0, 0]), float(c.z[0, j, 0])
        exact = quad(kernel, 0.0, 16.0, args=(s, z), complex_func=True, limit=400, epsabs=1e-7)[0]
        exact *= -p / np.pi * np.sin(np.pi * p)
        nearest = np.sqrt((spacing + s) ** 2 + z**2)
        assert found[i, j] * np.exp(-1j * nearest) == pytest.approx(exact, abs=5e-5)  # of 0.05 lit


def test_an_end_far_from_its_corners_is_a_straight_edge() -> None:
    # Sommerfeld 1896: next to a straight edge nothing is left out, and nothing spreads.
    c = corners([90.0], np.array([0.5]), np.array([1.0 - 1e-6]))
    size = np.float32(40.0)
    wide = replace(c, spacing=size * c.spacing, plate_width=size * c.plate_width, s=size * c.s)
    assert part(own_waves(wide), "far", 0.5, 0)[0, 0] == pytest.approx(1.0, abs=0.05)


def test_few_points_know_what_is_between() -> None:
    angles = [52.0, 66.0, 81.0, 104.0, 126.0]
    x = np.polynomial.legendre.leggauss(9)[0] / 2.0 + 0.5
    u = np.polynomial.legendre.leggauss(5)[0] / 2.0 + 0.5
    few = other_waves(corners(angles, x, 1.0 - u**2), 6)
    s, root = np.array([0.2, 0.55, 0.9]), np.array([0.3, 0.6, 0.95])
    c = corners(angles, s, 1.0 - root**2)
    there = other_waves(c, 6)

    def through(nodes: np.ndarray, at: np.ndarray) -> np.ndarray:
        rows = [np.polyfit(nodes - 0.5, unit, nodes.size - 1) for unit in np.eye(nodes.size)]
        return np.stack([np.polyval(row, at - 0.5) for row in rows], axis=1).astype(np.float32)

    runs = runs_of(c)
    found = few.of(np.arange(5), runs, through(x, s), through(u, root))
    incident = 1.0 / (2.0 * np.pi * 0.45 * 2.0 * np.pi)
    for kind, values in found.items():
        start = there.starts[kind][runs[kind][0][0]]
        exact = there.values[..., start : start + values.shape[2]]
        assert np.abs(values - exact).max() < 0.02 * incident
        assert np.abs(exact).max() > 1e-3 * incident
