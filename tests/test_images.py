"""`image` against Kraus's infinite corners with a half-wave dipole."""

from __future__ import annotations

import numpy as np
import pytest

from models import Reflectors, evaluate
from models.conventions import C0

KRAUS = [
    # apex angle, S/λ, dBi, terminal Ω, H-plane beamwidth: G = 1.6409·(R₁₁/R_t)·(E/E₀)², derived
    # from Kraus, Antennas, corner-reflector chapter; NaN where the source gives none.
    (90, 0.25, 12.46, 27.2, 44.9),
    (90, 0.35, 12.27, 71.7, 44.4),
    (90, 0.50, 11.82, 126.3, 41.8),
    (90, 0.70, 10.51, np.nan, 27.6),
    (60, 0.50, 14.31, 71.2, 30.0),
    (60, 0.65, 13.68, 138.2, np.nan),
    (45, 0.70, 15.68, np.nan, np.nan),
    (180, 0.25, 7.49, np.nan, np.nan),
]


def corner(angle: float, spacing: float) -> Reflectors:
    return Reflectors(
        apex_angle=np.radians(angle),
        spacing=spacing,
        plate_width=5.0,
        plate_length=5.0,
        dipole_length=0.5,
        dipole_diameter=1e-6,
    )


@pytest.mark.parametrize(("angle", "spacing", "gain", "resistance", "beamwidth"), KRAUS)
def test_infinite_corners(
    angle: float, spacing: float, gain: float, resistance: float, beamwidth: float
) -> None:
    figures = evaluate(corner(angle, spacing), C0, model="image")
    assert figures.directivity_dbi[0, 0] == pytest.approx(gain, abs=0.01)
    if not np.isnan(resistance):
        assert figures.resistance_ohm[0, 0] == pytest.approx(resistance, abs=0.1)
    if not np.isnan(beamwidth):
        # Four-neighbour interpolation of a cut at 2° costs some hundredths of a degree.
        assert figures.beamwidth_h_deg[0, 0] == pytest.approx(beamwidth, abs=0.12)


def test_several_lobes_beyond_seven_tenths() -> None:
    # Balanis §15.3, from memory: several lobes above .7 λ at 90°.
    close = evaluate(corner(90.0, 0.6), C0, model="image").boresight_dip_db[0, 0]
    far = evaluate(corner(90.0, 0.9), C0, model="image").boresight_dip_db[0, 0]
    assert close == pytest.approx(0.0, abs=1e-9)
    assert far > 3.0


def test_other_angles_have_no_images() -> None:
    figures = evaluate(corner(80.0, 0.5), C0, model="image")
    assert np.isnan(figures.directivity_dbi).all()
    assert np.isnan(figures.vswr).all()
