"""What the antenna is made of: mass of the plates (kg) and wind load on them (N).

The wind load is the drag of a flat plate of the frontal area, wind along boresight: F = ½ρv²·C·A.
The force coefficient C runs from 1.17 (square) to 1.98 (long) with the ratio of sides; the end
values are those of engineering data books, the points between were taken from memory of the usual
handbook curve. Ice, gusts, height, ground and the mast itself are not in it: local codes are.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np

from models.conventions import FloatArray
from models.geometry import Reflectors

__all__ = ["AIR_DENSITY", "Build", "drag_coefficient", "mass", "wind_load"]

AIR_DENSITY: Final = 1.225
"""Standard air at sea level, 15 °C, kg/m³ (ICAO standard atmosphere)."""

_RATIO: Final = np.log([1.0, 5.0, 10.0, 20.0, 100.0])
_DRAG: Final = np.array([1.17, 1.20, 1.30, 1.50, 1.98])


@dataclass(frozen=True, kw_only=True)
class Build:
    """Material of plates and dipole.

    Parameters
    ----------
    sheet_thickness : float
        m.
    sheet_density : float
        kg/m³; the default is aluminium.
    conductivity : float
        Of plates and dipole, S/m; infinity is a perfect conductor. The default is a common
        aluminium alloy.
    """

    sheet_thickness: float = 2.0e-3
    sheet_density: float = 2700.0
    conductivity: float = 2.5e7


def drag_coefficient(side_ratio: FloatArray) -> FloatArray:
    """Return the force coefficient of a flat plate, longer side over shorter `side_ratio` >= 1."""
    return np.asarray(np.interp(np.log(side_ratio), _RATIO, _DRAG))


def mass(reflectors: Reflectors, build: Build) -> FloatArray:
    """Return the mass of both plates and of a solid dipole of the sheet's material, kg, (n,)."""
    rod = np.pi / 4.0 * reflectors.dipole_diameter**2 * reflectors.dipole_length
    sheet = reflectors.sheet_area * build.sheet_thickness
    return np.asarray((sheet + rod) * build.sheet_density)


def wind_load(reflectors: Reflectors, wind_speed: float) -> FloatArray:
    """Return the drag on the plates, wind along boresight at `wind_speed` (m/s), N, (n,)."""
    width, height = reflectors.width, reflectors.plate_length
    ratio = np.maximum(width, height) / np.minimum(width, height)
    pressure = 0.5 * AIR_DENSITY * wind_speed**2
    return np.asarray(pressure * drag_coefficient(ratio) * width * height)
