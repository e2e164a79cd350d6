"""What edges diffract onto our plate, for `ray`: amplitudes without their quick phase.

They are smooth over the plate, so they are found at few points and interpolated; a matrix holds
them, a column for each corner and wave. `models.ray_currents` adds phase and our plate's edges.

- far, near: what the corners of our plate leave of the wave that its far end in z (z > 0) or its
  near one sends back of an image's, over that image's current. Spreading is in it.
- apex: the wave that the apex diffracts where α is not 180°/n; exact for endless plates, the
  integral of Oberhettinger and of Biot & Tolstoy integrated by parts.
- rim: what the rim seen at m·α from our plate diffracts, lit by all images.
- up, down: H and E along the ends of the plate seen at m·α, lit by all images. These ends begin at
  the apex: Fresnel's tail about it, too.

Lengths are times k, for 1 A. Every term holds the dipole's exact near field, so nothing is
asymptotic but the detours.

Source: Kouyoumjian & Pathak, Proc. IEEE 62 (1974); Sommerfeld 1896; Macdonald 1915; Biot & Tolstoy,
J. Acoust. Soc. Am. 29 (1957).
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from typing import Any, Final

import numpy as np
from numpy.typing import NDArray

from models.edges import SingleArray, WaveArray, hard, root, seen_part, shed, spread, still, turn
from models.ray_sources import Corners, Images, Runs, lobe, magnetic_field, place

__all__ = ["Waves", "by_end", "by_rim", "other_waves", "own_waves", "runs_of"]

Rays = list[tuple[int, int, int]]
"""Orders m of the edge and j of the image, and how many corners have it."""

_BLOCK: Final = 32_000
"""Points of rays that are held at once: what fits a processor's cache."""


@dataclass(frozen=True, kw_only=True, eq=False)
class Waves:
    """Amplitudes at few points of the plate.

    Parameters
    ----------
    values : (n_few_s, n_few_z, n_column)
        One column a corner and wave.
    starts : dict
        Column of the first corner, for each kind of wave and each order.
    """

    values: WaveArray
    starts: dict[str, dict[float, int]]

    @classmethod
    def none(cls, c: Corners, kinds: tuple[str, ...]) -> Waves:
        """Return waves of some kinds without amplitude, at the points of the corners."""
        runs = runs_of(c)
        starts: dict[str, dict[float, int]] = {kind: {} for kind in kinds}
        total = 0
        for kind in kinds:
            for order, n in runs[kind]:
                starts[kind][order] = total
                total += n
        shape = c.s.shape[0], c.z.shape[1], total
        return cls(values=np.zeros(shape, dtype=np.complex64), starts=starts)

    def add(self, kind: str, runs: Runs, parts: WaveArray) -> None:
        """Add the parts, one run after the other, to the waves of their orders."""
        at = 0
        for order, n in runs:
            start = self.starts[kind][order]
            self.values[..., start : start + n] += parts[..., at : at + n]
            at += n

    def of(
        self,
        rows: NDArray[np.intp],
        runs: dict[str, Runs],
        along_s: SingleArray,
        along_z: SingleArray,
    ) -> dict[str, WaveArray]:
        """Return the waves of the corners `rows` at all points, (n_s, n_z, n_ray) of each kind.

        Parameters
        ----------
        rows : (n,)
            In rising order.
        runs : dict
            Of these corners, for each kind.
        along_s, along_z : (n_s, n_few_s), (n_z, n_few_z)
            What interpolates.
        """
        kinds = list(self.starts)
        index = [self.starts[kind][m] + rows[:n] for kind in kinds for m, n in runs[kind]]
        few = self.values.take(np.concatenate(index), axis=2).view(np.float32)
        some = along_s @ few.reshape(few.shape[0], -1)
        values = (along_z @ some.reshape(-1, *few.shape[1:])).view(np.complex64)
        sizes = [sum(n for _, n in runs[kind]) for kind in kinds]
        parts = np.split(values, np.cumsum(sizes)[:-1], axis=2)
        return dict(zip(kinds, parts, strict=True))


def runs_of(c: Corners) -> dict[str, Runs]:
    """Return the rays of each kind of wave.

    Their order is j + ½ of an image, infinite for the wave from the apex; m of an edge.
    """
    edges = range(1, 2 * c.most())
    apex = [(np.inf, c.apex_angle.size)]
    own = [(j + 0.5, n) for j, n in c.lit()] + apex
    rims = [(m, n) for m in edges if (n := c.count(m / 1.25))]
    ends = [(m, n) for m in edges if (n := c.count(m))]
    return {"far": own, "near": own, "apex": apex, "rim": rims, "up": ends, "down": ends}


def own_waves(c: Corners) -> Waves:
    """Return what the corners of our plate leave of the waves from its ends."""
    found = Waves.none(c, ("far", "near"))
    for runs in _pieces(runs_of(c)["far"], c):
        for kind, sense in (("far", 1.0), ("near", -1.0)):
            found.add(kind, runs, _own_end(c, runs, sense))
    return found


def other_waves(c: Corners, apex_nodes: int) -> Waves:
    """Return what apex, rims and the ends of other plates diffract onto our plate.

    The apex' integral takes 6 nodes on small plates and 20 on wide ones, where its quick phase is
    all that the far field sees of it.
    """
    found = Waves.none(c, ("apex", "rim", "up", "down"))
    runs, lit = runs_of(c), c.lit()
    rims, ends = (
        [(int(m), j, min(n, n_lit)) for m, n in runs[kind] for j, n_lit in lit]
        for kind in ("rim", "up")
    )
    counts: dict[int, int] = {}
    for m, j, n in rims:
        for q in (abs(2 * m - 2 * j - 1), 2 * m + 2 * j + 1):
            counts[q] = max(n, counts.get(q, 0))
    images = Images(c, counts)
    found.add("apex", runs["apex"], _apex(c, apex_nodes))
    for rays in _pieces(rims, c):
        found.add("rim", [(m, n) for m, _, n in rays], _rims(c, images, rays))
    for rays in _pieces(ends, c):
        for kind, part in zip(("up", "down"), _ends(c, images, rays), strict=True):
            found.add(kind, [(m, n) for m, _, n in rays], part)
    return found


def _pieces(rays: Any, c: Corners) -> Iterator[Any]:
    """Yield the rays some at a time, so many that their points fit a processor's cache."""
    most = _BLOCK // (c.s.shape[0] * c.z.shape[1])
    start = total = 0
    for stop, (*_, n) in enumerate(rays):
        if total + n > most and total:
            yield rays[start:stop]
            start, total = stop, 0
        total += n
    if total:
        yield rays[start:]


def _apex_nodes(count: int) -> Iterator[tuple[float, float]]:
    """Yield nodes and weights for 0 to infinity, crowded towards the pole of the kernel at 0."""
    nodes, weights = np.polynomial.legendre.leggauss(count)
    reach = 1.2 * np.sqrt(count)
    for part, weight in zip((nodes + 1.0) / 2.0, weights / 2.0, strict=True):
        yield float(reach * part**1.5), float(reach * 1.5 * np.sqrt(part) * weight)


def _apex(c: Corners, count: int) -> WaveArray:
    """Return the current of the wave the apex diffracts, on a plate without ends and rim."""
    spacing = c.spacing
    p = np.pi / c.apex_angle
    cosine2 = np.cos(np.pi * p) ** 2
    nearest = np.sqrt((spacing + c.s) ** 2 + c.z * c.z)
    total: WaveArray = np.zeros(nearest.shape, dtype=np.complex64)
    for y, step in _apex_nodes(count):
        rise = np.sinh(np.minimum(p * y, np.float32(40.0)))  # beyond, the kernel is nothing
        rho = np.sqrt(spacing**2 + c.s * c.s + (2.0 * float(np.cosh(y))) * spacing * c.s)
        kernel = (2.0 * step * float(np.sinh(y))) * rise / (rise * rise + cosine2) * spacing / rho
        direct = np.sqrt(rho * rho + c.z * c.z)
        wave = magnetic_field(c, rho, direct)
        wave *= turn(direct - nearest)
        wave *= kernel
        total += wave
    total *= -p / np.pi * np.sin(np.pi * p)
    return total


def _own_end(corners: Corners, runs: Runs, sense: float) -> WaveArray:
    """Return what is left of the waves that our end at z > 0 (`sense` +1) or z < 0 sends back.

    The wave from the apex comes as if from behind it.
    """
    c, turned = corners.along(runs)
    along, off = place(c, turned)
    half = 0.5 * c.plate_length
    before = np.sqrt(off * off + half * half)  # source to edge, square to the edge
    shift = c.s - along
    direct = np.sqrt(shift * shift + (off * off + c.z * c.z))
    behind = half - sense * c.z
    path = before + behind
    over = np.sqrt(path * path + shift * shift)
    on_edge = shift * before / path
    strength = spread(direct, over) / lobe(c, c.z / direct)
    strength *= lobe(c, half / np.sqrt(on_edge * on_edge + before * before))
    ray = (along, before), (c.s, behind), over
    left = _beside(0.0, *ray, on_edge + along)
    left *= _beside(c.plate_width, *ray, c.plate_width - along - on_edge)
    left *= strength
    return left


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
    (along, height), (beyond, far) = source, point
    detour = np.sqrt((beyond - corner) ** 2 + far * far)
    detour += np.sqrt((along - corner) ** 2 + height * height)
    detour -= over
    return seen_part(root(detour), inside)


def _labels(rays: Rays) -> tuple[SingleArray, SingleArray, SingleArray]:
    """Return m, j + ½ and the sign of the current, (−1)^(j + m + 1), of each ray."""
    m, j, n = np.array(rays).T
    sign = 1.0 - 2.0 * ((j + m + 1) % 2)
    first, second, third = np.repeat(np.stack([m, j + 0.5, sign]).astype(np.float32), n, axis=1)
    return first, second, third


def by_rim(c: Corners, seen: SingleArray) -> tuple[SingleArray, SingleArray]:
    """Return paths in the H-plane: from the rim at `seen` to the points, from the dipole by it."""
    w = c.plate_width
    along, off = place(c, 0.5 * c.apex_angle)
    after = np.sqrt((c.s - w * np.cos(seen)) ** 2 + (w * np.sin(seen)) ** 2)
    return after, after + np.sqrt((w - along) ** 2 + off * off)


def _rims(corners: Corners, images: Images, rays: Rays) -> WaveArray:
    """Return the current by the rims seen at m·α from our plate, unbounded, each image's part."""
    c = corners.repeated(n for *_, n in rays)
    m, order, sign = _labels(rays)
    s, z, w, seen, turned = c.s, c.z, c.plate_width, m * c.apex_angle, order * c.apex_angle
    cosine, sine = np.cos(seen), np.sin(seen)
    after, first = by_rim(c, seen)
    first = np.sqrt(first * first + z * z)
    ax, an = place(c, turned)
    path = np.sqrt((w - ax) ** 2 + an * an) + after
    over: SingleArray = np.sqrt(path * path + z * z)
    facing = (-w * sine / after) * path
    # Reflected beyond the rim there is no such ray: its tail turns round.
    height = np.maximum(s * sine, 0.0) + an + np.float32(1e-12)
    bounce = ax + (s * cosine - ax) * an / height
    past = np.copysign(np.float32(1.0), w - bounce)
    total: WaveArray = np.zeros(over.shape, dtype=np.complex64)
    for sense in (-1, 1):  # the incident, the reflected side of the rim's field
        wanted = [(abs(2 * m + sense * (2 * j + 1)), n) for m, j, n in rays]
        direct, rho = images.direct(wanted), images.rho(wanted)
        zeta = root(over - direct)
        slope = -c.spacing * np.sin(seen + sense * turned) / rho
        bend = direct / over
        bend *= facing / rho
        bend -= slope
        bend *= 0.5  # half: the two sides share the slope of the rim's field
        field = images.field(wanted)
        field *= spread(direct, over) * ((2.0 * sense) * sign)
        part = still(zeta)
        part *= slope
        part += shed(zeta, bend)
        if sense > 0:
            part *= past
        part *= field
        total += part
    total *= turn(over - first)
    beyond = np.flatnonzero((past < 0.0).any(axis=(0, 1)))
    rest = turn((direct - first)[..., beyond])
    rest *= (slope * (past < 0.0))[..., beyond]
    rest *= field[..., beyond]
    total[..., beyond] += rest
    return total


def by_end(
    c: Corners, seen: SingleArray, turned: SingleArray, end: SingleArray
) -> tuple[SingleArray, SingleArray, SingleArray]:
    """Return paths by the end of the plate at `seen` that is at height `end`.

    From the image at `turned` to the end, from there to the points, both square to it, and the way
    along it.
    """
    along, off = place(c, turned)
    height, beyond = c.s * np.sin(seen), c.z - end
    return (
        np.sqrt(off * off + end * end),
        np.sqrt(height * height + beyond * beyond),
        c.s * np.cos(seen) - along,
    )


def _ends(corners: Corners, images: Images, rays: Rays) -> Iterator[WaveArray]:
    """Yield the current by the upper and by the lower ends of plates, each image's part.

    The plates are seen at m·α; our rim is left out.
    """
    c = corners.repeated(n for *_, n in rays)
    m, order, sign = _labels(rays)
    seen, turned = m * c.apex_angle, order * c.apex_angle
    cosine, sine = np.cos(seen), np.sin(seen)
    px, pn = c.s * cosine, c.s * sine  # the point in that plate's frame
    ax, an = place(c, turned)
    half = 0.5 * c.plate_length
    # Incident and reflected side: image above and below that plate.
    lit = []
    for sense in (1, -1):
        wanted = [(abs(2 * m - sense * (2 * j + 1)), n) for m, j, n in rays]
        lit.append((images.direct(wanted), images.bare(wanted)))
    for end in (half, -half):
        before, after, dx = by_end(c, seen, 0.5 * c.apex_angle, end)
        first = before + after
        first = np.sqrt(first * first + dx * dx)
        before, after, dx = by_end(c, seen, turned, end)
        beyond = c.z - end
        path = before + after
        over = np.sqrt(path * path + dx * dx)
        on_edge = dx * before / path
        rho2 = on_edge * on_edge + an * an
        to_edge = np.sqrt(rho2 + half * half)
        # Along that edge the diffracted wave has H of (an/ρ) and E/η of (end·on_edge/(ρ·R)),
        # which turns sign with the image; square to the plate H follows from both. Our plate
        # takes cosine of the one and sine of the other.
        shared = (-2.0 * sign) * lobe(c, half / to_edge) / np.sqrt(rho2)
        by_h = an * (cosine - sine * (dx / path) * (pn / after)) * shared
        by_e = end * on_edge * over * beyond / (to_edge * path * after)
        by_e *= -sine * shared
        total: WaveArray = np.zeros(over.shape, dtype=np.complex64)
        for (direct, bare), weight in zip(lit, (by_h + by_e, by_h - by_e), strict=True):
            wave = still(root(over - direct))
            wave *= bare
            wave *= weight * spread(direct, over)
            total += wave
        total *= turn(over - first)
        # These ends begin at the apex; their corners at the rim change next to nothing.
        total *= _beside(0.0, (ax, before), (px, after), over, ax + on_edge)
        total *= hard(root(path / over * (np.abs(pn) + np.abs(beyond) - after)))
        yield total
