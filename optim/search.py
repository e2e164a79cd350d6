"""The search: scout with a cheap model, prove with a true one on a finer grid.

The scout's model looks at the whole space. What it finds about the requirements, those tightened
and those relaxed by a step of margin included, is handed to the proving model, and the search goes
on there for as long as the front moves. What is on the front holds on a band grid twice as fine as
asked for. Where nothing meets the requirements, each limit in the way is taken down in turn, to see
what lies behind it.
"""

from __future__ import annotations

from dataclasses import dataclass, field, replace
from typing import Final

import numpy as np
from scipy.stats import qmc

from models import MODELS
from models.conventions import FloatArray
from optim.archive import Archive, Judged, diverse, nondominated
from optim.doors import open_doors
from optim.evaluate import Evaluator
from optim.evolve import evolve
from optim.journal import Journal
from optim.margins import Judge
from optim.precheck import blind_spots
from optim.progress import Progress
from optim.recommend import front_rows, nearest_rows, relaxation_rows, sorted_rows
from optim.referee import Referee
from optim.refine import apart, ranked, refine
from optim.requirements import Goal, Requirements
from optim.robust import bred, decide, reach, tolerated
from optim.settle import settled
from optim.space import DesignSpace
from optim.tolerance import Builds, Spread

__all__ = ["Found", "scouted", "search"]

FIRST_SAMPLE: Final = 4
"""Designs in the scout's first generation, as a multiple of the population."""

SCOUT_PATIENCE: Final = 12
PROVE_PATIENCE: Final = 8
"""Generations within which a front must move for the search to go on."""

PROVE_GENERATIONS: Final = 10
LEVELS: Final = (-1.0, -0.5, 0.0, 0.5, 1.0)
"""Violations, in steps of margin, about which designs are handed from scout to prover."""

SCATTERED: Final = 48
"""Designs handed over that lie far from each other: a scout's error is not the same everywhere."""


@dataclass(frozen=True, kw_only=True, eq=False)
class Found:
    """What a search found.

    Parameters
    ----------
    front : Judged
        Designs that hold on the fine grid and that none of their kind beats, worst values over
        the fine grid; empty if nothing meets the requirements.
    nearest : Judged
        If nothing does: the designs that miss least, each by other limits.
    relaxed : Judged
        And a design for every limit that, relaxed alone, would let it in; if no limit does so
        alone, the one design that needs the fewest relaxed.
    model : str
        That decided.
    evaluations : dict
        Designs judged by each model.
    spreads : dict
        How antennas built from a design spread, by the bytes of its row; where tolerances are
        given, of every design that is recommended, or nearest for want of yield.
    """

    front: Judged
    nearest: Judged
    relaxed: Judged
    model: str
    evaluations: dict[str, int]
    spreads: dict[bytes, Spread] = field(default_factory=dict)


def search(
    requirements: Requirements,
    space: DesignSpace,
    *,
    scout: Evaluator,
    prove: Evaluator | None,
    journal: Journal,
    progress: Progress,
) -> Found:
    """Return what the search finds; the same for the same seed, whatever the number of workers.

    Parameters
    ----------
    requirements : Requirements
    space : DesignSpace
    scout, prove : Evaluator
        The two models; without a second the scout decides.
    journal : Journal
        Gives answers while it has them and takes every new one.
    progress : Progress
        Is told after every generation.
    """
    asked, requirements = requirements, bred(requirements)
    run, judge = requirements.run, Judge(requirements)
    rng = np.random.default_rng(run.seed)
    first, further, finer = requirements.band.split()
    rest = np.concatenate([further, finer])
    decider = prove or scout
    scouting = deciding = Referee("scout", space, judge, scout, first, journal, further=rest)
    if prove is not None:
        scout_judge = Judge(scouted(requirements, space, scout.model))
        scouting = Referee("scout", space, scout_judge, scout, first, journal, further=further)
        deciding = Referee("prove", space, judge, prove, first, journal, further=rest)
    evolve(
        scouting,
        first_sample(space, FIRST_SAMPLE * run.population, rng),
        population=run.population,
        generations=run.generations,
        patience=SCOUT_PATIENCE,
        rng=rng,
        progress=progress,
    )
    builds = Builds(asked, space, decider, journal) if tolerated(asked) else None
    if prove is not None:
        if builds is not None and "yield" in {goal.name for goal in requirements.goals}:
            rules = Judge(requirements, reach(scouting.archive.all, builds))
            deciding = Referee("prove", space, rules, prove, first, journal, further=rest)
        evolve(
            deciding,
            handed_over(scouting, run.population),
            population=max(run.population // 2, 4),
            generations=PROVE_GENERATIONS,
            patience=PROVE_PATIENCE,
            rng=rng,
            progress=progress,
        )
    refine(deciding, rng=rng, progress=progress)
    front = settled(deciding, front_rows)
    if not len(front):
        open_doors(requirements, scouting, deciding, rng, progress)
        front = settled(deciding, front_rows)
    nearest = relaxed = front[:0]
    if not len(front):
        nearest = settled(deciding, nearest_rows)
        relaxed = settled(deciding, relaxation_rows)
    evaluations: dict[str, int] = {}
    for stage in dict.fromkeys([scouting, deciding]):
        evaluations[stage.model] = evaluations.get(stage.model, 0) + len(stage.archive)
    spreads: dict[bytes, Spread] = {}
    if builds is not None:
        front, nearest, relaxed, spreads = decide(
            asked, space, builds, front=front, nearest=nearest, relaxed=relaxed
        )
        evaluations[decider.model] += builds.solves
    return Found(
        front=front[sorted_rows(front)],
        nearest=nearest,
        relaxed=relaxed,
        model=decider.model,
        evaluations=evaluations,
        spreads=spreads,
    )


def first_sample(space: DesignSpace, count: int, rng: np.random.Generator) -> FloatArray:
    """Return designs that fill the space evenly (scrambled Sobol points), (count, n_var)."""
    points = qmc.Sobol(space.low.size, rng=rng).random_base2(int(np.ceil(np.log2(count))))
    return np.asarray(space.low + (space.high - space.low) * points[:count])


def handed_over(scouting: Referee, count: int) -> FloatArray:
    """Return designs for the prover: `count` about the limits, and the best of each region."""
    known = scouting.archive.all
    best = apart(known.designs[ranked(known, scouting)], scouting.space, SCATTERED)
    return np.unique(np.vstack([about_the_limits(scouting.archive, count), best]), axis=0)


def about_the_limits(archive: Archive, count: int) -> FloatArray:
    """Return `count` designs for the prover: the fronts with the limits moved both ways.

    The models differ by some share of a step of margin, so the prover's front is the scout's for
    requirements a little harder or easier than those that were asked for.
    """
    judged = archive.all
    miss = judged.violations.max(axis=1, initial=-np.inf)
    chosen: set[int] = set()
    for level in LEVELS:
        rows = np.flatnonzero(miss <= level)
        chosen.update(rows[nondominated(judged.objectives[rows])].tolist())
    rows = np.array(sorted(chosen), dtype=np.intp)
    rows = rows[diverse(judged.objectives[rows], count)]
    if len(rows) < count:
        nearest = np.argsort(judged.total_violation, kind="stable")
        rows = np.concatenate([rows, nearest[~np.isin(nearest, rows)][: count - len(rows)]])
    return judged.designs[rows]


def scouted(requirements: Requirements, space: DesignSpace, model: str) -> Requirements:
    """Return the requirements without what the scout's `model` cannot judge."""
    blind = blind_spots(requirements, space, model)
    goals = requirements.goals
    if not MODELS[model].gives_match:
        gain = (replace(g, name="gain") if g.name == "realized_gain" else g for g in goals)
        goals = tuple(dict.fromkeys(goal for goal in gain if goal.name != "vswr"))
    return replace(
        requirements,
        limits=tuple(limit for limit in requirements.limits if limit.label not in blind),
        goals=goals or (Goal("frontal_area", "min"),),
    )
