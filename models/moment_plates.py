"""Currents on both plates for given fields of the dipole: one grid of the integral equation.

Mixed potentials, rooftop currents tested along the line between cell centres (razor blade).
Unknowns are the currents (A) through cell edges on a quarter of the antenna: J_z is even and J_s
odd in z, both plates carry the same, and none flows across the apex line. With ψ the mean kernel,

    (jηk/4π)·[c² ψ I − k⁻² Dᵀψ D I] = ∫E dl,

D taking edge currents to what leaves each cell. Where an edge current lies on z = 0 the unknown is
half of it, which keeps the matrix symmetric.

The pulses of charge make an edge act a sixth of a cell further in than where the grid ends (see
`EDGE`), so the grid is laid that much too large and the error of first order in the cell vanishes.

Source: Glisson & Wilton, IEEE Trans. AP-28 (1980).
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache
from typing import Final

import numpy as np

from models.conventions import ComplexArray, FloatArray
from models.moment_kernel import Cells, between_plates, own_plate
from models.moment_wire import Wire

__all__ = ["EDGE", "Grid", "grid_cells"]

EDGE: Final = 0.17466
"""How far inside the last cell's end the edge of a strip acts, in cells."""

_REMEMBERED_CELLS: Final = 256


def apex_shift(apex_angle: FloatArray) -> FloatArray:
    """Return how far the first cell reaches beyond the apex, in cells, (n,)."""
    return np.asarray(EDGE * (1.0 - apex_angle / np.pi))


def grid_cells(
    count_s: int,
    count_z: int,
    *,
    k: FloatArray,
    apex_angle: FloatArray,
    plate_width: FloatArray,
    plate_length: FloatArray,
) -> Cells:
    """Return the grid of `count_s` × `count_z` cells whose edges act where the plate ends."""
    shift = apex_shift(apex_angle)
    size_s = plate_width / (count_s - shift - EDGE)
    return Cells(
        count_s=count_s,
        count_z=count_z,
        k=k,
        apex_angle=apex_angle,
        size_s=size_s,
        size_z=plate_length / (count_z - 2.0 * EDGE),
        start=-shift * size_s,
    )


@dataclass(frozen=True, kw_only=True, eq=False)
class Grid:
    """A grid and the places of its unknowns.

    Parameters
    ----------
    cells : Cells
        The batch of grids.
    """

    cells: Cells

    def heights(self) -> tuple[FloatArray, FloatArray]:
        """Return z of the J_z edges and of the J_s cells on the upper half, m, (n, rows)."""
        odd = self.cells.count_z % 2
        rows = np.arange(self.cells.count_z // 2)
        size = self.cells.size_z[:, None]
        return size * (rows + 0.5 * odd), size * (rows + 0.5 + 0.5 * odd)

    def matrix(self, reach: int) -> ComplexArray:
        """Return the matrix over jη/(4πk), (n, N, N), without unit.

        Parameters
        ----------
        reach : int
            Of `near_reach`, one for the batch.
        """
        cells = self.cells
        shift = np.arange(cells.count_s)
        own = own_plate(cells).take(np.abs(shift[:, None] - shift), axis=1)
        table, at_edges = between_plates(cells, reach)
        # J_s on the other plate points along its slope, cos α of it this way.
        turn = np.cos(cells.apex_angle)[:, None, None, None]
        turned = turn * table
        turned += own
        table += own
        # Tables over the distance in z: J_z on J_z, J_z on J_s, J_s on J_s. The vector potential is
        # that of a rooftop, a mean of neighbouring cells' kernels, along the whole test line.
        k2_z, k2_s = ((cells.k * size) ** 2 for size in (cells.size_z, cells.size_s))
        zz = -2.0 * table[..., :-1]
        zz += table[..., 1:]
        zz[..., 1:] += table[..., :-2]
        zz[..., 0] += table[..., 1]
        zz *= (1.0 + k2_z / 12.0)[:, None, None, None]
        zz += k2_z[:, None, None, None] * table[..., :-1]
        across = table[:, :, :-1] - table[:, :, 1:]
        zs = across[..., 1:] - across[..., :-1]
        turned = turned[:, 1:] + turned[:, :-1]
        ss = turned[:, :, 1:] + turned[:, :, :-1]
        ss *= (k2_s / 12.0)[:, None, None, None]
        at_edges *= turn
        at_edges += own[:, 1:, 1:]
        at_edges *= (k2_s / 1.5)[:, None, None, None]
        ss += at_edges
        ss += across[:, 1:]
        ss -= across[:, :-1]
        return _fold(cells.count_s, cells.count_z, zz, zs, ss)

    def voltages(self, wire: Wire, shapes: ComplexArray, spacing: FloatArray) -> ComplexArray:
        """Return ∫E dl of the wire's shapes over the test lines, V, (n, N, n_shape)."""
        cells = self.cells
        edges, middles = self.heights()
        cosine, sine = (f(cells.apex_angle / 2.0)[:, None] for f in (np.cos, np.sin))
        across = (spacing[:, None] * sine) ** 2
        along = cells.centres() - spacing[:, None] * cosine
        e_z = wire.near_field(shapes, np.sqrt(along**2 + across), edges, radial=False)
        along = cells.edges() - spacing[:, None] * cosine
        distance = np.sqrt(along**2 + across)
        e_s = wire.near_field(shapes, distance, middles, radial=True)
        e_s *= (along / distance * cells.size_s[:, None])[:, :, None, None]
        size, count = shapes.shape[0], shapes.shape[2]
        return np.concatenate(
            [
                e_z.reshape(size, -1, count) * cells.size_z[:, None, None],
                e_s.reshape(size, -1, count),
            ],
            axis=1,
        )

    def split(self, unknowns: ComplexArray) -> tuple[ComplexArray, ComplexArray]:
        """Return J_z (n, count_s, rows, m) and J_s (n, count_s - 1, rows, m) unknowns apart."""
        n_s, rows = self.cells.count_s, self.cells.count_z // 2
        size, _, m = unknowns.shape
        first = n_s * rows
        return (
            unknowns[:, :first].reshape(size, n_s, rows, m),
            unknowns[:, first:].reshape(size, n_s - 1, rows, m),
        )

    def current_square(self, unknowns: ComplexArray) -> ComplexArray:
        """Return ∫ J_m*·J_n dS over both plates for currents (n, N, m) in A, A², (n, m, m)."""
        cells = self.cells
        weight = np.full(cells.count_z // 2, 4.0)
        if cells.count_z % 2 == 0:
            weight[0] = 8.0  # half the current on half a cell's area
        ratio = (cells.size_z / cells.size_s)[:, None]
        n_s = cells.count_s
        weights = np.concatenate(
            [ratio * np.tile(weight, n_s), 4.0 / ratio * np.ones(weight.size * (n_s - 1))], axis=1
        )
        return np.asarray(unknowns.conj().swapaxes(1, 2) @ (weights[..., None] * unknowns))


@lru_cache(maxsize=128)
def _fold_indices(n_s: int, n_z: int) -> tuple[np.ndarray, ...]:
    """Return places in the three tables of direct and mirrored partner, and the direct sign."""
    rows, odd = n_z // 2, n_z % 2
    r = np.arange(rows)
    apart, both = np.abs(r[:, None] - r), r[:, None] + r
    # J_z edge n lies at n + odd/2, J_s cell j at j + 1/2 + odd/2: half steps in between.
    gap = r[:, None] - r - 0.5

    def places(first: int, second: int, length: int, index: np.ndarray) -> np.ndarray:
        i, j = np.arange(first)[:, None, None, None], np.arange(second)[:, None]
        place = (i * second + j) * length + index[:, None, :]
        return np.asarray(place.reshape(first * rows, second * rows))

    cross = (np.abs(gap) - 0.5).astype(np.intp)
    sign = np.broadcast_to(np.sign(gap)[None, :, None, :], (n_s, rows, n_s - 1, rows))
    return (
        places(n_s, n_s, n_z - 1, apart),
        places(n_s, n_s, n_z - 1, both + odd),
        places(n_s, n_s - 1, n_z - 1, cross),
        places(n_s, n_s - 1, n_z - 1, both + odd),
        places(n_s - 1, n_s - 1, n_z, apart),
        places(n_s - 1, n_s - 1, n_z, both + 1 + odd),
        sign.reshape(n_s * rows, (n_s - 1) * rows),
    )


def _fold(n_s: int, n_z: int, zz: ComplexArray, zs: ComplexArray, ss: ComplexArray) -> ComplexArray:
    """Return the matrix of a quarter from tables over distance: J_z is even in z, J_s odd."""
    # Small grids come again and again; the places of large ones are not worth their memory.
    indices = _fold_indices if n_s * n_z <= _REMEMBERED_CELLS else _fold_indices.__wrapped__
    zz_one, zz_two, zs_one, zs_two, ss_one, ss_two, sign = indices(n_s, n_z)
    size, first, total = zz.shape[0], zz_one.shape[0], zz_one.shape[0] + ss_one.shape[0]
    zz, zs, ss = (x.reshape(size, -1) for x in (zz, zs, ss))
    matrix = np.empty((size, total, total), dtype=np.complex128)
    np.add(zz.take(zz_one, axis=1), zz.take(zz_two, axis=1), out=matrix[:, :first, :first])
    np.subtract(ss.take(ss_one, axis=1), ss.take(ss_two, axis=1), out=matrix[:, first:, first:])
    cross = zs.take(zs_one, axis=1)
    cross *= sign
    cross -= zs.take(zs_two, axis=1)
    matrix[:, :first, first:] = cross
    matrix[:, first:, :first] = cross.swapaxes(1, 2)
    return matrix
