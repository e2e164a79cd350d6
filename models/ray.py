"""`ray`: the finite corner by rays at the plates and radiation of the currents they leave there.

Far fields on both cuts and the power through the sphere (`models.ray_far`), of a sinusoidal
current; impedance by reaction of the plates' currents (`models.ray_currents`) on it (induced EMF),
brought to the terminals of the solved dipole (`models.dipole_port`). Integrals over s and z are
Gauss-Jacobi sums with the weight of a plate edge, (1 − x)^{-1/2}. Amplitudes of waves
(`models.ray_waves`) are found at fewer points and interpolated: polynomials in s and, as befits an
edge, in √(L/2 − z).

Valid from w, L of about 0.6 λ.
"""

from __future__ import annotations

from collections.abc import Iterator
from functools import cache
from typing import Final

import numpy as np
from numpy.typing import NDArray
from scipy.special import roots_jacobi

from models.build import Build
from models.conventions import ETA0, ComplexArray, FloatArray, decibels, wavenumber
from models.dipole import mutual_impedance
from models.dipole_port import at_terminals
from models.edges import SingleArray, WaveArray
from models.geometry import Reflectors
from models.pattern import CUT_ANGLES, Pattern
from models.ray_currents import currents
from models.ray_far import far_fields
from models.ray_sources import Corners, axial_field
from models.ray_waves import Waves, other_waves, own_waves, runs_of

__all__ = ["radiate"]

Counts = tuple[int, int]
"""Numbers of points along s and along half the length."""

_OWN_POINTS: Final = 9, 4
_OTHER_POINTS: Final = 8, 4
_PAIRS: Final = 2_000
_BLOCK: Final = 32_000
"""Small plates whose waves, and points whose currents are held at once: what fits a cache."""

# Where memory is handed back after each large array and cleared again for the next, that takes a
# tenth of the time. glibc keeps whatever is smaller than a block that once was freed (mallopt(3)).
np.empty(1 << 24, dtype=np.uint8)


def radiate(reflectors: Reflectors, frequencies_hz: FloatArray, build: Build) -> Pattern:
    """Return the pattern of every design (n) at every frequency (n_freq).

    Parameters
    ----------
    reflectors : Reflectors
        n designs.
    frequencies_hz : (n_freq,)
        Hz.
    build : Build
        Its conductivity sets the loss of plates and dipole.
    """
    k = wavenumber(frequencies_hz)
    pairs = reflectors.matrix()[:, None, :] * np.where(np.arange(6) == 0, 1.0, k[:, None])
    shape = pairs.shape[:2]
    pairs = pairs.reshape(-1, 6)
    order = np.argsort(pairs[:, 0], kind="stable")
    pairs = pairs[order]
    skin = np.tile(np.sqrt(k * ETA0 / (2.0 * build.conductivity)), shape[0])[order]
    alone = _alone(pairs[:, 4], pairs[:, 5])
    fields = np.empty((2, order.size, CUT_ANGLES.size), dtype=np.complex128)
    numbers = np.empty((5, order.size))
    for rows, scale in _alike(_scales(pairs), _PAIRS):
        points = [(scale[0] * n_s, scale[1] * n_z) for n_s, n_z in (_OWN_POINTS, _OTHER_POINTS)]
        own, other = (_few(pairs[rows], some) for some in points)
        waves = own_waves(own), other_waves(other, min(2 + 4 * scale[0], 20))
        for part, many in _alike(_counts(pairs[rows]), _BLOCK):
            between = [_between(some, many) for some in points]
            here = rows[part]
            to = order[here]
            fields[:, to], numbers[:, to] = _solve(
                pairs[here], skin[here], alone[here], many, waves, part, between
            )
    power, resistance, reactance, efficiency, doubt = numbers.reshape(5, *shape)
    return Pattern(
        angles=CUT_ANGLES,
        h_field=fields[0].reshape(*shape, -1),
        e_field=fields[1].reshape(*shape, -1),
        power=power,
        resistance=resistance,
        reactance=reactance,
        efficiency=efficiency,
        doubt_db=doubt,
    )


def _alone(length: FloatArray, diameter: FloatArray) -> FloatArray:
    """Return the radiation resistance of the dipoles alone, Ω; many designs have the same one."""
    kinds, which = np.unique(np.stack([length, diameter], axis=1), axis=0, return_inverse=True)
    return np.asarray(mutual_impedance(1.0, kinds[:, 0], kinds[:, 1] / 2.0).real[which])


def _counts(pairs: FloatArray) -> NDArray[np.intp]:
    """Return nodes along s and along half the length, (n, 2)."""
    width, half = pairs[:, 2], pairs[:, 3] / 2.0
    # A Gauss sum needs half a node a radian of phase and a few more; coarse steps keep blocks few.
    along_s = 4.0 * np.ceil((0.5 * width + 2.0 * np.cbrt(width) + 1.3) / 4.0)
    along_z = 2.0 * np.ceil((0.5 * half + 1.0) / 2.0) + 1.0
    counts = np.stack([np.maximum(along_s, 12.0), np.maximum(along_z, 5.0)], axis=1)
    return counts.astype(np.intp)


def _scales(pairs: FloatArray) -> NDArray[np.intp]:
    """Return how many times as many points waves need as on a small plate, (n, 2)."""
    return np.ceil(pairs[:, 2:4] / 20.0).astype(np.intp)


def _alike(counts: NDArray[np.intp], most: int) -> Iterator[tuple[NDArray[np.intp], Counts]]:
    """Yield rows that have the same counts, and these; as many as have `most` points together."""
    for n_s, n_z in np.unique(counts, axis=0).tolist():
        rows = np.flatnonzero((counts == (n_s, n_z)).all(axis=1))
        pieces = min(rows.size, -(-rows.size * n_s * n_z // most))
        for part in np.array_split(rows, pieces):
            yield part, (n_s, n_z)


@cache
def _edge_gauss(count: int) -> tuple[FloatArray, FloatArray]:
    """Return places in (0, 1) and weights for what has a plate edge at 1."""
    x, weights = roots_jacobi(count, -0.5, 0.0)
    return (1.0 + x) / 2.0, weights * np.sqrt(1.0 - x) / 2.0


@cache
def _spread_out(count: int) -> FloatArray:
    """Return places in (0, 1) that are good to interpolate from."""
    return np.asarray((1.0 + np.polynomial.legendre.leggauss(count)[0]) / 2.0)


def _few(pairs: FloatArray, points: Counts) -> Corners:
    s, root = (_spread_out(count) for count in points)
    return _corners(pairs, s, 1.0 - root**2)


@cache
def _between(some: Counts, many: Counts) -> tuple[SingleArray, SingleArray]:
    """Return what interpolates from some points to many: along s (n_s, n_few_s), and along z."""
    s, z = (_edge_gauss(count)[0] for count in many)
    along_s = _polynomial(_spread_out(some[0]), s)
    return _single(along_s), _single(_polynomial(_spread_out(some[1]), np.sqrt(1.0 - z)))


def _polynomial(x: FloatArray, y: FloatArray) -> FloatArray:
    """Return the matrix from values at x to values at y of the polynomial through them."""
    weights = 1.0 / np.prod(x[:, None] - x + np.eye(x.size), axis=1)
    share = weights / (y[:, None] - x)
    return np.asarray(share / share.sum(axis=1, keepdims=True))


def _corners(pairs: FloatArray, s: FloatArray, z: FloatArray) -> Corners:
    """Return corners with points at the parts s of the width and z of half the length."""
    alpha, spacing, width, length, dipole, _ = _single(pairs.T)
    return Corners(
        apex_angle=alpha,
        spacing=spacing,
        plate_width=width,
        plate_length=length,
        dipole_length=dipole,
        s=_single(s)[:, None, None] * width,
        z=_single(z)[None, :, None] * (0.5 * length),
    )


def _solve(
    pairs: FloatArray,
    skin: FloatArray,
    alone: FloatArray,
    many: Counts,
    waves: tuple[Waves, ...],
    part: NDArray[np.intp],
    between: list[tuple[SingleArray, SingleArray]],
) -> tuple[ComplexArray, FloatArray]:
    """Return both cuts (2, n, n_angle) and power, R, X, efficiency and doubt (5, n).

    `part` says which corners of the waves these are.
    """
    _, _, width, length, dipole, diameter = pairs.T
    (s, weight_s), (z, weight_z) = (_edge_gauss(count) for count in many)
    c = _corners(pairs, s, z)
    runs = runs_of(c)
    amplitudes: dict[str, WaveArray] = {}
    for some, ways in zip(waves, between, strict=True):
        amplitudes |= some.of(part, runs, *ways)
    surface = currents(c, runs, amplitudes)
    weight = _single(weight_s[:, None, None] * weight_z[:, None] * (0.5 * width * length))
    moments = [j * weight for j in surface]
    h_field, e_field, power = far_fields(c, *(_parts(moment) for moment in moments))
    # Reaction on the dipole: both plates, both halves; the dipole's field is that for 1 A.
    added = -4.0 * (axial_field(c) * moments[0]).sum(axis=(0, 1), dtype=np.complex128)
    gap, maximum = at_terminals(added, dipole, diameter / 2.0)
    # Two measures of one power: over the sphere the better ratio to the field (directivity), by
    # reaction the better resistance; how far they are apart is the model's own doubt.
    outward = ETA0 / np.pi * power
    reaction = alone + added.real
    doubt = np.abs(decibels(np.maximum(reaction, 1e-3 * outward) / outward))
    square = np.abs(maximum) ** 2
    radiated = np.maximum(gap.real, 0.3 * square * outward)
    density = np.sum([j.real**2 + j.imag**2 for j in surface], axis=0)
    plates = 4.0 * (density * weight).sum(axis=(0, 1), dtype=np.float64)
    rod = (dipole - np.sin(dipole)) / 2.0 / (np.pi * diameter)  # ∫ sin²(h − |z|) dz over 2πa
    lost = square * skin * (plates + rod)
    return np.stack([h_field, e_field]), np.stack(
        [power, radiated + lost, gap.imag, radiated / (radiated + lost), doubt]
    )


def _single(array: FloatArray | SingleArray) -> SingleArray:
    return np.ascontiguousarray(array, dtype=np.float32)


def _parts(moment: WaveArray) -> SingleArray:
    """Return real and imaginary part of moments (n_s, n_z, n), as (n, 2, n_s, n_z)."""
    return np.ascontiguousarray(np.stack([moment.real, moment.imag]).transpose(3, 0, 1, 2))
