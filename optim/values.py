"""What a single value in a TOML file may be: numbers, ranges, choices, text, envelopes.

Each is a validator for pydantic that refuses with the text a reader needs: what is allowed instead.
"""

from __future__ import annotations

import difflib
import math
import unicodedata
from collections.abc import Iterable
from pathlib import Path
from typing import Final, NoReturn

from pydantic import BeforeValidator
from pydantic_core import PydanticCustomError

from optim.faults import printable, shown

__all__ = ["choice", "count", "mask", "near_miss", "number", "span", "title", "title_of"]

MOST_TITLE: Final = 200
"""Characters of a title."""


def _refuse(allowed: str) -> NoReturn:
    kind: Final = "refused"
    raise PydanticCustomError(kind, "{allowed}", {"allowed": allowed})


def _number_in(value: object, low: float, high: float) -> float | None:
    """Return `value` as a float if it is a finite number from `low` to `high`."""
    if isinstance(value, bool) or not isinstance(value, int | float):
        return None
    return float(value) if low <= value <= high and math.isfinite(value) else None


def number(low: float, high: float, remark: str = "") -> BeforeValidator:
    """Allow a finite number from `low` to `high`."""
    allowed = f"a number from {low:g} to {high:g}{remark}"

    def check(value: object) -> float:
        checked = _number_in(value, low, high)
        if checked is None:
            _refuse(allowed)
        return checked

    return BeforeValidator(check)


def count(low: int, high: int) -> BeforeValidator:
    """Allow a whole number from `low` to `high`."""

    def check(value: object) -> int:
        if isinstance(value, bool) or not isinstance(value, int) or not low <= value <= high:
            _refuse(f"a whole number from {low} to {high}")
        return value

    return BeforeValidator(check)


def span(low: float, high: float) -> BeforeValidator:
    """Allow `[low, high]` or one number, which fixes the variable, within `low` to `high`."""
    bounds = f"{low:g} to {high:g}"

    def check(value: object) -> tuple[float, float]:
        pair = value if isinstance(value, list) else [value, value]
        ends = [_number_in(end, low, high) for end in pair]
        if len(ends) != 2 or ends[0] is None or ends[1] is None:
            _refuse(f"[low, high] or one number, within {bounds}")
        if ends[0] > ends[1]:
            _refuse(f"[low, high] with low not above high, within {bounds}")
        return ends[0], ends[1]

    return BeforeValidator(check)


def title(value: object) -> str:
    """Allow one line of text."""
    if isinstance(value, str) and len(value) <= MOST_TITLE and not any(map(_controls, value)):
        return value
    _refuse(f"text on one line of at most {MOST_TITLE} characters")


def title_of(path: Path) -> str:
    """Return what a file without a title is called: its name, as a title that is allowed."""
    return printable(path.stem)[:MOST_TITLE].strip() or "untitled"


def mask(value: object) -> tuple[tuple[float, float], ...]:
    """Allow an envelope: pairs of angle (deg) and level (dB), angles rising, twice for a step."""
    shape = "two to 200 pairs [degrees off boresight from 0 to 180, dB from -200 to 100]"
    if not isinstance(value, list) or not 2 <= len(value) <= 200:
        _refuse(shape)
    points = []
    for place, pair in enumerate(value):
        numbers = pair if isinstance(pair, list) and len(pair) == 2 else [None, None]
        angle, level = _number_in(numbers[0], 0.0, 180.0), _number_in(numbers[1], -200.0, 100.0)
        if angle is None or level is None:
            _refuse(f"{shape}; the pair at [{place}] is {shown(pair)}")
        points.append((angle, level))
    angles = [angle for angle, _ in points]
    if angles != sorted(angles) or any(angles.count(angle) > 2 for angle in angles):
        _refuse(f"{shape}, in rising order of angle (an angle given twice is a step)")
    if angles[0] == angles[-1]:
        _refuse(f"{shape}, over more than one angle")
    return tuple(points)


def choice(*names: str) -> BeforeValidator:
    """Allow one of `names`; a near miss is told which one was probably meant."""

    def check(value: object) -> str:
        if isinstance(value, str) and value in names:
            return value
        _refuse("; ".join([*near_miss(value, names), "one of " + ", ".join(names)]))

    return BeforeValidator(check)


def near_miss(value: object, names: Iterable[str]) -> list[str]:
    """Return the question whether the nearest of `names` was meant, or nothing."""
    near = difflib.get_close_matches(str(value)[:60], list(names), n=1)
    return [f"did you mean {near[0]}?"] if near else []


def _controls(character: str) -> bool:
    return unicodedata.category(character) in {"Cc", "Cs", "Zl", "Zp"}
