"""Counts of cells and harmonics that pairs of design and frequency get."""

import numpy as np

from models.conventions import FloatArray
from models.moment_case import DENSITY, LADDER, Case

rng = np.random.default_rng(5)


def case(n: int) -> Case:
    """Return n pairs at a wavelength of 2 m."""
    return Case(
        k=np.full(n, np.pi),
        apex_angle=rng.uniform(0.6, np.pi, n),
        spacing=rng.uniform(0.4, 1.6, n),
        plate_width=rng.uniform(0.1, 6.0, n),
        plate_length=rng.uniform(0.1, 6.0, n),
        dipole_length=np.full(n, 0.94),
        dipole_radius=np.full(n, 0.01),
    )


def test_cells_and_harmonics() -> None:
    pairs = case(200)
    base_s, base_z, place, _, order = pairs.keys().T
    finest = np.array(LADDER)[place]

    def cells_a_wavelength(base: FloatArray, size: FloatArray) -> FloatArray:
        return np.asarray(base * finest / (size / 2.0))

    assert cells_a_wavelength(base_s, pairs.plate_width).min() >= DENSITY * (1.0 - 1e-9)
    assert cells_a_wavelength(base_z, pairs.plate_length).min() >= DENSITY * (1.0 - 1e-9)
    # Sources within r of the middle of the apex line have harmonics up to about kr.
    plates = np.hypot(pairs.plate_width, pairs.plate_length / 2.0)
    dipole = np.hypot(pairs.spacing, pairs.dipole_length / 2.0)
    assert (order >= np.pi * np.maximum(plates, dipole) - 1e-9).all()
    assert (order <= np.pi * np.maximum(plates, dipole) * 1.6 + 10.0).all()


def test_rows_put_back_together() -> None:
    pairs = case(7)
    order = np.array([4, 0, 6, 1, 5, 3, 2])
    parts = [pairs.rows(order[:3]), pairs.rows(order[3:])]
    again = Case.join(parts).rows(np.argsort(order))
    assert all(np.array_equal(value, getattr(pairs, name)) for name, value in vars(again).items())
    pairs.put(order[:3], pairs.rows(order[3:6]))
    assert np.array_equal(pairs.spacing[order[:3]], again.spacing[order[3:6]])
