"""Mean of e^{-jkR}/R over one grid cell as seen from the centre of another, 1/m.

Cells are c_s × c_z rectangles on plates that meet at the apex angle. A plate acts on itself through
|Δs| and |Δz| only; plate acts on plate through (s, s', |Δz|). The static part 1/R of near cells is
integrated in closed form, what remains by 2 × 2 Gauss points; a far cell is its centre and second
derivatives, which leaves out terms of fourth order in cell over distance.

Source: Glisson & Wilton, IEEE Trans. AP-28 (1980); the rectangle's potential is textbook matter.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np

from models.conventions import ComplexArray, FloatArray

__all__ = ["Cells", "between_plates", "near_reach", "own_plate"]

_GAUSS: Final = 0.5 / np.sqrt(3.0)
_NEAR_ROWS: Final = 3
"""Cells along z that count as near."""

_REACHES: Final = np.array([4, 6, 10, 20, 40])


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


def near_reach(apex_angle: FloatArray) -> FloatArray:
    """Return up to which i + i' cells of the two plates are near, in a few classes, (n,)."""
    need = 2.5 / np.sin(apex_angle / 2.0)
    return np.asarray(_REACHES[np.minimum(np.searchsorted(_REACHES, need), _REACHES.size - 1)])


def own_plate(cells: Cells) -> ComplexArray:
    """Return the kernel of a plate on itself over |Δs|, |Δz| in cells, (n, count_s, count_z)."""
    ds = np.arange(cells.count_s) * cells.size_s[:, None]
    dz = np.arange(cells.count_z) * cells.size_z[:, None]
    u, v = ds[:, :, None], dz[:, None, :]
    return _static(cells, u, v, None) + _remainder(cells, u, v, 0.0)


def between_plates(cells: Cells, s: FloatArray, reach: int) -> ComplexArray:
    """Return the kernel from plate to plate, made symmetric, (n, n_s, n_s, count_z).

    Parameters
    ----------
    cells : Cells
        The batch.
    s : (n, n_s)
        Positions (cell centres or edges) on both plates, m.
    reach : int
        Of `near_reach`, one for the batch.
    """
    count = s.shape[1]
    one, two = np.triu_indices(count)
    full = np.zeros((count, count), dtype=np.intp)
    full[one, two] = full[two, one] = np.arange(one.size)
    dz = np.arange(cells.count_z) * cells.size_z[:, None]
    table = _far(cells, s[:, one], s[:, two], dz)
    close = np.flatnonzero(one + two < reach)
    rows = min(_NEAR_ROWS, cells.count_z)
    cosine, sine = (f(cells.apex_angle)[:, None, None] for f in (np.cos, np.sin))
    near: ComplexArray | float = 0.0
    for here, there in ((one, two), (two, one)):
        a, b = s[:, here[close], None], s[:, there[close], None]
        u, v, height = a * cosine - b, dz[:, None, :rows], np.abs(a * sine)
        near = near + 0.5 * (_static(cells, u, v, height) + _remainder(cells, u, v, height))
    table[:, close, :rows] = near
    return table[:, full]


def _far(cells: Cells, s: FloatArray, t: FloatArray, dz: FloatArray) -> ComplexArray:
    """Return the kernel of far cells: centre plus second derivatives, (n, n_pairs, count_z)."""
    k, cosine = cells.k[:, None, None], np.cos(cells.apex_angle)[:, None]
    s2, z2 = cells.size_s[:, None] ** 2, cells.size_z[:, None] ** 2
    across = 0.5 * s2 * ((s - t * cosine) ** 2 + (t - s * cosine) ** 2)
    square = (s**2 + t**2 - 2.0 * s * t * cosine)[:, :, None] + (dz**2)[:, None, :]
    inverse_square = 1.0 / np.maximum(square, 1e-3 * s2[..., None])
    inverse = np.sqrt(inverse_square)
    phase = k * (square * inverse)
    along = (across[:, :, None] + (z2 * dz**2)[:, None, :]) * inverse_square
    bend = (3.0 * along - (s2 + z2)[..., None]) * inverse_square / 24.0
    factor = np.empty(phase.shape, dtype=np.complex128)
    real = inverse * (1.0 + bend - k**2 / 24.0 * along)
    imaginary = inverse * phase * bend
    sine, cosine = np.sin(phase), np.cos(phase)
    factor.real = real * cosine + imaginary * sine
    factor.imag = imaginary * cosine - real * sine
    return factor


def _static(cells: Cells, u: FloatArray, v: FloatArray, height: FloatArray | None) -> FloatArray:
    """Return the mean of 1/R over the cell at (u, v), seen from `height` above the origin."""
    half_s, half_z = cells.size_s[:, None, None] / 2.0, cells.size_z[:, None, None] / 2.0
    total: FloatArray | float = 0.0
    for sign_u in (1.0, -1.0):
        for sign_v in (1.0, -1.0):
            x, y = u + sign_u * half_s, v + sign_v * half_z
            total = total + sign_u * sign_v * _corner(x, y, height)
    return np.asarray(total / (4.0 * half_s * half_z))


def _corner(x: FloatArray, y: FloatArray, height: FloatArray | None) -> FloatArray:
    """Return ∫∫ dx dy / √(x² + y² + h²) from 0; the corners of a rectangle give its integral."""
    if height is None:
        # Corners never lie on an axis: cells are seen from cell centres.
        return np.asarray(x * np.arcsinh(y / np.abs(x)) + y * np.arcsinh(x / np.abs(y)))
    h2 = np.maximum(height**2, 1e-20 * (x**2 + y**2))
    h = np.sqrt(h2)
    radius = np.sqrt(x**2 + y**2 + h2)
    return np.asarray(
        x * np.arcsinh(y / np.sqrt(x**2 + h2))
        + y * np.arcsinh(x / np.sqrt(y**2 + h2))
        - h * np.arctan2(x * y, h * radius)
    )


def _remainder(
    cells: Cells, u: FloatArray, v: FloatArray, height: FloatArray | float
) -> ComplexArray:
    """Return the mean of (e^{-jkR} − 1)/R over the cell at (u, v) by 2 × 2 Gauss points."""
    k = cells.k[:, None, None]
    step_s, step_z = _GAUSS * cells.size_s[:, None, None], _GAUSS * cells.size_z[:, None, None]
    total = np.zeros(np.broadcast_shapes(u.shape, v.shape), dtype=np.complex128)
    for point_u in (u - step_s, u + step_s):
        for point_v in (v - step_z, v + step_z):
            radius = np.sqrt(point_u**2 + point_v**2 + np.square(height))
            # cos x − 1 loses digits for small x; −2 sin²(x/2) does not.
            total.real -= 2.0 * np.sin(0.5 * k * radius) ** 2 / radius
            total.imag -= np.sin(k * radius) / radius
    return total / 4.0
