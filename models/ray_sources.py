"""The corners as `ray` holds them, and the dipole with its images: exact near fields for 1 A.

Lengths are times k, angles in radians; the fields are those of a sinusoidal current, in units that
go with lengths in 1/k. Points come first and corners last: the long axis has to be the inner one
for speed.

Source: Balanis, *Antenna Theory*, 4th ed., §8.5 (near field of a dipole).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from models.conventions import ETA0
from models.edges import SingleArray, WaveArray, turn

__all__ = ["Corners", "Sources", "axial_field", "lobe", "magnetic_field"]


@dataclass(frozen=True, kw_only=True, eq=False)
class Corners:
    """Corners in order of rising apex angle, and the points on their plates; lengths times k.

    Points come first and corners last here: the long axis has to be the inner one for speed.

    Parameters
    ----------
    apex_angle, spacing, plate_width, plate_length, dipole_length : (n,)
        Radians, and lengths times k.
    s, z : (n_s, 1, n), (1, n_z, n)
        Distance from the apex line, and height over the middle, z >= 0.
    """

    apex_angle: SingleArray
    spacing: SingleArray
    plate_width: SingleArray
    plate_length: SingleArray
    dipole_length: SingleArray
    s: SingleArray
    z: SingleArray

    def first(self, count: int) -> Corners:
        """Return the first `count` corners, views of the same memory."""
        return Corners(**{name: value[..., :count] for name, value in vars(self).items()})

    def lit(self) -> list[tuple[int, int]]:
        """Return the orders j of images and how many corners have them: (j + 1/2)·α < π."""
        most = int(np.ceil(np.pi / float(self.apex_angle[0])))
        pairs = [(j, self.count(j + 0.5)) for j in range(most)]
        return [(j, n) for j, n in pairs if n]

    def count(self, orders: float) -> int:
        """Return how many corners have `orders` times the apex angle below π."""
        return int(np.count_nonzero(orders * self.apex_angle < np.pi - 1e-6))


class Sources:
    """The dipole and its images as our plate sees them, q·α/2 from its face; each computed once."""

    def __init__(self, corners: Corners) -> None:
        self._corners = corners
        self._known: dict[int, tuple[SingleArray, SingleArray, WaveArray]] = {}
        self._bare: dict[int, WaveArray] = {}

    def __call__(self, q: int, count: int) -> tuple[SingleArray, SingleArray, WaveArray]:
        """Return ρ, direct path and H_φ (exact, 1 A) of source q for the first `count` corners."""
        known = self._known.get(q)
        if known is None or known[0].shape[-1] < count:
            c = self._corners.first(count)
            along = c.s - c.spacing * np.cos(0.5 * q * c.apex_angle)
            rho2 = along * along + (c.spacing * np.sin(0.5 * q * c.apex_angle)) ** 2
            rho = np.sqrt(rho2)
            known = rho, np.sqrt(rho2 + c.z * c.z), magnetic_field(rho, c.z, c.dipole_length)
            self._known[q] = known
        rho, direct, field = known
        return rho[..., :count], direct[..., :count], field[..., :count]

    def bare(self, q: int, count: int) -> tuple[SingleArray, WaveArray]:
        """Return direct path and H_φ over the dipole's far field in that direction."""
        _, direct, field = self(q, count)
        known = self._bare.get(q)
        if known is None or known.shape[-1] < count:
            c = self._corners.first(count)
            known = self._bare[q] = field / lobe(c, c.z / direct)
        return direct, known[..., :count]


def magnetic_field(rho: SingleArray, z: SingleArray, length: SingleArray) -> WaveArray:
    """Return H_φ of the dipole for 1 A, exact, at transverse distance `rho` and height `z`."""
    half = 0.5 * length
    rho2 = rho * rho
    total = turn(np.sqrt(rho2 + (z - half) ** 2))
    total += turn(np.sqrt(rho2 + (z + half) ** 2))
    total -= 2.0 * np.cos(half) * turn(np.sqrt(rho2 + z * z))
    total *= 0.25j / np.pi
    total /= rho
    return total


def axial_field(c: Corners) -> WaveArray:
    """Return E_z of the dipole for 1 A at the points, V/m times the unit of length, 1/k."""
    half = 0.5 * c.dipole_length
    turned = 0.5 * c.apex_angle
    rho2 = (c.s - c.spacing * np.cos(turned)) ** 2 + (c.spacing * np.sin(turned)) ** 2
    total = np.zeros(np.broadcast_shapes(rho2.shape, c.z.shape), dtype=np.complex64)
    for end, weight in ((half, 1.0), (-half, 1.0), (0.0 * half, -2.0 * np.cos(half))):
        path = np.sqrt(rho2 + (c.z - end) ** 2)
        total += turn(path) * (weight / path)
    total *= -1j * ETA0 / (4.0 * np.pi)
    return total


def lobe(c: Corners, cosine: SingleArray) -> SingleArray:
    """Return the dipole's far field at the angle of `cosine` from its axis."""
    half = 0.5 * c.dipole_length
    cosine = np.minimum(cosine, 1.0 - 1e-5)
    return np.asarray((np.cos(half * cosine) - np.cos(half)) / np.sqrt(1.0 - cosine * cosine))
