"""Currents on both plates by rays: images, apex, rims, plate ends. Lengths times k, for 1 A.

The corner is unfolded. A plate is lit by the dipole and by its images behind the other plate, at
(2j + 1)·α/2 from the plate's face; each gives the current of geometrical optics, −2·H·n/ρ, times
what its edges do to it (`models.edges`, detour of the ray from the dipole's centre):

- the rim s = w lies along E: `soft`. What the other plate's rim diffracts, straight or by way of
  reflections, adds as if from that rim.
- the ends z = ±L/2 lie along H: `hard`, one end's wave stopped again by the other end. The current
  along s that an oblique ray leaves at the end belongs to it. What the other plate's ends diffract,
  H and E along that end, adds likewise.
- the apex diffracts what images leave out; the wave is treated as that of one more image.

What is smooth in this comes from `models.ray_waves`.

Valid from w, L of about 0.6 λ; finite and continuous in all dimensions.

Source: Kouyoumjian & Pathak, Proc. IEEE 62 (1974); Sommerfeld 1896; Macdonald 1915.
"""

from __future__ import annotations

import numpy as np

from models.edges import (
    WaveArray,
    hard,
    root,
    seen_part,
    shed,
    soft,
    spread,
    still,
    turn,
)
from models.ray_sources import Corners, Runs, magnetic_field, place
from models.ray_waves import by_end, by_rim

__all__ = ["currents"]


def currents(
    c: Corners, runs: dict[str, Runs], waves: dict[str, WaveArray]
) -> tuple[WaveArray, WaveArray]:
    """Return the current densities along z and along s at the points, (n_s, n_z, n).

    Parameters
    ----------
    c : Corners
        n corners.
    runs : dict
        Their rays of each kind, as of `ray_waves.runs_of`.
    waves : dict
        The amplitudes of each kind at the points, (n_s, n_z, n_ray).
    """
    shape = c.s.shape[0], c.z.shape[1], c.apex_angle.size
    along_z, along_s, by_ends = (np.zeros(shape, dtype=np.complex64) for _ in range(3))
    lit, oblique, at_ends = _lit(c, runs["far"], waves)
    _add(along_z, runs["far"], lit)
    _add(along_s, runs["far"], oblique)
    _add(along_z, runs["rim"], _by_rims(c, runs["rim"], waves["rim"], at_ends))
    grazing = root(2.0 * (c.plate_width - c.s))
    along_s *= hard(grazing)
    for kind, sense in (("up", 0.5), ("down", -0.5)):
        if runs[kind]:
            _add(by_ends, runs[kind], _by_ends(c, runs[kind], waves[kind], sense))
    by_ends *= soft(grazing)
    along_z += by_ends
    return along_z, along_s


def _add(total: WaveArray, runs: Runs, parts: WaveArray) -> None:
    """Add the parts, one run after the other, to those of the corners."""
    start = 0
    for _, n in runs:
        total[..., :n] += parts[..., start : start + n]
        start += n


def _lit(
    corners: Corners, runs: Runs, waves: dict[str, WaveArray]
) -> tuple[WaveArray, WaveArray, WaveArray]:
    """Return the currents by the images and the apex: along z, and along s on a plate without rim.

    And what the ends make of the first image's current.
    """
    n = corners.apex_angle.size
    c, turned = corners.along(runs)
    along, off = place(c, turned)
    shift = c.s - along
    rho2, z2 = shift * shift + off * off, c.z * c.z
    direct = np.sqrt(rho2 + z2)
    images = slice(turned.size - n)
    rho = np.sqrt(rho2[..., images])
    optics = magnetic_field(c.part(images), rho, direct[..., images])
    signs = np.array([(-2.0, 2.0)[int(order) % 2] for order, _ in runs[:-1]], dtype=np.float32)
    optics *= np.repeat(signs, [count for _, count in runs[:-1]]) * off[images] / rho
    optics = np.concatenate([optics, waves["apex"]], axis=-1)
    half = 0.5 * c.plate_length
    before = np.sqrt(off * off + half * half)
    lit = turn(direct)
    back = lit[..., :n].conj()
    oblique: WaveArray = np.zeros(direct.shape, dtype=np.complex64)
    for kind, sense in (("far", 1.0), ("near", -1.0)):
        behind = half - sense * c.z
        path = before + behind
        over = np.sqrt(path * path + shift * shift)
        zeta = root(over - direct)
        wave = turn(over)
        wave *= waves[kind]
        oblique += shed(zeta, sense * shift / path) * wave
        # The wave that runs back from this end stops again at the other one.
        wave *= hard(root(2.0 * (c.plate_length - behind) * path / over))
        wave *= still(zeta)
        wave *= -2.0
        lit += wave
    at_ends = lit[..., :n] * back
    oblique *= optics
    lit *= optics
    rim = np.sqrt((c.plate_width - along) ** 2 + off * off) + c.plate_width - c.s
    over = np.sqrt(rim * rim + z2)
    factor = soft(root(over - direct))
    factor -= 1.0
    factor *= spread(direct, over)
    factor += 1.0
    lit *= factor
    return lit, oblique, at_ends


def _by_rims(corners: Corners, runs: Runs, wave: WaveArray, at_ends: WaveArray) -> WaveArray:
    """Return the current by the waves of the rims as our rim, our ends and the apex leave it."""
    c, seen = corners.along(runs)
    w = c.plate_width
    after, path = by_rim(c, seen)
    over = np.sqrt(path * path + c.z * c.z)
    steepness = path / over
    across = np.sqrt(2.0 * w * w * (1.0 - np.cos(seen)))
    view = soft(root(steepness * (across + w - c.s - after)))
    # Past the line of our plate the rim fades behind the apex.
    view *= seen_part(root(steepness * (w + c.s - after)), np.pi - seen)
    view *= np.clip(5.0 - 4.0 * seen / np.pi, 0.0, 1.0) ** 2
    view *= turn(over)
    view *= wave
    view *= np.concatenate([at_ends[..., :n] for _, n in runs], axis=-1)
    return view


def _by_ends(corners: Corners, runs: Runs, wave: WaveArray, sense: float) -> WaveArray:
    """Return the current by the waves of the ends at `sense`·L of other plates."""
    c, seen = corners.along(runs)
    before, after, along = by_end(c, seen, 0.5 * c.apex_angle, sense * c.plate_length)
    path = before + after
    current = turn(np.sqrt(path * path + along * along))
    current *= wave
    return current
