"""What a second core buys a search, and whether long studies stay as they began.

Meaningful on a machine with two cores that has nothing else to do: the load is printed beside the
figures. Run by name: pytest tests/benchmarks/test_many_cores.py -s
"""

from __future__ import annotations

import multiprocessing
import os
import time
from pathlib import Path

import numpy as np
import pytest

from optim.run import Options, run
from optim.study_file import read_study
from optim.study_folder import StudyFolder
from optim.study_slots import Done, Task, work

SPEC = """
title = "Gauge"
[band]
low_mhz = 863
high_mhz = 870
points = 3
[require]
gain_dbi = {{ min = 10 }}
[size]
width_mm = {{ max = 500 }}
[run]
population = {population}
generations = {generations}
scout = "{model}"
prove = "none"
"""

STUDY = """
spec = "spec.toml"
repeats = 24
"""


def spec(folder: Path, *, population: int, generations: int, model: str) -> Path:
    path = folder / "spec.toml"
    path.write_text(SPEC.format(population=population, generations=generations, model=model))
    return path


@pytest.mark.skipif((os.cpu_count() or 1) < 2, reason="needs two cores")
def test_two_cores_against_one(tmp_path: Path) -> None:
    """A whole search by the full-wave model, the start of the workers included."""
    path = spec(tmp_path, population=100, generations=25, model="moment")
    seconds = {}
    for jobs in (2, 1):
        began = time.perf_counter()
        run(path, Options(out=tmp_path / f"{jobs}", jobs=jobs, quiet=True))
        seconds[jobs] = time.perf_counter() - began
    efficiency = seconds[1] / (2.0 * seconds[2])
    print(  # noqa: T201
        f"\none core {seconds[1]:.1f} s, two cores {seconds[2]:.1f} s: efficiency "
        f"{100 * efficiency:.0f} %, workers' start included (load {os.getloadavg()[0]:.1f})"
    )
    assert (tmp_path / "1" / "front.csv").read_bytes() == (
        tmp_path / "2" / "front.csv"
    ).read_bytes()
    assert efficiency >= 0.85


def resident_mb(pid: int) -> float:
    for line in Path(f"/proc/{pid}/status").read_text().splitlines():
        if line.startswith("VmRSS:"):
            return float(line.split()[1]) / 1024.0
    pytest.fail("no VmRSS")


@pytest.mark.skipif(not Path("/proc/self/status").exists(), reason="reads /proc")
def test_24_runs_take_their_time_and_no_memory(tmp_path: Path) -> None:
    spec(tmp_path, population=40, generations=10, model="ray")
    (tmp_path / "study.toml").write_text(STUDY)
    study = read_study(tmp_path / "study.toml")
    tasks = [Task(each.number, study.text(each)) for each in study.runs]
    began, ends, memory = time.perf_counter(), [], []
    for event in work(StudyFolder(tmp_path / "out"), tasks, jobs=2):
        if isinstance(event, Done):
            assert event.outcome.status == "met"
            ends.append(time.perf_counter() - began)
            pids = [process.pid for process in multiprocessing.active_children()]
            memory.append(sum(resident_mb(pid) for pid in pids if pid is not None))
    first, second = ends[11] - ends[1], ends[23] - ends[13]
    growth = np.mean(memory[-6:]) / np.mean(memory[2:8])
    straight = np.corrcoef(np.arange(2, 25), ends[1:])[0, 1]
    print(  # noqa: T201
        f"\n24 runs in {ends[-1]:.1f} s; runs 3 to 12 in {first:.1f} s, "
        f"15 to 24 in {second:.1f} s; correlation with a straight line {straight:.4f}; "
        f"both processes together {np.mean(memory[2:8]):.0f} MB early, "
        f"{np.mean(memory[-6:]):.0f} MB at the end "
        f"(load {os.getloadavg()[0]:.1f})"
    )
    assert straight >= 0.99
    assert growth <= 1.1
