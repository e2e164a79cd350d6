"""Which designs to put before the reader: of a front that exists, or nearest to one that does not.

Every function picks rows of judged designs. Margins are compared in their steps (1 dB, 3°, 5 % of a
size), so that decibels and millimetres can stand side by side.
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import Final

import numpy as np

from models.conventions import FloatArray
from optim.archive import IntArray, Judged, diverse, nondominated
from optim.margins import MISSING
from optim.requirements import Goal, Limit

__all__ = [
    "MOST_NEAREST",
    "MOST_ROWS",
    "binding_limits",
    "front_rows",
    "nearest_rows",
    "relaxation_rows",
    "relaxed_value",
    "roles",
    "sorted_rows",
]

MOST_ROWS: Final = 100
"""Designs kept of a front."""

MOST_NEAREST: Final = 3
"""Designs shown where none meets everything."""

BINDING: Final = 0.1
"""A limit met by less than this share of a step of margin binds."""


def front_rows(judged: Judged) -> IntArray:
    """Return the feasible rows that none of their kind beats, at most `MOST_ROWS`, spread out."""
    rows = np.flatnonzero(judged.feasible)
    rows = rows[nondominated(judged.objectives[rows])]
    return np.asarray(rows[diverse(judged.objectives[rows], MOST_ROWS)])


def sorted_rows(judged: Judged) -> IntArray:
    """Return all rows by their goals, first goal first, then by their dimensions."""
    return np.lexsort(np.hstack([judged.objectives, judged.designs]).T[::-1])


def roles(front: Judged, goals: Sequence[Goal], frontal_area: FloatArray) -> dict[str, int]:
    """Return the row of each role; a role whose design has one already is left out.

    Parameters
    ----------
    front : Judged
        n designs, at least one.
    goals : sequence of Goal
        Of the objectives.
    frontal_area : (n,)
        m²; it ranks where no goal is to be minimised.

    Returns
    -------
    dict
        "smallest": least of the first goal to be minimised. "balanced": nearest to the best of all
        goals at once, each as a share of its extent over the front. "most_margin": whose smallest
        margin is largest.
    """
    small = [i for i, goal in enumerate(goals) if goal.sense == "min"]
    size = front.objectives[:, small[0]] if small else frontal_area
    low = front.objectives.min(axis=0)
    extent = front.objectives.max(axis=0) - low
    share = (front.objectives - low) / np.where(extent > 0.0, extent, 1.0)
    picks = {
        "smallest": int(size.argmin()),
        "balanced": int((share**2).sum(axis=1).argmin()),
        "most_margin": int(front.smallest_margin.argmax()),
    }
    taken: dict[str, int] = {}
    for role, row in picks.items():
        if row not in taken.values():
            taken[role] = row
    return taken


def nearest_rows(judged: Judged) -> IntArray:
    """Return the rows that miss least in all, each for another set of violated conditions."""
    order = np.argsort(judged.total_violation, kind="stable")
    sets: dict[bytes, int] = {}
    for row in order:
        sets.setdefault((judged.violations[row] > 0.0).tobytes(), int(row))
    return np.array(list(sets.values())[:MOST_NEAREST], dtype=np.intp)


def relaxation_rows(judged: Judged) -> IntArray:
    """Return the row for every limit that, relaxed alone, would let a design in; nearest first.

    If no limit does so alone, the one row that needs the fewest limits relaxed, then the least in
    all. Empty if the guards or figures that no model gives stand in the way everywhere.
    """
    n_limits = judged.margins.shape[1]
    violated = judged.violations > 0.0
    possible = ~violated[:, n_limits:].any(axis=1) & (judged.violations < MISSING).all(axis=1)
    count = np.where(possible & violated.any(axis=1), violated.sum(axis=1), n_limits + 1)
    fewest = int(count.min(initial=n_limits + 1))
    if fewest > n_limits:
        return np.empty(0, dtype=np.intp)
    rows = np.flatnonzero(count == fewest)
    rows = rows[np.argsort(judged.total_violation[rows], kind="stable")]
    if fewest > 1:
        return rows[:1]
    first: dict[int, int] = {}
    for row in rows:
        first.setdefault(int(violated[row].argmax()), int(row))
    return np.array(list(first.values()), dtype=np.intp)


def binding_limits(judged: Judged) -> IntArray:
    """Return the limits (columns of margins) that some of these designs miss or barely meet."""
    return np.flatnonzero((judged.violations[:, : judged.margins.shape[1]] > -BINDING).any(axis=0))


def relaxed_value(limit: Limit, margin: float) -> float:
    """Return the value of `limit` at which a `margin` (in its unit, below 0) is met.

    Three significant digits, rounded to the easy side.
    """
    value = limit.at(margin)
    if value == 0.0:
        return value
    digits = 2 - int(np.floor(np.log10(abs(value))))
    rounded = np.floor if limit.sense == "min" else np.ceil
    return float(round(rounded(round(value * 10.0**digits, 6)) * 10.0**-digits, digits + 1))
