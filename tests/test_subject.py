"""What the papers read off a design: limits, sizes and the strongest direction."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from models import Reflectors, radiate
from models.pattern import Pattern
from optim.subject import Subject
from tests.search_specs import read

SPEC = """
title = "Any"
[band]
low_mhz = 300
high_mhz = 310
points = 2
[require]
gain_dbi = { min = 9 }
vswr = { max = 2 }
[size]
width_mm = { max = 800 }
wind_load_n = { max = 1, wind_speed_m_s = 40 }
"""


def _subject(folder: Path) -> Subject:
    requirements = read(folder, SPEC)
    reflectors = Reflectors(
        apex_angle=np.pi / 2.0,
        spacing=0.5,
        plate_width=0.5,
        plate_length=0.8,
        dipole_length=0.47,
        dipole_diameter=0.01,
    )
    frequencies = requirements.band.refined().frequencies()
    pattern = radiate(reflectors, frequencies, model="image", build=requirements.build)
    return Subject(
        requirements=requirements,
        reflectors=reflectors,
        role="most_margin",
        model="image",
        pattern=pattern,
    )


def test_margins_and_what_is_not_known(tmp_path: Path) -> None:
    subject = _subject(tmp_path)
    asked = {limit.label: margin for limit, margin in subject.asked()}
    assert asked["gain_dbi.min"] == pytest.approx(subject.figures.gain_dbi.min() - 9.0)
    # 2 · 500 mm · sin 45° = 707.1 mm under the cap of 800 mm.
    assert asked["width_mm.max"] == pytest.approx(92.893, abs=1e-3)
    # ½ · 1.225 · 40² · 0.7071 · 0.8 m² and a coefficient of 1.17 to 1.20: far off is still told.
    assert -670.0 < asked["wind_load_n.max"] < -647.0
    assert np.isnan(asked["vswr.max"])
    assert subject.sizes()["width"] == pytest.approx(707.107, abs=1e-3)
    assert subject.name == "most margin"


def test_peak_gain_is_that_of_the_strongest_direction(tmp_path: Path) -> None:
    given = _subject(tmp_path)
    # A beam split in the E-plane: twice the field 2 samples off boresight, 6.02 dB more.
    angles = np.radians(np.arange(0.0, 181.0, 2.0))
    h_field = np.ones((1, 3, angles.size), dtype=np.complex128)
    e_field = h_field.copy()
    e_field[0, 1, 2] = 2.0
    one = np.ones((1, 3))
    pattern = Pattern(
        angles=angles,
        h_field=h_field,
        e_field=e_field,
        power=one,
        resistance=one,
        reactance=one,
        efficiency=0.5 * one,
        doubt_db=one,
    )
    split = Subject(
        requirements=given.requirements,
        reflectors=given.reflectors,
        role="x",
        model="image",
        pattern=pattern,
    )
    assert split.peak_gain_dbi == pytest.approx(10.0 * np.log10(4.0 * 0.5))
