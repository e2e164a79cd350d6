"""The sinusoidal dipole against handbook values and its own far field."""

from __future__ import annotations

import numpy as np
import pytest

from models.conventions import ETA0
from models.dipole import far_field, mutual_impedance, near_field, terminal

K = 2.0 * np.pi


def test_self_impedance_of_a_thin_half_wave_dipole() -> None:
    # Balanis, Antenna Theory, ch. 8: 73.08 + j42.5 Ω in the limit of zero radius.
    impedance = complex(mutual_impedance(K, 0.5, 1e-7))
    assert impedance.real == pytest.approx(73.08, abs=0.01)
    assert impedance.imag == pytest.approx(42.5, abs=0.05)


@pytest.mark.parametrize(
    ("distance", "value"),
    [
        (0.25, 40.76 - 28.33j),
        (0.50, -12.52 - 29.91j),
        (0.75, -22.48 + 6.63j),
        (1.00, 4.01 + 17.73j),
        (1.50, -1.89 - 12.30j),
        (2.00, 1.08 + 9.36j),
    ],
)
def test_mutual_impedance_of_half_wave_dipoles(distance: float, value: complex) -> None:
    # Induced EMF in closed form, Carter 1932, King 1957; values derived from it.
    assert complex(mutual_impedance(K, 0.5, distance)) == pytest.approx(value, abs=0.011)


def test_mutual_impedance_is_the_near_field_on_the_other_current() -> None:
    # The definition Z = −∫E·I dz, by Gauss-Legendre, for a length that is not half a wave.
    length, distance = 0.43, 0.31
    nodes, weights = np.polynomial.legendre.leggauss(40)
    z = length / 4.0 * (nodes + 1.0)
    field = near_field(K, length, distance, z)
    current = np.sin(K * (length / 2.0 - z))
    integral = -2.0 * (field * current * weights).sum() * length / 4.0
    assert complex(mutual_impedance(K, length, distance)) == pytest.approx(integral, rel=1e-10)


def test_radiated_power_is_the_self_resistance() -> None:
    # D = |f|²/power with power = πR/η: the mean of |f|² over the sphere has to be the power.
    for length in (0.35, 0.5, 0.62):
        nodes, weights = np.polynomial.legendre.leggauss(60)
        f = far_field(K, length, np.sqrt(1.0 - nodes**2), nodes)
        mean = (f**2 * weights).sum() / 2.0
        resistance = complex(mutual_impedance(K, length, 1e-7)).real
        assert mean == pytest.approx(np.pi * resistance / ETA0, rel=1e-6)


def test_half_wave_pattern() -> None:
    # Balanis: 2.15 dBi and a beamwidth of 78° (78.08 from cos(90° cosθ)/sinθ).
    theta = np.radians(90.0 - 78.08 / 2.0)
    assert far_field(K, 0.5, 1.0, 0.0) == pytest.approx(1.0)
    assert far_field(K, 0.5, np.sin(theta), np.cos(theta)) == pytest.approx(np.sqrt(0.5), abs=1e-3)
    assert far_field(K, 0.5, 0.0, 1.0) == 0.0


def test_terminal_impedance_of_a_half_wave_dipole_is_that_at_the_maximum() -> None:
    assert terminal(np.array(73.1 + 42.5j), K, 0.5) == pytest.approx(73.1 + 42.5j)
    assert abs(terminal(np.array(50.0 + 0j), K, 0.4)) > 50.0
