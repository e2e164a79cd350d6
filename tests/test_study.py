"""Studies as a whole: same bytes killed or not; what fails, what stops, what is told meanwhile."""

from __future__ import annotations

import csv
import itertools
import json
import os
import random
import resource
import shutil
import signal
import subprocess
import sys
import time
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

import pytest

from models.geometry import DIMENSIONS
from optim.cli import main
from optim.study import StudyOptions, study
from tests.search_specs import EASY, write

ROOT = Path(__file__).parents[1]
START = "from optim.cli import main; raise SystemExit(main())"
STUDY = """
title = "Gain against depth"
spec = "spec.toml"
[set]
run.generations = 12
[grid]
require.gain_dbi.min = [11, 15, "much"]
size.depth_mm.max = [400, 300]
"""


def written(folder: Path, text: str = STUDY, spec: str = EASY) -> Path:
    write(folder, spec)
    path = folder / "study.toml"
    path.write_text(text, encoding="utf-8")
    return path


def started(path: Path, out: Path, *options: str, jobs: int) -> subprocess.Popen[str]:
    command = ["study", str(path), "--out", str(out), "--jobs", str(jobs), *options]
    return subprocess.Popen(
        [sys.executable, "-c", START, *command],
        cwd=ROOT,
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        text=True,
    )


def batches(out: Path) -> int:
    return sum(path.read_bytes().count(b"\n") for path in out.glob("runs/*/journal.jsonl"))


def everything(out: Path) -> dict[str, bytes]:
    """Return what must not depend on how the study went: all but times."""
    patterns = ("study.csv", "runs/*/front.csv", "runs/*/journal.jsonl", "runs/*/*/*.toml")
    files = itertools.chain.from_iterable(sorted(out.glob(pattern)) for pattern in patterns)
    pictures = sorted((out / "pictures").iterdir())
    return {str(path.relative_to(out)): path.read_bytes() for path in (*files, *pictures)}


@pytest.fixture(scope="module")
def whole(tmp_path_factory: pytest.TempPathFactory) -> Path:
    folder = tmp_path_factory.mktemp("whole")
    result = study(written(folder), StudyOptions(out=folder / "out", jobs=1, quiet=True))
    assert result.failed == 2
    return folder


def test_table_has_a_row_a_run(whole: Path) -> None:
    rows = list(csv.DictReader((whole / "out" / "study.csv").read_text().splitlines()))
    assert [row["run"] for row in rows] == ["1", "2", "3", "4", "5", "6"]
    assert [row["status"] for row in rows] == ["met", "met", "not met", "not met"] + 2 * ["failed"]
    assert [row["require.gain_dbi.min"] for row in rows] == ["11", "11", "15", "15", *2 * ["much"]]
    assert rows[4]["reason"].startswith("require.gain_dbi.min: 'much' given, allowed: a number")
    assert "gain_dbi.min" in rows[2]["reason"]
    assert rows[2]["frontal_area_m2"] == ""
    assert len(DIMENSIONS) == sum(
        key.startswith(tuple(DIMENSIONS)) and bool(rows[0][key]) for key in rows[0]
    )
    assert not any("second" in column for column in rows[0])


def test_rows_are_the_smallest_of_their_fronts(whole: Path) -> None:
    for row in csv.DictReader((whole / "out" / "study.csv").read_text().splitlines()):
        folder = whole / "out" / "runs" / f"{int(row['run']):04d}"
        if row["status"] != "met":
            continue
        front = list(csv.DictReader((folder / "front.csv").read_text().splitlines()))
        assert int(row["designs_on_front"]) == len(front)
        smallest = min(front, key=lambda design: float(design["frontal_area_m2"]))
        assert smallest.items() <= row.items()
        assert float(row["depth_mm"]) <= float(row["size.depth_mm.max"])
        assert float(row["gain_dbi"]) >= float(row["require.gain_dbi.min"])


def test_killed_three_times_and_resumed_is_the_same_study(whole: Path) -> None:
    path, out = whole / "study.toml", whole / "killed"
    total = batches(whole / "out")
    dice = random.Random(20)
    for number, jobs in enumerate([2, 1, 1]):
        target = int(total * (number + dice.random()) / 3.5)
        process = started(path, out, *(["--resume"] if number else []), jobs=jobs)
        end = time.monotonic() + 60.0
        while time.monotonic() < end and process.poll() is None and batches(out) <= target:
            time.sleep(0.002)
        process.kill()
        _, told = process.communicate(timeout=60)
        assert process.returncode == -signal.SIGKILL
        assert "Traceback" not in told
    assert target < batches(out) < total
    assert not (out / "study.csv").exists()
    study(path, StudyOptions(out=out, jobs=2, resume=True, quiet=True))
    assert everything(out) == everything(whole / "out")
    assert len(everything(out)) > 20


@contextmanager
def full_disk() -> Iterator[None]:
    """Refuse, as a disk that is full, to let a file grow: by the system, for children too."""
    soft, hard = resource.getrlimit(resource.RLIMIT_FSIZE)
    resource.setrlimit(resource.RLIMIT_FSIZE, (60_000, hard))
    try:
        yield
    finally:
        resource.setrlimit(resource.RLIMIT_FSIZE, (soft, hard))


def test_a_disk_that_is_full_is_told_and_costs_nothing(
    whole: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    path, out = whole / "study.toml", whole / "full"
    with full_disk():
        assert main(["study", str(path), "--out", str(out), "--jobs", "1", "--quiet"]) == 2
    told = capsys.readouterr().err
    assert told.endswith("journal.jsonl: cannot be written: File too large\n")
    assert "Traceback" not in told
    assert main(["study", str(path), "--out", str(out), "--status"]) == 0
    assert "go on with: apexfront study" in capsys.readouterr().out
    left = {file: file.read_bytes() for file in out.glob("runs/*/journal.jsonl")}
    study(path, StudyOptions(out=out, jobs=1, resume=True, quiet=True))
    for file, content in left.items():
        assert content.count(b"\n") > 2
        assert file.read_bytes().startswith(content[: content.rfind(b"\n") + 1])
    assert everything(out) == everything(whole / "out")


def test_status_of_a_study_under_way(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    long = STUDY.replace("generations = 12", "generations = 2000\nrun.population = 200")
    path, out = written(tmp_path, long), tmp_path / "out"
    process = started(path, out, jobs=1)
    end = time.monotonic() + 60.0
    while time.monotonic() < end and batches(out) < 4:
        time.sleep(0.01)
    before = {name: name.stat().st_mtime_ns for name in tmp_path.rglob("*.json")}
    assert main(["study", str(path), "--out", str(out), "--status"]) == 0
    told = capsys.readouterr().out
    assert before == {name: name.stat().st_mtime_ns for name in tmp_path.rglob("*.json")}
    assert "0 of 6 runs done (0 met, 0 not met, 0 failed), 1 under way, 5 waiting." in told
    assert "A process is working on it." in told
    assert "under way: scout, " in told
    assert main(["study", str(path), "--out", str(out), "--resume"]) == 2
    assert "another study is writing to this folder" in capsys.readouterr().err
    process.send_signal(signal.SIGINT)
    _, told = process.communicate(timeout=60)
    assert process.returncode == 130
    assert f"what was evaluated is safe. Go on with: apexfront study {path} --out {out}" in told
    assert "Traceback" not in told
    assert main(["study", str(path), "--out", str(out), "--status"]) == 0
    told = capsys.readouterr().out
    assert "1 stopped on the way, 5 waiting" in told
    assert "Nothing is working on it; go on with: apexfront study" in told


def test_status_of_a_finished_study(whole: Path, capsys: pytest.CaptureFixture[str]) -> None:
    arguments = ["study", str(whole / "study.toml"), "--out", str(whole / "out"), "--status"]
    assert main(arguments) == 0
    told = capsys.readouterr().out
    assert "6 of 6 runs done (2 met, 2 not met, 2 failed)" in told
    assert "it is done" in told


def test_what_is_not_this_study_is_refused(
    whole: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    path, out = str(whole / "study.toml"), str(whole / "out")
    assert main(["study", path, "--out", out]) == 2
    assert "holds a study already" in capsys.readouterr().err
    other = str(written(tmp_path, STUDY + "\n"))
    assert main(["study", other, "--out", out, "--resume"]) == 2
    assert "made by another study. study_sha256" in capsys.readouterr().err
    assert main(["study", other, "--out", out, "--status"]) == 2
    assert "holds another study" in capsys.readouterr().err
    assert main(["study", other, "--out", str(tmp_path / "none"), "--status"]) == 2
    assert "holds no study yet" in capsys.readouterr().err
    other_spec = str(written(tmp_path, STUDY, EASY + "\n"))
    assert main(["study", other_spec, "--out", out, "--resume"]) == 2
    assert "spec_sha256" in capsys.readouterr().err
    (tmp_path / "file").write_text("in the way")
    assert main(["study", path, "--out", str(tmp_path / "file")]) == 2
    assert str(tmp_path / "file") in capsys.readouterr().err


@pytest.mark.skipif(os.geteuid() == 0, reason="root may write anywhere")
def test_a_folder_that_cannot_be_written(
    whole: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    (tmp_path / "out").mkdir(mode=0o500)
    path = str(whole / "study.toml")
    assert main(["study", path, "--out", str(tmp_path / "out")]) == 2
    assert "Permission denied" in capsys.readouterr().err


def test_failed_runs_are_tried_again_and_the_rest_left_alone(
    whole: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    out = tmp_path / "out"
    shutil.copytree(whole / "out", out)
    path = out / "runs" / "0001" / "outcome.json"
    failed = json.loads(path.read_text()) | {"status": "failed", "reason": "lightning"}
    path.write_text(json.dumps(failed))
    times = {p: p.stat().st_mtime_ns for p in out.glob("runs/000[234]/*")}
    command = ["study", str(whole / "study.toml"), "--out", str(out), "--resume", "--quiet"]
    assert main([*command, "--jobs", "1"]) == 1
    told = capsys.readouterr()
    assert told.out.startswith("Gain against depth: 6 runs, 2 met, 2 failed.")
    assert told.err == ""
    assert json.loads(path.read_text())["status"] == "met"
    assert everything(out) == everything(whole / "out")
    assert times == {p: p.stat().st_mtime_ns for p in out.glob("runs/000[234]/*")}
