"""Streams whose reader has gone take no more and stop nothing; what else fails is told."""

from __future__ import annotations

import os
from collections.abc import Iterator
from pathlib import Path
from typing import TextIO

import pytest

from optim.progress import Stderr
from optim.streams import say


@pytest.fixture
def deserted() -> Iterator[TextIO]:
    ours, theirs = os.pipe()
    os.close(ours)
    with os.fdopen(theirs, "w", encoding="utf-8") as stream:
        yield stream


def test_a_deserted_stream_is_silenced(deserted: TextIO) -> None:
    say("one", deserted)
    say("two", deserted)
    deserted.write("three")  # and closing the stream, which writes it, raises nothing
    assert os.fstat(deserted.fileno()).st_rdev == Path(os.devnull).stat().st_rdev


def test_a_stream_that_is_closed_is_passed_over(capfd: pytest.CaptureFixture[str]) -> None:
    say("nothing", None)
    assert capfd.readouterr() == ("", "")


def test_a_full_disk_is_told() -> None:
    with Path("/dev/full").open("w", encoding="utf-8") as stream:
        with pytest.raises(OSError, match="No space left"):
            say("much", stream)
        say("more", stream)
        assert os.fstat(stream.fileno()).st_rdev == Path(os.devnull).stat().st_rdev


def test_messages_nobody_reads_end_in_silence(
    deserted: TextIO, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr("sys.stderr", deserted)
    console = Stderr(stderr=True)
    console.print("one")
    console.print("two")
    assert console.quiet
