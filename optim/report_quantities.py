"""Everything a report can show of a design as a number: words, unit, decimals, values (n,).

Dimensions in degrees and mm, sizes in the unit of their caps, figures worst over the band, the
smallest margin in its steps (1 dB, 3°, 5 % of a size). A number that is missing is NaN.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from models import MODELS, Figures
from models.conventions import FloatArray
from models.geometry import DIMENSIONS
from optim.archive import Judged
from optim.margins import MISSING, Judge
from optim.margins import SIZES as IN_SI
from optim.quantities import FIGURES, MASKS, OF_A_MATCH, SIZES, YIELD, About, minus, number
from optim.requirements import Limit
from optim.result import Result
from optim.tables import DIMENSION_KEYS
from optim.units import to_file

__all__ = ["Quantity", "asked_words", "limit_words", "quantities"]


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
        known = np.isfinite(value)
        return number(value, self.decimals) + (_behind(self.unit) if known else "")


def quantities(result: Result, judged: Judged) -> list[Quantity]:
    """Return every quantity of `judged` of which a design has a number, in a reader's order."""
    reflectors = result.space.reflectors(judged.designs)
    found = []
    for name in DIMENSIONS:
        about = About(name.replace("_", " "), "°" if name == "apex_angle" else "mm", 1)
        values = np.array([to_file(name, float(v)) for v in getattr(reflectors, name)])
        found.append(_quantity(DIMENSION_KEYS[name], "dimension", about, values))
    sizes = Judge(result.requirements).sizes(reflectors)
    for name, about in SIZES.items():
        found.append(_quantity(name, "size", about, sizes[name] / IN_SI[name]))
    honest = MODELS[result.found.model].gives_match
    masks = {limit.figure for limit in result.requirements.limits} & set(MASKS)
    for name, about in (FIGURES | {key: MASKS[key] for key in sorted(masks)}).items():
        if name in OF_A_MATCH and not honest:
            continue
        values = judged.worst[:, Figures.names().index(name)]
        found.append(_quantity(name, "figure", about, values))
    for column, goal in enumerate(result.requirements.goals):
        if goal.name == "yield":
            share = -judged.objectives[:, column]
            found.append(_quantity("yield", "figure", YIELD, share))
    margin = About("smallest margin", "steps", 2)
    found.append(_quantity("smallest_margin", "margin", margin, judged.smallest_margin))
    return [quantity for quantity in found if np.isfinite(quantity.values).any()]


def limit_words(limit: Limit) -> str:
    """Return what a limit is on, in words."""
    if limit.figure in MASKS:
        return f"{limit.key[-1].upper()}-plane cut"
    return (FIGURES | SIZES)[limit.figure].words


def asked_words(limit: Limit) -> str:
    """Return what a limit asks for, with its unit."""
    if limit.figure in MASKS:
        return "under the envelope"
    sign, unit = "≥" if limit.sense == "min" else "≤", (FIGURES | SIZES)[limit.figure].unit
    return f"{sign} {minus(f'{limit.value:g}')}{_behind(unit)}"


def _behind(unit: str) -> str:
    """Return a unit as it stands behind a number."""
    return unit if unit in {"", "°"} else f" {unit}"


def _quantity(key: str, group: str, about: About, values: FloatArray) -> Quantity:
    known = np.where(np.abs(values) < MISSING * 1e6, values, np.nan)
    words, unit, decimals, _ = about
    return Quantity(key=key, group=group, words=words, unit=unit, decimals=decimals, values=known)
