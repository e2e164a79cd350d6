"""Limits and distances against 47 CFR 1.1310 and the free-space formula, by hand."""

from __future__ import annotations

import numpy as np
import pytest

from optim.exposure import distance, far_field_from, public_limit


@pytest.mark.parametrize(
    ("mhz", "mw_cm2"),
    # 47 CFR 1.1310: f/1500 meets the neighbouring rows at its ends, 0.2 and 1.0 mW/cm².
    [(300.0, 0.2), (900.0, 0.6), (1500.0, 1.0)],
)
def test_public_limit(mhz: float, mw_cm2: float) -> None:
    assert public_limit(1e6 * mhz) == pytest.approx(10.0 * mw_cm2)


@pytest.mark.parametrize("mhz", [30.0, 299.9, 1500.1, 5800.0])
def test_no_limit_is_made_up(mhz: float) -> None:
    assert np.isnan(public_limit(1e6 * mhz))


def test_distance() -> None:
    # 1 kW EIRP and 6 W/m²: R = √(1000/(4π·6)) = 3.642 m; four times the power, twice as far.
    assert distance(100.0, 10.0, 6.0) == pytest.approx(3.642, abs=1e-3)
    assert distance(400.0, 10.0, 6.0) == pytest.approx(2.0 * distance(100.0, 10.0, 6.0))


def test_far_field() -> None:
    # One metre at a wavelength of one metre: 2 m.
    assert far_field_from(1.0, 299_792_458.0) == pytest.approx(2.0)
