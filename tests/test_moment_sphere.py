"""The whole sphere agrees with the cuts, its integral with the power, and symmetry holds."""

from __future__ import annotations

import numpy as np
import pytest

import models
from models import Reflectors, radiate
from models.conventions import FloatArray
from models.pattern import CUT_ANGLES, Sphere

DESIGNS = Reflectors(
    apex_angle=np.radians([90.0, 55.0]),
    spacing=[0.5, 0.6],
    plate_width=[0.9, 1.2],
    plate_length=[1.0, 0.8],
    dipole_length=0.46,
    dipole_diameter=0.01,
)
FREQUENCIES = np.array([290e6, 310e6])


@pytest.fixture(scope="module")
def cuts() -> models.pattern.Pattern:
    return radiate(DESIGNS, FREQUENCIES)


def _sphere(theta: FloatArray, phi: FloatArray) -> Sphere:
    return models.sphere(DESIGNS, FREQUENCIES, theta=theta, phi=phi)


def test_agrees_with_both_cuts(cuts: models.pattern.Pattern) -> None:
    turn = CUT_ANGLES[::5]
    flat = _sphere(np.array([np.pi / 2.0]), turn)
    scale = np.abs(cuts.h_field).max()
    assert np.abs(flat.theta_field[:, :, 0] - cuts.h_field[..., ::5]).max() < 1e-4 * scale
    # On the way over the zenith the rear half of the E-plane has φ = π.
    elevated = np.asarray(np.abs(np.pi / 2.0 - turn), dtype=np.float64)
    upright = _sphere(elevated, np.array([0.0, np.pi]))
    ahead = turn <= np.pi / 2.0 + 1e-9
    e_plane = np.where(ahead, upright.theta_field[..., 0], upright.theta_field[..., 1])
    # At the zenith θ has no one direction; nothing radiates along the dipole's own axis but the
    # plates, and both signs are the same field.
    away = np.abs(turn - np.pi / 2.0) > 1e-9
    assert np.abs(e_plane - cuts.e_field[..., ::5])[..., away].max() < 1e-4 * scale
    assert np.abs(flat.phi_field).max() < 1e-12 * scale


def test_integral_is_the_power() -> None:
    # Gauss-Legendre in cosθ and equal steps in φ: exact for the harmonics of plates this small.
    nodes, weights = (np.asarray(x) for x in np.polynomial.legendre.leggauss(24))
    steps = 48
    theta = np.asarray(np.arccos(nodes), dtype=np.float64)
    around = _sphere(theta, np.linspace(0.0, 2.0 * np.pi, steps, endpoint=False))
    square = np.abs(around.theta_field) ** 2 + np.abs(around.phi_field) ** 2
    mean = square.mean(axis=-1) @ weights / 2.0
    # The model vouches for its power balance to 0.05 dB, 1.2 %.
    np.testing.assert_allclose(mean, around.power, rtol=0.012)
    theta_gain, phi_gain = around.gains()
    total = (theta_gain + phi_gain).mean(axis=-1) @ weights / 2.0
    np.testing.assert_allclose(total, around.efficiency, rtol=0.012)
    assert (phi_gain.max(axis=(-1, -2)) > 1e-3 * theta_gain.max(axis=(-1, -2))).all()


def test_mirror_symmetry() -> None:
    theta, phi = np.radians([40.0, 70.0, 110.0, 140.0]), np.radians([-100.0, -30.0, 30.0, 100.0])
    around = _sphere(theta, phi)
    for field, upside_down, sideways in (
        (around.theta_field, 1.0, 1.0),
        (around.phi_field, -1.0, -1.0),
    ):
        np.testing.assert_allclose(field[:, :, ::-1], upside_down * field, atol=1e-5)
        np.testing.assert_allclose(field[..., ::-1], sideways * field, atol=1e-5)


def test_models_of_cuts_alone_are_refused_by_name() -> None:
    with pytest.raises(ValueError, match="model: 'image' given, allowed: moment"):
        models.sphere(DESIGNS, FREQUENCIES, theta=1.0, phi=0.0, model="image")
