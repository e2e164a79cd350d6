"""`image`: infinite plates at α = 180°/n, the feed and its 2n − 1 images, a sinusoidal dipole.

Gives the beam inside the corner, nothing behind it. Other apex angles have no image system: NaN.

Source: Kraus, *Antennas*, corner-reflector chapter; Balanis, *Antenna Theory*, §15.3.
"""

from __future__ import annotations

from typing import Final

import numpy as np

from models.conventions import ETA0, ComplexArray, FloatArray, wavenumber
from models.dipole import far_field, mutual_impedance, terminal
from models.geometry import Reflectors
from models.pattern import CUT_ANGLES, Pattern

__all__ = ["image_count", "image_field", "radiate"]

ANGLE_TOLERANCE: Final = 1e-6
"""How near 180°/n an apex angle must be, radians."""


def image_count(apex_angle: FloatArray) -> FloatArray:
    """Return n for α = 180°/n, NaN for other angles, (n,)."""
    n = np.round(np.pi / apex_angle)
    return np.where(np.abs(np.pi / np.maximum(n, 1.0) - apex_angle) < ANGLE_TOLERANCE, n, np.nan)


def image_field(n: int, k_spacing: FloatArray, phi: FloatArray) -> ComplexArray:
    """Return the sum over feed and images, relative to the feed alone, towards φ (broadcast)."""
    alpha = np.pi / n
    total = np.zeros(np.broadcast_shapes(k_spacing.shape, phi.shape), dtype=np.complex128)
    for m in range(2 * n):
        total += (-1) ** m * np.exp(1j * k_spacing * np.cos(phi - m * alpha))
    return total


def radiate(reflectors: Reflectors, frequencies_hz: FloatArray) -> Pattern:
    """Return the pattern of every design (n) at every frequency (n_freq); valid for wide plates."""
    k = wavenumber(frequencies_hz)
    angles, shape = CUT_ANGLES, (len(reflectors), k.size)
    h_field = np.full((*shape, angles.size), np.nan + 0j)
    e_field = h_field.copy()
    impedance = np.full(shape, np.nan + 0j)
    counts = image_count(reflectors.apex_angle)
    for n in np.unique(counts[~np.isnan(counts)]).astype(int):
        rows = np.flatnonzero(counts == n)
        ks = reflectors.spacing[rows, None, None] * k[:, None]
        length = reflectors.dipole_length[rows, None]
        inside = angles < np.pi / (2 * n) - 1e-9
        sine, cosine = np.cos(angles), np.sin(angles)  # θ is measured from the dipole
        broadside = far_field(k, length, 1.0, 0.0)[..., None]
        h_field[rows] = image_field(n, ks, angles) * broadside * inside
        lobe = far_field(k[:, None], length[..., None], sine, cosine)
        front = angles < np.pi / 2.0
        e_field[rows] = image_field(n, ks * np.abs(sine), np.zeros(1)) * lobe * front
        impedance[rows] = _impedance(n, reflectors[rows], k)
    gap = terminal(impedance, k, reflectors.dipole_length[:, None])
    return Pattern(
        angles=angles,
        h_field=h_field,
        e_field=e_field,
        power=np.pi / ETA0 * impedance.real,
        resistance=gap.real,
        reactance=gap.imag,
        efficiency=np.ones(shape) + 0.0 * impedance.real,
        doubt_db=np.full(shape, np.nan),
    )


def _impedance(n: int, reflectors: Reflectors, k: FloatArray) -> ComplexArray:
    """Return self plus mutual impedances with alternating signs, at the current maximum, Ω."""
    length = reflectors.dipole_length[:, None]
    total = mutual_impedance(k, length, reflectors.dipole_diameter[:, None] / 2.0)
    for m in range(1, 2 * n):
        distance = 2.0 * reflectors.spacing[:, None] * np.sin(m * np.pi / (2 * n))
        total = total + (-1) ** m * mutual_impedance(k, length, distance)
    return total
