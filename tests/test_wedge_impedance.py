"""The dipole's impedance in the infinite corner: images, power through the corner, continuity."""

from __future__ import annotations

import numpy as np
import pytest

from models import wedge
from models.conventions import ETA0
from models.dipole import far_field, mutual_impedance
from models.wedge_impedance import added_impedance, impedance, radiation_resistance

TAU = 2.0 * np.pi


# Kraus, Antennas, corner-reflector chapter: sums of mutual resistances; half-wave dipole.
@pytest.mark.parametrize(
    ("alpha_deg", "spacing", "resistance"),
    [(90, 0.25, 27.2), (90, 0.35, 71.7), (90, 0.50, 126.3), (60, 0.50, 71.2), (60, 0.65, 138.2)],
)
def test_terminal_resistance_of_corners(
    alpha_deg: float, spacing: float, resistance: float
) -> None:
    here = radiation_resistance(np.radians(alpha_deg), TAU * spacing, np.pi)
    assert here == pytest.approx(resistance, abs=0.06)


def test_half_wave_dipole_alone() -> None:
    """Balanis, *Antenna Theory*: 73.08 + j42.5 Ω, here before a sheet 500 λ away."""
    far = impedance(np.pi, TAU * 500.25, np.pi, 1e-6)
    assert far == pytest.approx(73.08 + 42.5j, abs=0.15)


@pytest.mark.parametrize("n", [1, 2, 3, 4, 6])
def test_image_sums(n: int) -> None:
    """At 180°/n: the mutual impedances (Carter 1932) of the feed's images, signs alternating."""
    alpha = np.pi / n
    spacing, length = np.meshgrid([0.15, 0.4, 0.9, 2.0], [0.35, 0.5, 0.6])
    distances = [2.0 * spacing * np.sin(m * alpha / 2.0) for m in range(1, 2 * n)]
    images = sum(
        (-1) ** m * mutual_impedance(TAU, length, distance)
        for m, distance in enumerate(distances, 1)
    )
    here = added_impedance(alpha, TAU * spacing, TAU * length)
    np.testing.assert_allclose(here, images, atol=1e-3)


def test_resistance_is_the_power_through_the_corner() -> None:
    """The far field's power (Harrington 1961 §5, another series altogether) over the sphere."""
    generator = np.random.default_rng(3)
    alpha = np.radians(generator.uniform(25.0, 180.0, 60))
    spacing, length = TAU * generator.uniform(0.15, 1.5, 60), TAU * generator.uniform(0.3, 0.65, 60)
    nodes, weights = np.polynomial.legendre.leggauss(40)
    cosine, turn = (nodes + 1.0) / 2.0, (nodes + 1.0) / 2.0
    sine = np.sqrt(1.0 - cosine**2)
    for a, ks, kl, here in zip(
        alpha, spacing, length, radiation_resistance(alpha, spacing, length), strict=True
    ):
        field = wedge.field(a, ks * sine[:, None], turn * a / 2.0)
        through = np.abs(field) ** 2 @ (weights / 2.0) * a
        lobe = far_field(1.0, kl, sine, cosine)
        there = ETA0 / (2.0 * np.pi**2) * np.sum(weights / 2.0 * lobe**2 * through)
        assert here == pytest.approx(there, abs=0.01)


@pytest.mark.parametrize("n", [1, 2, 3, 5])
def test_continuous_in_the_apex_angle(n: int) -> None:
    """Images come and go at 180°/n; what they leave is carried by the apex' diffraction."""
    step = np.array([-2e-4, -1e-4, 0.0, 1e-4, 2e-4])[: 5 if n > 1 else 3]
    here = added_impedance(np.pi / n + step, TAU * 0.4, np.pi)
    np.testing.assert_allclose(np.diff(here, n=2), 0.0, atol=5e-4)


def test_reactance_between_the_images_angles() -> None:
    """The impedance is smooth in 1/α: a polynomial through the image sums at 180°/1 … 180°/8.

    The polynomial itself is good to about an ohm, which is what is asked; a lost or doubled image
    is tens of ohms.
    """
    exact = np.pi / np.arange(1.0, 9.0)
    values = np.array(
        [
            sum(
                (-1) ** m * mutual_impedance(TAU, 0.5, 0.4 * np.sin(m * a / 2.0))
                for m in range(1, 2 * n)
            )
            for n, a in enumerate(exact, 1)
        ]
    )
    curve = np.polynomial.Polynomial.fit(1.0 / exact, values.imag, 7)
    alpha = np.radians([40.0, 70.0, 80.0])
    here = added_impedance(alpha, TAU * 0.2, np.pi)
    np.testing.assert_allclose(here.imag, curve(1.0 / alpha), atol=1.0)


def test_valid_range() -> None:
    inside = added_impedance(np.radians([30.0, 180.0]), 0.5, [0.7, 6.2])
    outside = added_impedance(np.radians([30.0, 30.0, 181.0]), [0.5, 0.1, 0.5], [6.5, 3.0, 3.0])
    assert np.isfinite(inside).all()
    assert np.isnan(outside.real).all()
    assert np.isnan(outside.imag).all()


def test_batch_is_the_sum_of_its_rows() -> None:
    alpha, ks = np.radians([33.0, 77.0, 90.0, 141.0]), np.array([1.0, 3.0, 2.0, 5.0])
    batch = added_impedance(alpha, ks, np.pi)
    single = [complex(added_impedance(a, s, np.pi)) for a, s in zip(alpha, ks, strict=True)]
    np.testing.assert_allclose(batch, single, rtol=1e-12)
