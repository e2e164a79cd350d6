"""Mass and wind load against hand calculation and data books."""

from __future__ import annotations

import numpy as np
import pytest

from models import Build, Reflectors
from models.build import drag_coefficient, mass, wind_load


def sheet(width: float, length: float) -> Reflectors:
    return Reflectors(
        apex_angle=np.pi,
        spacing=0.1,
        plate_width=width / 2.0,
        plate_length=length,
        dipole_length=0.1,
        dipole_diameter=1e-6,
    )


def test_drag_of_flat_plates() -> None:
    # Engineering data books: 1.17 for a square plate, 1.98 for a long one.
    np.testing.assert_allclose(drag_coefficient(np.array([1.0, 100.0, 1e4])), [1.17, 1.98, 1.98])
    assert np.all(np.diff(drag_coefficient(np.linspace(1.0, 120.0, 50))) >= 0.0)


def test_wind_load_of_a_square_metre() -> None:
    # ½·1.225 kg/m³·(40 m/s)²·1.17·1 m² = 1146.6 N.
    assert wind_load(sheet(1.0, 1.0), 40.0)[0] == pytest.approx(1146.6, abs=0.1)
    assert wind_load(sheet(2.0, 0.5), 40.0)[0] > 1146.6


def test_mass_of_a_square_metre_of_two_millimetres() -> None:
    assert mass(sheet(1.0, 1.0), Build())[0] == pytest.approx(5.4, abs=1e-3)
