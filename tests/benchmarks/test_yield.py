"""Yield against plain Monte Carlo: 20,000 antennas of a design, each solved by the full-wave model.

Run by name: pytest tests/benchmarks/test_yield.py -s (some minutes).
"""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
from joblib import cpu_count

from models import Reflectors, Terms, evaluate
from optim.evaluate import Evaluator
from optim.requirements import read_requirements
from optim.space import DesignSpace
from optim.tolerance import Builds, Spread, wilson

MODEL = "moment"
BUILT = 20_000

DESIGN = {
    "apex_angle": np.radians(90.0),
    "spacing": 0.172,
    "plate_width": 0.35,
    "plate_length": 0.4,
    "dipole_length": 0.15,
    "dipole_diameter": 0.003,
}
SPEC = """
title = "A design near its limits"
[band]
low_mhz = 863
high_mhz = 870
points = 2
[require]
gain_dbi = {{ min = {gain} }}
front_to_back_db = {{ min = {ratio} }}
vswr = {{ max = {vswr}, reference_ohm = 75 }}
[size]
width_mm = {{ max = {width} }}
[build]
dipole_diameter_mm = 3
[tolerance]
apex_angle_deg = 1
spacing_mm = 2
plate_width_mm = 2
plate_length_mm = 2
dipole_length_mm = 1
[run]
seed = 3
"""
ROOM = {
    "gain": (0.02, 3.0, 1.0, 50.0),
    "front-to-back ratio": (1.0, 0.15, 1.0, 50.0),
    "match": (1.0, 3.0, 0.05, 50.0),
    "everything at once": (0.03, 0.3, 0.1, 1.0),
}
"""How far the design is inside its limits: dB, dB, VSWR, mm."""


@pytest.mark.parametrize("name", ROOM)
def test_yield_is_that_of_plain_monte_carlo(tmp_path: Path, name: str) -> None:
    reflectors = Reflectors(**DESIGN)
    figures = evaluate(reflectors, [863e6, 870e6], model=MODEL, terms=Terms(reference_ohm=75.0))
    gain, ratio, match, width = ROOM[name]
    path = tmp_path / "spec.toml"
    text = SPEC.format(
        gain=figures.gain_dbi.min() - gain,
        ratio=figures.front_to_back_db.min() - ratio,
        vswr=figures.vswr.max() + match,
        width=1000.0 * reflectors.width[0] + width,
    )
    path.write_text(text, encoding="utf-8")
    requirements = read_requirements(path)
    space = DesignSpace.from_requirements(requirements)
    design = space.rows(reflectors)
    with Evaluator(requirements, MODEL, cpu_count()) as evaluator:
        builds = Builds(requirements, space, evaluator)
        spread = builds.spreads(design)[0]
        deviations = np.random.default_rng(11).uniform(-1.0, 1.0, (BUILT, 5))
        met = (builds.misses(builds.built(design[0], deviations)) <= 0.0).all(axis=(1, 2))
    plain, interval = float(met.mean()), wilson(float(met.mean()), BUILT)
    print(f"\n{name}: {_shown(spread)}; plain {plain:.4f} ({interval[0]:.4f} to {interval[1]:.4f})")  # noqa: T201
    assert 0.02 < plain < 0.98
    # Two intervals of 95 %, each right by itself, overlap.
    assert spread.low <= interval[1]
    assert interval[0] <= spread.high
    assert spread.samples < BUILT / 100


def _shown(spread: Spread) -> str:
    share = f"yield {spread.expected:.4f} ({spread.low:.4f} to {spread.high:.4f})"
    return f"{share} by {spread.method} of {spread.samples}, mostly {spread.matters_most}"
