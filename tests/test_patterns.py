"""Read back line by line: cuts are the figures' gain, the sphere agrees with the cuts."""

from __future__ import annotations

import csv
from dataclasses import replace

import numpy as np
import pytest

from models import Figures, Reflectors, radiate, sphere
from models.conventions import FloatArray
from models.figures import figures_of_merit
from models.pattern import Pattern, Sphere
from optim.patterns import FLOOR_DBI, GRID, cut_csv, sphere_csv

DESIGN = Reflectors(
    apex_angle=np.radians(80.0),
    spacing=0.4,
    plate_width=0.8,
    plate_length=0.9,
    dipole_length=0.45,
    dipole_diameter=0.01,
)
FREQUENCIES = np.array([290e6, 310.5e6])


@pytest.fixture(scope="module")
def pattern() -> Pattern:
    return radiate(DESIGN, FREQUENCIES)


@pytest.fixture(scope="module")
def figures(pattern: Pattern) -> Figures:
    return figures_of_merit(pattern)


@pytest.fixture(scope="module")
def around() -> Sphere:
    return sphere(DESIGN, FREQUENCIES, theta=GRID[0], phi=GRID[1])


def _read(text: str) -> tuple[list[str], dict[str, FloatArray]]:
    lines = text.splitlines()
    head = [line for line in lines if line.startswith("#")]
    rows = list(csv.DictReader(line for line in lines if not line.startswith("#")))
    return head, {name: np.array([float(row[name]) for row in rows]) for name in rows[0]}


@pytest.mark.parametrize("plane", ["h", "e"])
def test_cut(plane: str, pattern: Pattern, figures: Figures) -> None:
    head, table = _read(cut_csv(pattern, FREQUENCIES, plane=plane))
    assert any("from boresight +x towards" in line for line in head)
    angle = table["angle_deg"]
    np.testing.assert_array_equal(angle, np.arange(-180.0, 181.0, 2.0))
    for column, name in enumerate(("gain_dbi_at_290_mhz", "gain_dbi_at_310.5_mhz")):
        gain = table[name]
        assert gain[angle == 0.0] == pytest.approx(figures.gain_dbi[0, column], abs=1e-3)
        back = figures.gain_dbi[0, column] - figures.front_to_back_180_db[0, column]
        assert gain[[0, -1]] == pytest.approx(back, abs=2e-3)
        np.testing.assert_array_equal(gain, gain[::-1])


def test_sphere_agrees_with_cuts(pattern: Pattern, around: Sphere) -> None:
    head, table = _read(sphere_csv(around, FREQUENCIES))
    assert any("theta from +z" in line for line in head)
    for plane in "he":
        _, cut = _read(cut_csv(pattern, FREQUENCIES, plane=plane))
        for mhz in (290.0, 310.5):
            for angle in (-150.0, -40.0, 0.0, 20.0, 70.0, 160.0):
                # Elevation past the zenith comes down behind, at φ = 180°.
                behind = abs(angle) > 90.0
                upright = np.sign(angle) * 180.0 - angle if behind else angle
                theta, phi = (90.0, angle) if plane == "h" else (90.0 - upright, -180.0 * behind)
                here = (table["theta_deg"] == theta) & (table["phi_deg"] == phi)
                here &= table["frequency_mhz"] == mhz
                assert here.sum() == 1
                expected = cut[f"gain_dbi_at_{mhz:g}_mhz"][cut["angle_deg"] == angle]
                assert table["gain_theta_dbi"][here] == pytest.approx(expected, abs=0.01)


def test_integral_over_the_sphere_is_the_efficiency(pattern: Pattern, around: Sphere) -> None:
    _, table = _read(sphere_csv(around, FREQUENCIES))
    parts = [10.0 ** (table[f"gain_{p}_dbi"] / 10.0) for p in ("theta", "phi")]
    total = 10.0 ** (table["gain_dbi"] / 10.0)
    np.testing.assert_allclose(total, parts[0] + parts[1], rtol=1e-3)
    weight = np.sin(np.radians(table["theta_deg"]))
    for column, mhz in enumerate((290.0, 310.5)):
        here = table["frequency_mhz"] == mhz
        mean = (total * weight)[here].sum() / weight[here].sum()
        assert mean == pytest.approx(pattern.efficiency[0, column], rel=0.012)


def test_nothing_is_below_the_floor(around: Sphere) -> None:
    # By symmetry E_φ is nothing on both principal planes.
    _, table = _read(sphere_csv(around, FREQUENCIES))
    flat = table["theta_deg"] == 90.0
    assert (table["gain_phi_dbi"][flat] == FLOOR_DBI).all()


def test_directivity_stands_in_where_there_is_no_efficiency(
    pattern: Pattern, figures: Figures
) -> None:
    lossless = replace(pattern, efficiency=np.full((1, 2), np.nan))
    head, table = _read(cut_csv(lossless, FREQUENCIES, plane="h"))
    assert any("directivity" in line for line in head)
    ahead = table["directivity_dbi_at_290_mhz"][table["angle_deg"] == 0.0]
    assert ahead == pytest.approx(figures.directivity_dbi[0, 0], abs=1e-3)
