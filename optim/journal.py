"""The journal of a run: every evaluated batch, on disk before the search acts on it.

One JSON object a line. The first line is the header: what the answers depend on. Each further line
is one batch: the stage that asked, the designs (SI and radians, one row each) and the numbers they
were judged by, whose names are in the header. Numbers are 64-bit floats, least byte first, row by
row, in base64: they come back bit for bit, and writing them costs next to nothing. A line that was
cut by a crash or a full disk is dropped, and the batch is evaluated again. One process writes at a
time (a lock on the file).
"""

from __future__ import annotations

import base64
import fcntl
import json
import os
from collections import deque
from collections.abc import Iterator
from contextlib import contextmanager, suppress
from dataclasses import asdict, dataclass, fields
from io import FileIO
from pathlib import Path
from types import TracebackType
from typing import Any, Final, Self

import numpy as np
from pydantic import TypeAdapter, ValidationError

from models.conventions import FloatArray
from optim.faults import shown

__all__ = [
    "FORMAT",
    "Header",
    "Journal",
    "JournalError",
    "decode",
    "encode",
    "read_batches",
    "read_header",
]

FORMAT: Final = 1
"""Version of the layout of the file."""


# Data and length, not the time of the change: several times as fast where it exists.
_to_disk: Final = getattr(os, "fdatasync", os.fsync)


class JournalError(Exception):
    """The journal cannot be used; the message says why and what to do."""


@dataclass(frozen=True, kw_only=True)
class Header:
    """What every answer in the journal depends on; the number of workers is not among it.

    Parameters
    ----------
    seed : int
        Of the one random generator.
    spec_sha256 : str
        Of the bytes of the requirements file.
    scout, prove : str
        Names of the models; `prove` may be "none".
    versions : dict
        Of this program and of the libraries that do the arithmetic.
    columns : dict
        For each stage the names of the judged numbers, in order.
    format : int
        Version of the layout of the file.
    """

    seed: int
    spec_sha256: str
    scout: str
    prove: str
    versions: dict[str, str]
    columns: dict[str, list[str]]
    format: int = FORMAT

    def differences(self, other: Header) -> list[str]:
        """Return in words how a journal with this header differs from what `other` asks for."""
        words = {"spec_sha256": "requirements file (sha256)", "columns": "judged numbers"}
        return [
            f"{words.get(field.name, field.name)}: {getattr(self, field.name)!r} recorded, "
            f"{getattr(other, field.name)!r} asked for"
            for field in fields(self)
            if getattr(self, field.name) != getattr(other, field.name)
        ]


class Journal:
    """An open journal: first gives back what it holds, then takes what is new.

    Parameters
    ----------
    path : Path
        The file; its folder is made if need be.
    header : Header
        What the run about to start depends on.
    resume : bool
        Whether a journal that holds a run may be gone on with.

    Raises
    ------
    JournalError
        For a folder or file that cannot be written or is being written by another process, for a
        journal that exists and `resume` is false, and for one made under another header.
    """

    def __init__(self, path: Path, header: Header, *, resume: bool) -> None:
        self._path = path
        self._recorded: deque[dict[str, Any]] = deque()
        self._line = 1
        with _explained(path.parent, "made"):
            path.parent.mkdir(parents=True, exist_ok=True)
        with _explained(path, "opened"):
            self._file: FileIO = path.open("ab", buffering=0)
        try:
            self._lock()
            self._start(header, resume=resume)
        except BaseException:
            self._file.close()
            raise

    def __enter__(self) -> Self:
        return self

    def __exit__(
        self,
        kind: type[BaseException] | None,
        error: BaseException | None,
        trace: TracebackType | None,
    ) -> None:
        self._file.close()

    @property
    def remaining(self) -> int:
        """Number of recorded batches not yet given back."""
        return len(self._recorded)

    def replay(self, stage: str, designs: FloatArray) -> FloatArray | None:
        """Return the recorded numbers of the next batch, None when the journal has run out.

        Parameters
        ----------
        stage : str
            Which part of the search asks.
        designs : (n, n_var)
            What it asks for.

        Raises
        ------
        JournalError
            If the next recorded batch is not the one asked for.
        """
        if not self._recorded:
            return None
        self._line += 1
        batch = self._recorded.popleft()
        try:
            known = batch["stage"] == stage and np.array_equal(batch["designs"], designs)
            numbers = decode(batch["numbers"], len(designs)) if known else None
        except (KeyError, TypeError, ValueError) as error:
            raise _damaged(self._path, self._line) from error
        if numbers is None:
            msg = (
                f"{self._path}: line {self._line} holds another batch than this search asks for: "
                "the journal was edited, or numpy computes differently on this machine. "
                "Start again in another folder"
            )
            raise JournalError(msg)
        return numbers

    def append(self, stage: str, designs: FloatArray, numbers: FloatArray) -> None:
        """Record one evaluated batch; on return it is on the disk.

        Raises
        ------
        JournalError
            If it cannot be written; the lines before stay good.
        """
        self._write({"stage": stage, "designs": designs.tolist(), "numbers": encode(numbers)})

    def _lock(self) -> None:
        with _explained(self._path, "locked"):
            try:
                fcntl.flock(self._file, fcntl.LOCK_EX | fcntl.LOCK_NB)
            except BlockingIOError as error:
                msg = f"{self._path}: another search is writing to this folder"
                raise JournalError(msg) from error

    def _start(self, header: Header, *, resume: bool) -> None:
        lines, whole = _whole_lines(self._path)
        if not lines:
            self._cut(0)
            self._write(asdict(header))
            return
        if not resume:
            msg = (
                f"{self._path.parent}: holds a run already. "
                "Go on with it by --resume, or choose another folder with --out"
            )
            raise JournalError(msg)
        differences = _header(self._path, lines[0]).differences(header)
        if differences:
            msg = f"{self._path}: made by another search. " + "; ".join(differences)
            raise JournalError(msg)
        self._cut(whole)
        self._recorded.extend(lines[1:])

    def _cut(self, length: int) -> None:
        with _explained(self._path, "written"):
            self._file.truncate(length)

    def _write(self, entry: dict[str, Any]) -> None:
        line = json.dumps(entry, separators=(",", ":"), allow_nan=False) + "\n"
        rest = memoryview(line.encode())
        with _explained(self._path, "written"):
            while rest:
                rest = rest[self._file.write(rest) :]
            _to_disk(self._file.fileno())


def read_header(path: Path) -> Header | None:
    """Return the header of the journal at `path`, None where there is none yet.

    Raises
    ------
    JournalError
        For a file that cannot be read or is no journal.
    """
    if not path.exists():
        return None
    lines, _ = _whole_lines(path)
    return _header(path, lines[0]) if lines else None


def read_batches(path: Path, header: Header) -> Iterator[tuple[str, FloatArray]]:
    """Yield stage and numbers (n, n_numbers) of every batch of the journal at `path`, in order.

    Parameters
    ----------
    path : Path
    header : Header
        That of the journal, which names the numbers.

    Raises
    ------
    JournalError
        For a file that cannot be read or is damaged.
    """
    lines, _ = _whole_lines(path)
    for number, batch in enumerate(lines[1:], start=2):
        try:
            stage, numbers = batch["stage"], decode(batch["numbers"], len(batch["designs"]))
            if numbers.shape[1] != len(header.columns[stage]):
                raise _damaged(path, number)
            yield stage, numbers
        except (KeyError, TypeError, ValueError) as error:
            raise _damaged(path, number) from error


@contextmanager
def _explained(path: Path, what: str) -> Iterator[None]:
    try:
        yield
    except OSError as error:
        msg = f"{path}: cannot be {what}: {error.strerror or error}"
        raise JournalError(msg) from error


def _header(path: Path, entry: dict[str, Any]) -> Header:
    if entry.get("format") == FORMAT and set(entry) == {field.name for field in fields(Header)}:
        with suppress(ValidationError):
            return TypeAdapter(Header).validate_python(entry)
    msg = (
        f"{path}: no journal of this program's format {FORMAT} "
        f"(format {shown(entry.get('format'))} found)"
    )
    raise JournalError(msg)


def _whole_lines(path: Path) -> tuple[list[dict[str, Any]], int]:
    """Return the entries of all lines that were written to their end, and their bytes together."""
    with _explained(path, "read"):
        content = path.read_bytes()
    entries: list[dict[str, Any]] = []
    whole = 0
    lines = content.splitlines(keepends=True)
    for number, line in enumerate(lines, start=1):
        entry = _entry(line)
        if entry is None:
            if number < len(lines):
                raise _damaged(path, number)
            break
        entries.append(entry)
        whole += len(line)
    return entries, whole


def _entry(line: bytes) -> dict[str, Any] | None:
    if not line.endswith(b"\n"):
        return None
    try:
        entry = json.loads(line)
    except (ValueError, RecursionError):
        return None
    return entry if isinstance(entry, dict) else None


def encode(matrix: FloatArray) -> str:
    """Return the 64-bit floats of a matrix as text."""
    return base64.b64encode(matrix.astype("<f8").tobytes()).decode("ascii")


def decode(text: str, rows: int) -> FloatArray:
    """Return the matrix (rows, …) that `encode` made into text; `ValueError` for anything else."""
    values = np.frombuffer(base64.b64decode(text, validate=True), dtype="<f8")
    return values.reshape(rows, -1).astype(np.float64)


def _damaged(path: Path, line: int) -> JournalError:
    return JournalError(f"{path}: line {line} is damaged. Start again in another folder")
