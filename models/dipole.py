"""The dipole with a sinusoidal current: far field, near field, self and mutual impedance.

Along z, centre at the origin, current I·sin(k(h−|z|)) with half-length h; quantities are referred
to the current maximum I. Impedances in Ω, fields in V/m, lengths in m. Valid for thin wires near
resonance; the current of a solved dipole is `models.moment`'s business.

Source: Balanis, *Antenna Theory*, 4th ed., §4.5 and §8.5-8.6 (induced EMF); Carter 1932.
"""

from __future__ import annotations

from typing import Final

import numpy as np
from numpy.typing import ArrayLike
from scipy.special import sici

from models.conventions import ETA0, ComplexArray, FloatArray

__all__ = ["far_field", "mutual_impedance", "near_field", "terminal"]

_SCALE: Final = ETA0 / (4.0 * np.pi)  # the textbooks' 30 Ω, to five more digits


def far_field(
    wavenumber: ArrayLike, length: ArrayLike, sine: ArrayLike, cosine: ArrayLike
) -> FloatArray:
    """Return the field factor (cos(kh·cosθ) − cos kh)/sinθ; 1 broadside for a half-wave dipole.

    Parameters
    ----------
    wavenumber, length : array_like
        k (rad/m) and the dipole's full length (m); broadcast against the angles.
    sine, cosine : array_like
        sinθ and cosθ of the angle θ from the dipole's axis; 0 is returned on the axis.
    """
    half = np.asarray(wavenumber) * np.asarray(length) / 2.0
    sine, cosine = np.asarray(sine), np.asarray(cosine)
    with np.errstate(divide="ignore", invalid="ignore"):
        factor = (np.cos(half * cosine) - np.cos(half)) / np.abs(sine)
    return np.asarray(np.where(np.abs(sine) < 1e-9, 0.0, factor))


def near_field(
    wavenumber: ArrayLike, length: ArrayLike, distance: ArrayLike, z: ArrayLike
) -> ComplexArray:
    """Return E_z for I = 1 A at transverse `distance` (m) and height `z` (m), V/m; broadcasts."""
    k, half = np.asarray(wavenumber), np.asarray(length) / 2.0
    distance, z = np.asarray(distance), np.asarray(z)

    def wave(offset: FloatArray | float) -> ComplexArray:
        radius = np.sqrt(distance**2 + (z - offset) ** 2)
        return np.asarray(np.exp(-1j * k * radius) / radius)

    return np.asarray(
        -1j * _SCALE * (wave(half) + wave(-half) - 2.0 * np.cos(k * half) * wave(0.0))
    )


def mutual_impedance(wavenumber: ArrayLike, length: ArrayLike, distance: ArrayLike) -> ComplexArray:
    """Return the impedance between two side-by-side dipoles, referred to the current maxima, Ω.

    Parameters
    ----------
    wavenumber, length, distance : array_like
        k (rad/m), full length of both (m), distance of their axes (m, above 0); broadcast. The
        wire's radius for a distance gives the self impedance.
    """
    k, d = np.asarray(wavenumber, dtype=np.float64), np.asarray(distance, dtype=np.float64)
    h = np.asarray(length, dtype=np.float64) / 2.0

    def integral(sign: int, centre: FloatArray) -> ComplexArray:
        # ∫₀ʰ e^{-jk(R + sign·z)}/R dz with R² = d² + (z − centre)²; u = R + sign·(z − centre).
        def span(z: FloatArray) -> FloatArray:
            t = sign * (z - centre)
            radius = np.sqrt(d**2 + t**2)
            # Where t < 0 the plain sum cancels; d²/(R − t) is the same number.
            return np.asarray(np.where(t >= 0.0, radius + t, d**2 / (radius - np.minimum(t, 0.0))))

        start, stop = _exponential(k * span(np.zeros_like(h))), _exponential(k * span(h))
        return np.asarray(np.exp(-1j * k * sign * centre) * sign * (start - stop))

    def against(centre: FloatArray) -> ComplexArray:
        # 2∫₀ʰ sin(k(h − z))·e^{-jkR}/R dz
        ahead, back = integral(1, centre), integral(-1, centre)
        return np.asarray((np.exp(1j * k * h) * ahead - np.exp(-1j * k * h) * back) / 1j)

    ends = against(h) + against(-h)
    return np.asarray(1j * _SCALE * (ends - 2.0 * np.cos(k * h) * against(np.zeros_like(h))))


def terminal(impedance: ComplexArray, wavenumber: ArrayLike, length: ArrayLike) -> ComplexArray:
    """Refer an impedance at the current maximum to the gap: divide by sin²(kh)."""
    return np.asarray(impedance / np.sin(np.asarray(wavenumber) * np.asarray(length) / 2.0) ** 2)


def _exponential(x: FloatArray) -> ComplexArray:
    """Return E₁(jx) = −Ci(x) + j(Si(x) − π/2) for x > 0."""
    sine, cosine = sici(x)
    return np.asarray(-cosine + 1j * (sine - np.pi / 2.0))
