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

from dataclasses import dataclass
from typing import Final

import numpy as np

from models.edges import SingleArray, WaveArray, hard, seen_part, shed, soft, spread, tail, turn

__all__ = ["Corners", "currents"]

_APEX_NODES: Final = 5
_APEX_REACH: Final = 3.6
_TINY: Final = 1e-12


def _apex_nodes() -> list[tuple[float, float]]:
    """Return Gauss-Legendre nodes and weights, crowded towards the pole of the kernel at 0."""
    nodes, weights = np.polynomial.legendre.leggauss(_APEX_NODES)
    root = (nodes + 1.0) / 2.0
    steps = _APEX_REACH * root * weights
    return list(zip((_APEX_REACH * root**2).tolist(), steps.tolist(), strict=True))


_APEX: Final = _apex_nodes()


@dataclass(frozen=True, kw_only=True, eq=False)
class Corners:
    """Corners in order of rising apex angle, and the points on their plates; lengths times k.

    Points come first and corners last here: the long axis has to be the inner one for speed.

    Parameters
    ----------
    apex_angle, spacing, plate_width, plate_length, dipole_length : (n,)
        Radians, and lengths times k.
    s, z : (n_s, 1, n), (1, n_z, n)
        Distance from the apex line, and height over the middle, z >= 0.
    """

    apex_angle: SingleArray
    spacing: SingleArray
    plate_width: SingleArray
    plate_length: SingleArray
    dipole_length: SingleArray
    s: SingleArray
    z: SingleArray

    def first(self, count: int) -> Corners:
        """Return the first `count` corners, views of the same memory."""
        return Corners(**{name: value[..., :count] for name, value in vars(self).items()})

    def lit(self) -> list[tuple[int, int]]:
        """Return the orders j of images and how many corners have them: (j + 1/2)·α < π."""
        most = int(np.ceil(np.pi / float(self.apex_angle[0])))
        pairs = [(j, self.count(j + 0.5)) for j in range(most)]
        return [(j, n) for j, n in pairs if n]

    def count(self, orders: float) -> int:
        """Return how many corners have `orders` times the apex angle below π."""
        return int(np.count_nonzero(orders * self.apex_angle < np.pi - 1e-6))


class _Sources:
    """The dipole and its images as our plate sees them, q·α/2 from its face; each computed once."""

    def __init__(self, corners: Corners) -> None:
        self._corners = corners
        self._known: dict[int, tuple[SingleArray, SingleArray, WaveArray]] = {}
        self._bare: dict[int, WaveArray] = {}

    def __call__(self, q: int, count: int) -> tuple[SingleArray, SingleArray, WaveArray]:
        """Return ρ, direct path and H_φ (exact, 1 A) of source q for the first `count` corners."""
        known = self._known.get(q)
        if known is None or known[0].shape[-1] < count:
            c = self._corners.first(count)
            along = c.s - c.spacing * np.cos(0.5 * q * c.apex_angle)
            rho2 = along * along + (c.spacing * np.sin(0.5 * q * c.apex_angle)) ** 2
            rho = np.sqrt(rho2)
            known = rho, np.sqrt(rho2 + c.z * c.z), magnetic_field(rho, c.z, c.dipole_length)
            self._known[q] = known
        rho, direct, field = known
        return rho[..., :count], direct[..., :count], field[..., :count]

    def bare(self, q: int, count: int) -> tuple[SingleArray, WaveArray]:
        """Return direct path and H_φ over the dipole's far field in that direction."""
        _, direct, field = self(q, count)
        known = self._bare.get(q)
        if known is None or known.shape[-1] < count:
            c = self._corners.first(count)
            known = self._bare[q] = field / _lobe(c, c.z / direct)
        return direct, known[..., :count]


def magnetic_field(rho: SingleArray, z: SingleArray, length: SingleArray) -> WaveArray:
    """Return H_φ of the dipole for 1 A, exact, at transverse distance `rho` and height `z`."""
    half = 0.5 * length
    rho2 = rho * rho
    total = turn(np.sqrt(rho2 + (z - half) ** 2))
    total += turn(np.sqrt(rho2 + (z + half) ** 2))
    total -= 2.0 * np.cos(half) * turn(np.sqrt(rho2 + z * z))
    total *= 0.25j / np.pi
    total /= rho
    return total


def currents(corners: Corners) -> tuple[WaveArray, WaveArray]:
    """Return the current densities along z and along s at the points, (n_s, n_z, n)."""
    sources = _Sources(corners)
    along_z, along_s, at_ends = _image(corners, sources, 0)
    z_part, s_part = _apex(corners)
    along_z += z_part
    along_s += s_part
    orders = int(np.ceil(np.pi / float(corners.apex_angle[0])))
    for j, n in corners.lit()[1:]:
        z_part, s_part, _ = _image(corners.first(n), sources, j)
        along_z[..., :n] += z_part
        along_s[..., :n] += s_part
    for m in range(1, 2 * orders):
        n = corners.count(m / 1.25)
        if n:
            along_z[..., :n] += _rim(corners.first(n), sources, m) * at_ends[..., :n]
        n = corners.count(m)
        if n:
            along_z[..., :n] += _ends(corners.first(n), sources, m)
    return along_z, along_s


def _root(square: SingleArray) -> SingleArray:
    return np.asarray(np.sqrt(np.maximum(square, _TINY)))


def _sign(order: int) -> float:
    return -1.0 if order % 2 else 1.0


def _image(c: Corners, sources: _Sources, j: int) -> tuple[WaveArray, WaveArray, WaveArray]:
    """Return the current of image j with rim and ends of our plate, and the factor of the ends."""
    w, turned = c.plate_width, (j + 0.5) * c.apex_angle
    along, normal = c.spacing * np.cos(turned), c.spacing * np.sin(turned)
    rho, direct, field = sources(2 * j + 1, c.apex_angle.size)
    optics = field * (-2.0 * _sign(j) * normal / rho)
    over = np.sqrt((np.sqrt((w - along) ** 2 + normal**2) + w - c.s) ** 2 + c.z * c.z)
    at_rim = 1.0 + (soft(_root(over - direct)) - 1.0) * spread(direct, over)
    at_ends, oblique = _own_ends(c, direct, along, normal)
    return optics * at_rim * at_ends, optics * oblique * hard(_root(2.0 * (w - c.s))), at_ends


def _apex(c: Corners) -> tuple[WaveArray, WaveArray]:
    """Return the current of the wave the apex diffracts, ends of our plate included."""
    s, z, w, spacing = c.s, c.z, c.plate_width, c.spacing
    p = np.pi / c.apex_angle
    cosine2 = np.cos(np.pi * p) ** 2
    total = np.zeros(np.broadcast_shapes(s.shape, z.shape), dtype=np.result_type(s, 1j))
    for y, step in _APEX:
        rise = np.sinh(p * y)
        rho = np.sqrt(spacing**2 + s * s + (2.0 * float(np.cosh(y))) * spacing * s)
        kernel = (2.0 * step * float(np.sinh(y))) * rise / (rise * rise + cosine2) * spacing / rho
        total += kernel * magnetic_field(rho, z, c.dipole_length)
    optics = total * (-p / np.pi * np.sin(np.pi * p))
    direct = np.sqrt((spacing + s) ** 2 + z * z)
    over = np.sqrt((spacing + 2.0 * w - s) ** 2 + z * z)
    at_ends, oblique = _own_ends(c, direct, -spacing, np.zeros_like(spacing))
    at_rim = soft(_root(over - direct))
    return optics * at_rim * at_ends, optics * oblique * hard(_root(2.0 * (w - s)))


def _own_ends(
    c: Corners, direct: SingleArray, along: SingleArray, normal: SingleArray
) -> tuple[WaveArray, WaveArray]:
    """Return what the plate's own ends make of the current along z, and the current along s.

    Both are relative to the current without ends, of a source at (`along`, `normal`) to the plate
    whose direct path is `direct`.
    """
    half = 0.5 * c.plate_length
    before = np.sqrt(normal * normal + half * half)  # source to edge, square to the edge
    lobe = _lobe(c, c.z / direct)
    at_ends: WaveArray = np.ones(direct.shape, dtype=np.complex64)
    oblique: WaveArray = np.zeros(direct.shape, dtype=np.complex64)
    shift = c.s - along
    for sense in (1.0, -1.0):
        behind = half - sense * c.z
        path = before + behind
        over = np.sqrt(path * path + shift * shift)
        zeta = _root(over - direct)
        on_edge = shift * before / path
        strength = spread(direct, over) / lobe
        strength *= _lobe(c, half / np.sqrt(on_edge * on_edge + before * before))
        ray = (along, before), (c.s, behind), over
        share = strength * _beside(0.0, *ray, on_edge + along)
        share *= _beside(c.plate_width, *ray, c.plate_width - along - on_edge)
        # The wave that runs back from this end stops again at the other one.
        stopped = hard(_root(2.0 * (c.plate_length - behind) * path / over))
        at_ends -= 2.0 * tail(zeta) * stopped * share
        edge_current = shed(zeta)
        oblique = oblique + edge_current * share * (sense * shift / path)
    return at_ends, oblique


def _lobe(c: Corners, cosine: SingleArray) -> SingleArray:
    """Return the dipole's far field at the angle of `cosine` from its axis."""
    half = 0.5 * c.dipole_length
    cosine = np.minimum(cosine, 1.0 - 1e-5)
    return np.asarray((np.cos(half * cosine) - np.cos(half)) / np.sqrt(1.0 - cosine * cosine))


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


def _rim(c: Corners, sources: _Sources, m: int) -> WaveArray:
    """Return the current by the rim seen at m·α from our plate, lit by all images, without ends."""
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
    steepness = _steepness(c, after)
    across = np.sqrt(2.0 * w * w * (1.0 - np.cos(seen)))
    total *= soft(_root(steepness * (across + w - s - after)))
    # Past the line of our plate the rim fades behind the apex.
    fade = np.clip(5.0 - 4.0 * seen / np.pi, 0.0, 1.0) ** 2
    total *= seen_part(_root(steepness * (w + s - after)), np.pi - seen) * fade
    return total


def _steepness(c: Corners, after: SingleArray) -> SingleArray:
    """Return path over length of the ray from the dipole by the rim, `after` past it."""
    half = 0.5 * c.apex_angle
    path = after + np.sqrt(
        (c.plate_width - c.spacing * np.cos(half)) ** 2 + (c.spacing * np.sin(half)) ** 2
    )
    return np.asarray(path / np.sqrt(path * path + c.z * c.z))


def _ends(c: Corners, sources: _Sources, m: int) -> WaveArray:
    """Return the current by the ends of the plate seen at m·α from ours, lit by all images."""
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
            shared = (-2.0 * _sign(j + m + 1)) * _lobe(b, half / to_edge) / np.sqrt(rho2)
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
    return total * soft(_root(2.0 * (c.plate_width - c.s)))
