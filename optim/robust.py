"""A search for antennas that can be built: yield (0 to 1) as a goal or as a condition.

A yield takes dozens of solves, so the search breeds for what it follows from: the smallest margin,
each margin measured, once a second model proves, by what the tolerances take of it at one design
near the requirements; a model that decides alone does as well with margins in their steps. The
designs of that front are then studied, and their yields decide.
"""

from __future__ import annotations

from dataclasses import replace
from typing import Final

import numpy as np

from models.conventions import FloatArray
from optim.archive import Judged, diverse
from optim.recommend import MOST_NEAREST, front_rows, roles, sorted_rows
from optim.requirements import Goal, Requirements
from optim.space import DesignSpace
from optim.tolerance import Builds, Spread

__all__ = ["bred", "decide", "reach", "tolerated"]

YIELD: Final = "yield"
MOST_STUDIED: Final = 96
"""Designs of a front whose yield is found."""


def tolerated(requirements: Requirements) -> bool:
    """Return whether anything may deviate."""
    return any(value > 0.0 for value in requirements.tolerance.values())


def bred(requirements: Requirements) -> Requirements:
    """Return the requirements as they are bred for: with a goal for a least yield asked for."""
    names = [goal.name for goal in requirements.goals]
    if not requirements.min_yield or YIELD in names:
        return requirements
    return replace(requirements, goals=(*requirements.goals, Goal(YIELD, "max")))


def reach(judged: Judged, builds: Builds) -> FloatArray:
    """Return what tolerances take of each margin, in its steps, at the design that misses least."""
    nearest = int(np.argmin(judged.total_violation))
    return builds.spreads(judged.designs[[nearest]])[0].reach


def decide(
    asked: Requirements,
    space: DesignSpace,
    builds: Builds,
    *,
    front: Judged,
    nearest: Judged,
    relaxed: Judged,
) -> tuple[Judged, Judged, Judged, dict[bytes, Spread]]:
    """Return what a search bred for `asked`, decided by yield, with the objectives asked for.

    Parameters
    ----------
    asked : Requirements
    space : DesignSpace
    builds : Builds
    front, nearest, relaxed : Judged
        What was found; objectives as bred.

    Returns
    -------
    front : Judged
        Designs with yield enough that none of their kind beats.
    nearest : Judged
        As given; if the yield alone is missing, the designs that have most of it.
    relaxed : Judged
        As given.
    spreads : dict
        By the bytes of a design's row: of the recommended designs, or of the nearest for want
        of yield.
    """
    names = [goal.name for goal in bred(asked).goals]
    shown = front[:0]
    if YIELD in names:
        front = with_yields(front[diverse(front.objectives, MOST_STUDIED)], asked, builds)
        yields = _yields(front, builds)
        best = np.argsort(-yields, kind="stable")[:MOST_NEAREST]
        short, front = front[best], front[yields >= (asked.min_yield or 0.0)]
        front = front[front_rows(front)]
        nearest, relaxed = (with_yields(judged, asked, builds) for judged in (nearest, relaxed))
        if not len(front) and len(short):
            nearest = shown = short
    if len(front):
        # Of equals the first one has a role, so the order must be the final one.
        front = front[sorted_rows(front)]
        area = space.reflectors(front.designs).frontal_area
        shown = front[list(roles(front, asked.goals, area).values())]
    spreads = dict(zip(shown.keys, builds.spreads(shown.designs), strict=True))
    return front, nearest, relaxed, spreads


def with_yields(judged: Judged, asked: Requirements, builds: Builds) -> Judged:
    """Return designs bred for `asked` with the objectives asked for, yields found if among them."""
    names = [goal.name for goal in asked.goals]
    objectives = judged.objectives[:, : len(names)].copy()
    if YIELD in names:
        objectives[:, names.index(YIELD)] = -_yields(judged, builds)
    return replace(judged, objectives=objectives)


def _yields(judged: Judged, builds: Builds) -> FloatArray:
    return np.array([spread.expected for spread in builds.spreads(judged.designs)])
