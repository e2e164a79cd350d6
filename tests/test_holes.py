"""A search let loose over the widest ranges finds no holes in the full-wave model.

An optimiser comes back with whatever a model gets wrong. So everything on the front of such a
search is solved again on grids twice as fine, which is another discretisation of the same physics:
the figures have to stand.
"""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from models import moment, moment_case
from models.figures import Figures, figures_of_merit
from optim.archive import diverse
from optim.run import Options, run

LOOSE = """
title = "Let loose"
[band]
low_mhz = 300
high_mhz = 300
points = 1
[require]
gain_dbi = {{ min = 5 }}
resistance_ohm = {{ min = 0 }}
[search]
apex_angle_deg = [20, 180]
spacing_mm = [60, 1100]
plate_width_mm = [200, {longest}]
plate_length_mm = [200, {longest}]
dipole_length_mm = [300, 600]
[build]
length_step_mm = 1
dipole_diameter_mm = 5
[run]
population = {population}
generations = {generations}
scout = "moment"
prove = "none"
"""


def let_loose(
    folder: Path,
    monkeypatch: pytest.MonkeyPatch,
    *,
    population: int,
    generations: int,
    longest: int,
) -> tuple[Figures, Figures]:
    """Return the figures of designs on the front, as the search had them and solved finer."""
    spec = folder / "loose.toml"
    text = LOOSE.format(population=population, generations=generations, longest=longest)
    spec.write_text(text, encoding="utf-8")
    result = run(spec, Options(out=folder / "out", jobs=2, quiet=True))
    front = result.found.front
    front = front[diverse(front.objectives, 24)]
    reflectors = result.space.reflectors(front.designs)
    frequency = result.requirements.band.frequencies()
    build = result.requirements.build
    told = figures_of_merit(moment.radiate(reflectors, frequency, build))
    monkeypatch.setattr(moment_case, "DENSITY", 2.0 * moment_case.DENSITY)
    finer = figures_of_merit(moment.radiate(reflectors, frequency, build))
    return told, finer


def assert_holds(told: Figures, finer: Figures) -> None:
    """Assert that what the search was told stands on the finer grids."""
    assert len(told.gain_dbi) > 10
    assert (told.doubt_db <= moment.VOUCHED_DB).all()
    gain = np.abs(told.gain_dbi - finer.gain_dbi)
    assert gain.max() < 0.1
    ratio = np.abs(told.front_to_back_db - finer.front_to_back_db)
    assert ratio[finer.front_to_back_db < 20.0].max() < 1.5
    assert ratio[finer.front_to_back_db < 30.0].max() < 3.0
    np.testing.assert_allclose(told.resistance_ohm, finer.resistance_ohm, rtol=0.06, atol=1.0)


def test_no_holes(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    assert_holds(*let_loose(tmp_path, monkeypatch, population=40, generations=10, longest=1300))
