"""The designs: a struct of arrays, one row a corner reflector; metres and radians.

Spacing is feed to apex line; plate width runs along the slope from the apex line outwards; plate
length runs along the apex line, parallel to the dipole. Size is that of the smallest box, faces
square to boresight, around plates and dipole.
"""

from __future__ import annotations

from dataclasses import dataclass, fields
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from models.conventions import FloatArray

__all__ = ["DIMENSIONS", "Reflectors"]

DIMENSIONS = (
    "apex_angle",
    "spacing",
    "plate_width",
    "plate_length",
    "dipole_length",
    "dipole_diameter",
)
"""The six columns of a design, in the order used wherever designs become a matrix."""


@dataclass(frozen=True, kw_only=True, eq=False)
class Reflectors:
    """Corner reflectors, one row a design.

    Parameters
    ----------
    apex_angle : array_like, (n,) or scalar
        Angle between the plates, radians, above 0 and up to π (π is a flat sheet of width 2w).
    spacing : array_like, (n,) or scalar
        Dipole axis to apex line, m.
    plate_width : array_like, (n,) or scalar
        Each plate from the apex line along the slope to its rim, m.
    plate_length : array_like, (n,) or scalar
        Each plate along the apex line, m.
    dipole_length, dipole_diameter : array_like, (n,) or scalar
        Dipole end to end and its conductor's diameter, m.

    Raises
    ------
    ValueError
        For shapes that do not broadcast to one dimension, and for values that are not finite, not
        positive, or an apex angle above π; the message names the column and the first bad value.
    """

    apex_angle: FloatArray
    spacing: FloatArray
    plate_width: FloatArray
    plate_length: FloatArray
    dipole_length: FloatArray
    dipole_diameter: FloatArray

    def __init__(
        self,
        *,
        apex_angle: ArrayLike,
        spacing: ArrayLike,
        plate_width: ArrayLike,
        plate_length: ArrayLike,
        dipole_length: ArrayLike,
        dipole_diameter: ArrayLike,
    ) -> None:
        given = (apex_angle, spacing, plate_width, plate_length, dipole_length, dipole_diameter)
        columns = [np.atleast_1d(np.asarray(column, dtype=np.float64)) for column in given]
        try:
            columns = list(np.broadcast_arrays(*columns))
        except ValueError as error:
            shapes = ", ".join(
                f"{name} {column.shape}" for name, column in zip(DIMENSIONS, columns, strict=True)
            )
            msg = f"columns of one length or scalars are needed, got {shapes}"
            raise ValueError(msg) from error
        for name, column in zip(DIMENSIONS, columns, strict=True):
            if column.ndim != 1:
                msg = f"{name}: one dimension is needed, got shape {column.shape}"
                raise ValueError(msg)
            bad = ~(np.isfinite(column) & (column > 0.0))
            if name == "apex_angle":
                bad |= column > np.pi * (1.0 + 1e-12)
            if bad.any():
                allowed = "above 0 and at most π" if name == "apex_angle" else "finite, above 0"
                msg = f"{name}: {float(column[bad][0])!r} given, allowed: {allowed}"
                raise ValueError(msg)
            frozen = np.array(column)
            frozen.setflags(write=False)
            object.__setattr__(self, name, frozen)

    @classmethod
    def from_matrix(cls, matrix: FloatArray) -> Reflectors:
        """Return the designs whose rows are `matrix`, (n, 6), columns as in `DIMENSIONS`."""
        return cls(**{name: matrix[:, i] for i, name in enumerate(DIMENSIONS)})

    def matrix(self) -> FloatArray:
        """Return the designs as (n, 6), columns as in `DIMENSIONS`."""
        return np.stack([getattr(self, field.name) for field in fields(self)], axis=1)

    def __len__(self) -> int:
        """Return the number of designs."""
        return int(self.apex_angle.size)

    def __getitem__(self, rows: slice | NDArray[Any] | list[int] | int) -> Reflectors:
        """Return the designs at `rows` (a slice, a mask, indices, or one index)."""
        return Reflectors.from_matrix(np.atleast_2d(self.matrix()[rows]))

    @property
    def width(self) -> FloatArray:
        """Box across boresight in the H-plane, m, (n,)."""
        return 2.0 * self.plate_width * np.sin(self.apex_angle / 2.0)

    @property
    def height(self) -> FloatArray:
        """Box along the dipole, m, (n,)."""
        return np.maximum(self.plate_length, self.dipole_length)

    @property
    def depth(self) -> FloatArray:
        """Box along boresight, from apex line to rims or to the front of the dipole, m, (n,)."""
        rim = self.plate_width * np.cos(self.apex_angle / 2.0)
        return np.maximum(rim, self.spacing + self.dipole_diameter / 2.0)

    @property
    def clearance(self) -> FloatArray:
        """From the dipole's surface to the plates, or to their planes beyond the rims, m, (n,)."""
        return self.spacing * np.sin(self.apex_angle / 2.0) - self.dipole_diameter / 2.0

    @property
    def frontal_area(self) -> FloatArray:
        """Width times height, m², (n,)."""
        return self.width * self.height

    @property
    def volume(self) -> FloatArray:
        """Width times height times depth, m³, (n,)."""
        return self.frontal_area * self.depth

    @property
    def longest_side(self) -> FloatArray:
        """Longest side of the box, m, (n,)."""
        return np.maximum(np.maximum(self.width, self.height), self.depth)

    @property
    def sheet_area(self) -> FloatArray:
        """Area of both plates, one face, m², (n,)."""
        return 2.0 * self.plate_width * self.plate_length
