"""What is wrong with a file, all of it in one error: file, key, what was given, what is allowed.

Also the one door through which TOML files come in: `read_toml` reads a bounded number of bytes and
turns everything that can go wrong on the way into the same error.
"""

from __future__ import annotations

import hashlib
import json
import re
import reprlib
import tomllib
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Final, NoReturn

__all__ = ["MAX_BYTES", "Fault", "Source", "SpecError", "dotted", "printable", "read_toml", "shown"]

MAX_BYTES: Final = 100_000
"""Largest file read, bytes; a requirements file with every key in it has three thousand."""

MOST_FAULTS: Final = 100
"""Faults printed before the rest is only counted."""

_BARE_KEY: Final = re.compile(r"[A-Za-z0-9_-]+")
_LONG_KEY: Final = re.compile(r"""(?<![\w-])(?:(?:[\w-]+|"[^"\n]*"|'[^'\n]*')[ \t]*\.[ \t]*){40}""")
"""Forty parts of a dotted key; the standard reader takes minutes for ten thousand."""
_short = reprlib.Repr()
_short.maxstring = _short.maxother = _short.maxlong = 60
_short.maxlevel = 3


@dataclass(frozen=True)
class Fault:
    """One fault: `file`, dotted `key` (empty for the file as a whole), `given` and `allowed`."""

    file: str
    key: str
    given: str
    allowed: str

    def __str__(self) -> str:
        """Return the fault as one line."""
        place = f"{self.file}: {self.key}" if self.key else self.file
        return f"{place}: {self.given} given, allowed: {self.allowed}"


class SpecError(Exception):
    """A file that cannot be used; `faults` holds every fault found, `str()` one line each."""

    def __init__(self, faults: Iterable[Fault]) -> None:
        self.faults: tuple[Fault, ...] = tuple(faults)
        super().__init__(self.faults)

    def __str__(self) -> str:
        """Return one line a fault; past a hundred the rest is counted."""
        lines = [str(fault) for fault in self.faults[:MOST_FAULTS]]
        rest = len(self.faults) - MOST_FAULTS
        return "\n".join([*lines, f"… and {rest} more faults"] if rest > 0 else lines)


@dataclass(frozen=True)
class Source:
    """A TOML file as read: its name for messages, its text, its SHA-256 and its content."""

    name: str
    text: str
    sha256: str
    content: dict[str, object]


def shown(value: object) -> str:
    """Return a TOML value as a message shows it: short, on one line, nothing unprintable."""
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, dict):
        return "a table" if value else "an empty table"
    if isinstance(value, int) and abs(value) >= 10**40:
        return "an integer of more than 40 digits"
    return _short.repr(value)


def dotted(parts: Sequence[int | str]) -> str:
    """Return a key path as TOML writes it, list positions in brackets: `goals.minimise[0]`."""
    path = ""
    for part in parts:
        if isinstance(part, int):
            path += f"[{part}]"
            continue
        key = part if _BARE_KEY.fullmatch(part) else json.dumps(part)
        key = key if len(key) <= 60 else key[:59] + "…"
        path += f".{key}" if path else key
    return path


def read_toml(path: Path) -> Source:
    """Return the TOML file at `path`.

    Raises
    ------
    SpecError
        For a file that cannot be opened, is too long, is not UTF-8 or is not TOML.
    """
    name = printable(str(path))

    def refuse(given: str, allowed: str) -> NoReturn:
        raise SpecError([Fault(name, "", given, allowed)])

    try:
        with path.open("rb") as stream:
            data = stream.read(MAX_BYTES + 1)
    except FileNotFoundError:
        refuse("no file", "a TOML file that exists")
    except IsADirectoryError:
        refuse("a folder", "a TOML file")
    except PermissionError:
        refuse("a file that may not be read", "a TOML file with read permission")
    except (OSError, ValueError) as error:
        refuse(f"an unreadable file ({error})", "a TOML file that can be read")
    if len(data) > MAX_BYTES:
        refuse(f"more than {MAX_BYTES} bytes", f"a TOML file of at most {MAX_BYTES} bytes")
    try:
        text = data.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        where = f"bytes that are not UTF-8 (at byte {error.start})"
        refuse(where, "a TOML file, which is UTF-8 text")
    if _LONG_KEY.search(text):
        refuse("a key of forty parts or more", "keys of two or three parts, table.key")
    try:
        content = tomllib.loads(text)
    except tomllib.TOMLDecodeError as error:
        refuse(f"text that is not TOML ({printable(str(error))})", "TOML")
    except (ValueError, RecursionError):
        reason = "numbers too long or brackets too deep to read"
        refuse(reason, "TOML a person would write")
    return Source(name, text, hashlib.sha256(data).hexdigest(), content)


def printable(text: str) -> str:
    """Return `text` on one line, with what cannot be printed written as Python would."""
    return "".join(c if c.isprintable() else ascii(c)[1:-1] for c in text)
