"""The search as a whole: same seed, same bytes; interrupted or not, one worker or two."""

import json
import signal
import subprocess
import sys
import time
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from models import evaluate
from optim.refine import apart
from optim.run import JOURNAL, Options, run
from optim.search import handed_over, scouted
from optim.space import DesignSpace
from tests.search_specs import EASY, judging, read, write

START = "from optim.cli import main; raise SystemExit(main())"
LONGER = EASY.replace("generations = 8", "generations = 30")


def searched(spec: Path, out: Path, *, jobs: int = 1, resume: bool = False) -> bytes:
    run(spec, Options(out=out, jobs=jobs, resume=resume, quiet=True))
    return (out / "front.csv").read_bytes()


@pytest.fixture(scope="module")
def whole(tmp_path_factory: pytest.TempPathFactory) -> Path:
    folder = tmp_path_factory.mktemp("whole")
    searched(write(folder), folder / "run")
    return folder


def test_one_worker_is_two_workers(whole: Path) -> None:
    front = searched(whole / "spec.toml", whole / "two", jobs=2)
    assert front == (whole / "run" / "front.csv").read_bytes()
    assert (whole / "two" / JOURNAL).read_bytes() == (whole / "run" / JOURNAL).read_bytes()


def test_another_seed_is_another_search(whole: Path) -> None:
    run(whole / "spec.toml", Options(out=whole / "other", jobs=1, seed=99, quiet=True))
    assert (whole / "other" / JOURNAL).read_bytes() != (whole / "run" / JOURNAL).read_bytes()


@given(data=st.data())
@settings(derandomize=True, max_examples=6, deadline=None)
def test_cut_anywhere_and_resumed_is_the_same_run(whole: Path, data: st.DataObject) -> None:
    journal = (whole / "run" / JOURNAL).read_bytes()
    cut = data.draw(st.integers(0, len(journal)))
    (whole / "cut").mkdir(exist_ok=True)
    (whole / "cut" / JOURNAL).write_bytes(journal[:cut])
    front = searched(whole / "spec.toml", whole / "cut", resume=True)
    assert front == (whole / "run" / "front.csv").read_bytes()
    assert (whole / "cut" / JOURNAL).read_bytes() == journal


@pytest.fixture(scope="module")
def longer(tmp_path_factory: pytest.TempPathFactory) -> bytes:
    folder = tmp_path_factory.mktemp("longer")
    return searched(write(folder, LONGER), folder / "run")


@pytest.mark.parametrize("sign", [signal.SIGKILL, signal.SIGINT])
def test_killed_and_resumed_is_the_same_run(
    tmp_path: Path, longer: bytes, sign: signal.Signals
) -> None:
    spec = write(tmp_path, LONGER)
    command = [sys.executable, "-c", START, "search", str(spec), "--jobs", "1", "--out"]
    journal = tmp_path / "killed" / JOURNAL
    with subprocess.Popen(
        [*command, str(tmp_path / "killed")],
        cwd=Path(__file__).parents[1],
        stderr=subprocess.PIPE,
        text=True,
    ) as process:
        end = time.monotonic() + 60.0
        while time.monotonic() < end and process.poll() is None:
            if journal.exists() and journal.read_bytes().count(b"\n") >= 4:
                break
            time.sleep(0.002)
        process.send_signal(sign)
        _, told = process.communicate(timeout=60)
    left = journal.read_bytes()
    front = searched(spec, tmp_path / "killed", resume=True)
    assert journal.read_bytes().startswith(left[: left.rfind(b"\n") + 1])
    assert left.count(b"\n") < journal.read_bytes().count(b"\n")
    assert front == longer
    if sign == signal.SIGINT:
        assert process.returncode == 130
        assert "--resume" in told
        assert "Traceback" not in told


def test_front_rows_hold_on_the_fine_grid(whole: Path) -> None:
    requirements = read(whole)
    space = DesignSpace.from_requirements(requirements)
    found = run(whole / "spec.toml", Options(out=whole / "fine", jobs=1, quiet=True)).found
    frequencies = np.linspace(420e6, 440e6, 5)
    figures = evaluate(space.reflectors(found.front.designs), frequencies, model="image")
    assert len(found.front) >= 2
    assert figures.gain_dbi.min() >= 11.0
    assert figures.beamwidth_h_deg.max() <= 60.0
    assert figures.resistance_ohm.min() >= 10.0
    np.testing.assert_allclose(-found.front.objectives[:, 2], figures.gain_dbi.min(axis=1))


def test_designs_are_judged_once_and_on_steps(whole: Path) -> None:
    lines = (whole / "run" / JOURNAL).read_text().splitlines()[1:]
    scouted = np.array(
        [
            row
            for line in map(json.loads, lines)
            if line["stage"] == "scout"
            for row in line["designs"]
        ]
    )
    assert len(np.unique(scouted, axis=0)) == len(scouted) >= 200
    steps = scouted[:, 1:] / 5e-3
    np.testing.assert_allclose(steps, np.round(steps), atol=1e-9)
    assert set(np.degrees(scouted[:, 0]).round(9)) == {60.0, 90.0}


@pytest.mark.parametrize(("model", "left"), [("ray", False), ("modal", True)])
def test_match_is_left_to_the_prover_by_a_scout_without(
    tmp_path: Path, model: str, left: bool
) -> None:
    # Figures of a match: VSWR, realized gain, reactance (IEEE Std 145 puts mismatch in the second).
    study = Path(__file__).parents[1] / "studies" / "matched_relay_450.toml"
    requirements = read(tmp_path, study.read_text(encoding="utf-8"))
    space = DesignSpace.from_requirements(requirements)
    asked = scouted(requirements, space, model)
    figures = {limit.figure for limit in asked.limits}
    assert "front_to_back_db" in figures
    assert ({"vswr", "realized_gain_dbi"} & figures == set()) is left
    assert ("gain" if left else "realized_gain") in {goal.name for goal in asked.goals}


@pytest.mark.parametrize("count", [10, 40])
def test_the_prover_gets_the_best_of_each_region_too(tmp_path: Path, count: int) -> None:
    with judging(tmp_path) as scouting:
        space = scouting.space
        shares = np.random.default_rng(3).random((300, 5))
        scouting.judge(space.snap(space.low + shares * (space.high - space.low)))
        given = handed_over(scouting, count)
        known = scouting.archive.all
        assert count < len(given) <= count + 48
        assert set(map(bytes, given)) <= set(map(bytes, known.designs))
        cost = known.objectives[:, 0] / scouting.archive.front.objectives[:, 0].min()
        best = known.designs[(cost + known.total_violation).argmin()]
        assert (given == best).all(axis=1).any()
        assert len(apart(given, space, 16)) == 16
