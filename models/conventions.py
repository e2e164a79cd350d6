"""Constants, array types and decibels shared by every model.

Frame: e^{+jωt}; apex line on z; boresight +x; plates at φ = ±α/2; dipole along z at (S, 0, 0).
The H-plane is xy, the E-plane xz. SI and radians inside; other units only as a suffix.
"""

from __future__ import annotations

from typing import Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

__all__ = [
    "C0",
    "ETA0",
    "ComplexArray",
    "FloatArray",
    "decibels",
    "wavenumber",
]

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]

C0: Final = 299_792_458.0
"""Speed of light, m/s (exact, SI 2019)."""

ETA0: Final = 376.730313668
"""Impedance of free space, Ω."""


def wavenumber(frequency_hz: ArrayLike) -> FloatArray:
    """Return k = 2πf/c in rad/m, of the shape of `frequency_hz` (Hz)."""
    return np.asarray(2.0 * np.pi / C0 * np.asarray(frequency_hz, dtype=np.float64))


def decibels(power_ratio: ArrayLike) -> FloatArray:
    """Return 10·log10 of a power ratio (any shape); zero gives -inf, NaN stays NaN."""
    with np.errstate(divide="ignore", invalid="ignore"):
        return np.asarray(10.0 * np.log10(np.asarray(power_ratio, dtype=np.float64)))
