"""The search as pymoo sees it: variables in SI between bounds, only what can be built, no repeats.

The algorithm is NSGA-II (Deb, Pratap, Agarwal & Meyarivan 2002, IEEE Trans. Evol. Comput. 6:182):
whoever meets the conditions beats whoever does not, among the rest less violation wins, and among
the feasible the Pareto rank and then the emptier neighbourhood.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import Any, Final

import numpy as np
from pymoo.algorithms.moo.nsga2 import NSGA2
from pymoo.core.duplicate import DuplicateElimination
from pymoo.core.population import Population
from pymoo.core.problem import Problem
from pymoo.core.repair import Repair
from pymoo.core.termination import NoTermination
from pymoo.operators.crossover.sbx import SBX
from pymoo.operators.mutation.pm import PM
from pymoo.operators.survival.rank_and_crowding import RankAndCrowding

from models.conventions import FloatArray
from optim.archive import Archive, Judged
from optim.space import DesignSpace

__all__ = ["View", "door", "genetic", "whole"]

View = Callable[[Judged], tuple[FloatArray, FloatArray]]
"""What a search looks at: objectives (n, n_goals) and total violation (n,) of judged designs."""

SPREAD: Final = 8.0
"""Distribution index of crossover and mutation: the usual 15 to 20 snap back onto the parents."""

FEW_GOALS: Final = 2
"""Up to so many goals the crowding distance spreads a front well; past it, nearest neighbours."""


def whole(judged: Judged) -> tuple[FloatArray, FloatArray]:
    """View the goals under all conditions."""
    return judged.objectives, judged.total_violation


def door(limits: list[int]) -> View:
    """View the violation of some limits (columns) as the goal, under all other conditions."""

    def view(judged: Judged) -> tuple[FloatArray, FloatArray]:
        violated = np.maximum(judged.violations, 0.0)
        behind = violated[:, limits].sum(axis=1)
        return behind[:, None], np.delete(violated, limits, axis=1).sum(axis=1)

    return view


class DesignProblem(Problem):  # type: ignore[misc]
    """Bounds and counts; designs are judged outside. The one condition is the total violation."""

    def __init__(self, space: DesignSpace, n_goals: int) -> None:
        super().__init__(
            n_var=space.low.size,
            n_obj=n_goals,
            n_ieq_constr=1,
            xl=space.low,
            xu=space.high,
        )


class Buildable(Repair):  # type: ignore[misc]
    """Snap every offspring to what can be built."""

    def __init__(self, space: DesignSpace) -> None:
        super().__init__()
        self._space = space

    def _do(self, _problem: Problem, designs: FloatArray, **_: Any) -> FloatArray:
        return self._space.snap(designs)


class Unseen(DuplicateElimination):  # type: ignore[misc]
    """Keep offspring that occur once and have never been judged."""

    def __init__(self, archive: Archive) -> None:
        super().__init__()
        self._archive = archive

    def do(self, population: Population, *others: Population, **_: Any) -> Population:
        """Return what is new in `population`; the first population may hold judged designs."""
        seen = {row.tobytes() for other in others for row in other.get("X")}
        kept = []
        for i, row in enumerate(population.get("X")):
            key = row.tobytes()
            if key not in seen and not (others and key in self._archive):
                kept.append(i)
            seen.add(key)
        return population[kept]


def genetic(
    space: DesignSpace,
    archive: Archive,
    start: FloatArray,
    *,
    population: int,
    n_goals: int,
    rng: np.random.Generator,
) -> NSGA2:
    """Return the algorithm, ready to be asked for its first generation.

    Parameters
    ----------
    space : DesignSpace
    archive : Archive
        Of the model that will judge; what is in it is not asked for again, the first time apart.
    start : (n_start, n_var)
        The first generation, of any length.
    population : int
        Designs a generation.
    n_goals : int
        Number of objectives of the view.
    rng : numpy.random.Generator
        The one source of chance.
    """
    algorithm = NSGA2(
        pop_size=population,
        sampling=start,
        crossover=SBX(eta=SPREAD, prob=0.9),
        mutation=PM(eta=SPREAD),
        survival=RankAndCrowding(crowding_func="cd" if n_goals <= FEW_GOALS else "mnn"),
        repair=Buildable(space),
        eliminate_duplicates=Unseen(archive),
    )
    problem = DesignProblem(space, n_goals)
    algorithm.setup(problem, seed=rng, termination=NoTermination())
    return algorithm
