"""Far field of the currents that `ray` finds: both cuts, and the mean over the sphere.

f as in `models.pattern`; lengths times k. Fields are band-limited: sources within R of the phase
reference give harmonics up to about R. So a cut is found in as many directions as that takes and
interpolated; the sphere takes those of the H-plane at each of few heights (Gauss-Legendre in cosθ).

A field is a sum over the plates of moments times the cosine and the sine of a phase: real products
of small matrices. One pair of them serves e^{+j·phase} and e^{−j·phase}, so 90° of a cut give 180°.

Source: Balanis, *Antenna Theory*, 4th ed., §12.2 (radiation integrals).
"""

from __future__ import annotations

from functools import cache
from typing import Final

import numpy as np

from models.conventions import ComplexArray, FloatArray
from models.dipole import far_field
from models.edges import SingleArray, WaveArray, turn
from models.pattern import CUT_ANGLES, cosine_interpolation, middles
from models.ray_sources import Corners

__all__ = ["far_fields"]

_BLOCK: Final = 400_000
"""Phases that are held at once: what fits a processor's cache."""


def far_fields(
    c: Corners, moment_z: SingleArray, moment_s: SingleArray
) -> tuple[ComplexArray, ComplexArray, FloatArray]:
    """Return f on the H- and the E-plane cut, (n, n_angle) each, and the mean of |f|², (n,).

    Parameters
    ----------
    c : Corners
        With the points of the plates, n_s × n_z.
    moment_z, moment_s : (n, 2, n_s, n_z)
        Moments of the current along z and along s, A/k: real and imaginary part.
    """
    half = 0.5 * c.apex_angle
    ahead, aside = c.plate_width * np.cos(half), c.plate_width * np.sin(half)
    up = 0.5 * c.plate_length
    # Middle and radius of a circle about the plates in the H-plane, then in the E-plane; the feed
    # may be outside.
    middle_h = np.minimum(ahead, 0.5 * c.plate_width / np.cos(np.minimum(half, 1.5)))
    across = np.maximum(np.maximum(aside, middle_h), np.abs(c.spacing - middle_h))
    middle_e = 0.5 * ahead
    along = np.maximum(np.hypot(middle_e, up), np.abs(c.spacing - middle_e))
    reach = np.hypot(across, up)
    n, _, n_s, _ = moment_z.shape
    pieces = min(n, -(-n * n_s * _samples(across) * _levels(reach) // _BLOCK))
    h_field, e_field = (np.empty((n, CUT_ANGLES.size), dtype=np.complex128) for _ in range(2))
    power = np.empty(n)
    for rows in np.array_split(np.argsort(reach), pieces):  # those of like size together
        some, moments = c.take(rows), (moment_z[rows], moment_s[rows])
        counts = _samples(across[rows]), _levels(reach[rows])
        h_field[rows], power[rows] = _around(some, *moments, middle_h[rows], *counts)
        e_field[rows] = _over(some, *moments, middle_e[rows], _samples(along[rows]))
    return h_field, e_field, power


def _samples(reaches: SingleArray) -> int:
    """Return how many directions in half a turn sources as far as `reaches` need; even."""
    # Bessel's J_m(R) is below 1e-5 from there on.
    reach = float(reaches.max())
    return 2 * int(np.ceil((reach + 2.5 * np.cbrt(reach) + 2.0) / 2.0))


def _levels(reaches: SingleArray) -> int:
    """Return how many heights over the H-plane the power of sources as far as `reaches` needs."""
    return int(np.ceil(0.36 * float(reaches.max()) + 1.9))  # by trial, for 1e-4 dB


@cache
def _heights(count: int) -> tuple[SingleArray, SingleArray, FloatArray]:
    """Return sinθ, cosθ and weights over the upper hemisphere: the H-plane, and `count` above it.

    Half of a Gauss-Legendre sum from pole to pole, as the power is even.
    """
    nodes, weights = np.polynomial.legendre.leggauss(2 * count + 1)
    cosine = np.abs(nodes[count:]).astype(np.float32)
    weights = np.concatenate([weights[count : count + 1] / 2.0, weights[count + 1 :]])
    return np.sqrt(1.0 - cosine * cosine), cosine, weights


def _around(
    c: Corners,
    moment_z: SingleArray,
    moment_s: SingleArray,
    middle: SingleArray,
    samples: int,
    levels: int,
) -> tuple[ComplexArray, FloatArray]:
    """Return f on the H-plane cut, (n, n_angle), and the mean of |f|² over the sphere, (n,)."""
    n, _, n_s, n_z = moment_z.shape
    sine, cosine, weights = _heights(levels)
    phi = middles(samples)[: samples // 2].astype(np.float32)
    height = c.z[0].T[:, :, None] * cosine
    # Moments along z: even for the current along z, odd and times j for that along s; (n, θ, real
    # and imaginary part, z and s, n_s).
    rows = np.empty((n, sine.size, 2, 2, n_s), dtype=np.float32)
    even = moment_z.reshape(n, -1, n_z) @ (np.cos(height) * sine)
    rows[:, :, :, 0] = even.reshape(n, 2, n_s, -1).transpose(0, 3, 1, 2)
    odd = (moment_s.reshape(n, -1, n_z) @ np.sin(height)).reshape(n, 2, n_s, -1)
    np.negative(odd[:, 1].swapaxes(1, 2), out=rows[:, :, 0, 1])
    rows[:, :, 1, 1] = odd[:, 0].swapaxes(1, 2)
    half = 0.5 * c.apex_angle[:, None]
    bend = np.concatenate([phi - half, phi + half], axis=1)[:, None, :]
    sine, cosine = sine[:, None], cosine[:, None]
    toward = np.cos(bend)
    waves = _waves(c.s[:, 0].T[:, :, None] * (sine * toward).reshape(n, 1, -1))
    waves = waves.reshape(2, n, n_s, -1, samples).swapaxes(2, 3)
    dipole = far_field(1.0, c.dipole_length[:, None, None], sine, cosine).astype(np.float32)
    ahead = dipole * turn(-(c.spacing[:, None, None] * sine) * np.cos(phi))
    tilt, aside = cosine * toward, np.sin(bend)
    power = np.zeros((n, levels + 1), dtype=np.float32)
    cut = []
    # Toward the front, and φ past 90°.
    both = _both_ways(rows.reshape(n, levels + 1, 4, n_s) @ waves)
    for plates, alone, facing in zip(both, (ahead, ahead.conj()), (-1.0, 1.0), strict=True):
        along_z, along_s = plates[:, :, 0], plates[:, :, 1]
        theta = _plates(along_z + (facing * tilt) * along_s) + alone
        power += _strength(theta) + _strength(_plates(aside * along_s))
        cut.append(theta[:, 0])
    return _interpolated(cut[0], cut[1], middle), power @ weights / samples


def _over(
    c: Corners,
    moment_z: SingleArray,
    moment_s: SingleArray,
    middle: SingleArray,
    samples: int,
) -> ComplexArray:
    """Return f on the E-plane cut, (n, n_angle)."""
    n, _, n_s, n_z = moment_z.shape
    psi = middles(samples)[: samples // 2].astype(np.float32)
    forward, cosine = np.cos(psi), np.sin(psi)
    half = np.cos(0.5 * c.apex_angle)[:, None]
    waves = _waves(c.s[:, 0].T[:, :, None] * (half * forward)[:, None, :])
    rows = np.concatenate([moment_z, moment_s], axis=3).swapaxes(2, 3).reshape(n, -1, n_s)
    height = c.z[0].T[:, :, None] * cosine
    # Moments along z: even for the current along z, odd for that along s. Both plates alike.
    level = np.stack(
        [
            (2.0 * forward) * np.cos(height),
            (2.0 * half * cosine)[:, None] * np.sin(height),
        ],
        axis=1,
    )
    sums = (rows @ waves).reshape(2, n, 2, 2, n_z, -1)
    sums *= level[:, None]
    front, back = _both_ways(sums.sum(axis=4).reshape(2, n, 4, -1))
    dipole = far_field(1.0, c.dipole_length[:, None], forward, cosine).astype(np.float32)
    ahead = dipole * turn(-c.spacing[:, None] * forward)
    # Along the cut's own tangent the field is smooth through the zenith; E_θ changes sign there.
    front = front[:, 0] - 1j * front[:, 1] + ahead
    back = -back[:, 0] - 1j * back[:, 1] - ahead.conj()
    e_field = _interpolated(front, back, middle)
    e_field[:, CUT_ANGLES - np.pi / 2.0 > 1e-9] *= -1.0
    return e_field


def _waves(phase: SingleArray) -> SingleArray:
    """Return cosine and sine, (2, ...)."""
    waves = np.empty((2, *phase.shape), dtype=np.float32)
    np.cos(phase, out=waves[0])
    np.sin(phase, out=waves[1])
    return waves


def _both_ways(sums: SingleArray) -> WaveArray:
    """Return sums of moments times e^{+j·phase} and times e^{−j·phase}, (2, ..., m, n_direction).

    `sums` (2, ..., 2m, n_direction) are those of the real parts and then the imaginary parts of
    the moments, times cosine and sine.
    """
    count = sums.shape[-2] // 2
    (re_cos, im_cos), (re_sin, im_sin) = ((s[..., :count, :], s[..., count:, :]) for s in sums)
    out = np.empty((2, *re_cos.shape), dtype=np.complex64)
    np.subtract(re_cos, im_sin, out=out[0].real)
    np.add(im_cos, re_sin, out=out[0].imag)
    np.add(re_cos, im_sin, out=out[1].real)
    np.subtract(im_cos, re_sin, out=out[1].imag)
    return out


def _plates(field: WaveArray) -> WaveArray:
    """Return the sum over both plates, side by side on the last axis."""
    half = field.shape[-1] // 2
    return np.asarray(field[..., :half] + field[..., half:])


def _strength(field: WaveArray) -> SingleArray:
    return np.asarray((field.real**2 + field.imag**2).sum(axis=-1))


def _interpolated(front: WaveArray, back: WaveArray, middle: SingleArray) -> ComplexArray:
    """Return a cut at `CUT_ANGLES`, of samples up to 90° and, in the same order, back from 180°.

    It is smoothest with the phase reference in the middle of the sources, `middle` ahead of the
    apex.
    """
    n, count = front.shape[0], 2 * front.shape[1]
    samples = np.concatenate([front, back[:, ::-1]], axis=1)
    samples *= turn(middle[:, None] * np.cos(middles(count)).astype(np.float32))
    parts = np.stack([samples.real, samples.imag]).reshape(2 * n, count) @ _between(count)
    field = turn(-middle[:, None] * np.cos(CUT_ANGLES).astype(np.float32))
    field *= parts[:n] + np.complex64(1j) * parts[n:]
    return field.astype(np.complex128)


@cache
def _between(count: int) -> SingleArray:
    """Return the matrix from samples in the middles to `CUT_ANGLES`, (count, n_angle)."""
    return cosine_interpolation(count, CUT_ANGLES).T.astype(np.float32)
