"""The price of a requirement: the smallest antenna as one limit is tightened, relaxed or dropped.

Limits move in the unit of their key, sizes are SI. Every price is the size of the smallest design
found by a short search from the designs known so far, so it is an upper bound of the true one, by
the search's model at the search's frequencies. All prices are read from all designs judged, so an
easier limit never costs more than a harder one.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from functools import partial
from typing import Final

import numpy as np

from models.conventions import FloatArray
from optim.archive import Judged
from optim.doors import behind
from optim.evolve import evolve
from optim.problem import View
from optim.progress import Progress
from optim.referee import Referee
from optim.requirements import Limit, Requirements
from optim.space import DesignSpace

__all__ = ["STEPS", "Price", "costliest", "levels", "prices"]

POPULATION: Final = 24
GENERATIONS: Final = 12
PATIENCE: Final = 5
STEPS: Final = (-1.0, -0.5, 0.0, 0.5, 1.0)
"""Levels of a limit, in its steps from the one asked for; positive is harder."""


@dataclass(frozen=True, kw_only=True, eq=False)
class Price:
    """What one limit costs.

    Parameters
    ----------
    limit : Limit
    step : float
        Of its levels, in its unit.
    values : (n_levels,)
        Of the limit, easiest first.
    sizes : (n_levels,)
        Smallest size that meets everything at that value, SI; NaN where no design was found.
    dropped : float
        Smallest size without the limit.
    """

    limit: Limit
    step: float
    values: FloatArray
    sizes: FloatArray
    dropped: float

    @property
    def asked(self) -> float:
        """Smallest size at the value asked for."""
        return self.at(0.0)

    @property
    def moves(self) -> bool:
        """Whether the size depends on this limit at all, within its levels or without it."""
        known = np.append(self.sizes, self.dropped)
        return bool(np.ptp(np.nan_to_num(known, nan=-1.0)) > 0.0)

    def at(self, steps: float) -> float:
        """Return the smallest size so many steps harder; NaN where none was found or looked for."""
        found = self.sizes[np.isclose(self.values, self.value(steps))]
        return float(found[0]) if found.size else np.nan

    def change(self, steps: float) -> float:
        """Return by what share of the size asked for it changes so many steps harder, or NaN."""
        return self.at(steps) / self.asked - 1.0

    def value(self, steps: float) -> float:
        """Return the value of the limit so many steps harder."""
        return _level(self.limit, steps)


def step_of(limit: Limit) -> float:
    """Return the step of a limit: 1 dB, 10°, 10 Ω, a tenth of a size, half of VSWR - 1."""
    if limit.key.endswith(("_deg", "_ohm")):
        return 10.0
    if limit.key == "vswr":
        return 0.5 * (limit.value - 1.0) or 0.2
    return 1.0 if "_db" in limit.key or limit.key.startswith("mask") else 0.1 * limit.value


def _level(limit: Limit, steps: float) -> float:
    return limit.at(step_of(limit) * steps)


def levels(limit: Limit) -> FloatArray:
    """Return the values of a limit that are priced, easiest first; those that cannot be left out.

    VSWR stays above 1, beamwidths and sizes above 0, side lobes at 0 dB or below.
    """
    values = [_level(limit, step) for step in STEPS]
    low, high = -np.inf, np.inf
    if limit.key == "vswr":
        low = 1.0
    elif limit.key.endswith(("_deg", "_mm", "_m2", "_kg", "_n", "_ohm")):
        low = 0.0
    elif limit.key == "sidelobe_db":
        high = 0.0
    return np.array([value for value in values if low < value <= high or value == limit.value])


def prices(
    requirements: Requirements, referee: Referee, rng: np.random.Generator, progress: Progress
) -> list[Price]:
    """Return the price of every limit; the first objective of `referee` is the size."""
    for column, limit in enumerate(requirements.limits):
        search = partial(_search, requirements, referee, column, rng, progress)
        price = partial(_smallest_of, referee, column, limit)
        nothing = _nothing(limit)
        easier = [value for value in levels(limit) if _eases(limit, value)][::-1]
        if not _near(referee.archive.all, column):
            search(nothing)
            easier = easier if price(nothing) < price(limit.value) else []
        for value in [*easier, nothing]:
            search(value)
        for value in levels(limit):
            # Where the smallest design meets a harder limit as it is, nothing smaller will.
            if not _eases(limit, value) and not price(value) <= price(limit.value):
                search(value)
    judged = referee.archive.all
    return [
        Price(
            limit=limit,
            step=step_of(limit),
            values=levels(limit),
            sizes=np.array([_smallest(judged, column, limit, v) for v in levels(limit)]),
            dropped=_smallest(judged, column, limit, _nothing(limit)),
        )
        for column, limit in enumerate(requirements.limits)
    ]


def _eases(limit: Limit, value: float) -> bool:
    return value < limit.value if limit.sense == "min" else value > limit.value


def _near(judged: Judged, column: int) -> bool:
    """Return whether a limit is within a step of the smallest design, or nothing meets all."""
    rows = np.flatnonzero(judged.feasible)
    if not rows.size:
        return True
    smallest = rows[judged.objectives[rows, 0].argmin()]
    return bool(judged.violations[smallest, column] > -1.0)


def _search(
    requirements: Requirements,
    referee: Referee,
    column: int,
    rng: np.random.Generator,
    progress: Progress,
    value: float,
) -> None:
    """Search for the smallest design with one limit moved to `value`."""
    view = moved(column, requirements.limits[column], value)
    evolve(
        referee,
        behind(referee.archive.all, view, POPULATION),
        population=POPULATION,
        generations=GENERATIONS,
        patience=PATIENCE,
        rng=rng,
        progress=progress,
        view=view,
        space=_space(requirements, column, value),
    )


def moved(column: int, limit: Limit, value: float) -> View:
    """View the first goal alone, one limit moved to `value` (infinite: dropped)."""
    harder = limit.margins(np.array(value))

    def view(judged: Judged) -> tuple[FloatArray, FloatArray]:
        violations = judged.violations.copy()
        violations[:, column] += harder / limit.scale
        # On the limit is met, whatever the last bits of the shift say.
        violations[np.abs(violations) < 1e-9] = 0.0
        return judged.objectives[:, :1], np.maximum(violations, 0.0).sum(axis=1)

    return view


def costliest(found: Sequence[Price]) -> list[Price]:
    """Return the prices, the limit first whose easing by a step saves most, then by harder."""
    return sorted(
        found,
        key=lambda price: (
            np.nan_to_num(price.change(-1.0)),
            np.nan_to_num(price.dropped, nan=np.inf),
            -np.nan_to_num(price.change(0.5)),
        ),
    )


def _nothing(limit: Limit) -> float:
    return -np.inf if limit.sense == "min" else np.inf


def _space(requirements: Requirements, column: int, value: float) -> DesignSpace:
    """Return the space with one limit moved: what its ranges derive from moves with it."""
    limits = list(requirements.limits)
    if np.isfinite(value):
        limits[column] = replace(limits[column], value=value)
    else:
        del limits[column]
    return DesignSpace.from_requirements(replace(requirements, limits=tuple(limits)))


def _smallest_of(referee: Referee, column: int, limit: Limit, value: float) -> float:
    return _smallest(referee.archive.all, column, limit, value)


def _smallest(judged: Judged, column: int, limit: Limit, value: float) -> float:
    sizes, misses = moved(column, limit, value)(judged)
    met = sizes[misses <= 0.0, 0]
    return float(met.min()) if met.size else np.nan
