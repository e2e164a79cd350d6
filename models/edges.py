"""Diffraction at the edge of a thin plate: Fresnel's tail and what it makes of the plate's current.

Everything is a function of ζ, ζ² being the detour over the edge in radians: k(path over the edge −
direct path). For a half-plane these are Sommerfeld's exact results; the current on it is that of
geometrical optics times `soft` (E along the edge) or `hard` (H along the edge). They stay finite at
every shadow boundary. The transition function of the uniform theory is the same tail rescaled.

Single precision throughout: a ray sum needs no more, and current numpy computes sines of single
numbers some fifty times faster than of double ones.

Source: Sommerfeld 1896; Kouyoumjian & Pathak, Proc. IEEE 62 (1974); Macdonald 1915.
"""

from __future__ import annotations

from typing import Final

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy.special import wofz

from models.conventions import ComplexArray

__all__ = [
    "SingleArray",
    "WaveArray",
    "hard",
    "root",
    "seen_part",
    "shed",
    "soft",
    "spread",
    "still",
    "tail",
    "transition",
    "turn",
]

SingleArray = NDArray[np.float32]
WaveArray = NDArray[np.complex64]

_EDGE: Final = complex(np.exp(-0.25j * np.pi) / np.sqrt(np.pi))

_TINY: Final = 1e-12
_COUNT: Final = 16_384
"""The smooth part of the tail is tabulated, evenly over 1/(1 + ζ), and read off to 2e-5."""


def transition(x: ArrayLike) -> ComplexArray:
    """Return F(x) = 2j√x·e^{jx} ∫_√x^∞ e^{−jt²} dt of the uniform theory, x >= 0."""
    zeta = np.sqrt(np.asarray(x, dtype=np.float64))
    return np.asarray(np.sqrt(np.pi) * np.exp(0.25j * np.pi) * zeta * _still_tail(zeta) * 2.0)


def _still_tail(zeta: NDArray[np.float64]) -> ComplexArray:
    """Return e^{+jζ²}·Q(ζ), from the Faddeeva function."""
    return np.asarray(0.5 * wofz(1j * np.exp(0.25j * np.pi) * zeta))


def _table() -> WaveArray:
    # An index is cut off, not rounded: entries stand for the middles.
    place = (np.arange(_COUNT + 1) + 0.5) / _COUNT
    return _still_tail(np.maximum(1.0 / place - 1.0, 0.0)).astype(np.complex64)


_TABLE = _table()


def turn(phase: SingleArray) -> WaveArray:
    """Return e^{−j·phase} (radians, any shape)."""
    out = np.empty(phase.shape, dtype=np.complex64)
    np.cos(phase, out=out.real)
    np.sin(-phase, out=out.imag)
    return out


def still(zeta: SingleArray) -> WaveArray:
    """Return e^{+jζ²}·Q(ζ), the tail without its phase: smooth and falling, ζ >= 0."""
    place = zeta + np.float32(1.0)
    np.divide(np.float32(_COUNT), place, out=place)
    return np.asarray(_TABLE.take(place.astype(np.intp), mode="clip"))


def root(square: SingleArray) -> SingleArray:
    """Return the square root of a detour, which rounding may have made negative or nothing."""
    out = np.maximum(square, np.float32(_TINY))
    return np.asarray(np.sqrt(out, out=out))


def tail(zeta: SingleArray) -> WaveArray:
    """Return Fresnel's tail Q(ζ) = e^{jπ/4}/√π ∫_ζ^∞ e^{−jt²} dt; Q(0) = ½, ζ >= 0."""
    out = still(zeta)
    out *= turn(zeta * zeta)
    return out


def seen_part(zeta: SingleArray, inside: SingleArray) -> WaveArray:
    """Return the part of a wave seen past an edge: 1 − Q(ζ) where `inside` >= 0, Q(ζ) beyond."""
    out = tail(zeta)
    out -= 0.5
    out *= np.copysign(np.float32(1.0), -inside)
    out += 0.5
    return out


def hard(zeta: SingleArray) -> WaveArray:
    """Return the current near an edge along H over that without the edge; 0 at the edge."""
    out = tail(zeta)
    out *= -2.0
    out += 1.0
    return out


def soft(zeta: SingleArray) -> WaveArray:
    """Return the current near an edge along E over that without the edge; 1/ζ at the edge."""
    out = still(zeta)
    out *= -2.0
    out += shed(zeta)
    out *= turn(zeta * zeta)
    out += 1.0
    return out


def shed(zeta: SingleArray, weight: SingleArray | float = 1.0) -> WaveArray:
    """Return e^{−jπ/4}/(√π·ζ), times `weight`.

    The current along an edge that a wave leaves; it has the phase of the tail, e^{−jζ²}, yet to
    come.
    """
    size = weight / zeta
    out = np.empty(size.shape, dtype=np.complex64)
    np.multiply(size, np.float32(_EDGE.real), out=out.real)
    np.negative(out.real, out=out.imag)
    return out


def spread(direct: SingleArray, over: SingleArray) -> SingleArray:
    """Return √(2R²/(R'(R' + R))): what the tail needs for a point source at finite distance.

    Leading term of Macdonald's integral for a point source and a half-plane; `direct` R and `over`
    R' in one unit.
    """
    return np.asarray(direct * np.sqrt(2.0 / (over * (over + direct))))
