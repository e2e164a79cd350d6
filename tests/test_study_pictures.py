"""Pictures of a study show every run where its numbers say."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from optim.study_file import Study, read_study
from optim.study_folder import Outcome
from optim.study_pictures import draw_fronts, draw_smallest, draw_study, label_of
from tests.picture_checks import assert_readable, words_of
from tests.search_specs import write

TEXT = """
title = "Smallest size against gain, three bands"
spec = "spec.toml"
repeats = 2
[grid]
require.gain_dbi.min = [12, 9, 10.5]
build.feed = ["plain", "folded"]
[[case]]
name = "420 to 430 MHz, telemetry"
band.low_mhz = 420
band.high_mhz = 430
[[case]]
name = "430 to 440 MHz, relays in the valley"
band.low_mhz = 430
band.high_mhz = 440
"""


@pytest.fixture
def study(tmp_path: Path) -> Study:
    write(tmp_path)
    (tmp_path / "study.toml").write_text(TEXT)
    return read_study(tmp_path / "study.toml")


def outcome(area: float) -> Outcome:
    row = {"frontal_area_m2": str(area)}
    return Outcome(status="met", smallest=row, curve=[[area, 10.0], [area + 0.1, 12.0]])


@pytest.fixture
def outcomes(study: Study) -> dict[int, Outcome]:
    found = {run.number: outcome(0.1 + 0.001 * run.number) for run in study.runs}
    return found | {1: Outcome(status="not met"), 2: Outcome(status="failed", reason="x")}


def test_points_are_the_runs(study: Study, outcomes: dict[int, Outcome]) -> None:
    factor = study.factors[1]
    assert factor.name == "require.gain_dbi.min"
    figure = draw_smallest(study, outcomes, factor)
    axes = figure.axes[0]
    shown = {
        (float(x), round(float(y), 6))
        for line in axes.lines
        if line.get_linestyle() == "None" and line.get_marker() not in {"x", "1"}
        for x, y in np.column_stack([np.asarray(line.get_xdata()), np.asarray(line.get_ydata())])
    }
    gains = [run.changes[factor.name] for run in study.runs]
    expected = {
        (float(gain), round(0.1 + 0.001 * number, 6))
        for number, gain in enumerate(gains, start=1)
        if number > 2
    }
    assert shown == expected
    crosses = [line for line in axes.lines if line.get_marker() in {"x", "1"}]
    assert [float(np.asarray(line.get_xdata())[0]) for line in crosses] == [12.0, 12.0]
    assert "gain min (dBi)" in [words.text for words in words_of(figure)]


def test_lines_join_the_smallest(study: Study, outcomes: dict[int, Outcome]) -> None:
    lines = [
        line
        for line in draw_smallest(study, outcomes, study.factors[1]).axes[0].lines
        if line.get_linestyle() != "None"
    ]
    assert len(lines) == 2
    for line in lines:
        assert np.asarray(line.get_xdata()).tolist() == [9.0, 10.5, 12.0]
    least = min(
        0.1 + 0.001 * run.number
        for run in study.runs
        if run.levels[0] == 0 and run.changes["require.gain_dbi.min"] == 9
    )
    assert float(np.asarray(lines[0].get_ydata())[0]) == pytest.approx(least)


def test_all_pictures_are_readable(study: Study, outcomes: dict[int, Outcome]) -> None:
    for factor in study.factors:
        assert_readable(draw_smallest(study, outcomes, factor))
    assert_readable(draw_fronts(study, outcomes))


def test_nothing_found_is_still_a_picture(study: Study) -> None:
    nothing = {run.number: Outcome(status="not met") for run in study.runs}
    assert_readable(draw_smallest(study, nothing, study.factors[0]))
    assert "no run meets its requirements" in [
        w.text for w in words_of(draw_fronts(study, nothing))
    ]


def test_a_picture_a_factor_and_the_fronts(
    study: Study, outcomes: dict[int, Outcome], tmp_path: Path
) -> None:
    files = draw_study(tmp_path / "pictures", study, outcomes)
    assert sorted({file.stem for file in files}) == [
        "fronts",
        "smallest_by_build_feed",
        "smallest_by_case",
        "smallest_by_require_gain_dbi_min",
    ]
    assert {file.suffix for file in files} == {".svg", ".png"}
    assert all(file.stat().st_size > 5000 for file in files)


@pytest.mark.parametrize(
    ("name", "label"),
    [
        ("require.gain_dbi.min", "gain min (dBi)"),
        ("size.wind_load_n.wind_speed_m_s", "wind load wind speed (m/s)"),
        ("size.width_mm.max", "width max (mm)"),
        ("build.sheet_density_kg_m3", "sheet density (kg/m³)"),
        ("run.seed", "seed"),
        ("case", "case"),
    ],
)
def test_labels_have_words_and_unit(name: str, label: str) -> None:
    assert label_of(name) == label
