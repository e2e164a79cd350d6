"""Pairs of one design and one frequency, and the counts of cells that pairs share.

Cells are counted in base counts along s and z times a step of a ladder, so that the grids of a pair
stand in exact proportion. Lengths in m, angles in radians, wavenumbers in rad/m.

Source: a field of sources within r has harmonics up to about kr (Hansen, *Spherical Near-Field
Antenna Measurements*, 1988, from memory).
"""

from __future__ import annotations

from dataclasses import dataclass, fields
from typing import Final, Self

import numpy as np

from models.conventions import FloatArray
from models.geometry import Reflectors
from models.moment_kernel import near_reach

__all__ = ["DENSITY", "FIRST", "LADDER", "Case", "Rows"]

DENSITY: Final = 6.75
"""Cells a wavelength, at least, of the finest of the first three grids."""

FEWEST: Final = 5
"""Cells of that grid along a side, at least."""

LADDER: Final = (2, 3, 4, 5, 6, 8, 10)
"""Cell counts of the grids, in multiples of base counts."""

FIRST: Final = (2, 3)
"""Places on the ladder of the finest of the first grids, whichever takes fewer cells."""


class Rows:
    """Arrays of one row a pair."""

    @classmethod
    def join(cls, parts: list[Self]) -> Self:
        """Return the rows of all `parts`."""
        names = [field.name for field in fields(cls)]  # type: ignore[arg-type]
        return cls(**{name: np.concatenate([getattr(p, name) for p in parts]) for name in names})

    def rows(self, index: np.ndarray | slice) -> Self:
        """Return the rows at `index`."""
        return type(self)(**{name: value[index] for name, value in vars(self).items()})

    def put(self, index: np.ndarray, other: Self) -> None:
        """Overwrite the rows at `index`."""
        for name, value in vars(self).items():
            value[index] = getattr(other, name)


@dataclass(frozen=True, kw_only=True, eq=False)
class Case(Rows):
    """Pairs of one design and one frequency, each (n,); SI, radians."""

    k: FloatArray
    apex_angle: FloatArray
    spacing: FloatArray
    plate_width: FloatArray
    plate_length: FloatArray
    dipole_length: FloatArray
    dipole_radius: FloatArray

    @classmethod
    def pairs(cls, reflectors: Reflectors, k: FloatArray) -> Case:
        """Return all pairs of designs and wavenumbers, designs first."""
        n = k.size
        return cls(
            k=np.tile(k, len(reflectors)),
            apex_angle=np.repeat(reflectors.apex_angle, n),
            spacing=np.repeat(reflectors.spacing, n),
            plate_width=np.repeat(reflectors.plate_width, n),
            plate_length=np.repeat(reflectors.plate_length, n),
            dipole_length=np.repeat(reflectors.dipole_length, n),
            dipole_radius=np.repeat(reflectors.dipole_diameter / 2.0, n),
        )

    def keys(self) -> np.ndarray:
        """Return what pairs settled together share, (n, 5) integers.

        Base counts along s and z, place on the ladder of the finest of the first grids, near class,
        and the highest harmonic of the far field.
        """
        waves = self.k / (2.0 * np.pi)
        sides = np.stack([self.plate_width, self.plate_length]) * waves
        tops = np.array(LADDER)[list(FIRST)]
        cells = np.maximum(DENSITY * sides, FEWEST)
        counts = np.ceil(cells / tops[:, None, None] - 1e-9)
        choice = (counts.prod(axis=1).T * tops**2).argmin(axis=1)
        base_s, base_z = counts[choice, :, np.arange(waves.size)].T
        first, top = np.array(FIRST)[choice], tops[choice]
        plates = np.hypot(base_s, base_z / 2.0) * top / DENSITY
        # In half wavelengths, so that few pairs stand apart for their dipole's sake.
        dipole = np.ceil(2.0 * np.hypot(self.spacing, self.dipole_length / 2.0) * waves) / 2.0
        order = np.ceil(2.0 * np.pi * np.maximum(plates, dipole))
        columns = [base_s, base_z, first, near_reach(self.apex_angle), order]
        return np.stack(columns, axis=1).astype(int)
