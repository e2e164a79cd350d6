"""The corner of infinite plates at any apex angle, exactly: field in the beam, radiation resistance.

Relative to the feed alone; feed on the bisector at spacing S; in three dimensions k stands for
k·sinθ (the plates are uniform in z, so a z-directed dipole excites TM_z only).

Source: Harrington, *Time-Harmonic Electromagnetic Fields* (1961), §5; Wait 1954; Klopfenstein 1957.
"""

from __future__ import annotations

from typing import Final

import numpy as np
from numpy.typing import ArrayLike
from scipy.special import jv

from models.conventions import ETA0, ComplexArray, FloatArray
from models.dipole import far_field

__all__ = ["field", "radiation_resistance"]

_NODES: Final = 16


def field(apex_angle: ArrayLike, k_spacing: ArrayLike, phi: ArrayLike) -> ComplexArray:
    """Return F(φ) = (4π/α) Σ_m e^{jπμ/2} J_μ(kS) cos μφ, μ = (2m+1)π/α; 0 outside the corner.

    Parameters
    ----------
    apex_angle, k_spacing, phi : array_like
        α (radians), kS (or kS·sinθ) and the angle off the bisector; broadcast.
    """
    alpha, ks, phi = np.broadcast_arrays(
        *(np.asarray(x, dtype=np.float64) for x in (apex_angle, k_spacing, phi))
    )
    total = np.zeros(alpha.shape, dtype=np.complex128)
    for m in range(_orders(alpha, ks)):
        mu = (2 * m + 1) * np.pi / alpha
        total += np.exp(0.5j * np.pi * mu) * jv(mu, ks) * np.cos(mu * phi)
    return np.asarray(np.where(np.abs(phi) < alpha / 2.0, 4.0 * np.pi / alpha * total, 0.0))


def radiation_resistance(
    apex_angle: ArrayLike, k_spacing: ArrayLike, k_length: ArrayLike
) -> FloatArray:
    """Return the radiation resistance of a dipole in the corner, at the current maximum, Ω.

    From the power through the corner: ∫|F|² dφ is a sum of squares of Bessel functions, the rest a
    Gauss-Legendre integral over θ.

    Parameters
    ----------
    apex_angle, k_spacing, k_length : array_like
        α (radians), kS and kl; broadcast.
    """
    alpha, ks, kl = np.broadcast_arrays(
        *(np.asarray(x, dtype=np.float64)[..., None] for x in (apex_angle, k_spacing, k_length))
    )
    nodes, weights = np.polynomial.legendre.leggauss(_NODES)
    cosine = (nodes + 1.0) / 2.0
    sine = np.sqrt(1.0 - cosine**2)
    power = sum(
        (jv((2 * m + 1) * np.pi / alpha, ks * sine) ** 2 for m in range(_orders(alpha, ks))),
        start=np.zeros(np.broadcast_shapes(alpha.shape, cosine.shape)),
    )
    # ∫ cos²μφ over the corner is α/2; U = η|I f F|²/8π², P = ½R I².
    density = (
        (4.0 * np.pi / alpha) ** 2 * alpha / 2.0 * power * far_field(1.0, kl, sine, cosine) ** 2
    )
    return np.asarray(ETA0 / (4.0 * np.pi**2) * (density * weights).sum(axis=-1))


def _orders(alpha: FloatArray, ks: FloatArray) -> int:
    # J_μ(x) is below 1e-12 once μ exceeds x by a few times x^(1/3) and a constant.
    if alpha.size == 0:
        return 0
    top = float(ks.max())
    return int(np.ceil((top + 6.0 * np.cbrt(top) + 12.0) * float(alpha.max()) / (2.0 * np.pi))) + 1
