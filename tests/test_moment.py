"""The full-wave model against converged values, published corners and itself."""

import numpy as np
import pytest

from models import Reflectors, evaluate
from models.conventions import C0


def test_corners_with_resonant_dipoles() -> None:
    # L. B. Cebik, Corner Reflectors Revisited Again (2005): wire grids, so ±0.5 dB, ±5 Ω, ±4°.
    designs = Reflectors(
        apex_angle=np.radians(90.0),
        spacing=np.array([0.324, 0.370, 0.436]),
        plate_width=0.8,
        plate_length=1.4,
        dipole_length=np.array([0.4240, 0.4268, 0.4388]),
        dipole_diameter=0.008,
    )
    figures = evaluate(designs, C0, model="moment")
    assert figures.directivity_dbi[:, 0] == pytest.approx([11.42, 11.37, 11.28], abs=0.5)
    assert figures.resistance_ohm[:, 0] == pytest.approx([50.0, 70.0, 100.0], abs=5.0)
    assert figures.beamwidth_e_deg[:, 0] == pytest.approx(46.0, abs=4.0)
    assert figures.beamwidth_h_deg[:, 0] == pytest.approx(54.0, abs=4.0)
    assert np.all(figures.doubt_db < 0.3)
