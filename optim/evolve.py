"""Breeding designs: ask the genetic algorithm, evaluate, record, tell, until nothing moves."""

from __future__ import annotations

from collections import deque
from typing import Final

import numpy as np

from models.conventions import FloatArray
from optim.archive import Archive, nondominated
from optim.problem import View, genetic, whole
from optim.progress import Progress
from optim.referee import Referee
from optim.space import DesignSpace

__all__ = ["Standstill", "advance", "evolve", "standing"]

MOVED: Final = 0.01
"""A front has moved if a design on it is ahead of all before by this share of its extent."""


def evolve(
    referee: Referee,
    start: FloatArray,
    *,
    population: int,
    generations: int,
    rng: np.random.Generator,
    progress: Progress,
    patience: int | None = None,
    view: View = whole,
    space: DesignSpace | None = None,
) -> None:
    """Let designs breed and be judged by `referee`, whose archive holds the outcome.

    Parameters
    ----------
    referee : Referee
    start : (n_start, n_var)
        The first generation.
    population, generations : int
        Designs a generation, and the most generations after the first.
    rng : numpy.random.Generator
    progress : Progress
    patience : int, optional
        Stop after so many generations in which the front did not move; None goes on to the end.
    view : View
        Objectives and conditions of this search.
    space : DesignSpace, optional
        Where to breed, if not in the referee's.
    """
    rule = Standstill(patience or generations + 1)
    algorithm = genetic(
        space or referee.space,
        referee.archive,
        start,
        population=population,
        n_goals=view(referee.archive.all)[0].shape[1],
        rng=rng,
    )
    holds = None if view is whole else lambda some: view(some)[1] <= 0.0
    with progress.stage(f"{referee.stage} ({referee.model})", generations + 1) as told:
        for _ in range(generations + 1):
            asked = algorithm.ask()
            if asked is None:
                return
            judged = referee.judge(asked.get("X"), holds)
            objectives, violation = view(judged)
            asked.set("F", objectives, "G", violation[:, None])
            algorithm.tell(infills=asked)
            told(referee)
            if rule.reached(*standing(referee.archive, view)):
                return


class Standstill:
    """Whether a search has stopped to move for `patience` generations.

    While nothing is feasible, what must move is the least violation.
    """

    def __init__(self, patience: int) -> None:
        self._fronts: deque[FloatArray] = deque(maxlen=patience + 1)
        self._misses: deque[float] = deque(maxlen=patience + 1)

    def reached(self, front: FloatArray, miss: float) -> bool:
        """Return whether it stands still, after one more generation.

        Parameters
        ----------
        front : (n, n_goals)
            Objectives of what nothing feasible beats.
        miss : float
            Least total violation.
        """
        self._fronts.append(front)
        self._misses.append(miss)
        if len(self._fronts) < (self._fronts.maxlen or 0):
            return False
        if not len(front):
            return miss > (1.0 - MOVED) * self._misses[0]
        return advance(self._fronts[0], front) < MOVED


def standing(archive: Archive, view: View) -> tuple[FloatArray, float]:
    """Return the objectives of the front and the least total violation, as `view` has them."""
    if view is whole:
        return archive.front.objectives, archive.least_violation
    objectives, violation = view(archive.all)
    feasible = objectives[violation <= 0.0]
    return feasible[nondominated(feasible)], float(violation.min())


def advance(before: FloatArray, now: FloatArray) -> float:
    """Return how far a front has moved, as a share of its extent.

    Parameters
    ----------
    before, now : (n, n_goals)
        Objectives, to be minimised.

    Returns
    -------
    float
        The least shift of all of `before` that leaves no design of `now` ahead (the additive
        ε-indicator of Zitzler et al. 2003); infinite where there was no front before.
    """
    if not len(before):
        return np.inf
    extent = np.ptp(now, axis=0)
    scale = np.where(extent > 0.0, extent, np.maximum(np.abs(now[0]), 1e-12))
    ahead = ((before[:, None, :] - now[None, :, :]) / scale).max(axis=2)
    return float(ahead.min(axis=0).max())
