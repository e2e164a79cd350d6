"""What a model hands over: far fields on the principal cuts or the sphere, the power behind them.

Every model here is mirror symmetric in y and in z, so half a cut (0 = boresight, π = rear) is the
whole. A field f is E_θ·r·e^{jkr} over jη·I/(2π), where I is the dipole's sinusoidal current maximum
(or the same scale in a solved dipole): a half-wave dipole alone has |f| = 1 broadside. Directivity
in a direction is |f|²/power; with a radiation resistance R at the same current, power = πR/η.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Final

import numpy as np

from models.conventions import ComplexArray, FloatArray

__all__ = ["CUT_ANGLES", "Pattern", "Sphere", "cosine_interpolation", "middles"]

CUT_ANGLES: Final[FloatArray] = np.radians(np.arange(0.0, 181.0, 2.0))
"""Angles off boresight at which models give both cuts, radians, (n_angle,)."""


def middles(count: int) -> FloatArray:
    """Return the middles of `count` equal parts of 0 to π, radians."""
    return np.asarray((np.arange(count) + 0.5) * (np.pi / count))


def cosine_interpolation(count: int, angles: FloatArray) -> FloatArray:
    """Return the matrix from samples in the `middles` to `angles`, (n_angle, count).

    Exact for even functions of period 2π with harmonics below `count`.
    """
    order = np.arange(count)
    weight = np.where(order == 0, 1.0, 2.0) / count
    samples = np.cos(order[:, None] * middles(count))
    return np.asarray((np.cos(angles[:, None] * order) * weight) @ samples)


@dataclass(frozen=True, kw_only=True, eq=False)
class Pattern:
    """Far fields and terminal quantities of n designs at n_freq frequencies.

    Parameters
    ----------
    angles : (n_angle,)
        Uniform, from 0 (boresight) to π (rear), radians.
    h_field, e_field : (n, n_freq, n_angle)
        Complex field on the H- and E-plane cut, normalised as above.
    power : (n, n_freq)
        Directivity is abs(field)**2 / power.
    resistance, reactance : (n, n_freq)
        Input impedance at the gap, Ω; NaN where the model gives none.
    efficiency : (n, n_freq)
        Radiated over accepted power, 0 to 1; NaN where the model gives none.
    doubt_db : (n, n_freq)
        The model's own estimate of its error in boresight directivity, dB; NaN where it has none.
        A design whose doubt is infinite is one the model cannot vouch for.
    """

    angles: FloatArray
    h_field: ComplexArray
    e_field: ComplexArray
    power: FloatArray
    resistance: FloatArray
    reactance: FloatArray
    efficiency: FloatArray
    doubt_db: FloatArray

    def rows(self, index: slice | FloatArray | list[int]) -> Pattern:
        """Return the patterns of the designs at `index`."""
        return replace(
            self,
            **{
                name: getattr(self, name)[index]
                for name in (
                    "h_field",
                    "e_field",
                    "power",
                    "resistance",
                    "reactance",
                    "efficiency",
                    "doubt_db",
                )
            },
        )


@dataclass(frozen=True, kw_only=True, eq=False)
class Sphere:
    """Fields of n designs at n_freq frequencies all around, both polarisations, scaled as above.

    Parameters
    ----------
    theta : (n_theta,)
        From the z axis, radians.
    phi : (n_phi,)
        From boresight towards +y, radians.
    theta_field, phi_field : (n, n_freq, n_theta, n_phi)
        Complex field along θ and along φ.
    power : (n, n_freq)
        Directivity is abs(field)**2 / power.
    efficiency : (n, n_freq)
        Radiated over accepted power, 0 to 1.
    """

    theta: FloatArray
    phi: FloatArray
    theta_field: ComplexArray
    phi_field: ComplexArray
    power: FloatArray
    efficiency: FloatArray

    def gains(self) -> tuple[FloatArray, FloatArray]:
        """Return gain by polarisation, θ and φ, as power ratios (n, n_freq, n_theta, n_phi)."""
        scale = (self.efficiency / self.power)[..., None, None]
        return np.abs(self.theta_field) ** 2 * scale, np.abs(self.phi_field) ** 2 * scale
