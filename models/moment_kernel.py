"""Mean of e^{-jkR}/R over one grid cell as seen from the centre of another, 1/m.

Cells are c_s × c_z rectangles on plates that meet at the apex angle. A plate acts on itself through
|Δs| and |Δz| only; plate acts on plate through (s, s', |Δz|). The static part 1/R of near cells is
integrated in closed form, what remains by 2 × 2 Gauss points; a far cell is its centre and second
derivatives, which leaves out terms of fourth order in cell over distance.

Source: Glisson & Wilton, IEEE Trans. AP-28 (1980); the rectangle's potential is textbook matter.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache
from typing import Final

import numpy as np

from models.conventions import ComplexArray, FloatArray

__all__ = ["Cells", "between_plates", "cosine_and_sine", "near_reach", "own_plate"]

_GAUSS: Final = 0.5 / np.sqrt(3.0)
_NEAR_ROWS: Final = 2
"""Cells along z that count as near."""

_REACHES: Final = np.array([3, 5, 8, 16, 32])


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
    """Return up to which i + i' cells of the two plates are near, in a few classes, (n,)."""
    need = 2.0 / np.sin(apex_angle / 2.0)
    return np.asarray(_REACHES[np.minimum(np.searchsorted(_REACHES, need), _REACHES.size - 1)])


def own_plate(cells: Cells) -> ComplexArray:
    """Return the kernel of a plate on itself over |Δs|, |Δz| in cells, (n, count_s, count_z)."""
    apart = np.arange(cells.count_s) * cells.size_s[:, None]
    return _near(cells, apart, np.zeros_like(apart), cells.count_z)


def between_plates(cells: Cells, reach: int) -> tuple[ComplexArray, ComplexArray]:
    """Return the kernel from plate to plate at cell centres and at the edges between, symmetric.

    Parameters
    ----------
    cells : Cells
        The batch.
    reach : int
        Of `near_reach`, one for the batch.

    Returns
    -------
    (n, count_s, count_s, count_z) and (n, count_s - 1, count_s - 1, count_z)
    """
    one, two, close, at_centres, at_edges = _pair_places(cells.count_s, reach)
    s = np.concatenate([cells.centres(), cells.edges()], axis=1)
    table = _far(cells, s.take(one, axis=1), s.take(two, axis=1))
    rows = min(_NEAR_ROWS, cells.count_z)
    here = s.take(np.concatenate([one[close], two[close]]), axis=1)
    there = s.take(np.concatenate([two[close], one[close]]), axis=1)
    cosine, sine = (f(cells.apex_angle)[:, None] for f in (np.cos, np.sin))
    near = _near(cells, here * cosine - there, np.abs(here * sine), rows)
    table[:, close, :rows] = 0.5 * (near[:, : close.size] + near[:, close.size :])
    return table.take(at_centres, axis=1), table.take(at_edges, axis=1)


@lru_cache(maxsize=64)
def _pair_places(count: int, reach: int) -> tuple[np.ndarray, ...]:
    """Return pairs of places (centres, then edges), the near ones, and each pair's number."""
    one, two = np.triu_indices(count)
    first, second = np.triu_indices(count - 1)
    close = np.concatenate([one + two < reach, first + second + 1 < reach])
    number = np.arange(close.size)
    at_centres = np.zeros((count, count), dtype=np.intp)
    at_edges = np.zeros((count - 1, count - 1), dtype=np.intp)
    at_centres[one, two] = at_centres[two, one] = number[: one.size]
    at_edges[first, second] = at_edges[second, first] = number[one.size :]
    one, two = np.concatenate([one, first + count]), np.concatenate([two, second + count])
    return one, two, np.flatnonzero(close), at_centres, at_edges


def _far(cells: Cells, s: FloatArray, t: FloatArray) -> ComplexArray:
    """Return the kernel of far cells: centre plus second derivatives, (n, n_pairs, count_z)."""
    k, cosine = cells.k[:, None, None], np.cos(cells.apex_angle)[:, None]
    s2, z2 = cells.size_s[:, None] ** 2, cells.size_z[:, None] ** 2
    dz2 = z2 * np.arange(cells.count_z) ** 2
    across = 0.5 * s2 * ((s - t * cosine) ** 2 + (t - s * cosine) ** 2)
    square = (s**2 + t**2 - 2.0 * s * t * cosine)[:, :, None] + dz2[:, None, :]
    # Coinciding cells are near ones and get their value there.
    np.maximum(square, 1e-3 * s2[..., None], out=square)
    inverse_square = 1.0 / square
    inverse = np.sqrt(inverse_square)
    phase = k * np.sqrt(square)
    # The mean over a cell adds (c_s² ∂²/∂s² + c_z² ∂²/∂z²)/24; s is the mean of both plates.
    along = across[:, :, None] + (z2 * dz2)[:, None, :]
    along *= inverse_square
    bend = (3.0 * along - (s2 + z2)[..., None]) * inverse_square / 24.0
    along *= k**2 / -24.0
    along += bend
    along += 1.0
    bend *= phase
    cos, sin = cosine_and_sine(phase)
    kernel = np.empty(phase.shape, dtype=np.complex128)
    np.multiply(inverse, along * cos + bend * sin, out=kernel.real)
    np.multiply(inverse, bend * cos - along * sin, out=kernel.imag)
    return kernel


def _near(cells: Cells, u: FloatArray, height: FloatArray, rows: int) -> ComplexArray:
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
    v = np.arange(rows) * size_z
    # Static part: neighbours share the corners in z.
    x = u[:, :, None] + size_s * np.array([-0.5, 0.5])
    y = (np.arange(rows + 1) - 0.5) * size_z
    corners = _corner(x[..., None], y[:, None, None, :], squared)
    edges = corners[:, :, 1] - corners[:, :, 0]
    mean = (edges[..., 1:] - edges[..., :-1]) / (size_s * size_z[..., None])
    # The rest, (e^{-jkR} − 1)/R, at 2 × 2 Gauss points.
    x = u[:, :, None] + size_s * np.array([-_GAUSS, _GAUSS])
    y = (v[:, :, None] + size_z[..., None] * np.array([-_GAUSS, _GAUSS])).reshape(u.shape[0], -1)
    radius = np.sqrt((x**2)[..., None] + (y**2)[:, None, None, :] + squared)
    half_phase = 0.5 * cells.k[:, None, None, None] * radius
    tangent = np.tan(half_phase)
    radius *= 2.0 + 2.0 * tangent**2
    kernel = np.empty(mean.shape, dtype=np.complex128)
    # cos x − 1 loses digits for small x; −2 sin²(x/2) does not, nor does it need a sine.
    kernel.real = mean - _four(tangent**2 / radius)
    kernel.imag = -_four(tangent / radius)
    return kernel


def _four(values: FloatArray) -> FloatArray:
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
