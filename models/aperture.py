"""The circle ρ = w through the rims of two plates: basis for the field on it, static energy.

The field E_z on the circle vanishes at both rims (φ = ±α/2), is even about boresight, and goes like
√r at a rim. On the front arc φ = (α/2)·sin(πy/2), on the back arc π − φ = (π − α/2)·sin(πy/2), with
y from 0 (middle of the arc) to 1 (rim): r is then a square, and the field a smooth function of y.
The basis of an arc is b_i(y) = ∫_y¹ P_{2i+1}: even, 0 at the rim, with Legendre's P. Dimensionless.

The energies are those of Laplace's equation; they hold the whole slow part of a modal sum, so what
is left of it converges fast. Kernels: Σ cos(pt)/p = −ln(2 sin(t/2)), and its odd half.
"""

from __future__ import annotations

from functools import cache

import numpy as np
from numpy.polynomial.legendre import leggauss, legvander
from scipy.special import beta, betainc

from models.conventions import FloatArray

__all__ = ["moments", "static_energy"]


def moments(phase: FloatArray, count: int) -> FloatArray:
    """Return ∫₀¹ b_i(y)·cos(z·sin(πy/2)) d(sin(πy/2)) for z = `phase` (...), (..., count)."""
    y, weights = _gauss(24 + 2 * count + int(0.6 * np.max(phase, initial=0.0)))
    index = np.arange(count)
    legendre = legvander(y, 2 * count)
    basis = (legendre[:, 0:-1:2] - legendre[:, 2::2]) / (4 * index + 3)
    measure = weights * np.pi / 2.0 * np.cos(np.pi / 2.0 * y)
    return np.asarray(
        np.cos(phase[..., None] * np.sin(np.pi / 2.0 * y)) @ (measure[:, None] * basis)
    )


def static_energy(apex_angle: FloatArray, count: int) -> FloatArray:
    """Return Σ over all modes inside and outside the circle of order × moment × moment.

    Parameters
    ----------
    apex_angle : (n,)
        Radians, 0 to π.
    count : int
        Basis functions an arc.

    Returns
    -------
    (n, 2·count, 2·count)
        Front arc first. The sums are Σ(2/α)μ + Σ(2/(2π−α))ν inside, Σ l/π outside, of the moments
        of half an arc.
    """
    y, weights = _gauss(24 + 2 * count)
    test = weights[:, None] * _slopes(y, count)
    x = np.sin(np.pi / 2.0 * y)
    add, sub = x[:, None] + x, x[:, None] - x
    gap = 2.0 * np.sin(np.pi / 4.0 * (1.0 - y)) ** 2  # 1 − x without cancellation
    energy = np.empty((apex_angle.size, 2 * count, 2 * count))
    front, back = slice(None, count), slice(count, None)
    for row, alpha in enumerate(apex_angle):
        half, rest = alpha / 2.0, np.pi - alpha / 2.0
        for arc, angle in ((front, half), (back, rest)):
            # What bends the straight-line kernel ln((x+x')/|x−x'|) of the outside to the circle.
            bend = np.log(
                np.sinc(angle / (2.0 * np.pi) * add) / np.sinc(angle / (2.0 * np.pi) * sub)
            )
            energy[row, arc, arc] = _straight(count) + test.T @ bend @ test / (2.0 * np.pi)
        near = half * gap[:, None] + rest * gap
        far = half * (1.0 + x)[:, None] + rest * gap
        across = np.log(np.sin(far / 2.0) / np.sin(near / 2.0))
        energy[row, front, back] = -test.T @ across @ test / (2.0 * np.pi)
        energy[row, back, front] = energy[row, front, back].T
    return energy


def _gauss(count: int) -> tuple[FloatArray, FloatArray]:
    nodes, weights = leggauss(count)
    return (nodes + 1.0) / 2.0, weights / 2.0


def _slopes(y: FloatArray, count: int) -> FloatArray:
    return np.asarray(legvander(y, 2 * count - 1)[:, 1::2])


@cache
def _straight(count: int) -> FloatArray:
    """Energy of an arc, any angle: its sector inside, plus a straight line's kernel outside.

    The logarithms (on the diagonal, and at the rim for the sector) are met by nodes that crowd to
    both ends of every interval; the outer variable splits the inner one.
    """
    u, weights = _gauss(40 + 2 * count)
    ease = 3.0
    y, measure = betainc(ease, ease, u), weights * (u * (1.0 - u)) ** (ease - 1) / beta(ease, ease)
    outer = y[:, None]
    inner = np.concatenate([outer * y, outer + (1.0 - outer) * y], axis=1)
    step = np.concatenate([outer * (1.0 - y), (1.0 - outer) * y], axis=1)
    weight = np.concatenate([outer * measure, (1.0 - outer) * measure], axis=1)
    add = np.sin(np.pi / 2.0 * inner) + np.sin(np.pi / 2.0 * outer)
    sub = 2.0 * np.sin(np.pi / 4.0 * step) * np.cos(np.pi / 4.0 * (inner + outer))
    rim = (
        2.0 * np.sin(np.pi / 4.0 * (1.0 - inner)) ** 2
        + 2.0 * np.sin(np.pi / 4.0 * (1.0 - outer)) ** 2
    )
    quarter = np.pi / 4.0
    sector = (
        np.sin(quarter * add)
        * np.cos(quarter * sub)
        / (np.sin(quarter * sub) * np.sin(quarter * rim))
    )
    kernel = weight * np.log(sector * add / sub)
    inside = np.einsum(
        "oq,oqj->oj", kernel, _slopes(inner.ravel(), count).reshape(*inner.shape, count)
    )
    return np.asarray((measure[:, None] * _slopes(y, count)).T @ inside / (2.0 * np.pi))
