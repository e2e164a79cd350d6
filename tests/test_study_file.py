"""Study files: which runs they make, and everything wrong with them in one error."""

from __future__ import annotations

import tomllib
from pathlib import Path

import pytest

from optim.faults import SpecError
from optim.study_file import Study, read_study
from tests.search_specs import EASY, write


def read(folder: Path, text: str, spec: str = EASY) -> Study:
    write(folder, spec)
    path = folder / "study.toml"
    path.write_text(text, encoding="utf-8")
    return read_study(path)


def faults(folder: Path, text: str, spec: str = EASY) -> list[str]:
    with pytest.raises(SpecError) as told:
        read(folder, text, spec)
    return str(told.value).splitlines()


FULL = """
title = "All there is"
spec = "spec.toml"
repeats = 2
[set]
run.population = 8
require.front_to_back_db = { min = 5 }
[grid]
require.gain_dbi.min = [10, 11.5]
"size.depth_mm.max" = [400, 500, 600]
[[case]]
name = "low"
band.low_mhz = 420
band.high_mhz = 425
[[case]]
band.low_mhz = 425
band.high_mhz = 440
"""


def test_runs_are_every_case_by_every_value_by_every_repeat(tmp_path: Path) -> None:
    study = read(tmp_path, FULL)
    assert len(study.runs) == 2 * 2 * 3 * 2
    assert [run.number for run in study.runs] == list(range(1, 25))
    assert [factor.name for factor in study.factors] == [
        "case", "require.gain_dbi.min", "size.depth_mm.max",
    ]  # fmt: skip
    assert study.factors[0].words == ("low", "band.low_mhz = 425, band.high_mhz = 440")
    assert len({study.text(run) for run in study.runs}) == 24
    last = tomllib.loads(study.text(study.runs[-1]))
    assert last["band"] == {"low_mhz": 425, "high_mhz": 440, "points": 3}
    assert last["require"]["gain_dbi"] == {"min": 11.5}
    assert last["require"]["front_to_back_db"] == {"min": 5}
    assert last["size"] == {"depth_mm": {"max": 600}}
    assert last["run"] == tomllib.loads(EASY)["run"] | {"population": 8, "seed": 2}
    assert study.words(study.runs[2]) == {
        "case": "low",
        "require.gain_dbi.min": "10",
        "size.depth_mm.max": "500",
        "repeat": "1",
    }


def test_the_spec_itself_is_left_as_it_is(tmp_path: Path) -> None:
    study = read(tmp_path, FULL)
    texts = [study.text(run) for run in study.runs]
    assert [study.text(run) for run in study.runs] == texts
    assert study.base == tomllib.loads(EASY)


def test_repeats_count_on_from_the_seed(tmp_path: Path) -> None:
    text = 'spec = "spec.toml"\nrepeats = 3\n[set]\nrun.seed = 41'
    study = read(tmp_path, text)
    seeds = [tomllib.loads(study.text(run))["run"]["seed"] for run in study.runs]
    assert seeds == [41, 42, 43]
    assert study.title == "study"


def test_every_fault_is_told_at_once(tmp_path: Path) -> None:
    told = faults(
        tmp_path,
        """
        titel = "slip"
        repeats = 2
        [set]
        run.population = 8
        [grid]
        require.gain_dbi.mn = [1]
        size.width_mm.max = 500
        run.seed = [1, 2]
        size.height_mm.max = [500, 500]
        run.generations = []
        [[case]]
        run.population = 9
        [[case]]
        name = 5
        """,
    )
    name = tmp_path / "study.toml"
    expected = [
        f"{name}: titel: 'slip' given, allowed: no such key; did you mean title?; one of title, ",
        f"{name}: spec: nothing given, allowed: the name of a requirements file",
        f"{name}: grid.require.gain_dbi.mn: an unknown key given, allowed: did you mean min?; one",
        f"{name}: grid.size.width_mm.max: 500 given, allowed: a list of at least one value",
        f"{name}: grid.size.height_mm.max[1]: 500 given, allowed: each value once",
        f"{name}: grid.run.generations: [] given, allowed: a list of at least one value",
        f"{name}: case[1].name: 5 given, allowed: text on one line",
        f"{name}: case[1]: no key given, allowed: at least one key",
        f"{name}: case[0].run.population: a key changed twice given, allowed: each key in one",
        f"{name}: grid.run.seed: seeds given, allowed: left out, as repeats goes through",
    ]
    assert len(told) == len(expected)
    for line, start in zip(told, expected, strict=True):
        assert line.startswith(start)


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ('spec = "none.toml"\nrepeats = 2', "none.toml: no file given"),
        ('spec = "spec.toml"', "grid: nothing to vary given"),
        ("spec = 5\nrepeats = 2", "spec: 5 given, allowed: the name of a requirements file"),
        ('spec = "spec.toml"\nrepeats = 0', "repeats: 0 given, allowed: a whole number from 1"),
        ('spec = "spec.toml"\ngrid = 3', "grid: 3 given, allowed: a table of keys"),
        ('spec = "spec.toml"\ncase = [3]', "case: [3] given, allowed: tables, each [[case]]"),
        ('spec = "spec.toml"\n[grid]\nband.x.y = [1]', "grid.band.x.y: an unknown key given"),
        ('spec = "spec.toml"\n[grid]\nband.points.y = [1]', "allowed: no key below it"),
        (
            'spec = "spec.toml"\n[grid]\nrequire.gain_dbi = [{ min = 1 }]\n'
            "[set]\nrequire.gain_dbi.min = 3",
            "a key changed twice",
        ),
        (
            'spec = "spec.toml"\nrepeats = 1000\n[grid]\nbuild.length_step_mm = '
            f"{list(range(1, 12))}",
            "11000 runs given, allowed: at most 10000 runs",
        ),
        ('spec = "spec.toml"\n[[case]]\nrun.seed = 1\n[[case]]\nrun.seed = 1', "each name once"),
    ],
)
def test_what_is_refused(tmp_path: Path, text: str, words: str) -> None:
    assert any(words in line for line in faults(tmp_path, text))


def test_what_is_wrong_in_every_run_is_wrong_with_the_study(tmp_path: Path) -> None:
    text = 'spec = "spec.toml"\n[grid]\nrequire.gain_dbi.min = [10, "much"]'
    told = faults(tmp_path, text, EASY.replace("points = 3", "points = 0"))
    assert told == [
        f"{tmp_path / 'spec.toml'}: band.points: 0 given, allowed: a whole number from 1 to 201"
    ]


def test_what_is_wrong_in_one_run_is_no_fault_of_the_study(tmp_path: Path) -> None:
    text = 'spec = "spec.toml"\n[grid]\nrequire.gain_dbi.min = ["much", 10]'
    assert len(read(tmp_path, text).runs) == 2


def test_a_spec_may_need_what_is_varied(tmp_path: Path) -> None:
    """The band is in the cases only."""
    spec = EASY.replace("low_mhz = 420", "").replace("high_mhz = 440", "")
    text = 'spec = "spec.toml"\n[[case]]\nband = { low_mhz = 420, high_mhz = 440, points = 3 }'
    # An inline table is the same as its keys.
    study = read(tmp_path, text, spec)
    assert tomllib.loads(study.text(study.runs[0]))["band"]["high_mhz"] == 440
