"""The matrix of the plates: where an edge acts, symmetry, and the field of a plane plate."""

import numpy as np
import pytest

from models.moment_kernel import Cells
from models.moment_plates import EDGE, Grid, grid_cells


def test_edges_act_where_the_plate_ends() -> None:
    # A conducting strip of width w has the logarithmic capacity w/4 (closed form). Pulses of charge
    # matched at their middles act like a strip narrower by EDGE of a cell at each end.
    count = 400
    place = np.arange(count) + 0.5

    def integral(u: np.ndarray) -> np.ndarray:
        return np.asarray(u - u * np.log(np.abs(u)))

    apart = place[:, None] - place
    potential = integral(apart + 0.5) - integral(apart - 0.5)
    charge = np.linalg.solve(potential, np.ones(count))
    acting = 4.0 * np.exp(-1.0 / charge.sum())
    assert (count - acting) / 2.0 == pytest.approx(EDGE, abs=1e-3)


def grid(count_z: int) -> Grid:
    one = np.ones(1)
    return Grid(
        cells=grid_cells(
            4,
            count_z,
            k=2.0 * np.pi * one,
            apex_angle=1.5 * one,
            plate_width=0.8 * one,
            plate_length=1.0 * one,
        )
    )


@pytest.mark.parametrize("count_z", [5, 6])
def test_matrix_is_symmetric(count_z: int) -> None:
    matrix = grid(count_z).matrix(4)[0]
    rows = count_z // 2
    assert matrix.shape == (7 * rows, 7 * rows)
    assert matrix == pytest.approx(matrix.T, rel=1e-5)


@pytest.mark.parametrize("count_z", [5, 6])
def test_quarter_stands_for_the_whole(count_z: int) -> None:
    # Total squared current, summed edge by edge over both halves of both plates.
    quarter = grid(count_z)
    rng = np.random.default_rng(7)
    rows = count_z // 2
    unknowns = rng.normal(size=(1, 7 * rows, 1)).astype(np.complex64)
    j_z, j_s = (x[0, ..., 0] for x in quarter.split(unknowns))
    ratio = quarter.cells.size_z[0] / quarter.cells.size_s[0]
    z_whole = np.concatenate([j_z[:, ::-1], j_z], axis=1)
    if count_z % 2 == 0:
        middle = 2.0 * j_z[:, :1]
        z_whole = np.concatenate([j_z[:, :0:-1], middle, j_z[:, 1:]], axis=1)
    expected = 2.0 * ratio * np.sum(np.abs(z_whole) ** 2) + 4.0 / ratio * np.sum(np.abs(j_s) ** 2)
    assert quarter.current_square(unknowns)[0, 0, 0].real == pytest.approx(expected)


def test_grid_covers_the_plate_and_its_edge_shift() -> None:
    cells: Cells = grid(6).cells
    rim = cells.start + cells.size_s * cells.count_s
    assert rim - EDGE * cells.size_s == pytest.approx(0.8)
    assert (cells.count_z - 2.0 * EDGE) * cells.size_z == pytest.approx(1.0)
