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

from models.conventions import ETA0, ComplexArray, FloatArray
from models.moment_kernel import Cells, between_plates, own_plate
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

    def matrix(self, reach: int) -> ComplexArray:
        """Return the matrix of the integral equation, Ω, (n, N, N)."""
        cells, odd = self.cells, self.cells.count_z % 2
        n_s, rows = cells.count_s, cells.count_z // 2
        i = np.arange(n_s)
        own = own_plate(cells)
        table = own[:, np.abs(i[:, None] - i)]
        at_edges = table[:, 1:, 1:] + np.cos(cells.apex_angle)[
            :, None, None, None
        ] * between_plates(cells, cells.edges(), reach - 1)
        table = table + between_plates(cells, cells.centres(), reach)
        k2 = (cells.k**2)[:, None, None, None]
        # Differences along z: of edge and edge (even), of edge and cell (odd); along s likewise.
        inner = np.concatenate([table[..., 1:2], table[..., :-2]], axis=-1)
        zz = (k2 * cells.size_z[:, None, None, None] ** 2 - 2.0) * table
        zz = zz[..., :-1] + table[..., 1:] + inner
        across = table[:, :, :-1] - table[:, :, 1:]
        zs = across[..., 1:] - across[..., :-1]
        ss = k2 * cells.size_s[:, None, None, None] ** 2 * at_edges
        ss = ss - (across[:, :-1] - across[:, 1:])
        r = np.arange(rows)
        apart, sum_ = np.abs(r[:, None] - r), r[:, None] + r
        zz_block = zz[..., apart] + zz[..., sum_ + odd]
        ss_block = ss[..., apart] - ss[..., sum_ + 1 + odd]
        # Edge n lies at n + odd/2, cell j at j + 1/2 + odd/2; zs is over the half steps between.
        gap = r[:, None] - r - 0.5
        sign = np.where(gap > 0.0, 1.0, -1.0)
        zs_block = sign * zs[..., (np.abs(gap) - 0.5).astype(int)] - zs[..., sum_ + odd]
        first, second = n_s * rows, (n_s - 1) * rows
        matrix = np.empty((cells.k.size, first + second, first + second), dtype=np.complex128)
        matrix[:, :first, :first] = zz_block.swapaxes(2, 3).reshape(-1, first, first)
        matrix[:, first:, first:] = ss_block.swapaxes(2, 3).reshape(-1, second, second)
        cross = zs_block.swapaxes(2, 3).reshape(-1, first, second)
        matrix[:, :first, first:] = cross
        matrix[:, first:, :first] = cross.swapaxes(1, 2)
        matrix *= (1j * ETA0 / (4.0 * np.pi) / cells.k)[:, None, None]
        return matrix

    def voltages(self, wire: Wire, spacing: FloatArray) -> ComplexArray:
        """Return ∫E dl of the wire's modes (1 A) over the test lines, V, (n, N, modes)."""
        cells = self.cells
        edges, middles = self.heights()
        cosine = np.cos(cells.apex_angle / 2.0)[:, None]
        sine = np.sin(cells.apex_angle / 2.0)[:, None]

        def place(s: FloatArray) -> tuple[FloatArray, FloatArray]:
            along = s - spacing[:, None] * cosine
            return np.sqrt(along**2 + (spacing[:, None] * sine) ** 2), along

        distance, _ = place(cells.centres())
        along_z = wire.near_field(distance, edges)[0] * cells.size_z[:, None, None, None]
        distance, along = place(cells.edges())
        along_s = wire.near_field(distance, middles)[1] * (
            (along / distance)[:, :, None, None] * cells.size_s[:, None, None, None]
        )
        size, modes = cells.k.size, wire.modes
        return np.concatenate(
            [along_z.reshape(size, -1, modes), along_s.reshape(size, -1, modes)], axis=1
        )

    def split(self, currents: ComplexArray) -> tuple[ComplexArray, ComplexArray]:
        """Return J_z (n, count_s, rows, m) and J_s (n, count_s - 1, rows, m) unknowns apart."""
        n_s, rows = self.cells.count_s, self.cells.count_z // 2
        size, m = currents.shape[0], currents.shape[-1]
        first = n_s * rows
        return (
            currents[:, :first].reshape(size, n_s, rows, m),
            currents[:, first:].reshape(size, n_s - 1, rows, m),
        )

    def cuts(self, currents: ComplexArray, angles: FloatArray) -> tuple[ComplexArray, ComplexArray]:
        """Return f of the plates on the H- and the E-plane cut, (n, n_angle, m) each.

        Parameters
        ----------
        currents : (n, N, m)
            Unknowns, A.
        angles : (n_angle,)
            Off boresight, radians.
        """
        cells = self.cells
        k = cells.k[:, None, None]
        half_angle = cells.apex_angle[:, None, None] / 2.0
        j_z, j_s = self.split(currents)
        moment_z = (cells.size_z * cells.k)[:, None, None] * j_z.sum(axis=2)
        ks = k * cells.centres()[:, None, :]
        turn = angles[:, None]
        lit = _turn(ks * np.cos(turn - half_angle)) + _turn(ks * np.cos(turn + half_angle))
        h_cut = lit @ moment_z
        # E-plane: both plates alike, e^{jk s cosψ cos(α/2)}; z enters as cos and j sin.
        sine, cosine = np.abs(np.cos(angles)), np.sin(angles)
        toward = np.where(angles <= np.pi / 2.0, 1.0, -1.0)
        edges, middles = self.heights()
        even = np.cos(k * edges[:, None, :] * cosine[:, None])
        odd = np.sin(k * middles[:, None, :] * cosine[:, None])
        tilt = np.cos(angles)[:, None] * np.cos(half_angle)
        along_z = _turn(ks * tilt)
        along_s = _turn(k * cells.edges()[:, None, :] * tilt)
        e_z = np.einsum("bai,bar,birm->bam", along_z, even, j_z, optimize=True)
        e_s = np.einsum("bae,bar,berm->bam", along_s, odd, j_s, optimize=True)
        size_z, size_s = (
            (cells.size_z * cells.k)[:, None, None],
            (cells.size_s * cells.k)[:, None, None],
        )
        e_cut = 2.0 * size_z * sine[:, None] * e_z
        e_cut -= 2j * size_s * (toward * cosine)[:, None] * np.cos(half_angle) * e_s
        return h_cut, e_cut

    def current_square(self, currents: ComplexArray) -> FloatArray:
        """Return ∫ J_m* · J_n dS over both plates, 1/m² · m² per A², (n, m, m), real part."""
        cells = self.cells
        j_z, j_s = self.split(currents)
        weight = np.full(j_z.shape[2], 4.0)
        if cells.count_z % 2 == 0:
            weight[0] = 8.0  # half an unknown on half a cell's area
        ratio = (cells.size_z / cells.size_s)[:, None, None, None]
        size, m = currents.shape[0], currents.shape[-1]
        left = (j_z * (ratio * weight[:, None])).reshape(size, -1, m)
        right = (j_s * (4.0 / ratio)).reshape(size, -1, m)
        stack = np.concatenate([left, right], axis=1)
        return np.asarray((currents.conj().swapaxes(1, 2) @ stack).real)


def _turn(phase: FloatArray) -> ComplexArray:
    """Return e^{j·phase}."""
    wave = np.empty(phase.shape, dtype=np.complex128)
    wave.real, wave.imag = np.cos(phase), np.sin(phase)
    return wave
