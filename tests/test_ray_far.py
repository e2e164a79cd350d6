"""Far fields of known currents: the dipole alone, and moments on plates summed one by one."""

from __future__ import annotations

import numpy as np
import pytest

from models.conventions import ETA0, ComplexArray, FloatArray
from models.pattern import CUT_ANGLES
from models.ray_far import far_fields
from models.ray_sources import Corners


def plates(n_s: int, n_z: int) -> Corners:
    """Return four corners with points scattered over their plates, lengths times k."""
    rng = np.random.default_rng(5)
    width, length = np.array([3.0, 7.0, 14.0, 9.0]), np.array([9.0, 4.0, 14.0, 5.0])
    columns = {
        "apex_angle": np.radians([55.0, 90.0, 125.0, 180.0]),
        "spacing": np.array([4.5, 3.0, 2.0, 1.5]),
        "plate_width": width,
        "plate_length": length,
        "dipole_length": np.array([np.pi, 3.0, 2.5, np.pi]),
        "s": rng.uniform(0.0, 1.0, (n_s, 1, 4)) * width,
        "z": rng.uniform(0.0, 0.5, (1, n_z, 4)) * length,
    }
    return Corners(**{name: value.astype(np.float32) for name, value in columns.items()})


def one_by_one(
    c: Corners, moments: list[ComplexArray], row: int, directions: FloatArray
) -> tuple[ComplexArray, ComplexArray]:
    """Return f_θ and f_φ at directions (θ, φ) of one corner: −½ Σ p·(θ̂, φ̂) e^{jr·r'}.

    From the radiation integral, Balanis, Antenna Theory, 4th ed., §12.2.
    """
    theta, phi = directions
    radial = np.stack([np.sin(theta) * np.cos(phi), np.sin(theta) * np.sin(phi), np.cos(theta)])
    rise = np.stack([np.cos(theta) * np.cos(phi), np.cos(theta) * np.sin(phi), -np.sin(theta)])
    turn = np.stack([-np.sin(phi), np.cos(phi), 0.0 * phi])
    half = 0.5 * float(c.dipole_length[row])
    along = np.where(np.sin(theta) < 1e-9, 1.0, np.sin(theta))
    alone = np.where(
        np.sin(theta) < 1e-9, 0.0, (np.cos(half * np.cos(theta)) - np.cos(half)) / along
    )
    f_theta = alone * np.exp(1j * float(c.spacing[row]) * radial[0])
    f_phi = np.zeros_like(f_theta)
    s, z = c.s[:, 0, row].astype(float), c.z[0, :, row].astype(float)
    for side in (1.0, -1.0):
        bend = side * float(c.apex_angle[row]) / 2.0
        slope = np.array([np.cos(bend), np.sin(bend), 0.0])
        for sense in (1.0, -1.0):  # the current along s is odd in z
            for i, j in np.ndindex(s.size, z.size):
                place = s[i] * slope + np.array([0.0, 0.0, sense * z[j]])
                moment = moments[0][row, i, j] * np.array([0.0, 0.0, 1.0])
                moment = moment + sense * moments[1][row, i, j] * slope
                wave = -0.5 * np.exp(1j * np.tensordot(place, radial, 1))
                f_theta = f_theta + wave * np.tensordot(moment, rise, 1)
                f_phi = f_phi + wave * np.tensordot(moment, turn, 1)
    return f_theta, f_phi


def parts(moments: ComplexArray) -> np.ndarray:
    return np.stack([moments.real, moments.imag], axis=1).astype(np.float32)


def test_dipole_alone() -> None:
    # Balanis, Antenna Theory, 4th ed., §4.6: cos(π/2 cosθ)/sinθ and 73 Ω for a half wave.
    c = plates(2, 1)
    none = np.zeros((4, 2, 2, 1), dtype=np.float32)
    h_field, e_field, power = far_fields(c, none, none)
    np.testing.assert_allclose(np.abs(h_field[0]), 1.0, atol=1e-3)
    forward = np.cos(CUT_ANGLES)
    lobe = np.zeros_like(forward)
    ahead = np.abs(forward) > 1e-6
    lobe[ahead] = np.cos(np.pi / 2.0 * np.sin(CUT_ANGLES[ahead])) / np.abs(forward[ahead])
    np.testing.assert_allclose(np.abs(e_field[0]), lobe, atol=1e-3)
    assert ETA0 / np.pi * power[0] == pytest.approx(73.1, abs=0.1)


@pytest.fixture(scope="module")
def scattered() -> tuple[Corners, list[ComplexArray]]:
    rng = np.random.default_rng(6)
    draw = rng.normal(size=(2, 2, 4, 4, 3)) * 0.3
    return plates(4, 3), [draw[0, 0] + 1j * draw[0, 1], draw[1, 0] + 1j * draw[1, 1]]


@pytest.mark.parametrize("row", range(4))
def test_cuts_are_those_of_the_moments(
    scattered: tuple[Corners, list[ComplexArray]], row: int
) -> None:
    c, moments = scattered
    h_field, e_field, _ = far_fields(c, *(parts(moment) for moment in moments))
    level, zenith = np.full_like(CUT_ANGLES, np.pi / 2.0), np.abs(np.pi / 2.0 - CUT_ANGLES)
    behind = np.where(np.pi / 2.0 + 1e-9 < CUT_ANGLES, np.pi, 0.0)
    h_exact, _ = one_by_one(c, moments, row, np.stack([level, CUT_ANGLES]))
    e_exact, _ = one_by_one(c, moments, row, np.stack([zenith, behind]))
    scale = np.abs(h_exact).max()
    np.testing.assert_allclose(h_field[row] / scale, h_exact / scale, atol=3e-4)
    np.testing.assert_allclose(e_field[row] / scale, e_exact / scale, atol=3e-4)


@pytest.mark.parametrize("row", range(4))
def test_power_is_that_of_a_dense_sphere(
    scattered: tuple[Corners, list[ComplexArray]], row: int
) -> None:
    c, moments = scattered
    *_, power = far_fields(c, *(parts(moment) for moment in moments))
    cosine, weights = np.polynomial.legendre.leggauss(40)
    phi = np.arange(80) * (2.0 * np.pi / 80)
    grid = np.stack(np.meshgrid(np.arccos(cosine), phi, indexing="ij")).reshape(2, -1)
    f_theta, f_phi = one_by_one(c, moments, row, grid)
    density = (np.abs(f_theta) ** 2 + np.abs(f_phi) ** 2).reshape(40, 80).mean(axis=1)
    assert power[row] == pytest.approx(density @ weights / 2.0, rel=1e-3)
