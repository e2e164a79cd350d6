"""Mean of e^{-jkR}/R over one grid cell as seen from the centre of another, 1/m.

Cells are c_s × c_z rectangles on plates that meet at the apex angle. A plate acts on itself through
|Δs| and |Δz| only; plate acts on plate through (s, s', |Δz|). The static part 1/R of near cells is
integrated in closed form, what remains by 2 × 2 Gauss points; a far cell is its centre and second
derivatives, which leaves out terms of fourth order in cell over distance. Single precision, but for
the closed form.

Source: Glisson & Wilton, IEEE Trans. AP-28 (1980); the rectangle's potential is textbook matter.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache
from typing import Final

import numpy as np

from models.conventions import FloatArray
from models.edges import SingleArray, WaveArray

__all__ = ["Cells", "cosine_and_sine", "kernels", "near_reach"]

_GAUSS: Final = 0.5 / np.sqrt(3.0)
_NEAR_ROWS: Final = 2
"""Cells along z that count as near."""

_NEAR_CELLS: Final = 2.0
"""How far apart, in cells, places along s no longer count as near."""

_REACHES: Final = np.array([5, 8, 16, 32])


@dataclass(frozen=True, kw_only=True, eq=False)
class Cells:
    """A batch of grids of equal counts.

    Parameters
    ----------
    count_s, count_z : int
        Cells from apex to rim and over the whole plate length.
    k, apex_angle, size_s, size_z, start : (n,)
        Wavenumber, rad/m; apex angle, rad; cell size and s of the first cell's inner edge, m.
    """

    count_s: int
    count_z: int
    k: FloatArray
    apex_angle: FloatArray
    size_s: FloatArray
    size_z: FloatArray
    start: FloatArray

    def centres(self) -> FloatArray:
        """Return s of the cell centres, m, (n, count_s)."""
        steps = np.arange(self.count_s) + 0.5
        return np.asarray(self.start[:, None] + self.size_s[:, None] * steps)

    def edges(self) -> FloatArray:
        """Return s of the edges between cells, m, (n, count_s - 1)."""
        steps = np.arange(1, self.count_s)
        return np.asarray(self.start[:, None] + self.size_s[:, None] * steps)


def cosine_and_sine(phase: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Return cos and sin of `phase`, radians, by the tangent of its half.

    For float64 numpy has a vector tangent but no vector sine: half the time of two calls.
    """
    tangent = np.tan(0.5 * phase)
    sine = 2.0 / (1.0 + tangent**2)
    cosine = sine - 1.0
    sine *= tangent
    return cosine, sine


def near_reach(apex_angle: FloatArray) -> FloatArray:
    """Return how many cells from the apex plates are near each other, in a few classes, (n,)."""
    need = _NEAR_CELLS / np.sin(apex_angle / 2.0)
    return np.asarray(_REACHES[np.minimum(np.searchsorted(_REACHES, need), _REACHES.size - 1)])


def kernels(cells: Cells, reach: int) -> tuple[WaveArray, WaveArray, WaveArray]:
    """Return the kernel of a plate on itself, and from plate to plate at cell centres and edges.

    Parameters
    ----------
    cells : Cells
        The batch.
    reach : int
        Of `near_reach`, one for the batch.

    Returns
    -------
    (n, count_s, count_z) over |Δs|, |Δz| in cells, (n, count_s, count_s, count_z) and
    (n, count_s - 1, count_s - 1, count_z); the last two symmetric, at the edges between cells.
    """
    one, two, close, at_centres, at_edges = _pair_places(cells.count_s, reach)
    apart = cells.size_s[:, None] * np.arange(cells.count_s)
    s = np.concatenate([apart, cells.centres(), cells.edges()], axis=1)
    s, t = s.take(one, axis=1), s.take(two, axis=1)
    # A plate meets itself at no angle.
    angle = np.repeat(cells.apex_angle[:, None], one.size, axis=1)
    angle[:, : cells.count_s] = 0.0
    cosine, sine = np.cos(angle), np.sin(angle)
    table = _far(cells, s, t, cosine)
    rows = min(_NEAR_ROWS, cells.count_z)
    s, t, cosine, sine = (x.take(close, axis=1) for x in (s, t, cosine, sine))
    here, there = np.concatenate([s, t], axis=1), np.concatenate([t, s], axis=1)
    u, height = here * np.tile(cosine, 2) - there, here * np.tile(sine, 2)
    near = _near(cells, u, height, rows)
    table[:, close, :rows] = 0.5 * (near[:, : close.size] + near[:, close.size :])
    own = table[:, : cells.count_s]
    return own, table.take(at_centres, axis=1), table.take(at_edges, axis=1)


@lru_cache(maxsize=64)
def _pair_places(count: int, reach: int) -> tuple[np.ndarray, ...]:
    """Return pairs of places, the near ones, and the number of each pair from plate to plate.

    Places are distances on one plate, then centres, then edges.
    """
    apart = np.arange(count)
    one, two = np.triu_indices(count)
    first, second = np.triu_indices(count - 1)
    total = np.concatenate([0 * apart, one + two + 1, first + second + 2])
    between = np.concatenate([apart, two - one, second - first])
    # R² of the narrowest corner of the class; on one plate only the distance counts.
    steep = (_NEAR_CELLS / reach) ** 2 * total**2
    flat = np.where(total > 0, 1.0 - (_NEAR_CELLS / reach) ** 2, 1.0) * between**2
    close = np.flatnonzero(steep + flat < _NEAR_CELLS**2)
    number = np.arange(total.size)
    at_centres = np.zeros((count, count), dtype=np.intp)
    at_edges = np.zeros((count - 1, count - 1), dtype=np.intp)
    at_centres[one, two] = at_centres[two, one] = number[count : count + one.size]
    at_edges[first, second] = at_edges[second, first] = number[count + one.size :]
    one = np.concatenate([apart, count + one, 2 * count + first])
    two = np.concatenate([0 * apart, count + two, 2 * count + second])
    return one, two, close, at_centres, at_edges


def _far(cells: Cells, s: FloatArray, t: FloatArray, cosine: FloatArray) -> WaveArray:
    """Return the kernel of far cells: centre plus second derivatives, (n, n_pairs, count_z)."""
    s2, z2 = cells.size_s[:, None] ** 2, cells.size_z[:, None] ** 2
    # Coinciding cells are near ones and get their value there.
    apart = np.maximum(s**2 + t**2 - 2.0 * s * t * cosine, 1e-3 * s2)
    bent = 0.5 * s2 * ((s - t * cosine) ** 2 + (t - s * cosine) ** 2)
    k, size, flat, across, dz2, cz2 = (
        x.astype(np.float32)
        for x in (
            cells.k[:, None, None],
            (s2 + z2)[..., None],
            apart[..., None],
            bent[..., None],
            (z2 * np.arange(cells.count_z) ** 2)[:, None],
            z2[..., None],
        )
    )
    square = flat + dz2
    inverse_square = 1.0 / square
    inverse = np.sqrt(inverse_square)
    phase = np.sqrt(square)
    phase *= k
    # The mean over a cell adds (c_s² ∂²/∂s² + c_z² ∂²/∂z²)/24; s is the mean of both plates.
    along = across + cz2 * dz2
    along *= inverse_square
    bend = 3.0 * along
    bend -= size
    bend *= inverse_square
    bend *= 1.0 / 24.0
    along *= k**2 / -24.0
    along += bend
    along += 1.0
    along *= inverse
    bend *= phase
    bend *= inverse
    cos, sin = np.cos(phase), np.sin(phase)
    kernel = np.empty(phase.shape, dtype=np.complex64)
    np.add(along * cos, bend * sin, out=kernel.real)
    np.subtract(bend * cos, along * sin, out=kernel.imag)
    return kernel


def _near(cells: Cells, u: FloatArray, height: FloatArray, rows: int) -> WaveArray:
    """Return the mean of e^{-jkR}/R over cells (u, 0 … rows − 1), seen from above the origin.

    Parameters
    ----------
    cells : Cells
        The batch.
    u, height : (n, n_places)
        Centre of the cell along s and height above its plane, m.
    rows : int
        Cells along z.
    """
    size_s, size_z = cells.size_s[:, None, None], cells.size_z[:, None]
    squared = (height**2)[:, :, None, None]
    # Static part: neighbours share the corners in z.
    x = u[:, :, None] + size_s * np.array([-0.5, 0.5])
    y = (np.arange(rows + 1) - 0.5) * size_z
    corners = _corner(x[..., None], y[:, None, None, :], squared)
    edges = corners[:, :, 1] - corners[:, :, 0]
    mean = (edges[..., 1:] - edges[..., :-1]) / (size_s * size_z[..., None])
    # The rest, (e^{-jkR} − 1)/R, at 2 × 2 Gauss points.
    x = u[:, :, None] + size_s * np.array([-_GAUSS, _GAUSS])
    y = size_z * (np.arange(rows)[:, None] + np.array([-_GAUSS, _GAUSS])).reshape(-1)
    radius = np.sqrt((x**2)[..., None] + (y**2)[:, None, None, :] + squared).astype(np.float32)
    half_phase = cells.k.astype(np.float32)[:, None, None, None] * radius
    half_phase *= 0.5
    sine, cosine = np.sin(half_phase), np.cos(half_phase)
    kernel = np.empty(mean.shape, dtype=np.complex64)
    # cos x − 1 loses digits for small x; −2 sin²(x/2) does not.
    sine /= radius
    kernel.imag = -0.5 * _four(sine * cosine)
    sine *= np.sin(half_phase)
    kernel.real = mean - 0.5 * _four(sine)
    return kernel


def _four(values: SingleArray) -> SingleArray:
    """Return the sums over 2 × 2 points, (n, n_places, 2, 2 rows) to (n, n_places, rows)."""
    both = values[:, :, 0] + values[:, :, 1]
    return np.asarray(both[..., 0::2] + both[..., 1::2])


def _corner(x: FloatArray, y: FloatArray, squared: FloatArray) -> FloatArray:
    """Return ∫∫ dx dy / √(x² + y² + h²) from 0; the corners of a rectangle give its integral."""
    x2, y2 = x**2, y**2
    h2 = np.maximum(squared, 1e-20 * (x2 + y2))
    h = np.sqrt(h2)
    total = x * np.arcsinh(y / np.sqrt(x2 + h2))
    total += y * np.arcsinh(x / np.sqrt(y2 + h2))
    total -= h * np.arctan2(x * y, h * np.sqrt(x2 + y2 + h2))
    return np.asarray(total)
