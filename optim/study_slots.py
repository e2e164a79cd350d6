"""Runs of a study side by side: processes of this machine that take one search after another.

Workers are never more than were asked for: while many runs wait, each gets one worker, and the
last ones share what is left over. Their number changes the time, not the results. A process that
dies fails its run and is replaced; trouble with disk or cluster stops the study, as it would meet
every run. When the study itself is killed, its processes end at once.
"""

from __future__ import annotations

import os
import signal
import threading
import time
import traceback
from collections import deque
from collections.abc import Callable, Iterable, Iterator
from contextlib import contextmanager
from dataclasses import dataclass, field
from multiprocessing import get_context, parent_process
from multiprocessing.connection import Connection, wait
from multiprocessing.process import BaseProcess
from typing import Final, NamedTuple

from optim.cluster import ClusterError
from optim.faults import SpecError
from optim.journal import JournalError
from optim.progress import Progress, found
from optim.referee import Referee
from optim.run import Options, run
from optim.study_file import StudyError
from optim.study_folder import Outcome, StudyFolder, gathered

__all__ = ["Done", "Task", "Told", "Trouble", "work"]

TELL: Final = 0.5
"""Least time between two words from a run, s."""

GRACE: Final = 5.0
"""Seconds a process has to end."""


class Task(NamedTuple):
    """A run to do: its number, its requirements file, its number of workers."""

    number: int
    spec: str
    jobs: int = 1


class Told(NamedTuple):
    """How a run goes: stage, generations done and to do, and what it has found."""

    number: int
    stage: str
    done: int
    total: int
    found: str


class Done(NamedTuple):
    """A run is done."""

    number: int
    outcome: Outcome


class Trouble(NamedTuple):
    """What stops the study."""

    words: str


Event = Told | Done


@dataclass(eq=False)
class _Slot:
    """A process that does runs, and the one it has now."""

    process: BaseProcess
    pipe: Connection
    task: Task | None = field(default=None)


def work(
    folder: StudyFolder, tasks: Iterable[Task], *, jobs: int, cluster: str | None = None
) -> Iterator[Event]:
    """Do all `tasks` on `jobs` workers in all and give what happens as it happens.

    Parameters
    ----------
    folder : StudyFolder
    tasks : iterable of Task
    jobs : int
        Workers; with a cluster, runs side by side.
    cluster : str, optional
        Address of a Dask scheduler.

    Raises
    ------
    StudyError
        When disk or cluster fail; what was evaluated is safe.
    """
    waiting, free = deque(tasks), jobs
    slots: list[_Slot] = []
    try:
        while waiting or any(slot.task for slot in slots):
            while waiting and free:
                share = 1 if cluster is not None else max(1, free // len(waiting))
                idle = next((slot for slot in slots if slot.task is None), None)
                if idle is None:
                    idle = _start(folder, cluster)
                    slots.append(idle)
                idle.task = waiting.popleft()._replace(jobs=share)
                idle.pipe.send(idle.task)
                free -= share
            for pipe in wait([slot.pipe for slot in slots], timeout=TELL):
                slot = next(slot for slot in slots if slot.pipe is pipe)
                task, event = slot.task, _heard(slot)
                if event is None:
                    slots.remove(slot)
                    event = task and Done(task.number, _died(folder, task, slot.process))
                if isinstance(event, Trouble):
                    raise StudyError(event.words)
                if isinstance(event, Done) and task is not None:
                    slot.task = None
                    free += task.jobs
                if event is not None:
                    yield event
        for slot in slots:
            slot.pipe.close()
    finally:
        _end(slots)


def _start(folder: StudyFolder, cluster: str | None) -> _Slot:
    context = get_context("spawn")
    ours, theirs = context.Pipe()
    process = context.Process(target=_serve, args=(theirs, folder, cluster))
    with _interrupts_held():
        process.start()
    theirs.close()
    return _Slot(process, ours)


@contextmanager
def _interrupts_held() -> Iterator[None]:
    """Hold Ctrl-C back; a process started meanwhile is born deaf to it."""
    before = signal.pthread_sigmask(signal.SIG_BLOCK, [signal.SIGINT])
    try:
        yield
    finally:
        signal.pthread_sigmask(signal.SIG_SETMASK, before)


def _heard(slot: _Slot) -> Told | Done | Trouble | None:
    """Return what a process says; None when it has died."""
    try:
        event: Told | Done | Trouble = slot.pipe.recv()
    except (EOFError, OSError):
        return None
    return event


def _died(folder: StudyFolder, task: Task, process: BaseProcess) -> Outcome:
    process.join(GRACE)
    code = process.exitcode
    how = f"by signal {-code}" if code is not None and code < 0 else f"with code {code}"
    outcome = Outcome(status="failed", reason=f"its process ended {how}; out of memory?")
    folder.settle(task.number, outcome)
    return outcome


def _end(slots: list[_Slot]) -> None:
    """End all processes: idle ones have seen their pipe close, busy ones are told to."""
    for slot in slots:
        if slot.task is not None:
            slot.process.terminate()
    for slot in slots:
        slot.process.join(GRACE)
        if slot.process.is_alive():
            slot.process.kill()
            slot.process.join()
        slot.process.close()
        slot.pipe.close()


def _serve(pipe: Connection, folder: StudyFolder, cluster: str | None) -> None:
    """Do runs until the pipe closes; the whole life of a process."""
    signal.signal(signal.SIGINT, signal.SIG_IGN)
    signal.signal(signal.SIGTERM, _leave)
    signal.pthread_sigmask(signal.SIG_UNBLOCK, [signal.SIGINT])
    threading.Thread(target=_end_with_parent, daemon=True).start()
    while True:
        try:
            task: Task = pipe.recv()
        except EOFError:
            return
        try:
            outcome = _outcome(folder, task, cluster, pipe.send)
            folder.settle(task.number, outcome)
        except (JournalError, ClusterError) as error:
            pipe.send(Trouble(str(error)))
        except OSError as error:
            place = f"{error.filename}: " if error.filename else ""
            pipe.send(Trouble(f"{place}{error.strerror or error}"))
        else:
            pipe.send(Done(task.number, outcome))


def _outcome(
    folder: StudyFolder, task: Task, cluster: str | None, tell: Callable[[Told], None]
) -> Outcome:
    """Search as `task` says and return what became of it."""
    spec, out = folder.prepare(task.number, task.spec), folder.run(task.number)
    options = Options(out=out, jobs=task.jobs, resume=True, quiet=True, cluster=cluster)
    try:
        run(spec, options, _Words(task.number, tell))
        return gathered(out)
    except SpecError as error:
        # Without the file's name: the table is the same wherever the study's folder is.
        faults = (f"{f.key}: {f.given} given, allowed: {f.allowed}" for f in error.faults)
        return Outcome(status="failed", reason="; ".join(faults))
    except (JournalError, ClusterError, OSError):
        raise
    except Exception as error:  # whatever it is, the other runs go on
        (out / "failure.txt").write_text(traceback.format_exc(), encoding="utf-8")
        reason = " ".join(f"{type(error).__name__}: {error}".split())
        return Outcome(status="failed", reason=reason)


class _Words(Progress):
    """Progress that is told to another process."""

    def __init__(self, number: int, tell: Callable[[Told], None]) -> None:
        super().__init__(quiet=True)
        self._number = number
        self._tell = tell
        self._last = 0.0

    @contextmanager
    def stage(self, name: str, generations: int) -> Iterator[Callable[[Referee], None]]:
        """Tell after every generation, twice a second at most."""
        done = 0

        def told(referee: Referee) -> None:
            nonlocal done
            done += 1
            if time.monotonic() - self._last > TELL:
                self._last = time.monotonic()
                self._tell(Told(self._number, name, done, generations, found(referee)))

        yield told


def _leave(_number: int, _frame: object) -> None:
    raise SystemExit(1)


def _end_with_parent() -> None:
    parent = parent_process()
    if parent is not None:
        parent.join()
        os._exit(1)
