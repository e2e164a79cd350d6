"""Currents on both plates by rays: images, apex, rims, plate ends. Lengths times k, for 1 A.

The corner is unfolded. A plate is lit by the dipole and by its images behind the other plate, at
(2j + 1)·α/2 from the plate's face; each gives the current of geometrical optics, −2·H·n/ρ, times
what its edges do to it (`models.edges`, detour of the ray from the dipole's centre):

- the rim s = w lies along E: `soft`. What the other plate's rim diffracts, straight or by way of
  reflections, adds as if from that rim.
- the ends z = ±L/2 lie along H: `hard`, one end's wave stopped again by the other end. The current
  along s that an oblique ray leaves at the end belongs to it. What the other plate's ends diffract,
  H and E along that end, adds likewise. Ends begin at the apex: Fresnel's tail about it, too.
- the apex diffracts what images leave out when α is not 180°/n: exact for endless plates, the
  integral of Oberhettinger and of Biot & Tolstoy integrated by parts.

Valid from w, L of about 0.6 λ; finite and continuous in all dimensions. Every term holds the
dipole's exact near field, so nothing is asymptotic but the detours.

Source: Kouyoumjian & Pathak, Proc. IEEE 62 (1974); Sommerfeld 1896; Macdonald 1915; Biot & Tolstoy,
J. Acoust. Soc. Am. 29 (1957).
"""

from __future__ import annotations

from typing import Final

import numpy as np

from models.edges import SingleArray, WaveArray, hard, seen_part, shed, soft, spread, tail
from models.ray_sources import Corners, Sources, lobe, magnetic_field

__all__ = ["currents"]

_APEX_NODES: Final = 6
_APEX_REACH: Final = 3.6
_TINY: Final = 1e-12


def _apex_nodes() -> list[tuple[float, float]]:
    """Return Gauss-Legendre nodes and weights, crowded towards the pole of the kernel at 0."""
    nodes, weights = np.polynomial.legendre.leggauss(_APEX_NODES)
    root = (nodes + 1.0) / 2.0
    steps = _APEX_REACH * root * weights
    return list(zip((_APEX_REACH * root**2).tolist(), steps.tolist(), strict=True))


_APEX: Final = _apex_nodes()


def currents(corners: Corners, few: Corners, between: SingleArray) -> tuple[WaveArray, WaveArray]:
    """Return the current densities along z and along s at the points, (n_s, n_z, n).

    What other edges diffract is smooth along s but for factors in closed form, so it is found at
    few points and interpolated.

    Parameters
    ----------
    corners : Corners
        With the points that are asked for.
    few : Corners
        The same corners with fewer points along s, (n_few, 1, n).
    between : (n_s, n_few)
        What makes values at the asked points of those at the few.
    """
    sources, at_few = Sources(corners), Sources(few)
    rim = hard(_root(2.0 * (corners.plate_width - corners.s)))
    along_z, along_s = _apex(corners, few, between)
    along_s *= rim
    orders = int(np.ceil(np.pi / float(corners.apex_angle[0])))
    ends_of_first: WaveArray = along_z
    for j, n in corners.lit():
        optics = _image(corners.first(n), sources, j)
        at_ends, oblique = (
            _at_all(part, between) for part in _ends_of_image(few.first(n), at_few, j)
        )
        along_z[..., :n] += optics * _at_rim(corners.first(n), sources, j) * at_ends
        along_s[..., :n] += optics * oblique * rim[..., :n]
        if j == 0:
            ends_of_first = at_ends
    by_ends = np.zeros(np.broadcast_shapes(few.s.shape, few.z.shape), dtype=np.complex64)
    for m in range(1, 2 * orders):
        n = corners.count(m / 1.25)
        if n:
            waves = _at_all(_rim(few.first(n), at_few, m), between)
            along_z[..., :n] += waves * _rim_view(corners.first(n), m) * ends_of_first[..., :n]
        n = corners.count(m)
        if n:
            by_ends[..., :n] += _ends(few.first(n), at_few, m)
    grazing = soft(_root(2.0 * (corners.plate_width - corners.s)))
    along_z += _at_all(by_ends, between) * grazing
    return along_z, along_s


def _at_all(values: WaveArray, between: SingleArray) -> WaveArray:
    """Return `values` (n_few, n_z, n) at all points along s, (n_s, n_z, n)."""
    few = values.shape[0]
    flat = between.astype(np.complex64) @ np.ascontiguousarray(values).reshape(few, -1)
    return np.asarray(flat.reshape(-1, *values.shape[1:]))


def _root(square: SingleArray) -> SingleArray:
    return np.asarray(np.sqrt(np.maximum(square, _TINY)))


def _sign(order: int) -> float:
    return -1.0 if order % 2 else 1.0


def _image(c: Corners, sources: Sources, j: int) -> WaveArray:
    """Return the current of geometrical optics that image j gives."""
    rho, _, field = sources(2 * j + 1, c.apex_angle.size)
    normal = c.spacing * np.sin((j + 0.5) * c.apex_angle)
    return np.asarray(field * (-2.0 * _sign(j) * normal / rho))


def _at_rim(c: Corners, sources: Sources, j: int) -> WaveArray:
    """Return what our plate's rim makes of the current of image j."""
    _, direct, _ = sources(2 * j + 1, c.apex_angle.size)
    w, turned = c.plate_width, (j + 0.5) * c.apex_angle
    before = np.sqrt((w - c.spacing * np.cos(turned)) ** 2 + (c.spacing * np.sin(turned)) ** 2)
    over = np.sqrt((before + w - c.s) ** 2 + c.z * c.z)
    factor = soft(_root(over - direct))
    factor -= 1.0
    factor *= spread(direct, over)
    factor += 1.0
    return factor


def _ends_of_image(c: Corners, sources: Sources, j: int) -> tuple[WaveArray, WaveArray]:
    """Return what our plate's ends make of the current of image j: along z, and along s."""
    _, direct, _ = sources(2 * j + 1, c.apex_angle.size)
    turned = (j + 0.5) * c.apex_angle
    return _own_ends(c, direct, c.spacing * np.cos(turned), c.spacing * np.sin(turned))


def _apex(corners: Corners, few: Corners, between: SingleArray) -> tuple[WaveArray, WaveArray]:
    """Return the current of the wave the apex diffracts: along z, and along s without our rim."""
    c, spacing = few, few.spacing
    p = np.pi / c.apex_angle
    cosine2 = np.cos(np.pi * p) ** 2
    total = np.zeros(np.broadcast_shapes(c.s.shape, c.z.shape), dtype=np.complex64)
    for y, step in _APEX:
        rise = np.sinh(p * y)
        rho = np.sqrt(spacing**2 + c.s * c.s + (2.0 * float(np.cosh(y))) * spacing * c.s)
        kernel = (2.0 * step * float(np.sinh(y))) * rise / (rise * rise + cosine2) * spacing / rho
        total += kernel * magnetic_field(rho, c.z, c.dipole_length)
    total *= -p / np.pi * np.sin(np.pi * p)
    direct = np.sqrt((spacing + c.s) ** 2 + c.z * c.z)
    at_ends, oblique = _own_ends(c, direct, -spacing, np.zeros_like(spacing))
    c = corners
    direct = np.sqrt((c.spacing + c.s) ** 2 + c.z * c.z)
    over = np.sqrt((c.spacing + 2.0 * c.plate_width - c.s) ** 2 + c.z * c.z)
    along_z = _at_all(total * at_ends, between) * soft(_root(over - direct))
    return along_z, _at_all(total * oblique, between)


def _own_ends(
    c: Corners, direct: SingleArray, along: SingleArray, normal: SingleArray
) -> tuple[WaveArray, WaveArray]:
    """Return what the plate's own ends make of the current along z, and the current along s.

    Both are relative to the current without ends, of a source at (`along`, `normal`) to the plate
    whose direct path is `direct`.
    """
    half = 0.5 * c.plate_length
    before = np.sqrt(normal * normal + half * half)  # source to edge, square to the edge
    towards = lobe(c, c.z / direct)
    at_ends: WaveArray = np.ones(direct.shape, dtype=np.complex64)
    oblique: WaveArray = np.zeros(direct.shape, dtype=np.complex64)
    shift = c.s - along
    for sense in (1.0, -1.0):
        behind = half - sense * c.z
        path = before + behind
        over = np.sqrt(path * path + shift * shift)
        zeta = _root(over - direct)
        on_edge = shift * before / path
        strength = spread(direct, over) / towards
        strength *= lobe(c, half / np.sqrt(on_edge * on_edge + before * before))
        ray = (along, before), (c.s, behind), over
        share = strength * _beside(0.0, *ray, on_edge + along)
        share *= _beside(c.plate_width, *ray, c.plate_width - along - on_edge)
        # The wave that runs back from this end stops again at the other one.
        stopped = hard(_root(2.0 * (c.plate_length - behind) * path / over))
        at_ends -= 2.0 * tail(zeta) * stopped * share
        edge_current = shed(zeta)
        oblique = oblique + edge_current * share * (sense * shift / path)
    return at_ends, oblique


def _beside(
    corner: SingleArray | float,
    source: tuple[SingleArray, SingleArray],
    point: tuple[SingleArray, SingleArray],
    over: SingleArray,
    inside: SingleArray,
) -> WaveArray:
    """Return the part of an endless edge's diffraction left when the edge stops at a corner.

    Source and point are given by their places along the edge and their distances from its line,
    `over` is the path over the edge, and `inside` how far inside the corner the ray bends.
    """
    (along, height), (place, far) = source, point
    path = np.sqrt((along - corner) ** 2 + height * height)
    path = path + np.sqrt((place - corner) ** 2 + far * far)
    return seen_part(_root(path - over), inside)


def _rim(c: Corners, sources: Sources, m: int) -> WaveArray:
    """Return the current by the rim seen at m·α from our plate, lit by all images, unbounded."""
    s, z, w = c.s, c.z, c.plate_width
    seen = m * c.apex_angle
    after = np.sqrt((s - w * np.cos(seen)) ** 2 + (w * np.sin(seen)) ** 2)
    facing = -w * np.sin(seen) / after
    total = np.zeros(np.broadcast_shapes(s.shape, z.shape), dtype=np.complex64)
    for j, n in c.lit():
        b = c.first(n)
        turned = (j + 0.5) * b.apex_angle
        ax, an = b.spacing * np.cos(turned), b.spacing * np.sin(turned)
        path = np.sqrt((b.plate_width - ax) ** 2 + an * an) + after[..., :n]
        over = np.sqrt(path * path + b.z * b.z)
        # Reflected beyond the rim there is no such ray: its tail turns round.
        height = np.maximum(b.s * np.sin(seen[..., :n]), 0.0) + an + _TINY
        bounce = ax + (b.s * np.cos(seen[..., :n]) - ax) * an / height
        past = np.copysign(np.float32(1.0), b.plate_width - bounce)
        for sense in (-1, 1):  # the incident, the reflected side of the rim's field
            q = 2 * m + sense * (2 * j + 1)
            rho, direct, field = sources(abs(q), n)
            zeta = _root(over - direct)
            slope = -b.spacing * np.sin(0.5 * q * b.apex_angle) / rho
            bend = 0.5 * (facing[..., :n] * (direct * path) / (rho * over) - slope)
            if sense < 0:
                part = tail(zeta) * slope + shed(zeta, bend)
            else:
                part = seen_part(zeta, -past) * slope + shed(zeta, bend * past)
            part *= field
            part *= (2.0 * sense * _sign(j + m + 1)) * spread(direct, over)
            total[..., :n] += part
    return total


def _rim_view(c: Corners, m: int) -> WaveArray:
    """Return what our plate's rim and the apex make of the wave of the rim seen at m·α."""
    s, w, seen = c.s, c.plate_width, m * c.apex_angle
    after = np.sqrt((s - w * np.cos(seen)) ** 2 + (w * np.sin(seen)) ** 2)
    steepness = _steepness(c, after)
    across = np.sqrt(2.0 * w * w * (1.0 - np.cos(seen)))
    view = soft(_root(steepness * (across + w - s - after)))
    # Past the line of our plate the rim fades behind the apex.
    fade = np.clip(5.0 - 4.0 * seen / np.pi, 0.0, 1.0) ** 2
    view *= seen_part(_root(steepness * (w + s - after)), np.pi - seen) * fade
    return view


def _steepness(c: Corners, after: SingleArray) -> SingleArray:
    """Return path over length of the ray from the dipole by the rim, `after` past it."""
    half = 0.5 * c.apex_angle
    path = after + np.sqrt(
        (c.plate_width - c.spacing * np.cos(half)) ** 2 + (c.spacing * np.sin(half)) ** 2
    )
    return np.asarray(path / np.sqrt(path * path + c.z * c.z))


def _ends(c: Corners, sources: Sources, m: int) -> WaveArray:
    """Return the current by the ends of the plate seen at m·α, lit by all images; not our rim."""
    total = np.zeros(np.broadcast_shapes(c.s.shape, c.z.shape), dtype=np.complex64)
    for j, n in c.lit():
        b = c.first(n)
        seen, turned = m * b.apex_angle, (j + 0.5) * b.apex_angle
        px, pn = b.s * np.cos(seen), b.s * np.sin(seen)  # the point in that plate's frame
        ax, an = b.spacing * np.cos(turned), b.spacing * np.sin(turned)
        dx, half = px - ax, 0.5 * b.plate_length
        before = np.sqrt(an * an + half * half)
        # Incident and reflected side: image above and below that plate.
        lit = [sources.bare(abs(2 * m - sense * (2 * j + 1)), n) for sense in (1, -1)]
        for end in (half, -half):
            beyond = b.z - end
            after = np.sqrt(pn * pn + beyond * beyond)
            path = before + after
            over = np.sqrt(path * path + dx * dx)
            on_edge = dx * before / path
            rho2 = on_edge * on_edge + an * an
            to_edge = np.sqrt(rho2 + half * half)
            # Along that edge the diffracted wave has H of (an/ρ) and E/η of (end·on_edge/(ρ·R)),
            # which turns sign with the image; square to the plate H follows from both. Our plate
            # takes cosine of the one and sine of the other.
            shared = (-2.0 * _sign(j + m + 1)) * lobe(b, half / to_edge) / np.sqrt(rho2)
            by_h = an * (np.cos(seen) - np.sin(seen) * (dx / path) * (pn / after)) * shared
            by_e = end * on_edge * over * beyond / (to_edge * path * after)
            by_e = by_e * (-np.sin(seen) * shared)
            waves = []
            for (direct, field), weight in zip(lit, (by_h + by_e, by_h - by_e), strict=True):
                wave = tail(_root(over - direct))
                wave *= field
                wave *= weight * spread(direct, over)
                waves.append(wave)
            part = waves[0] + waves[1]
            # These ends begin at the apex; their corners at the rim change next to nothing.
            part *= _beside(0.0, (ax, before), (px, after), over, ax + on_edge)
            part *= hard(_root(path / over * (np.abs(pn) + np.abs(beyond) - after)))
            total[..., :n] += part
    return total
