"""TOML text of plain values: what `tomllib` reads, written so that it reads back the same."""

from __future__ import annotations

import datetime
import re
from collections.abc import Mapping
from typing import Final

__all__ = ["document", "quoted", "value_text"]

_BARE_KEY: Final = re.compile(r"[A-Za-z0-9_-]+")
_ESCAPES: Final = {"\\": "\\\\", '"': '\\"'}


def document(content: Mapping[str, object]) -> str:
    """Return a file: plain keys first, then a section a table; what lies deeper is inline."""
    tables = {key: value for key, value in content.items() if isinstance(value, Mapping)}
    lines = [
        f"{key_text(key)} = {value_text(value)}"
        for key, value in content.items()
        if key not in tables
    ]
    for name, table in tables.items():
        lines += ["", f"[{key_text(name)}]"]
        lines += [f"{key_text(key)} = {value_text(value)}" for key, value in table.items()]
    return "\n".join(lines) + "\n"


def value_text(value: object) -> str:
    """Return a value on one line.

    Raises
    ------
    TypeError
        For what TOML has no word for.
    """
    match value:
        case bool():
            return "true" if value else "false"
        case int() | float():
            return repr(value)
        case str():
            return quoted(value)
        case datetime.datetime() | datetime.date() | datetime.time():
            return value.isoformat()
        case list() | tuple():
            return "[" + ", ".join(map(value_text, value)) + "]"
        case Mapping():
            pairs = (f"{key_text(str(key))} = {value_text(inner)}" for key, inner in value.items())
            return "{ " + ", ".join(pairs) + " }" if value else "{}"
    msg = f"no TOML for {type(value).__name__}"
    raise TypeError(msg)


def key_text(key: str) -> str:
    """Return a key as it stands before an equals sign or in brackets."""
    return key if _BARE_KEY.fullmatch(key) else quoted(key)


def quoted(text: str) -> str:
    """Return `text` as a TOML basic string."""
    escaped = (
        f"\\u{ord(c):04x}" if ord(c) < 32 or ord(c) == 127 else _ESCAPES.get(c, c) for c in text
    )
    return '"' + "".join(escaped) + '"'
