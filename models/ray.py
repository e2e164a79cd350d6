"""`ray`: the finite corner by rays at the plates and radiation of the currents they leave there.

Far fields on both cuts and the power through the sphere, of a sinusoidal current; impedance by
reaction of the plates' currents on it (induced EMF), brought to the terminals of the solved dipole
(`models.dipole_port`). Currents: `models.ray_currents`. Integrals over s and z are Gauss-Jacobi
sums with the weight of a plate edge, (1 − x)^{-1/2}.

Valid from w, L of about 0.6 λ.
"""

from __future__ import annotations

from dataclasses import replace
from functools import cache
from typing import Final

import numpy as np
from scipy.special import roots_jacobi

from models.build import Build
from models.conventions import ETA0, ComplexArray, FloatArray, decibels, wavenumber
from models.dipole import far_field, mutual_impedance
from models.dipole_port import at_terminals
from models.edges import SingleArray, WaveArray, turn
from models.geometry import Reflectors
from models.pattern import CUT_ANGLES, Pattern
from models.ray_currents import currents
from models.ray_sources import Corners, axial_field

__all__ = ["radiate"]

_BLOCK: Final = 24_000
"""Points on the plates that are held at once: what fits a processor's cache."""


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
    pairs = pairs.reshape(-1, 6)
    skin = np.broadcast_to(
        np.sqrt(k * ETA0 / (2.0 * build.conductivity)), (len(reflectors), k.size)
    )
    shape, angles = (len(reflectors), k.size), CUT_ANGLES
    fields = np.empty((2, pairs.shape[0], angles.size), dtype=np.complex128)
    numbers = np.empty((5, pairs.shape[0]))
    counts = _node_counts(pairs)
    order = np.lexsort((pairs[:, 0], counts[:, 1], counts[:, 0]))
    start = 0
    while start < order.size:
        n_s, n_z = counts[order[start]]
        same = np.all(counts[order[start:]] == (n_s, n_z), axis=1)
        length = int(same.argmin()) if not same.all() else same.size
        rows = order[start : start + min(length, max(1, _BLOCK // int(n_s * n_z)))]
        fields[:, rows], numbers[:, rows] = _solve(pairs[rows], skin.reshape(-1)[rows], n_s, n_z)
        start += rows.size
    power, resistance, reactance, efficiency, doubt = numbers.reshape(5, *shape)
    return Pattern(
        angles=angles,
        h_field=fields[0].reshape(*shape, -1),
        e_field=fields[1].reshape(*shape, -1),
        power=power,
        resistance=resistance,
        reactance=reactance,
        efficiency=efficiency,
        doubt_db=doubt,
    )


def _node_counts(pairs: FloatArray) -> np.ndarray:
    """Return nodes along s and along half the length, (n, 2) integers."""
    width, half = pairs[:, 2], pairs[:, 3] / 2.0
    # A Gauss sum needs half a node a radian of phase and a few more; coarse steps keep blocks few.
    along_s = 4.0 * np.ceil((0.6 * width + 6.5) / 4.0)
    along_z = 2.0 * np.ceil((0.5 * half + 2.0) / 2.0)
    return np.stack([along_s, along_z], axis=1).astype(np.intp)


@cache
def _edge_gauss(count: int) -> tuple[FloatArray, FloatArray]:
    x, weights = roots_jacobi(count, -0.5, 0.0)
    return x, weights * np.sqrt(1.0 - x) / 2.0


@cache
def _between(few: int, count: int) -> SingleArray:
    """Return what interpolates, by a polynomial, from `few` edge nodes to `count`, (count, few)."""
    x, y = _edge_gauss(few)[0], _edge_gauss(count)[0]
    weights = 1.0 / np.prod(x[:, None] - x + np.eye(few), axis=1)
    share = weights / (y[:, None] - x)
    return _single(share / share.sum(axis=1, keepdims=True))


@cache
def _plain_gauss(count: int) -> tuple[FloatArray, FloatArray]:
    x, weights = np.polynomial.legendre.leggauss(count)
    return x, weights


def _nodes(size: FloatArray, count: int) -> tuple[FloatArray, FloatArray]:
    """Return places in (0, size) and weights, (n, count), for what has a plate edge at `size`."""
    x, weights = _edge_gauss(count)
    return size[:, None] * (1.0 + x) / 2.0, size[:, None] * weights


def _solve(
    pairs: FloatArray, skin: FloatArray, n_s: int, n_z: int
) -> tuple[ComplexArray, FloatArray]:
    """Return both cuts (2, n, n_angle) and power, R, X, efficiency and doubt (5, n)."""
    alpha, spacing, width, length, dipole, diameter = pairs.T
    s, weight_s = _nodes(width, n_s)
    z, weight_z = _nodes(length / 2.0, n_z)
    corners = Corners(
        apex_angle=_single(alpha),
        spacing=_single(spacing),
        plate_width=_single(width),
        plate_length=_single(length),
        dipole_length=_single(dipole),
        s=_single(s.T[:, None, :]),
        z=_single(z.T[None, :, :]),
    )
    n_few = max(n_s // 3 + 2, 2 * n_s // 3 - 4)
    few = replace(corners, s=_single(_nodes(width, n_few)[0].T[:, None, :]))
    surface = currents(corners, few, _between(n_few, n_s))
    along_z, along_s = (np.ascontiguousarray(np.moveaxis(j, 2, 0)) for j in surface)
    weight = _single(weight_s[:, :, None] * weight_z[:, None, :])
    moment_z, moment_s = along_z * weight, along_s * weight
    h_field, e_field = _cuts(corners, moment_z, moment_s)
    power = _sphere_mean(corners, moment_z, moment_s)
    # Reaction on the dipole: both plates, both halves; the dipole's field is that for 1 A.
    axial = axial_field(corners)
    moments = surface[0] * np.ascontiguousarray(weight.transpose(1, 2, 0))
    added = -4.0 * (axial * moments).sum(axis=(0, 1), dtype=np.complex128)
    gap, maximum = at_terminals(added, dipole, diameter / 2.0)
    # Two measures of one power: over the sphere the better ratio to the field (directivity), by
    # reaction the better resistance; how far they are apart is the model's own doubt.
    outward = ETA0 / np.pi * power
    reaction = mutual_impedance(1.0, dipole, diameter / 2.0).real + added.real
    doubt = np.abs(decibels(np.maximum(reaction, 1e-3 * outward) / outward))
    square = np.abs(maximum) ** 2
    radiated = np.maximum(gap.real, 0.3 * square * outward)
    density = along_z.real**2 + along_z.imag**2 + along_s.real**2 + along_s.imag**2
    plates = 4.0 * (density * weight).sum(axis=(1, 2), dtype=np.float64)
    rod = (dipole - np.sin(dipole)) / 2.0 / (np.pi * diameter)  # ∫ sin²(h − |z|) dz over 2πa
    lost = square * skin * (plates + rod)
    return np.stack([h_field, e_field]), np.stack(
        [power, radiated + lost, gap.imag, radiated / (radiated + lost), doubt]
    )


def _single(array: FloatArray) -> SingleArray:
    return np.ascontiguousarray(array, dtype=np.float32)


def _cuts(
    c: Corners, moment_z: WaveArray, moment_s: WaveArray
) -> tuple[ComplexArray, ComplexArray]:
    """Return f on the H- and the E-plane cut, (n, n_angle) each, of moments (n, n_s, n_z)."""
    angles = CUT_ANGLES.astype(np.float32)
    psi = angles[: angles.size // 2 + 1]
    half, spacing, length = (
        0.5 * c.apex_angle[:, None],
        c.spacing[:, None],
        c.dipole_length[:, None],
    )
    s, z = c.s[:, 0].T[:, :, None], c.z[0].T[:, :, None]
    toward = turn(-s * np.cos(psi - half)[:, None]) + turn(-s * np.cos(psi + half)[:, None])
    h_plates = _all_round(moment_z.sum(axis=2)[:, None, :], toward)[:, 0]
    ahead = turn(-spacing * np.cos(angles))
    h_field = far_field(1.0, length, 1.0, 0.0) * ahead + h_plates
    # E-plane: 2·½·2 for both plates, the factor of a current, both halves.
    tilt = turn(-s * (np.cos(psi) * np.cos(half))[:, None])
    height = z * np.sin(angles)
    even = (_all_round(moment_z.swapaxes(1, 2), tilt) * np.cos(height)).sum(axis=1)
    odd = (_all_round(moment_s.swapaxes(1, 2), tilt) * np.sin(height)).sum(axis=1)
    forward, cosine = np.cos(CUT_ANGLES), np.sin(CUT_ANGLES)
    sine, facing = np.abs(forward), np.where(forward >= 0.0, 1.0, -1.0)
    e_plates = 2.0 * sine * even - 2j * (cosine * facing) * np.cos(half) * odd
    e_field = far_field(1.0, length, sine, cosine) * ahead + e_plates
    return np.asarray(h_field, dtype=np.complex128), np.asarray(e_field, dtype=np.complex128)


def _turned(moments: WaveArray, phases: WaveArray) -> WaveArray:
    """Return moments @ phases and moments @ phases*, stacked; the second serves π − ψ."""
    both = np.concatenate([moments, moments.conj()], axis=1) @ phases
    count = moments.shape[1]
    return np.stack([both[:, :count], both[:, count:].conj()])


def _all_round(moments: WaveArray, phases: WaveArray) -> WaveArray:
    """Return moments @ phases on all angles, with the phases of those up to 90°."""
    front, back = _turned(moments, phases)
    return np.concatenate([front, back[..., -2::-1]], axis=2)


def _sphere_mean(c: Corners, moment_z: WaveArray, moment_s: WaveArray) -> FloatArray:
    """Return the mean of |f|² over the sphere, both polarisations, (n,).

    Gauss-Legendre in cosθ over one hemisphere, equal steps in φ over half a turn; φ past 90° by
    conjugation.
    """
    n, count_s, count_z = moment_z.shape
    nodes, weights = _plain_gauss(count_z + 1)
    cosines = ((nodes + 1.0) / 2.0).astype(np.float32)
    sines = np.sqrt(1.0 - cosines**2)
    steps = count_s // 2
    phi = ((np.arange(steps) + 0.5) * (np.pi / 2.0 / steps)).astype(np.float32)
    # Moments along z, even for the current along z and odd for that along s: (θ, n, 2, n_s).
    height = c.z[0].T[:, :, None] * cosines
    even = moment_z @ (sines * np.cos(height)).astype(np.complex64)
    odd = 1j * (moment_s @ np.sin(height).astype(np.complex64))
    moments = np.ascontiguousarray(np.stack([even, odd]).transpose(3, 1, 0, 2))
    moments = np.concatenate([moments, moments.conj()], axis=2)
    sine, cosine = sines[:, None, None], cosines[:, None, None]
    dipole = far_field(1.0, c.dipole_length[:, None], sine, cosine).astype(np.float32)
    ahead = dipole * turn(-(c.spacing[:, None] * sine) * np.cos(phi))
    # Both halves of the turn, (θ, n, φ) each: toward the front, and φ past 90°.
    theta, cross = [ahead, ahead.conj()], [np.zeros_like(ahead), np.zeros_like(ahead)]
    s = c.s[:, 0].T[:, :, None]
    for bend in (phi - 0.5 * c.apex_angle[:, None], phi + 0.5 * c.apex_angle[:, None]):
        across = (sine * np.cos(bend)).swapaxes(0, 1).reshape(n, 1, -1)
        phases = turn(-s * across).reshape(n, count_s, cosines.size, steps)
        plate = moments @ np.ascontiguousarray(phases.transpose(2, 0, 1, 3))
        for half, facing in ((0, -1.0), (1, 1.0)):
            along_z, along_s = plate[:, :, 2 * half], plate[:, :, 2 * half + 1]
            if half:
                along_z, along_s = along_z.conj(), along_s.conj()
            theta[half] = theta[half] + along_z + facing * cosine * np.cos(bend) * along_s
            cross[half] = cross[half] + np.sin(bend) * along_s
    power = sum(np.abs(field) ** 2 for field in (*theta, *cross))
    return np.asarray((power.sum(axis=2).T @ weights) / (4.0 * steps))
