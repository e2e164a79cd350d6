"""The corner of infinite plates at any apex angle, exactly: the field in the beam.

Relative to the feed alone; feed on the bisector at spacing S; in three dimensions k stands for
k·sinθ (the plates are uniform in z, so a z-directed dipole excites TM_z only). The dipole's
impedance is the business of `models.wedge_impedance`.

Source: Harrington, *Time-Harmonic Electromagnetic Fields* (1961), §5; Wait 1954; Klopfenstein 1957.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike
from scipy.special import jv

from models.conventions import ComplexArray, FloatArray
from models.wedge_impedance import radiation_resistance

__all__ = ["field", "radiation_resistance"]


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


def _orders(alpha: FloatArray, ks: FloatArray) -> int:
    # J_μ(x) is below 1e-12 once μ exceeds x by a few times x^(1/3) and a constant.
    if alpha.size == 0:
        return 0
    top = float(ks.max())
    return int(np.ceil((top + 6.0 * np.cbrt(top) + 12.0) * float(alpha.max()) / (2.0 * np.pi))) + 1
