"""Far fields of given currents against plain sums, and sampling of the sky."""

import numpy as np
import pytest

from models.moment_field import Sky, View, plates_far_field
from models.moment_plates import Grid, grid_cells
from models.pattern import CUT_ANGLES


def test_sphere_weights() -> None:
    # Means over the sphere of 1, cos²θ and sin²θ·cos²φ are 1, 1/3 and 1/3.
    sky = Sky.of(8)
    theta, phi = (x[2 * sky.count :] for x in (sky.theta, sky.phi))
    for value, mean in (
        (np.ones(theta.size), 1.0),
        (np.cos(theta) ** 2, 1.0 / 3.0),
        ((np.sin(theta) * np.cos(phi)) ** 2, 1.0 / 3.0),
    ):
        assert value @ sky.weights == pytest.approx(mean, rel=1e-12)


def test_cuts_from_samples() -> None:
    # An even function of few harmonics on the H-plane; a z dipole's |cos| on the E-plane.
    sky = Sky.of(8)
    h_cut, e_cut = (sky.phi[: sky.count], sky.theta[sky.count : 2 * sky.count])
    samples = np.concatenate([np.exp(3j * np.cos(h_cut)), np.sin(e_cut) + 0j])
    h_field, e_field = sky.cuts(np.concatenate([samples, np.zeros(sky.weights.size)])[None])
    assert h_field[0] == pytest.approx(np.exp(3j * np.cos(CUT_ANGLES)), abs=1e-6)
    assert e_field[0] == pytest.approx(np.abs(np.cos(CUT_ANGLES)), abs=1e-9)


@pytest.mark.parametrize("count_z", [5, 6])
def test_plates_far_field(count_z: int) -> None:
    # The radiation integral, element by element over all four quarters.
    one, k = np.ones(1), 2.0 * np.pi
    cells = grid_cells(
        3,
        count_z,
        k=k * one,
        apex_angle=1.2 * one,
        plate_width=0.7 * one,
        plate_length=0.9 * one,
    )
    grid = Grid(cells=cells)
    rng = np.random.default_rng(3)
    unknowns = rng.normal(size=(1, 5 * (count_z // 2), 1)).astype(np.complex64)
    j_z, j_s = (x[0, ..., 0] for x in grid.split(unknowns))
    edges, middles = (z[0] for z in grid.heights())
    sky = Sky.of(6)
    towards = np.stack(
        [
            np.sin(sky.theta) * np.cos(sky.phi),
            np.sin(sky.theta) * np.sin(sky.phi),
            np.cos(sky.theta),
        ]
    )
    total = np.zeros((3, sky.theta.size), dtype=np.complex128)
    for side in (0.6, -0.6):
        slope = np.array([np.cos(side), np.sin(side), 0.0])
        for up in (1.0, -1.0):
            for s, row in zip(cells.centres()[0], j_z, strict=True):
                for z, current in zip(edges, row, strict=True):
                    place = slope * s + np.array([0.0, 0.0, up * z])
                    moment = np.array([0.0, 0.0, cells.size_z[0]])
                    total += current * np.outer(moment, np.exp(1j * k * place @ towards))
            for s, row in zip(cells.edges()[0], j_s, strict=True):
                for z, current in zip(middles, row, strict=True):
                    place = slope * s + np.array([0.0, 0.0, up * z])
                    moment = up * slope * cells.size_s[0]
                    total += current * np.outer(moment, np.exp(1j * k * place @ towards))
    theta_hat = np.stack(
        [
            np.cos(sky.theta) * np.cos(sky.phi),
            np.cos(sky.theta) * np.sin(sky.phi),
            -np.sin(sky.theta),
        ]
    )
    phi_hat = np.stack([-np.sin(sky.phi), np.cos(sky.phi), np.zeros(sky.phi.size)])
    f_theta, f_phi = (-k / 2.0 * (hat * total).sum(axis=0) for hat in (theta_hat, phi_hat))
    found_theta, found_phi = plates_far_field(grid, unknowns, View.of(sky, cells.apex_angle))
    assert found_theta[0, 0] == pytest.approx(f_theta, abs=1e-5)
    assert found_phi[0, 0] == pytest.approx(f_phi[2 * sky.count :], abs=1e-5)
