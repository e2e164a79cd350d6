"""Impedance of a dipole in the corner of infinite plates, any apex angle; at the current maximum.

In Ω. The sinusoidal dipole stands on the bisector at spacing S. Sommerfeld's contour for the
corner's Green's function leaves the images whose angle |mα| is at most π, and one integral for the
apex' diffraction; both are sums over parallel dipoles at distances 2S sin(mα/2) and 2S cosh(y/2):

    Z − Z_self = 2 Σ_{m=1..N} (−1)^m Z(2S sin(mα/2))
                 − (2/π)(−1)^N ∫₀^∞ Z(2S cosh(y/2)) s cosh b / (s² + sinh² b) db

with N = ⌊π/α⌋, s = sin(π²/α − Nπ), b = πy/α. At α = 180°/n it is the image sum, in between it is
continuous. Mutual impedances come from a Chebyshev table over distance and length, built on first
use. Valid for lengths 0.1 to 1 λ and kS·sin(α/2) of at least 0.05, within 0.01 Ω; NaN elsewhere.

Source: Sommerfeld's integral as in Felsen & Marcuvitz, *Radiation and Scattering of Waves* (1973),
§6.5, residues and integral worked out here; mutual impedance: `models.dipole`.
"""

from __future__ import annotations

from functools import cache
from typing import Final

import numpy as np
from numpy.polynomial.chebyshev import cheb2poly, chebvander
from numpy.typing import ArrayLike
from scipy.special import sici

from models.conventions import ETA0, ComplexArray, FloatArray
from models.dipole import mutual_impedance

__all__ = ["added_impedance", "impedance", "radiation_resistance"]

LENGTHS: Final = (0.2 * np.pi, 2.0 * np.pi)
"""kl of the table."""
NEAREST: Final = 0.1
"""Smallest kd of the table."""

_DEGREES: Final = (24, 16)
_NODES: Final = 16


def impedance(
    apex_angle: ArrayLike, k_spacing: ArrayLike, k_length: ArrayLike, k_radius: ArrayLike
) -> ComplexArray:
    """Return the impedance at the current maximum, Ω: `added_impedance` and the dipole's own.

    Parameters
    ----------
    apex_angle, k_spacing, k_length, k_radius : array_like
        α (radians, 0 to π), kS, kl and k times the wire's radius; broadcast.
    """
    own = mutual_impedance(1.0, k_length, k_radius)
    return np.asarray(own + added_impedance(apex_angle, k_spacing, k_length))


def radiation_resistance(
    apex_angle: ArrayLike, k_spacing: ArrayLike, k_length: ArrayLike
) -> FloatArray:
    """Return the real part of `impedance` for a thin wire, Ω; parameters as there."""
    kl = np.asarray(k_length, dtype=np.float64)
    (sine, cosine), (sine2, cosine2) = sici(kl), sici(2.0 * kl)
    # Balanis, Antenna Theory, 4th ed., eq. 8-60a.
    own = np.euler_gamma + np.log(kl) - cosine + 0.5 * np.sin(kl) * (sine2 - 2.0 * sine)
    own += 0.5 * np.cos(kl) * (np.euler_gamma + np.log(kl / 2.0) + cosine2 - 2.0 * cosine)
    added = added_impedance(apex_angle, k_spacing, k_length)
    return np.asarray(ETA0 / (2.0 * np.pi) * own + added.real)


def added_impedance(
    apex_angle: ArrayLike, k_spacing: ArrayLike, k_length: ArrayLike
) -> ComplexArray:
    """Return what the plates add to a dipole's impedance, Ω: independent of the wire's radius.

    Parameters
    ----------
    apex_angle, k_spacing, k_length : array_like
        α (radians, 0 to π), kS and kl; broadcast.

    Returns
    -------
    (...)
        NaN outside the table (see the module's text).
    """
    alpha, ks, kl = np.broadcast_arrays(
        *(np.asarray(x, dtype=np.float64) for x in (apex_angle, k_spacing, k_length))
    )
    shape = alpha.shape
    alpha, ks, kl = alpha.ravel(), ks.ravel(), kl.ravel()
    valid = (kl >= LENGTHS[0]) & (kl <= LENGTHS[1])
    valid &= (ks * np.sin(alpha / 2.0) >= NEAREST / 2.0) & (alpha <= np.pi * (1.0 + 1e-12))
    series = _distance_series(np.where(valid, kl, np.pi))
    count = np.floor(np.pi / alpha + 1e-12)
    parity = 1.0 - 2.0 * (count % 2.0)
    total = np.zeros(alpha.shape, dtype=np.complex128)
    for m in range(1, int(np.max(count[valid], initial=0.0)) + 1):
        rows = np.flatnonzero(valid & (count >= m))
        distance = 2.0 * ks[rows] * np.sin(m * alpha[rows] / 2.0)
        total[rows] += 2.0 * (-1) ** m * _mutual(series[:, rows], distance)
    farthest = _mutual(series, np.where(valid, 2.0 * ks, 1.0))
    excess = np.sin(np.pi * (np.pi / alpha - count)).clip(0.0)
    # ∫ s cosh b/(s² + sinh² b) db = π/2: what is left of Z − Z(2S) is smooth as s goes to 0.
    total -= parity * farthest
    rows = np.flatnonzero(valid & (excess > 1e-9))
    scale, double, s = alpha[rows] / (2.0 * np.pi), 2.0 * ks[rows], excess[rows]
    terms, end = series[:, rows], farthest[rows]
    rest = np.zeros(rows.size, dtype=np.complex128)
    for b, weight in zip(*_contour(), strict=True):
        grow, turn = np.exp(b.real * scale), b.imag * scale
        # cosh(b·α/2π) in its real parts: many times faster than the complex function
        stretch = (grow + 1.0 / grow) / 2.0 * np.cos(turn)
        stretch = stretch + 0.5j * (grow - 1.0 / grow) * np.sin(turn)
        kernel = weight * np.cosh(b) / (s**2 + np.sinh(b) ** 2)
        rest += kernel * (_mutual(terms, double * stretch) - end)
    total[rows] -= 2.0 / np.pi * parity[rows] * s * rest
    return np.asarray(np.where(valid, total, complex(np.nan, np.nan))).reshape(shape)


@cache
def _contour() -> tuple[ComplexArray, ComplexArray]:
    """Nodes and weights in b, bent below the real axis, where e^{−jkR} decays; (n_node,) each.

    The poles lie on the imaginary axis. The four constants were chosen by trial for the least error
    at 16 nodes (1.5 to 3 mΩ, S = 0.15 to 1.5 λ); e^{−12} bounds what is cut off.
    """
    reach, depth, slope = 12.0, 1.2, 0.45
    nodes, weights = np.polynomial.legendre.leggauss(_NODES)
    t = (nodes + 1.0) / 2.0
    along = reach * t**2
    bend = np.tanh(along * slope / depth)
    step = reach * t * weights * (1.0 - 1j * slope * (1.0 - bend**2))
    return along - 1j * depth * bend, step


@cache
def _table() -> ComplexArray:
    """Coefficients of Z·e^{jkd}·(kd + 1): powers of a distance place by Chebyshev's in kl.

    The place runs from −1 (kd = `NEAREST`) to 1 (infinity), linear in 1/(kd + 1). The powers' loss
    of digits is some 1e6 of 1e16; they need half the work of Clenshaw's recurrence.
    """
    (far, far_inverse), (long, long_inverse) = (_interpolation(degree) for degree in _DEGREES)
    distance = 2.0 * (1.0 + NEAREST) / (1.0 - far[:, None]) - 1.0
    length = LENGTHS[0] + (LENGTHS[1] - LENGTHS[0]) * (long + 1.0) / 2.0
    values = mutual_impedance(1.0, length, distance) * np.exp(1j * distance) * (distance + 1.0)
    series = far_inverse @ values @ long_inverse.T
    return np.stack([cheb2poly(column) for column in series.T], axis=1)


def _interpolation(count: int) -> tuple[FloatArray, FloatArray]:
    points = np.cos(np.pi * (np.arange(count) + 0.5) / count)
    return points, np.asarray(np.linalg.inv(chebvander(points, count - 1)))


def _distance_series(k_length: FloatArray) -> ComplexArray:
    """Return the series in distance of dipoles of length kl (n,), (n_term, n)."""
    place = 2.0 * (k_length - LENGTHS[0]) / (LENGTHS[1] - LENGTHS[0]) - 1.0
    return np.asarray(_table() @ chebvander(place, _DEGREES[1] - 1).T)


def _mutual(series: ComplexArray, distance: FloatArray | ComplexArray) -> ComplexArray:
    """Return Z(kd) for kd = `distance` (n,), of `series` (n_term, n), by Horner's rule."""
    shrink = 1.0 / (distance + 1.0)
    place = 1.0 - 2.0 * (1.0 + NEAREST) * shrink
    value = series[-1].copy()
    for term in series[-2::-1]:
        value *= place
        value += term
    wave = np.cos(distance.real) - 1j * np.sin(distance.real)
    return np.asarray(value * shrink * wave * np.exp(distance.imag))
