"""The folder of a study: what it belongs to, the lock of its one writer, the outcome of each run.

    study.json                what the study depends on, written first
    runs/0001/spec.toml       the requirements file of the first run
    runs/0001/journal.jsonl   and the rest that a search writes
    runs/0001/outcome.json    written last, when all the rest is on the disk: the run is done

Every file here appears whole or not at all, so a study that was stopped anywhere goes on from what
there is. The lock is on the folder itself and ends with the process that holds it.
"""

from __future__ import annotations

import csv
import fcntl
import json
import os
import time
from collections.abc import Iterator
from contextlib import contextmanager, suppress
from dataclasses import asdict, dataclass, field
from pathlib import Path
from typing import Any, Final

from pydantic import TypeAdapter

from optim.run import JOURNAL
from optim.study_file import Study, StudyError

__all__ = [
    "DONE",
    "Outcome",
    "StudyFolder",
    "gathered",
    "write_whole",
]

FORMAT: Final = 1
HEADER: Final = "study.json"
OUTCOME: Final = "outcome.json"
SPEC: Final = "spec.toml"
DONE: Final = ("met", "not met")
"""States of a run that need no second try."""

PATIENCE: Final = 1.0
"""Seconds to wait for a lock: a look at the status holds it for some microseconds."""


@dataclass(frozen=True, kw_only=True)
class Outcome:
    """What became of one run.

    Parameters
    ----------
    status : str
        "met", "not met" or "failed".
    reason : str
        Why it failed, or what binds where nothing meets the requirements.
    front : int
        Designs on the front.
    smallest : dict
        The row of front.csv with the smallest frontal area, as text by column; empty without one.
    curve : list
        Frontal area (m²) and gain (dBi) of every design on the front.
    seconds : float
        Of the last process that worked on it.
    """

    status: str
    reason: str = ""
    front: int = 0
    smallest: dict[str, str] = field(default_factory=dict)
    curve: list[list[float]] = field(default_factory=list)
    seconds: float = 0.0

    @property
    def area(self) -> float | None:
        """Return the smallest frontal area, m²."""
        return float(self.smallest["frontal_area_m2"]) if self.smallest else None


class StudyFolder:
    """Where the files of a study are.

    Parameters
    ----------
    path : Path
        Need not exist.
    """

    def __init__(self, path: Path) -> None:
        self.path = path

    def run(self, number: int) -> Path:
        """Return the folder of a run."""
        return self.path / "runs" / f"{number:04d}"

    @contextmanager
    def opened(self, study: Study, versions: dict[str, str], *, resume: bool) -> Iterator[None]:
        """Make or take up the folder for `study` and keep others from writing to it.

        Raises
        ------
        StudyError
            For a folder of another study, one that holds this study when `resume` is false, and
            one that another process writes to.
        OSError
            Where it cannot be written.
        """
        self.path.mkdir(parents=True, exist_ok=True)
        lock = os.open(self.path, os.O_RDONLY)
        try:
            end = time.monotonic() + PATIENCE
            while not _locked(lock, fcntl.LOCK_EX):
                if time.monotonic() > end:
                    msg = f"{self.path}: another study is writing to this folder"
                    raise StudyError(msg)
                time.sleep(0.02)
            self._take_up(study, versions, resume=resume)
            yield
        finally:
            os.close(lock)

    def _take_up(self, study: Study, versions: dict[str, str], *, resume: bool) -> None:
        asked = {
            "format": FORMAT,
            "title": study.title,
            "study_sha256": study.sha256,
            "spec_sha256": study.spec_sha256,
            "versions": versions,
            "runs": len(study.runs),
        }
        recorded = self.header()
        if recorded is None:
            write_whole(self.path / HEADER, json.dumps(asked, indent=2) + "\n")
            return
        if not resume:
            msg = (
                f"{self.path}: holds a study already. "
                "Go on with it by --resume, or choose another folder with --out"
            )
            raise StudyError(msg)
        differences = [
            f"{key}: {recorded.get(key)!r} recorded, {value!r} asked for"
            for key, value in asked.items()
            if recorded.get(key) != value
        ]
        if differences:
            msg = f"{self.path / HEADER}: made by another study. " + "; ".join(differences)
            raise StudyError(msg)

    def header(self) -> dict[str, Any] | None:
        """Return what the study in the folder depends on, None where there is none.

        Raises
        ------
        StudyError
            For a file that is no header of a study.
        """
        found = _object(self.path / HEADER)
        if found is None and (self.path / HEADER).exists():
            msg = f"{self.path / HEADER}: no file of a study. Start again in another folder"
            raise StudyError(msg)
        return found

    def in_use(self) -> bool:
        """Return whether a process works on the study."""
        try:
            probe = os.open(self.path, os.O_RDONLY)
        except OSError:
            return False
        try:
            return not _locked(probe, fcntl.LOCK_SH)
        finally:
            os.close(probe)

    def outcome(self, number: int) -> Outcome | None:
        """Return what became of a run, None while it is not done."""
        found = _object(self.run(number) / OUTCOME)
        if found is None or set(found) != set(Outcome.__dataclass_fields__):
            return None
        with suppress(ValueError, KeyError):
            outcome = TypeAdapter(Outcome).validate_python(found)
            return outcome if outcome.area is None or outcome.area > 0.0 else None
        return None

    def started(self, number: int) -> bool:
        """Return whether a run has a journal."""
        return (self.run(number) / JOURNAL).exists()

    def prepare(self, number: int, spec: str) -> Path:
        """Write the requirements file of a run and return its path."""
        folder = self.run(number)
        folder.mkdir(parents=True, exist_ok=True)
        path = folder / SPEC
        with suppress(FileNotFoundError):
            if path.read_text(encoding="utf-8") == spec:
                return path
        write_whole(path, spec)
        return path

    def settle(self, number: int, outcome: Outcome) -> None:
        """Record what became of a run, once everything it wrote is on the disk."""
        folder = self.run(number)
        folder.mkdir(parents=True, exist_ok=True)
        for path in sorted(folder.rglob("*")):
            _flush(path)
        write_whole(folder / OUTCOME, json.dumps(asdict(outcome), indent=2) + "\n")


def gathered(folder: Path) -> Outcome:
    """Return the outcome of a finished search from the files in its `folder`."""
    with (folder / "front.csv").open(encoding="utf-8", newline="") as stream:
        rows = list(csv.DictReader(stream))
    summary = json.loads((folder / "summary.json").read_text(encoding="utf-8"))
    smallest = min(rows, key=lambda row: float(row["frontal_area_m2"]), default={})
    binds = "" if rows else "binds: " + ", ".join(summary["binding"])
    return Outcome(
        status=summary["status"],
        reason=binds,
        front=len(rows),
        smallest=smallest,
        curve=[[float(row["frontal_area_m2"]), float(row["gain_dbi"])] for row in rows],
        seconds=summary["seconds"],
    )


def write_whole(path: Path, text: str) -> None:
    """Write `text` to `path` so that after a crash the file is the old or the new one, whole."""
    new = path.with_name(path.name + ".new")
    with new.open("w", encoding="utf-8", newline="\n") as stream:
        stream.write(text)
        stream.flush()
        os.fsync(stream.fileno())
    new.replace(path)
    _flush(path.parent)


def _flush(path: Path) -> None:
    handle = os.open(path, os.O_RDONLY)
    try:
        os.fsync(handle)
    finally:
        os.close(handle)


def _locked(handle: int, kind: int) -> bool:
    try:
        fcntl.flock(handle, kind | fcntl.LOCK_NB)
    except BlockingIOError:
        return False
    return True


def _object(path: Path) -> dict[str, Any] | None:
    try:
        found = json.loads(path.read_bytes())
    except (FileNotFoundError, ValueError, RecursionError):
        return None
    return found if isinstance(found, dict) else None
