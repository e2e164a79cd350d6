"""Patterns and curves of a report are what the models say, to the last digit kept."""

import json
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from models import evaluate, radiate
from models.conventions import decibels
from optim.faults import SpecError
from optim.outcome import FILE as FOUND
from optim.outcome import read_outcome
from optim.report_data import FILE, compute, is_current, read_data, shown_points, write_data
from optim.requirements import Band
from optim.result import Result
from tests.report_runs import changed, finished


@pytest.fixture(scope="module")
def result(tmp_path_factory: pytest.TempPathFactory) -> Result:
    return read_outcome(finished(tmp_path_factory.mktemp("met")))[0]


def test_cuts_are_the_models(result: Result) -> None:
    content = compute(result)
    reflectors = result.space.reflectors(result.found.front.designs)
    middle = result.requirements.band.middle_hz
    assert content["centre_mhz"] == pytest.approx(middle / 1e6)
    pattern = radiate(reflectors, middle, model="image")
    level = decibels(np.abs(pattern.h_field[:, 0]) ** 2 / np.abs(pattern.h_field[:, 0, :1]) ** 2)
    kept = np.array(content["h_tenths_db"], dtype=np.float64) / 10.0
    seen = np.isfinite(kept) & (level > -60.0)
    assert seen.sum() > 50
    assert kept[seen] == pytest.approx(level[seen], abs=0.051)


def test_curves_are_the_models(result: Result) -> None:
    content = compute(result)
    frequencies = 1e6 * np.array(content["mhz"])
    reflectors = result.space.reflectors(result.found.front.designs)
    figures = evaluate(reflectors, frequencies, model="image")
    assert np.array(content["band"]["directivity_dbi"]) == pytest.approx(
        figures.directivity_dbi, abs=0.0051
    )


def test_scout_is_asked_where_another_model_proved(result: Result) -> None:
    assert compute(result)["scout"] == {}
    asked = result.requirements
    proven = replace(
        result,
        requirements=replace(asked, run=replace(asked.run, scout="ray", prove="image")),
    )
    content = compute(proven)
    assert len(content["scout"]["gain_dbi"]) == len(result.found.front)


@pytest.mark.parametrize(
    ("band", "megahertz"),
    [
        (Band(4e8, 4e8, 1), [400.0]),
        (Band(4e8, 5e8, 2), [400.0, 450.0, 500.0]),
        (Band(4e8, 5e8, 21), [400.0, 425.0, 450.0, 475.0, 500.0]),
    ],
)
def test_points_reach_from_edge_to_edge(band: Band, megahertz: list[float]) -> None:
    assert (shown_points(band) / 1e6).tolist() == pytest.approx(megahertz)


@pytest.fixture
def kept(tmp_path: Path, result: Result) -> tuple[Path, int]:
    """A folder with numbers in it, and how many designs they are of."""
    (tmp_path / FOUND).write_text("{}")
    write_data(tmp_path, compute(result))
    return tmp_path, len(result.found.front)


@pytest.mark.parametrize("text", ["", "[1]", "{", "{}", "[" * 100_000, "\0"])
def test_damaged_files_are_told(tmp_path: Path, text: str) -> None:
    (tmp_path / FOUND).write_text("{}")
    with pytest.raises(SpecError, match="no file"):
        read_data(tmp_path, 1)
    (tmp_path / FILE).write_text(text)
    with pytest.raises(SpecError, match="damaged"):
        read_data(tmp_path, 1)


@pytest.mark.parametrize(
    ("path", "value"),
    [
        (("mhz",), ...),
        (("mhz",), []),
        (("mhz", 0), None),
        (("centre_mhz",), "430"),
        (("h_tenths_db",), {}),
        (("h_tenths_db", 0), ...),
        (("e_tenths_db", 0, 90), ...),
        (("e_tenths_db", 0, 3), "x"),
        (("band",), {}),
        (("band",), 3),
        (("band", "gain_dbi", 0), [1.0]),
        (("band", "vswr", 0, 0), True),
        (("band", "gain_dbi", 0, 0), float("nan")),
        (("band", "gain_dbi", 0, 0), 10**400),
        (("scout",), [1]),
        (("scout",), {"gain_dbi": [1.0]}),
    ],
)
def test_hand_edited_files_are_told(
    kept: tuple[Path, int], path: tuple[str | int, ...], value: object
) -> None:
    folder, designs = kept
    assert is_current(folder, designs)
    assert not is_current(folder, designs + 1)
    content = changed(json.loads((folder / FILE).read_text()), path, value)
    (folder / FILE).write_text(json.dumps(content))
    assert not is_current(folder, designs)
    with pytest.raises(SpecError, match="a damaged file"):
        read_data(folder, designs)


def test_numbers_of_other_designs_are_refused(kept: tuple[Path, int]) -> None:
    folder, designs = kept
    (folder / FOUND).write_text('{"format": 1}')
    assert not is_current(folder, designs)
    with pytest.raises(SpecError, match="other designs"):
        read_data(folder, designs)


def test_file_holds_no_number_that_json_has_not(result: Result) -> None:
    text = json.dumps(compute(result), allow_nan=False)
    assert "NaN" not in text
