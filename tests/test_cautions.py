"""Every danger is named, with numbers that follow from their sources."""

from __future__ import annotations

import numpy as np
import pytest

from models import Reflectors
from optim.cautions import cautions
from optim.requirements import Band

CORNER = Reflectors(
    apex_angle=np.radians(90.0),
    spacing=0.173,
    plate_width=0.5 / np.sqrt(2.0),
    plate_length=0.5,
    dipole_length=0.16,
    dipole_diameter=0.006,
)


def _texts(low_mhz: float, high_mhz: float, gain: float = 10.0) -> dict[str, str]:
    band = Band(1e6 * low_mhz, 1e6 * high_mhz, 3)
    return dict(cautions(CORNER, band=band, wind_speed=40.0, peak_gain_dbi=gain))


def test_wind_load() -> None:
    # A square of 0.5 m: ½ · 1.225 · 40² · 1.17 · 0.25 = 286.65 N.
    text = _texts(900, 900)["Wind and ice"]
    assert "40 m/s" in text
    assert "287 N" in text
    assert "code of the place" in text


def test_exposure() -> None:
    # 900 MHz: 0.6 mW/cm² = 6 W/m²; 10 W and 10 dBi: √(100/(4π·6)) = 1.15 m.
    text = _texts(900, 915)["Radio exposure"]
    assert "0.36 m for 1 W, 1.2 m for 10 W, 3.6 m for 100 W" in text
    assert "0.6 mW/cm²" in text
    # The diagonal is 0.707 m: 2 · 0.5 m² · 915 MHz/c = 3.05 m.
    assert "beyond 3.1 m (2D²/λ): keep that distance" in text
    assert "licensed practice decide" in text


@pytest.mark.parametrize("band", [(144, 146), (290, 310), (1490, 1510), (2400, 2483)])
def test_unknown_limits_are_to_be_looked_up(band: tuple[float, float]) -> None:
    text = _texts(*band)["Radio exposure"]
    assert "must be looked up" in text
    assert "mW/cm²" not in text


def test_no_number_without_a_gain() -> None:
    text = _texts(900, 915, gain=np.nan)["Radio exposure"]
    assert "nan" not in text
    assert "for 10 W" not in text


def test_every_danger_is_named() -> None:
    assert set(_texts(900, 900)) == {
        "Wind and ice",
        "Lightning and earthing",
        "Power lines",
        "Radio exposure",
    }
