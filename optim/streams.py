"""Writing to stdout and stderr whose reader may have gone: the work goes on, to its own end."""

from __future__ import annotations

import os
from typing import TextIO

__all__ = ["say", "silence"]


def say(text: str, stream: TextIO | None) -> None:
    """Write a line of text; nothing where the stream is closed or its reader has seen enough.

    Raises
    ------
    OSError
        Where it cannot be written for any other reason, as on a full disk.
    """
    if stream is None:
        return
    try:
        stream.write(f"{text}\n")
        stream.flush()
    except BrokenPipeError:
        silence(stream)
    except OSError:
        silence(stream)
        raise


def silence(stream: TextIO) -> None:
    """Let all that is still to be written to `stream` go nowhere."""
    # What the stream holds back is written when the program ends, and must find a place.
    nowhere = os.open(os.devnull, os.O_WRONLY)
    os.dup2(nowhere, stream.fileno())
    os.close(nowhere)
