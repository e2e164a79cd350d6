"""Searches that ask for yield, on the image model: what is bred, what decides, what is refused."""

from __future__ import annotations

import json
from pathlib import Path

import numpy as np
import pytest

from optim.recommend import front_rows
from optim.requirements import read_requirements
from optim.robust import bred, tolerated
from optim.run import Options, run
from tests.search_specs import SMALL, write

LOOSE = SMALL.replace("resistance_ohm = { min = 45 }", "resistance_ohm = { min = 30 }")


def asking(lines: str, goals: str = "") -> str:
    return f"{LOOSE}\n[tolerance]\nspacing_mm = 4\ndipole_length_mm = 3\n{lines}\n[goals]\n{goals}"


def test_a_least_yield_is_bred_for(tmp_path: Path) -> None:
    goals = 'minimise = ["volume"]'
    plain = read_requirements(write(tmp_path, asking("", goals)))
    assert tolerated(plain)
    assert bred(plain) is plain
    least = read_requirements(write(tmp_path, asking("min_yield = 0.9", goals)))
    assert [goal.name for goal in bred(least).goals] == ["volume", "yield"]
    assert not tolerated(read_requirements(write(tmp_path, LOOSE)))


def test_recommended_designs_say_what_tolerances_do(tmp_path: Path) -> None:
    spec = write(tmp_path, asking("", 'maximise = ["gain"]'))
    result = run(spec, Options(out=tmp_path / "run", jobs=1, quiet=True))
    summary = json.loads((tmp_path / "run/summary.json").read_text(encoding="utf-8"))
    entry = summary["recommended"][0]["tolerance"]
    assert 0.0 <= entry["yield_low"] <= entry["yield"] <= entry["yield_high"] <= 1.0
    assert next(iter(entry["dimensions"])) == entry["matters_most"]
    assert entry["dimensions"]["spacing_mm"]["plus_minus"] == 4.0
    assert "spacing_mm exact" in result.text()
    assert "deviations uniform in ±" in result.text()


def test_least_yield_holds_on_the_front_whatever_the_workers(tmp_path: Path) -> None:
    spec = write(tmp_path, asking("min_yield = 0.9", 'minimise = ["volume"]\nmaximise = ["gain"]'))
    one = run(spec, Options(out=tmp_path / "one", jobs=1, quiet=True))
    two = run(spec, Options(out=tmp_path / "two", jobs=2, quiet=True))
    assert (tmp_path / "one/front.csv").read_bytes() == (tmp_path / "two/front.csv").read_bytes()
    assert np.array_equal(one.found.front.numbers(), two.found.front.numbers(), equal_nan=True)
    front = one.found.front
    assert len(front)
    assert front.objectives.shape[1] == 2
    assert [s.expected >= 0.9 for s in one.found.spreads.values()] == [True] * len(
        one.found.spreads
    )
    # Without the condition the search goes closer to the limits.
    free = run(
        write(tmp_path, asking("", 'minimise = ["volume"]\nmaximise = ["gain"]')),
        Options(out=tmp_path / "free", jobs=1, quiet=True),
    )
    assert free.found.front.smallest_margin.min() < front.smallest_margin.min()


def test_cut_off_amid_the_yields_and_resumed_ends_the_same(tmp_path: Path) -> None:
    spec = write(tmp_path, asking("min_yield = 0.5", 'maximise = ["gain"]'))
    whole, cut = tmp_path / "whole", tmp_path / "cut"
    run(spec, Options(out=whole, jobs=1, quiet=True))
    lines = (whole / "journal.jsonl").read_text(encoding="utf-8").splitlines(keepends=True)
    assert json.loads(lines[-1])["stage"] == "yield"
    cut.mkdir()
    torn = "".join(lines[:-1]) + lines[-1][:100]
    (cut / "journal.jsonl").write_text(torn, encoding="utf-8")
    run(spec, Options(out=cut, jobs=1, quiet=True, resume=True))
    for name in ("journal.jsonl", "front.csv"):
        assert (cut / name).read_bytes() == (whole / name).read_bytes()


def test_yield_as_a_goal_is_a_share(tmp_path: Path) -> None:
    spec = write(tmp_path, asking("", 'maximise = ["gain", "yield"]'))
    found = run(spec, Options(out=tmp_path / "run", jobs=1, quiet=True)).found
    yields = -found.front.objectives[:, 1]
    assert np.all((yields >= 0.0) & (yields <= 1.0))
    assert np.ptp(yields) > 0.1
    assert len(front_rows(found.front)) == len(found.front)
    for key, spread in found.spreads.items():
        row = found.front.keys.index(key)
        assert yields[row] == spread.expected


def test_yield_out_of_reach_is_not_met_and_says_so(tmp_path: Path) -> None:
    # The only spacing left meets the depth with 0.5 mm to spare: ± 4 mm is more.
    text = asking("min_yield = 0.9", 'maximise = ["gain"]').replace(
        "apex_angle_deg = 90", "apex_angle_deg = 90\nspacing_mm = [225, 228]"
    )
    result = run(write(tmp_path, text), Options(out=tmp_path / "run", jobs=1, quiet=True))
    assert not result.met
    summary = json.loads((tmp_path / "run/summary.json").read_text(encoding="utf-8"))
    assert "min_yield" in summary["binding"]
    relaxed = summary["relaxations"][0]["limits"][0]
    assert relaxed["requirement"] == "min_yield"
    assert 0.0 < relaxed["to"] < 0.9
    assert "Relax min_yield from 0.9" in result.text()
    assert summary["nearest"][0]["tolerance"]["yield"] == pytest.approx(relaxed["to"], abs=2e-3)
