"""Cell means of e^{-jkR}/R against numerical integration."""

import numpy as np
import pytest
from scipy.integrate import dblquad

from models.moment_kernel import Cells, kernels, near_reach


def cells(apex_angle: float) -> Cells:
    one = np.ones(1)
    return Cells(
        count_s=5,
        count_z=4,
        k=2.0 * np.pi * one,
        apex_angle=apex_angle * one,
        size_s=0.12 * one,
        size_z=0.15 * one,
        start=-0.01 * one,
    )


def mean(grid: Cells, s: float, t: float, dz: float, apex_angle: float) -> complex:
    """Integrate over the cell at (t, dz) of the other plate, seen from s, adaptively."""
    a, b, k = grid.size_s[0], grid.size_z[0], grid.k[0]

    def kernel(z: float, t: float) -> complex:
        radius = np.sqrt(s**2 + t**2 - 2.0 * s * t * np.cos(apex_angle) + z**2)
        return complex(np.exp(-1j * k * radius) / radius)

    limits = (t - a / 2.0, t + a / 2.0, dz - b / 2.0, dz + b / 2.0)
    real, imaginary = (
        dblquad(lambda z, t, part=part: getattr(kernel(z, t), part), *limits, epsabs=1e-9)[0]
        for part in ("real", "imag")
    )
    return complex(real / (a * b), imaginary / (a * b))


@pytest.mark.parametrize("place", [(1, 0), (0, 2), (3, 1)])
def test_own_plate(place: tuple[int, int]) -> None:
    grid = cells(1.0)
    ds, dz = place[0] * grid.size_s[0], place[1] * grid.size_z[0]
    expected = mean(grid, 0.0, ds, dz, 0.0)
    assert kernels(grid, 5)[0][0][place] == pytest.approx(expected, rel=1e-3)


@pytest.mark.parametrize("place", [(0, 0, 0), (0, 1, 0), (0, 4, 0), (3, 3, 1), (2, 4, 3)])
@pytest.mark.parametrize("degrees", [30.0, 90.0, 180.0])
def test_between_plates(place: tuple[int, int, int], degrees: float) -> None:
    angle = np.radians(degrees)
    grid = cells(angle)
    _, at_centres, at_edges = kernels(grid, int(near_reach(np.array([angle]))[0]))
    i, j, row = place
    dz = row * grid.size_z[0]
    s = grid.centres()[0]
    expected = (mean(grid, s[i], s[j], dz, angle) + mean(grid, s[j], s[i], dz, angle)) / 2.0
    assert at_centres[0][place] == pytest.approx(expected, rel=1e-2)
    assert at_centres[0, j, i, row] == at_centres[0, i, j, row]
    s = grid.edges()[0]
    i, j = min(i, 3), min(j, 3)
    expected = (mean(grid, s[i], s[j], dz, angle) + mean(grid, s[j], s[i], dz, angle)) / 2.0
    assert at_edges[0, i, j, row] == pytest.approx(expected, rel=1e-2)


def test_a_cell_on_itself() -> None:
    # ∫∫ 1/R over a square of side a from its centre is 4a·ln(1 + √2) (closed form).
    one = np.ones(1)
    grid = Cells(
        count_s=2,
        count_z=2,
        k=1e-9 * one,
        apex_angle=one,
        size_s=0.3 * one,
        size_z=0.3 * one,
        start=0.0 * one,
    )
    expected = 4.0 * np.log(1.0 + np.sqrt(2.0)) / 0.3
    assert kernels(grid, 5)[0][0, 0, 0].real == pytest.approx(expected, rel=1e-6)
