"""Workers shared out among runs, a process that dies, what fails a run and what stops the study."""

from __future__ import annotations

import errno
import multiprocessing
import os
import threading
from collections.abc import Callable
from contextlib import suppress
from multiprocessing.connection import Connection
from pathlib import Path

import pytest

from optim import study_slots
from optim.journal import JournalError
from optim.study_file import StudyError
from optim.study_folder import Outcome, StudyFolder
from optim.study_slots import Done, Task, Told, Trouble, work
from tests.search_specs import EASY

MET = Outcome(status="met")


class Process:
    """A process that is a thread."""

    exitcode = 0

    def __init__(self, answer: Callable[[Task], object], pipe: Connection) -> None:
        self._told_to_end = False
        self._thread = threading.Thread(target=self._serve, args=(answer, pipe))
        self._thread.start()

    def _serve(self, answer: Callable[[Task], object], pipe: Connection) -> None:
        with pipe, suppress(EOFError):
            while not self._told_to_end:
                if pipe.poll(0.01):
                    pipe.send(answer(pipe.recv()))

    def join(self, _seconds: float) -> None:
        self._thread.join()

    def is_alive(self) -> bool:
        return self._thread.is_alive()

    def terminate(self) -> None:
        self._told_to_end = True

    def close(self) -> None:
        assert not self.is_alive()


def answered(monkeypatch: pytest.MonkeyPatch, answer: Callable[[Task], object]) -> list[Process]:
    """Let threads answer in place of processes; return those that were started."""
    started: list[Process] = []

    def start(_folder: StudyFolder, _cluster: str | None) -> study_slots._Slot:
        ours, theirs = multiprocessing.Pipe()
        started.append(Process(answer, theirs))
        return study_slots._Slot(started[-1], ours)  # type: ignore[arg-type]

    monkeypatch.setattr(study_slots, "_start", start)
    return started


@pytest.mark.parametrize(
    ("runs", "jobs", "shares"),
    [(5, 2, {1}), (1, 2, {2}), (1, 8, {8}), (2, 8, {4}), (24, 4, {1}), (1, 1, {1})],
)
def test_workers_are_shared_out(
    monkeypatch: pytest.MonkeyPatch, tmp_path: Path, runs: int, jobs: int, shares: set[int]
) -> None:
    asked: list[Task] = []
    together = threading.Barrier(min(runs, jobs), timeout=10)

    def answer(task: Task) -> Done:
        asked.append(task)
        if task.number <= min(runs, jobs):
            together.wait()
        return Done(task.number, MET)

    started = answered(monkeypatch, answer)
    tasks = [Task(number, "") for number in range(1, runs + 1)]
    done = {event.number for event in work(StudyFolder(tmp_path), tasks, jobs=jobs)}
    assert done == set(range(1, runs + 1))
    first = [task.jobs for task in asked if task.number <= min(runs, jobs)]
    assert sum(first) <= jobs
    assert set(first) == shares
    assert len(started) == min(runs, jobs)
    assert all(1 <= task.jobs <= jobs for task in asked)


def test_with_a_cluster_every_run_has_one_process(
    monkeypatch: pytest.MonkeyPatch, tmp_path: Path
) -> None:
    asked: list[int] = []

    def answer(task: Task) -> Done:
        asked.append(task.jobs)
        return Done(task.number, MET)

    answered(monkeypatch, answer)
    list(work(StudyFolder(tmp_path), [Task(1, "")], jobs=8, cluster="tcp://x"))
    assert asked == [1]


def test_trouble_stops_the_study(monkeypatch: pytest.MonkeyPatch, tmp_path: Path) -> None:
    started = answered(monkeypatch, lambda _task: Trouble("no space left"))
    with pytest.raises(StudyError, match="no space left"):
        list(work(StudyFolder(tmp_path), [Task(1, ""), Task(2, "")], jobs=1))
    assert len(started) == 1


def test_a_process_that_dies_fails_its_run_only(tmp_path: Path) -> None:
    long = EASY.replace("generations = 8", "generations = 9999").replace("= 20", "= 300")
    folder = StudyFolder(tmp_path)
    tasks = [Task(1, long), Task(2, EASY)]
    outcomes = {}
    # Workers that earlier tests left idle are none of this study's.
    before = set(multiprocessing.active_children())
    alive = True
    for event in work(folder, tasks, jobs=1):
        if isinstance(event, Told) and event.number == 1 and alive:
            (process,) = set(multiprocessing.active_children()) - before
            process.kill()
            alive = False
        elif isinstance(event, Done):
            outcomes[event.number] = event.outcome
    assert outcomes[1].reason == "its process ended by signal 9; out of memory?"
    assert outcomes[2].status == "met"
    assert folder.outcome(1) == outcomes[1]
    assert folder.outcome(2) == outcomes[2]
    assert set(multiprocessing.active_children()) <= before


def outcome_when(monkeypatch: pytest.MonkeyPatch, tmp_path: Path, error: Exception) -> Outcome:
    def run(*_given: object) -> None:
        raise error

    monkeypatch.setattr(study_slots, "run", run)
    folder = StudyFolder(tmp_path)
    return study_slots._outcome(folder, Task(7, EASY), None, lambda _told: None)


def test_whatever_goes_wrong_in_a_run_is_its_reason(
    monkeypatch: pytest.MonkeyPatch, tmp_path: Path
) -> None:
    outcome = outcome_when(monkeypatch, tmp_path, ZeroDivisionError("by\nnought"))
    assert outcome == Outcome(status="failed", reason="ZeroDivisionError: by nought")
    assert "Traceback" in (tmp_path / "runs" / "0007" / "failure.txt").read_text()


@pytest.mark.parametrize(
    "error", [OSError(errno.ENOSPC, os.strerror(errno.ENOSPC)), JournalError("cannot be written")]
)
def test_trouble_with_the_disk_is_no_fault_of_the_run(
    monkeypatch: pytest.MonkeyPatch, tmp_path: Path, error: Exception
) -> None:
    with pytest.raises(type(error)):
        outcome_when(monkeypatch, tmp_path, error)
    assert StudyFolder(tmp_path).outcome(7) is None
