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
from typing import Final

import numpy as np
from numpy.lib.stride_tricks import as_strided
from scipy.linalg.lapack import cgesv

from models.conventions import ETA0, ComplexArray, FloatArray
from models.edges import WaveArray
from models.moment_kernel import Cells, kernels
from models.moment_wire import Wire

__all__ = ["EDGE", "Grid", "grid_cells"]

EDGE: Final = 0.17466
"""How far inside the last cell's end the edge of a strip acts, in cells."""


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

    def matrix(self, reach: int) -> WaveArray:
        """Return the matrix over jη/(4πk), (n, N, N), without unit.

        Parameters
        ----------
        reach : int
            Of `near_reach`, one for the batch.
        """
        cells = self.cells
        shift = np.arange(cells.count_s)
        own, table, at_edges = kernels(cells, reach)
        own = own.take(np.abs(shift[:, None] - shift), axis=1)
        # J_s on the other plate points along its slope, cos α of it this way.
        turn, k2_z, k2_s = (
            x.astype(np.float32)[:, None, None, None]
            for x in (
                np.cos(cells.apex_angle),
                (cells.k * cells.size_z) ** 2,
                (cells.k * cells.size_s) ** 2,
            )
        )
        turned = turn * table
        turned += own
        table += own
        # Tables over the distance in z: J_z on J_z, J_z on J_s, J_s on J_s. The vector potential is
        # that of a rooftop, a mean of neighbouring cells' kernels, along the whole test line.
        zz = -2.0 * table[..., :-1]
        zz += table[..., 1:]
        zz[..., 1:] += table[..., :-2]
        zz[..., 0] += table[..., 1]
        zz *= 1.0 + k2_z / 12.0
        zz += k2_z * table[..., :-1]
        across = table[:, :, :-1] - table[:, :, 1:]
        zs = across[..., 1:] - across[..., :-1]
        turned = turned[:, 1:] + turned[:, :-1]
        ss = turned[:, :, 1:] + turned[:, :, :-1]
        ss *= k2_s / 12.0
        at_edges *= turn
        at_edges += own[:, 1:, 1:]
        at_edges *= k2_s / 1.5
        ss += at_edges
        ss += across[:, 1:]
        ss -= across[:, :-1]
        return _fold(cells.count_s, cells.count_z, zz, zs, ss)

    def currents(self, reach: int, voltages: ComplexArray) -> WaveArray:
        """Return the unknowns (n, N, m), A, that `voltages` (n, N, m), V, drive."""
        cells = self.cells
        given = ((4.0 * np.pi / ETA0 * cells.k / 1j)[:, None, None] * voltages).astype(np.complex64)
        for matrix, right in zip(self.matrix(reach), given, strict=True):
            # The matrix is its own transpose, and that is what LAPACK reads without a copy.
            right[...] = cgesv(matrix.T, right, overwrite_a=True)[2]
        return given

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

    def split(self, unknowns: WaveArray) -> tuple[WaveArray, WaveArray]:
        """Return J_z (n, count_s, rows, m) and J_s (n, count_s - 1, rows, m) unknowns apart."""
        n_s, rows = self.cells.count_s, self.cells.count_z // 2
        size, _, m = unknowns.shape
        first = n_s * rows
        return (
            unknowns[:, :first].reshape(size, n_s, rows, m),
            unknowns[:, first:].reshape(size, n_s - 1, rows, m),
        )

    def current_square(self, unknowns: WaveArray) -> WaveArray:
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
        weighted = weights[..., None].astype(np.float32) * unknowns
        return np.asarray(unknowns.conj().swapaxes(1, 2) @ weighted)


def _fold(n_s: int, n_z: int, zz: WaveArray, zs: WaveArray, ss: WaveArray) -> WaveArray:
    """Return the matrix of a quarter from tables over distance: J_z is even in z, J_s odd."""
    rows, odd = n_z // 2, n_z % 2
    size, first, total = zz.shape[0], n_s * rows, (2 * n_s - 1) * rows
    matrix = np.empty((size, total, total), dtype=np.complex64)

    def place(i: slice, j: slice) -> WaveArray:
        """Return a part of the matrix as (n, s, row, s', row')."""
        part = matrix[:, i, j]
        return part.reshape(size, part.shape[1] // rows, rows, -1, rows)

    def spread(along: WaveArray, first: int, step: int) -> WaveArray:
        """Return along[..., first + step·row + row'] as (n, s, row, s', row')."""
        each, down, right, one = along.strides
        lengths = (size, along.shape[1], rows, along.shape[2], rows)
        return as_strided(along[..., first:], lengths, (each, down, step * one, right, one))

    def direct(table: WaveArray, back: WaveArray) -> WaveArray:
        """Return what row' does over row' − row, from `back` where it is the lower one."""
        along = np.concatenate([back[..., : rows - 1][..., ::-1], table[..., :rows]], axis=-1)
        return spread(along, rows - 1, -1)

    along_z, along_s = slice(first), slice(first, None)
    # J_z edge n lies at n + odd/2, J_s cell j at j + 1/2 + odd/2: half steps in between.
    np.add(direct(zz, zz[..., 1:]), spread(zz, odd, 1), out=place(along_z, along_z))
    np.subtract(direct(ss, ss[..., 1:]), spread(ss, 1 + odd, 1), out=place(along_s, along_s))
    np.subtract(direct(-zs, zs), spread(zs, odd, 1), out=place(along_z, along_s))
    matrix[:, along_s, along_z] = matrix[:, along_z, along_s].swapaxes(1, 2)
    return matrix
