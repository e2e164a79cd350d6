"""The corners as `ray` holds them, and the dipole with its images: exact near fields for 1 A.

Lengths are times k, angles in radians; the fields are those of a sinusoidal current, in units that
go with lengths in 1/k. Points come first and corners last: the long axis has to be the inner one
for speed.

Source: Balanis, *Antenna Theory*, 4th ed., §8.5 (near field of a dipole).
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from typing import TypeVar

import numpy as np
from numpy.typing import NDArray

from models.conventions import ETA0
from models.edges import SingleArray, WaveArray, turn

__all__ = ["Corners", "Images", "Runs", "axial_field", "lobe", "magnetic_field", "place"]

Runs = Sequence[tuple[float, int]]
"""Rays of many corners in a row: order of image or edge, and how many corners have it."""
Single = TypeVar("Single", np.float32, np.complex64)
Wanted = Sequence[tuple[int, int]]
"""The same of sources, by their q."""


@dataclass(frozen=True, kw_only=True, eq=False)
class Corners:
    """Corners in order of rising apex angle, and the points on their plates; lengths times k.

    An image or an edge of some order is there for all corners up to some angle: the first ones.

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

    def part(self, rows: slice) -> Corners:
        """Return some of the corners, views of the same memory."""
        return Corners(**{name: value[..., rows] for name, value in vars(self).items()})

    def repeated(self, counts: Iterable[int]) -> Corners:
        """Return the first corners, as many as each of `counts`, one run after the other."""
        return self.take(np.concatenate([np.arange(count) for count in counts]))

    def take(self, rows: NDArray[np.intp]) -> Corners:
        """Return copies of the corners at `rows`."""
        return Corners(**{name: value.take(rows, axis=-1) for name, value in vars(self).items()})

    def along(self, runs: Runs) -> tuple[Corners, SingleArray]:
        """Return the corners of each ray, and its order times the apex angle; at most π if inf."""
        c = self.repeated(n for _, n in runs)
        orders = np.array([order for order, _ in runs], dtype=np.float32)
        angle = np.repeat(orders, [n for _, n in runs]) * c.apex_angle
        return c, np.where(np.isinf(angle), np.float32(np.pi), angle)

    def most(self) -> int:
        """Return the largest number of images that a plate sees."""
        return int(np.ceil(np.pi / float(self.apex_angle[0])))

    def count(self, orders: float) -> int:
        """Return how many corners have `orders` times the apex angle below π."""
        return int(np.count_nonzero(orders * self.apex_angle < np.pi - 1e-6))

    def lit(self) -> list[tuple[int, int]]:
        """Return the orders j of images and how many corners have them: (j + 1/2)·α < π."""
        pairs = [(j, self.count(j + 0.5)) for j in range(self.most())]
        return [(j, n) for j, n in pairs if n]


class Images:
    """The dipole and its images as our plate sees them, q·α/2 from its face.

    Each is computed once, for as many corners as `counts` says.
    """

    def __init__(self, corners: Corners, counts: dict[int, int]) -> None:
        c, turned = corners.along([(0.5 * q, n) for q, n in counts.items()])
        along, across = place(c, turned)
        along = c.s - along
        rho2 = along * along + across * across
        self._rho, self._direct = np.sqrt(rho2), np.sqrt(rho2 + c.z * c.z)
        self._field = magnetic_field(c, self._rho, self._direct)
        self._bare = self._field / lobe(c, c.z / self._direct)
        sizes = np.array(list(counts.values()))
        self._starts = dict(zip(counts, (np.cumsum(sizes) - sizes).tolist(), strict=True))

    def rho(self, wanted: Wanted) -> SingleArray:
        """Return the distances from the axes, (n_s, 1, n_ray)."""
        return self._pick(self._rho, wanted)

    def direct(self, wanted: Wanted) -> SingleArray:
        """Return the direct paths R, (n_s, n_z, n_ray)."""
        return self._pick(self._direct, wanted)

    def field(self, wanted: Wanted) -> WaveArray:
        """Return H_φ·e^{jR}."""
        return self._pick(self._field, wanted)

    def bare(self, wanted: Wanted) -> WaveArray:
        """Return H_φ·e^{jR} over the dipole's far field in that direction."""
        return self._pick(self._bare, wanted)

    def _pick(self, values: NDArray[Single], wanted: Wanted) -> NDArray[Single]:
        starts = [self._starts[q] for q, _ in wanted]
        return np.concatenate(
            [values[..., start : start + n] for start, (_, n) in zip(starts, wanted, strict=True)],
            axis=-1,
        )


def place(c: Corners, turned: SingleArray) -> tuple[SingleArray, SingleArray]:
    """Return where the image at the angle `turned` from a plate is: along it, and off it."""
    return c.spacing * np.cos(turned), c.spacing * np.sin(turned)


def magnetic_field(c: Corners, rho: SingleArray, direct: SingleArray) -> WaveArray:
    """Return H_φ·e^{jR} of the dipole for 1 A, exact, at distance `rho` from its axis.

    `direct` is R = √(ρ² + z²); what is left of the phase is that of the dipole's length.
    """
    half = 0.5 * c.dipole_length
    rho2 = rho * rho
    upper, lower = (np.sqrt(rho2 + (c.z - end) ** 2) for end in (half, -half))
    # The waves of both ends: that of the mean path, times the beat of the two.
    total = turn(0.5 * (upper + lower) - direct)
    total *= 2.0 * np.cos(0.5 * (upper - lower))
    total -= 2.0 * np.cos(half)
    total *= 0.25j / np.pi
    total /= rho
    return total


def axial_field(c: Corners) -> WaveArray:
    """Return E_z of the dipole for 1 A at the points, V/m times the unit of length, 1/k."""
    half = 0.5 * c.dipole_length
    along, across = place(c, 0.5 * c.apex_angle)
    rho2 = (c.s - along) ** 2 + across**2
    total = np.zeros(np.broadcast_shapes(rho2.shape, c.z.shape), dtype=np.complex64)
    for end, weight in ((half, 1.0), (-half, 1.0), (0.0 * half, -2.0 * np.cos(half))):
        path = np.sqrt(rho2 + (c.z - end) ** 2)
        total += turn(path) * (weight / path)
    total *= -1j * ETA0 / (4.0 * np.pi)
    return total


def lobe(c: Corners, cosine: SingleArray) -> SingleArray:
    """Return the dipole's far field at the angle of `cosine` from its axis."""
    half = 0.5 * c.dipole_length
    cosine = np.minimum(cosine, np.float32(1.0 - 1e-5))
    return np.asarray((np.cos(half * cosine) - np.cos(half)) / np.sqrt(1.0 - cosine * cosine))
