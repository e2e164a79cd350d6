"""Yields against closed forms of uniform deviations, plain counting, and a reference interval."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
from scipy.stats import binomtest

from models.conventions import FloatArray
from optim.evaluate import Evaluator
from optim.journal import Header, Journal
from optim.requirements import read_requirements
from optim.space import DesignSpace
from optim.tolerance import STAGE, Builds, columns, wilson

DESIGN = np.array([[np.pi / 2.0, 0.35, 0.7, 0.7, 0.33]])


def spec(*, require: str = "resistance_ohm = { min = 0 }", size: str = "", tolerance: str) -> str:
    return f"""
[band]
low_mhz = 420
high_mhz = 440
points = 2
[require]
{require}
[size]
{size}
[tolerance]
{tolerance}
[run]
scout = "image"
prove = "none"
"""


def builds(folder: Path, text: str, journal: Journal | None = None) -> Builds:
    path = folder / "spec.toml"
    path.write_text(text, encoding="utf-8")
    requirements = read_requirements(path)
    space = DesignSpace.from_requirements(requirements)
    return Builds(requirements, space, Evaluator(requirements, "image"), journal)


def test_one_length_under_a_cap(tmp_path: Path) -> None:
    # Uniform over 690 to 710 mm, at most 705: three quarters.
    text = spec(size="height_mm = { max = 705 }", tolerance="plate_length_mm = 10")
    spread = builds(tmp_path, text).spreads(DESIGN)[0]
    assert spread.expected == pytest.approx(0.75, abs=0.002)
    assert spread.low <= 0.75 <= spread.high
    assert spread.high - spread.low < 0.01
    assert spread.method == "fit"


def test_two_lengths_under_two_caps(tmp_path: Path) -> None:
    # Width 2 w sin 45°: at most √2 · 702 mm lets 60 % of w pass; independent of the height's half.
    size = f"height_mm = {{ max = 700 }}\nwidth_mm = {{ max = {702.0 * np.sqrt(2.0)} }}"
    text = spec(size=size, tolerance="plate_length_mm = 10\nplate_width_mm = 10")
    spread = builds(tmp_path, text).spreads(DESIGN)[0]
    assert spread.expected == pytest.approx(0.3, abs=0.004)
    assert spread.low <= 0.3 <= spread.high
    exact = {name: influence.yield_if_exact for name, influence in spread.influences.items()}
    assert exact["plate_length"] == pytest.approx(0.6, abs=0.004)
    assert exact["plate_width"] == pytest.approx(0.5, abs=0.004)


def test_product_of_two_deviations(tmp_path: Path) -> None:
    # x y at most 1 with x and y uniform on 1 ± a: the share of y that passes, averaged over x.
    a = 0.01 / 0.7
    x = 1.0 + a * (2.0 * (np.arange(200_000) + 0.5) / 200_000 - 1.0)
    true = float(np.mean(np.clip((1.0 / x - 1.0 + a) / (2.0 * a), 0.0, 1.0)))
    size = f"frontal_area_m2 = {{ max = {0.49 * np.sqrt(2.0)} }}"
    text = spec(size=size, tolerance="plate_length_mm = 10\nplate_width_mm = 10")
    spread = builds(tmp_path, text).spreads(DESIGN)[0]
    assert spread.expected == pytest.approx(true, abs=0.004)
    assert spread.low <= true <= spread.high


def test_against_plain_counting(tmp_path: Path) -> None:
    tolerance = "spacing_mm = 8\ndipole_length_mm = 4"
    study = builds(tmp_path, spec(require="gain_dbi = { min = 11.742 }", tolerance=tolerance))
    spread = study.spreads(DESIGN)[0]
    deviations = np.random.default_rng(2).uniform(-1.0, 1.0, (2_000, 2))
    met = (study.misses(study.built(DESIGN[0], deviations)) <= 0.0).all(axis=(1, 2))
    low, high = wilson(float(met.mean()), met.size)
    assert 0.05 < met.mean() < 0.95
    assert spread.low <= high
    assert spread.high >= low
    assert spread.high - spread.low < 0.05
    assert spread.matters_most == "spacing"


def test_what_the_model_does_not_vouch_for_is_counted_as_lost(tmp_path: Path) -> None:
    # Image sources stand for 180°/n only: every other apex angle fails.
    text = spec(require="gain_dbi = { min = 5 }", tolerance="apex_angle_deg = 1")
    spread = builds(tmp_path, text).spreads(DESIGN)[0]
    assert spread.method == "count"
    assert spread.expected == 0.0
    assert 0.0 < spread.high < 0.2


def test_flat_sheet_stays_flat_or_bends_forward(tmp_path: Path) -> None:
    study = builds(tmp_path, spec(tolerance="apex_angle_deg = 2\nspacing_mm = 5"))
    built = study.built(np.array([np.pi, 0.2, 0.7, 0.7, 0.33]), np.array([[1.0, 1.0], [-1.0, 0.0]]))
    assert built[0, 0] == np.pi
    assert built[1, 0] == pytest.approx(np.radians(178.0))
    assert built[0, 1] == pytest.approx(0.205)


def test_journal_gives_the_same_spread_without_a_solve(tmp_path: Path) -> None:
    text = spec(require="gain_dbi = { min = 11.742 }", tolerance="spacing_mm = 8")
    requirements = builds(tmp_path, text)._rules.requirements
    header = Header(
        seed=1,
        spec_sha256="",
        scout="image",
        prove="none",
        versions={},
        columns={STAGE: columns(requirements)},
    )
    with Journal(tmp_path / "journal.jsonl", header, resume=False) as journal:
        first = builds(tmp_path, text, journal).spreads(DESIGN)[0]
    with Journal(tmp_path / "journal.jsonl", header, resume=True) as journal:
        study = builds(tmp_path, text, journal)
        study.misses = _refuse  # type: ignore[method-assign]
        again = study.spreads(DESIGN)[0]
    assert (again.low, again.expected, again.high) == (first.low, first.expected, first.high)
    assert 0.0 < first.expected < 1.0
    assert len(columns(requirements)) == 2 * (len(requirements.limits) + 2)


def _refuse(designs: FloatArray) -> FloatArray:
    msg = "evaluated though the journal has it"
    raise AssertionError(msg)


@pytest.mark.parametrize(("met", "count"), [(0, 64), (8, 10), (60, 64), (64, 64)])
def test_wilson_interval(met: int, count: int) -> None:
    # SciPy's own, an independent implementation.
    reference = binomtest(met, count).proportion_ci(0.95, method="wilson")
    assert wilson(met / count, count) == pytest.approx((reference.low, reference.high), abs=1e-12)
