"""How the figures move with the dimensions and over the band, and what each requirement costs.

A short search finds designs to start from (or takes those of a finished search of the same
requirements), then each limit is moved and searched about, then maps are drawn through the balanced
design. One model judges everything; what it is, and at how many frequencies, is said on every
picture. Sizes are those of the first size among the goals, frontal area if there is none.
"""

from __future__ import annotations

import csv
import errno
import json
import os
from collections.abc import Iterator
from contextlib import suppress
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Final

import numpy as np
from joblib import cpu_count

from models import Figures
from models.conventions import FloatArray
from optim.archive import Judged, diverse
from optim.cluster import connected
from optim.evaluate import Evaluator
from optim.evolve import evolve
from optim.faults import SpecError
from optim.margins import SIZES, Judge
from optim.progress import Progress
from optim.recommend import front_rows, nearest_rows, roles, sorted_rows
from optim.referee import Referee
from optim.requirements import Goal, Requirements, read_requirements
from optim.run import DEFAULT_FOLDER, unjudged
from optim.search import FIRST_SAMPLE, first_sample
from optim.space import DesignSpace
from optim.trade_maps import POINTS, Map, chosen_pairs, map_of
from optim.trade_prices import Price, costliest, prices
from optim.units import FILE_KEYS, VARIABLES, from_file

__all__ = ["Options", "Trade", "trade"]

POPULATION: Final = 40
GENERATIONS: Final = 20
PATIENCE: Final = 8
MOST_FREQUENCIES: Final = 5
"""A wide band is looked at at so many frequencies."""

BAND_FREQUENCIES: Final = 9
"""Frequencies of the curves over the band."""

MOST_SHOWN: Final = 5
"""Designs in the curves over the band."""


@dataclass(frozen=True, kw_only=True)
class Options:
    """What the command line may say.

    Parameters
    ----------
    out : Path, optional
        Folder that the results are meant for, made if need be; a search finished in it is used.
    jobs : int, optional
        Worker processes; all cores if left out.
    model : str, optional
        The model with the last word in a search, if left out.
    quiet : bool
        No progress and no messages.
    cluster : str, optional
        Address of a Dask scheduler whose workers do the work instead of processes here.
    """

    out: Path | None = None
    jobs: int | None = None
    model: str | None = None
    quiet: bool = False
    cluster: str | None = None


@dataclass(frozen=True, kw_only=True, eq=False)
class Trade:
    """What was found.

    Parameters
    ----------
    requirements : Requirements
        The first goal is the size.
    space : DesignSpace
    model : str
    frequencies : (n_freq,)
        At which everything but the band curves was judged, Hz.
    judged : int
        Designs judged.
    shown : dict
        Name to row (5,) of the designs drawn over the band.
    through : str
        Name of the design that the maps go through: one with room on all sides, if there is one.
    band : (n_band,)
        Frequencies of the band curves, Hz.
    curves : Figures
        Of the designs shown, (n_shown, n_band).
    maps : list of Map
    prices : list of Price
        Costliest first.
    met : bool
        Whether the designs shown meet the requirements.
    """

    requirements: Requirements
    space: DesignSpace
    model: str
    frequencies: FloatArray
    judged: int
    shown: dict[str, FloatArray]
    through: str
    band: FloatArray
    curves: Figures
    maps: list[Map]
    prices: list[Price]
    met: bool

    @property
    def size(self) -> Goal:
        """The goal that is the size."""
        return self.requirements.goals[0]


def trade(spec: Path, options: Options) -> Trade:
    """Return the trade-offs of the requirements in `spec`.

    Raises
    ------
    SpecError
        For a requirements file that cannot be used, or a model that cannot judge it.
    ClusterError
        For a cluster that cannot be used, or that stopped working.
    OSError
        For a folder that cannot be made or written to.
    """
    asked = read_requirements(spec)
    space = DesignSpace.from_requirements(asked)
    model = options.model or asked.run.prove or asked.run.scout
    run = replace(asked.run, scout=model, prove=None)
    requirements = replace(asked, run=run, goals=_size_first(asked))
    faults = list(unjudged(requirements, space))
    if faults:
        raise SpecError(faults)
    rng = np.random.default_rng(run.seed)
    frequencies = _few(requirements, MOST_FREQUENCIES)
    with (
        connected(options.cluster) as cluster,
        Evaluator(requirements, model, options.jobs or cpu_count(), cluster=cluster) as evaluator,
        Progress(quiet=options.quiet) as progress,
    ):
        if options.out is not None:
            _make(options.out)
        judge = Judge(requirements)
        referee = Referee("trade", space, judge, evaluator, frequencies, None)
        start = [known_designs(folder, asked) for folder in _folders(spec, options)]
        sample = first_sample(space, FIRST_SAMPLE * POPULATION, rng)
        evolve(
            referee,
            np.concatenate([space.snap(np.concatenate(start)), sample]),
            population=POPULATION,
            generations=GENERATIONS,
            patience=PATIENCE,
            rng=rng,
            progress=progress,
        )
        found = costliest(prices(requirements, referee, rng, progress))
        shown = _shown(referee.archive.all, requirements, space)
        progress.say(f"drawing maps by {model}")
        through = "balanced" if "balanced" in shown else next(iter(shown))
        maps = [
            map_of(requirements, space, evaluator, frequencies, shown[through], pair, POINTS)
            for pair in chosen_pairs(space)
        ]
        band = _few(requirements, BAND_FREQUENCIES, least=BAND_FREQUENCIES)
        curves = evaluator.figures(space.reflectors(np.stack(list(shown.values()))), band)
    return Trade(
        requirements=requirements,
        space=space,
        model=model,
        frequencies=frequencies,
        judged=len(referee.archive),
        shown=shown,
        through=through,
        band=band,
        curves=curves,
        maps=maps,
        prices=found,
        met=referee.archive.feasible > 0,
    )


def known_designs(folder: Path, asked: Requirements) -> FloatArray:
    """Return the front of a finished search of the same requirements, (n, 5); empty if none."""
    rows: list[list[float]] = []
    with suppress(OSError, ValueError, KeyError, TypeError, csv.Error):
        summary = json.loads((folder / "summary.json").read_text(encoding="utf-8"))
        if summary["spec_sha256"] == asked.sha256:
            with (folder / "front.csv").open(encoding="utf-8", newline="") as stream:
                rows = [
                    [from_file(name, float(line[key])) for name, key in FILE_KEYS.items()]
                    for line in csv.DictReader(stream)
                ]
    designs = np.array(rows).reshape(-1, len(VARIABLES))
    return np.asarray(designs[np.isfinite(designs).all(axis=1)])


def _make(folder: Path) -> None:
    """Make the folder of results, and see that it can be written to before the work is done."""
    folder.mkdir(parents=True, exist_ok=True)
    if not os.access(folder, os.W_OK):
        raise PermissionError(errno.EACCES, os.strerror(errno.EACCES), str(folder))


def _folders(spec: Path, options: Options) -> Iterator[Path]:
    yield Path(DEFAULT_FOLDER) / spec.stem
    if options.out is not None:
        yield options.out


def _size_first(asked: Requirements) -> tuple[Goal, ...]:
    """Return the goals, a size first; yield, which no map shows, left out."""
    sizes = [goal for goal in asked.goals if goal.name in SIZES]
    size = sizes[0] if sizes else Goal("frontal_area", "min")
    rest = [goal for goal in asked.goals if goal not in (size, Goal("yield", "max"))]
    return (size, *rest)


def _few(requirements: Requirements, most: int, least: int = 1) -> FloatArray:
    band = requirements.band
    count = int(np.clip(band.points, least, most)) if band.high_hz > band.low_hz else 1
    return np.linspace(band.low_hz, band.high_hz, count)


def _shown(judged: Judged, requirements: Requirements, space: DesignSpace) -> dict[str, FloatArray]:
    """Return the smallest design, the other recommended ones and some more of the front."""
    rows = front_rows(judged)
    if not len(rows):
        nearest = judged.designs[nearest_rows(judged)]
        return {f"nearest_{place + 1}": design for place, design in enumerate(nearest)}
    front = judged[rows]
    front = front[sorted_rows(front)]
    named = roles(front, requirements.goals, space.reflectors(front.designs).frontal_area)
    shown = {name: front.designs[row] for name, row in named.items()}
    for row in diverse(front.objectives, MOST_SHOWN):
        if len(shown) < MOST_SHOWN and row not in named.values():
            shown[f"front_{row + 1}"] = front.designs[row]
    return shown
