"""What lies behind the limits that no design found can meet together: which one to relax, how far.

A door is a limit taken down: the search then makes its violation as small as can be, under all the
others.
"""

from __future__ import annotations

from dataclasses import replace
from itertools import combinations
from typing import Final

import numpy as np

from models.conventions import FloatArray
from optim.archive import Judged
from optim.evolve import evolve
from optim.problem import View, door
from optim.progress import Progress
from optim.recommend import nearest_rows, relaxation_rows
from optim.referee import Referee
from optim.requirements import Requirements
from optim.settle import settled
from optim.space import DesignSpace

__all__ = ["open_doors"]

GENERATIONS: Final = 20
POPULATION: Final = 24
PATIENCE: Final = 6
MOST_DOORS: Final = 6
"""Limits looked behind; two at a time they make 15 doors."""


def open_doors(
    requirements: Requirements,
    scouting: Referee,
    deciding: Referee,
    rng: np.random.Generator,
    progress: Progress,
) -> None:
    """Look behind the limits that are in the way, one at a time, then two at a time.

    In the way is what the nearest designs miss or meet by less than a step of margin. Without a
    limit the ranges derived from it open as well. Pairs are tried only where no single one helps.
    """
    nearest = settled(deciding, nearest_rows)
    misses = nearest.violations[:, : nearest.margins.shape[1]].max(axis=0)
    worst_first = np.argsort(-misses, kind="stable")[:MOST_DOORS]
    in_the_way = [int(limit) for limit in worst_first if misses[limit] > -1.0]
    for together in (1, 2):
        for limits in combinations(sorted(in_the_way), together):
            asked = [deciding.labels[limit] for limit in limits]
            left = tuple(limit for limit in requirements.limits if limit.label not in asked)
            space = DesignSpace.from_requirements(replace(requirements, limits=left))
            start = nearest.designs[:0]
            for referee in dict.fromkeys([scouting, deciding]):
                if not set(asked) <= set(referee.labels):
                    continue
                view = door([referee.labels.index(label) for label in asked])
                start = np.concatenate([start, behind(referee.archive.all, view, POPULATION)])
                evolve(
                    referee,
                    np.unique(start, axis=0),
                    population=POPULATION,
                    generations=GENERATIONS,
                    patience=PATIENCE,
                    rng=rng,
                    progress=progress,
                    view=view,
                    space=space,
                )
                start = behind(referee.archive.all, view, POPULATION)
        opened = settled(deciding, relaxation_rows)
        if len(opened) and (opened.margins[0] < 0.0).sum() <= together:
            return


def behind(judged: Judged, view: View, count: int) -> FloatArray:
    """Return the `count` designs that meet a door's conditions best, then come nearest to it."""
    objectives, others = view(judged)
    return judged.designs[np.lexsort((objectives[:, 0], others))[:count]]
