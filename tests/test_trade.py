"""Trade studies from end to end, on the image model."""

from __future__ import annotations

import csv
import json
from pathlib import Path

import numpy as np
import pytest

from optim.cli import main
from optim.requirements import Goal, read_requirements
from optim.trade import Options, known_designs, trade
from optim.trade_files import page, write
from tests.search_specs import EASY, IMPOSSIBLE, SMALL
from tests.search_specs import write as write_spec

SPEC = EASY.replace(
    "apex_angle_deg = [60, 90]", "apex_angle_deg = 90\nplate_length_mm = 500"
).replace('"Easy"', '"$5 </title><script>x</script>"')


@pytest.fixture(autouse=True)
def short(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("optim.trade.POINTS", 9)
    monkeypatch.setattr("optim.trade.POPULATION", 16)
    monkeypatch.setattr("optim.trade.GENERATIONS", 3)
    monkeypatch.setattr("optim.trade_prices.POPULATION", 8)
    monkeypatch.setattr("optim.trade_prices.GENERATIONS", 2)


def test_files_and_words(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    spec, out = write_spec(tmp_path, SPEC), tmp_path / "out"
    assert main(["trade", str(spec), "--out", str(out), "--jobs", "1", "--quiet"]) == 0
    printed = capsys.readouterr()
    assert printed.err == ""
    assert (out / "trade.txt").read_text(encoding="utf-8") == printed.out
    # Endless plates give the same figures whatever their size, so the smallest of the range does:
    # 2 · 300 sin 45° by 500 mm.
    assert "Smallest frontal area that meets everything: 0.2121 m²." in printed.out
    assert "No requirement, eased alone by its step, makes it smaller." in printed.out
    assert "Judged by image at 3 frequencies from 420 to 440 MHz" in printed.out
    names = {path.name for path in out.iterdir()}
    maps = {"map_spacing_dipole_length"}
    stems = {"prices", "band"} | maps
    assert names == {"trade.txt"} | {f"{s}.{e}" for s in stems for e in ("png", "csv")}
    with (out / "map_spacing_dipole_length.csv").open(encoding="utf-8") as stream:
        lines = list(csv.DictReader(stream))
    assert len(lines) == 9 * 9
    assert {line["meets"] for line in lines} == {"0", "1"}
    # A model that knows no plate ends has no front-to-back ratio: empty, not a number.
    assert lines[0]["front_to_back_db"] == ""
    with (out / "prices.csv").open(encoding="utf-8") as stream:
        asked = [line for line in csv.DictReader(stream) if line["asked"] == "1"]
    assert len(asked) == 3
    assert len({line["smallest_frontal_area"] for line in asked}) == 1


def test_same_whatever_the_workers(tmp_path: Path) -> None:
    spec = write_spec(tmp_path, SPEC)
    one, two = (trade(spec, Options(jobs=jobs, quiet=True)) for jobs in (1, 2))
    assert page(one) == page(two)
    assert np.array_equal(one.maps[0].violations, two.maps[0].violations)


def test_nothing_meets_the_requirements(tmp_path: Path) -> None:
    found = trade(write_spec(tmp_path, IMPOSSIBLE), Options(jobs=1, quiet=True))
    assert not found.met
    assert next(iter(found.shown)) == "nearest_1"
    text = page(found)
    assert "No design was found that meets everything" in text
    # By looking at every step (test_doors.py) a gain of 11.5 or a beam of 44.4° would be enough.
    assert "With gain_dbi.min eased to 11.2 there is one." in text
    assert "With beamwidth_h_deg.max eased to 50 there is one." in text
    assert "resistance_ohm.min eased" not in text
    assert "Without" not in text
    assert "prices.png" in write(tmp_path / "out", found)


def test_what_costs_most_is_said(tmp_path: Path) -> None:
    # Gap resistance rises with the spacing, and with it the depth of a box of fixed plates.
    spec = SMALL.replace("[size]\ndepth_mm = { max = 230 }\n", "").replace(
        "[run]", '[goals]\nminimise = ["volume"]\nmaximise = ["gain"]\n[run]'
    )
    text = page(trade(write_spec(tmp_path, spec), Options(jobs=1, quiet=True)))
    assert "resistance_ohm.min = 45 costs most: easing it to 35 changes the volume by -" in text
    assert "No requirement" not in text


def test_starts_from_a_finished_search_of_the_same_file(tmp_path: Path) -> None:
    spec = write_spec(tmp_path, SPEC.replace("generations = 8", "generations = 2"))
    asked = read_requirements(spec)
    assert known_designs(tmp_path, asked).shape == (0, 5)
    run = ["search", str(spec), "--out", str(tmp_path / "run"), "--jobs", "1", "--quiet"]
    assert main(run) == 0
    front = known_designs(tmp_path / "run", asked)
    assert len(front) > 1
    assert front[0, 0] == pytest.approx(np.pi / 2.0)
    summary = json.loads((tmp_path / "run/summary.json").read_text(encoding="utf-8"))
    summary["spec_sha256"] = "other"
    (tmp_path / "run/summary.json").write_text(json.dumps(summary), encoding="utf-8")
    assert len(known_designs(tmp_path / "run", asked)) == 0


def test_a_folder_that_cannot_be_written_is_told_before_the_work(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr("optim.trade.evolve", lambda *_, **__: pytest.fail("worked for nothing"))
    monkeypatch.setattr("os.access", lambda path, _mode: Path(path) != tmp_path / "out")
    spec = write_spec(tmp_path, SPEC)
    (tmp_path / "file").touch()
    for out, words in (("out", "Permission denied"), ("file", "File exists")):
        assert main(["trade", str(spec), "--out", str(tmp_path / out)]) == 2
        assert capsys.readouterr().err == f"{tmp_path / out}: {words}\n"


def test_size_comes_first_and_a_model_must_be_able(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    text = SPEC.replace('minimise = ["frontal_area", "beamwidth_h"]', "")
    found = trade(write_spec(tmp_path, text), Options(jobs=1, quiet=True))
    assert found.size == Goal("frontal_area", "min")
    match = write_spec(tmp_path, SPEC.replace("[search]", "[require.vswr]\nmax = 2\n[search]"))
    assert main(["trade", str(match), "--model", "image", "--out", str(tmp_path / "x")]) == 2
    assert "vswr" in capsys.readouterr().err
    assert not (tmp_path / "x").exists()
