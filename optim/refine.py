"""Refining the best design of the first goal: covariance matrix adaptation on what can be built.

Breeding keeps a whole front alive and moves its ends slowly: where limits bind, the dimensions of
the smallest design go together, along a ridge that is narrow and has kinks. The evolution strategy
of Hansen & Ostermeier (2001, Evol. Comput. 9:159), here by the library `cma`, learns the direction
of such a ridge. Several of them start from designs that differ, since ridges do, too. Without a
design that meets everything they look for the one that misses least.
"""

from __future__ import annotations

from typing import Any, Final

import numpy as np

from models.conventions import FloatArray
from optim.archive import BoolArray, IntArray, Judged
from optim.progress import Progress
from optim.referee import Referee
from optim.space import DesignSpace

__all__ = ["apart", "ranked", "refine"]

FEWEST: Final = 2
"""Free variables; with less there is no ridge."""

STARTS: Final = 6
GENERATIONS: Final = 40

HALVED: Final = 12
"""Generations after which the better half of the strategies goes on."""

APART: Final = 0.2
"""Share of the range of some variable by which designs are apart."""

DEVIATION: Final = 0.06
"""First standard deviation, as a share of each variable's range."""

STILL: Final = 2e-3
"""Deviation at which a strategy has come to rest."""

MISS: Final = 1.0
"""What a violation of one step costs, as a share of the goal."""

WORTH: Final = 0.3
"""A design that misses by less than so many steps is judged at all frequencies."""


def refine(referee: Referee, *, rng: np.random.Generator, progress: Progress) -> None:
    """Look for the best of the first goal about the best known; the referee's archive holds it.

    Parameters
    ----------
    referee : Referee
        Has judged designs already.
    rng : numpy.random.Generator
        The one source of chance.
    progress : Progress
        Is told after every generation.
    """
    space, known = referee.space, referee.archive.all
    free = ~space.fixed
    if free.sum() < FEWEST:
        return
    starts = apart(known.designs[ranked(known, referee)], space, STARTS)
    scale = _scale(referee)
    low, extent = space.low[free], (space.high - space.low)[free]
    strategies = [_strategy((start[free] - low) / extent, rng) for start in starts]
    with progress.stage(f"refine ({referee.model})", GENERATIONS) as told:
        for generation in range(GENERATIONS):
            if generation == HALVED:
                strategies.sort(key=lambda strategy: float(strategy.best.f))
                strategies = strategies[: (len(strategies) + 1) // 2]
            asked = [strategy.ask() for strategy in strategies]
            shares = np.concatenate(asked)
            designs = np.tile(starts[0], (len(shares), 1))
            designs[:, free] = low + shares * extent
            judged = referee.judge(space.snap(designs), _worth)
            scale = scale or _scale(referee)
            costs = _cost(judged, scale)
            ends = np.cumsum([len(some) for some in asked])
            for strategy, some, end in zip(strategies, asked, ends, strict=True):
                strategy.tell(some, costs[end - len(some) : end].tolist())
            told(referee)
            strategies = [strategy for strategy in strategies if not strategy.stop()]
            if not strategies:
                return


def apart(designs: FloatArray, space: DesignSpace, count: int) -> FloatArray:
    """Return the first `count` designs that are not near one taken before."""
    extent = np.where(space.fixed, 1.0, space.high - space.low)
    taken = designs[:1]
    for design in designs:
        if len(taken) == count:
            break
        if (np.abs(design - taken) > APART * extent).any(axis=1).all():
            taken = np.vstack([taken, design])
    return taken


def ranked(judged: Judged, referee: Referee) -> IntArray:
    """Return the rows of `judged` from the best to the worst."""
    return np.argsort(_cost(judged, _scale(referee)), kind="stable")


def _strategy(start: FloatArray, rng: np.random.Generator) -> Any:
    # Imported here: it takes longer than all else together, and few commands come this far.
    from cma import CMAEvolutionStrategy

    return CMAEvolutionStrategy(
        start,
        DEVIATION,
        {
            "bounds": [0.0, 1.0],
            "randn": lambda *shape: rng.standard_normal(shape),
            "seed": np.nan,  # or it would seed numpy's global generator
            "tolx": STILL,
            "verbose": -9,
        },
    )


def _worth(judged: Judged) -> BoolArray:
    return np.asarray(judged.violations.max(axis=1) < WORTH)


def _scale(referee: Referee) -> float | None:
    """Return the best of the first goal; None while nothing meets everything."""
    front = referee.archive.front.objectives
    return float(np.abs(front[:, 0]).min()) or 1.0 if len(front) else None


def _cost(judged: Judged, scale: float | None) -> FloatArray:
    """Return what is to be minimised, (n,): the first goal and the misses, or the misses alone."""
    if scale is None:
        return judged.total_violation
    return np.asarray(judged.objectives[:, 0] / scale + MISS * judged.total_violation)
