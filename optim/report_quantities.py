"""Everything a report can show of a design as a number: words, unit, decimals, values (n,).

Dimensions in degrees and mm, sizes in the unit of their caps, figures worst over the band, the
smallest margin in its steps (1 dB, 3°, 5 % of a size). A number that is missing is NaN.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np

from models import MODELS, Figures
from models.conventions import FloatArray
from models.geometry import DIMENSIONS
from optim.analysis import FIGURES
from optim.archive import Judged
from optim.margins import MISSING, SIZES, Judge
from optim.requirements import Limit
from optim.result import Result
from optim.tables import DIMENSION_KEYS
from optim.units import to_file

__all__ = ["MASKS", "SIZE_WORDS", "Quantity", "asked_words", "limit_words", "minus", "quantities"]

SIZE_WORDS: Final = {
    "width": ("box width", "mm", 1),
    "height": ("box height", "mm", 1),
    "depth": ("box depth", "mm", 1),
    "frontal_area": ("frontal area", "m²", 4),
    "volume": ("volume of the box", "m³", 4),
    "longest_side": ("longest side of the box", "mm", 1),
    "sheet_area": ("sheet area", "m²", 4),
    "mass": ("mass", "kg", 2),
    "wind_load": ("wind load", "N", 0),
}

MASKS: Final = {
    "mask_h_db": ("excess over the H-plane envelope", "dB", 2),
    "mask_e_db": ("excess over the E-plane envelope", "dB", 2),
}

_OF_A_MATCH: Final = frozenset({"realized_gain_dbi", "reactance_ohm", "vswr"})


@dataclass(frozen=True, kw_only=True, eq=False)
class Quantity:
    """One number of every design.

    Parameters
    ----------
    key : str
        Of a dimension, size or figure.
    group : str
        "dimension", "size", "figure" or "margin".
    words, unit : str
    decimals : int
    values : (n,)
        In `unit`.
    """

    key: str
    group: str
    words: str
    unit: str
    decimals: int
    values: FloatArray

    @property
    def label(self) -> str:
        """Words and unit."""
        return f"{self.words} ({self.unit})" if self.unit else self.words

    def text(self, row: int) -> str:
        """Return the number of one design with its unit, a dash where it is missing."""
        value = self.values[row]
        if not np.isfinite(value):
            return "–"
        gap = "" if self.unit in {"", "°"} else " "
        return f"{minus(f'{value:.{self.decimals}f}')}{gap}{self.unit}"


def minus(number: str) -> str:
    """Return a number as text with a proper minus sign."""
    return number.replace("-", "−")


def quantities(result: Result, judged: Judged) -> list[Quantity]:
    """Return every quantity of `judged` of which a design has a number, in a reader's order."""
    reflectors = result.space.reflectors(judged.designs)
    found = []
    for name in DIMENSIONS:
        words, unit = name.replace("_", " "), "°" if name == "apex_angle" else "mm"
        values = np.array([to_file(name, float(v)) for v in getattr(reflectors, name)])
        found.append(_quantity(DIMENSION_KEYS[name], "dimension", (words, unit, 1), values))
    sizes = Judge(result.requirements).sizes(reflectors)
    for name, about in SIZE_WORDS.items():
        found.append(_quantity(name, "size", about, sizes[name] / SIZES[name]))
    honest = MODELS[result.found.model].gives_match
    masks = {limit.figure for limit in result.requirements.limits} & set(MASKS)
    for name, about in (FIGURES | {key: MASKS[key] for key in sorted(masks)}).items():
        if name in _OF_A_MATCH and not honest:
            continue
        values = judged.worst[:, Figures.names().index(name)]
        found.append(_quantity(name, "figure", about, values))
    for column, goal in enumerate(result.requirements.goals):
        if goal.name == "yield":
            share = -judged.objectives[:, column]
            found.append(_quantity("yield", "figure", ("yield", "", 3), share))
    margin = ("smallest margin", "steps", 2)
    found.append(_quantity("smallest_margin", "margin", margin, judged.smallest_margin))
    return [quantity for quantity in found if np.isfinite(quantity.values).any()]


def limit_words(limit: Limit) -> str:
    """Return what a limit is on, in words."""
    about = (FIGURES | MASKS | SIZE_WORDS).get(limit.figure)
    if limit.figure in MASKS:
        return f"{limit.key[-1].upper()}-plane cut"
    return limit.key.replace("_", " ") if about is None else about[0]


def asked_words(limit: Limit) -> str:
    """Return what a limit asks for, with its unit."""
    if limit.figure in MASKS:
        return "under the envelope"
    unit = (FIGURES | SIZE_WORDS).get(limit.figure, ("", "", 0))[1]
    gap = "" if unit in {"", "°"} else " "
    return f"{'≥' if limit.sense == 'min' else '≤'} {minus(f'{limit.value:g}')}{gap}{unit}"


def _quantity(key: str, group: str, about: tuple[str, str, int], values: FloatArray) -> Quantity:
    words, unit, decimals = about
    known = np.where(np.abs(values) < MISSING * 1e6, values, np.nan)
    return Quantity(key=key, group=group, words=words, unit=unit, decimals=decimals, values=known)
