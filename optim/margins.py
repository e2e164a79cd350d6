"""How far designs are inside or outside their limits, over the whole band.

A margin is signed, positive where the limit is met, in the limit's own unit, and the worst over the
band points. A figure that a model cannot give meets nothing. Two guards stand beside the limits: a
beam that dips on boresight is no beam, and what a model cannot vouch for is never good.
"""

from __future__ import annotations

from typing import Final

import numpy as np

from models import Figures, Reflectors
from models.build import mass, wind_load
from models.conventions import FloatArray
from optim.requirements import Goal, Limit, Requirements

__all__ = ["GOAL_FIGURES", "GUARDS", "MISSING", "SIZES", "Judge"]

MISSING: Final = 1000.0
"""A figure that is missing or infinite counts as this many scales beyond its limit."""

LEAST_REACH: Final = 1e-3
"""Steps of margin that tolerances take at least, where they are a measure of margins."""

GREATEST_DIP_DB: Final = 0.5
"""Beam peak above boresight from which a beam counts as split, dB."""

GUARDS: Final = (
    Limit(
        "boresight_dip_db", "boresight_dip_db", "max", GREATEST_DIP_DB, "beam split on boresight"
    ),
    Limit("doubt_db", "doubt_db", "max", 0.0, "model cannot vouch"),
)
"""Constraints beside the requirements, on every design."""

SIZES: Final = {
    "width": 1e-3,
    "height": 1e-3,
    "depth": 1e-3,
    "frontal_area": 1.0,
    "volume": 1.0,
    "longest_side": 1e-3,
    "sheet_area": 1.0,
    "mass": 1.0,
    "wind_load": 1.0,
}
"""Sizes and the unit of their caps in SI: mm for lengths, then m², m³, kg and N."""

GOAL_FIGURES: Final = {
    "gain": "gain_dbi",
    "realized_gain": "realized_gain_dbi",
    "front_to_back": "front_to_back_db",
    "beamwidth_h": "beamwidth_h_deg",
    "beamwidth_e": "beamwidth_e_deg",
    "vswr": "vswr",
}

_SMALL_IS_WORST: Final = frozenset(
    {
        "directivity_dbi",
        "gain_dbi",
        "realized_gain_dbi",
        "front_to_back_db",
        "front_to_back_180_db",
        "resistance_ohm",
    }
)


class Judge:
    """Margins, constraint violations and objectives of designs against requirements.

    Parameters
    ----------
    requirements : Requirements
    reach : (n_limits,), optional
        What tolerances take of each margin, in its steps; a step each if left out. The goal yield
        is served by the smallest margin in these measures.

    Attributes
    ----------
    limits : tuple of Limit
        The columns of `margins`.
    constraints : tuple of Limit
        The columns of `violations`: the limits, then `GUARDS`.
    """

    def __init__(self, requirements: Requirements, reach: FloatArray | None = None) -> None:
        self.requirements = requirements
        self._reach = np.ones(len(requirements.limits)) if reach is None else reach
        self.limits = requirements.limits
        self.constraints = (*requirements.limits, *GUARDS)

    def sizes(self, reflectors: Reflectors) -> dict[str, FloatArray]:
        """Return every size of `SIZES`, SI, each (n,)."""
        found = {name: getattr(reflectors, name) for name in SIZES if hasattr(reflectors, name)}
        found["mass"] = mass(reflectors, self.requirements.build)
        found["wind_load"] = wind_load(reflectors, self.requirements.wind_speed)
        return found

    def margins(self, reflectors: Reflectors, figures: Figures) -> FloatArray:
        """Return the worst margin over the band, in the limit's unit, (n, n_limits), finite.

        A figure that is missing or infinite on the wrong side counts as `MISSING` scales short.
        """
        sizes = self.sizes(reflectors)
        columns = [_margin(limit, sizes, figures) for limit in self.limits]
        return np.stack(columns, axis=1) if columns else np.empty((len(reflectors), 0))

    def violations(self, reflectors: Reflectors, figures: Figures) -> FloatArray:
        """Return how far each constraint is missed, in its scale, (n, n_constraints), finite.

        0 or less is met.
        """
        scales = np.array([limit.scale for limit in self.limits])
        dip = _margin(GUARDS[0], {}, figures) / GUARDS[0].scale
        # A model without an estimate of its own error gives NaN there, which is no refusal.
        refused = np.isposinf(figures.doubt_db).any(axis=1)
        # No model knows of a dipole that touches the plates.
        refused |= reflectors.clearance <= 0.0
        vouched = np.where(refused, -MISSING, 0.0)
        margins = self.margins(reflectors, figures) / scales
        return -np.column_stack([margins, dip, vouched]) + 0.0

    def feasible(self, reflectors: Reflectors, figures: Figures) -> np.ndarray:
        """Return which designs meet every constraint, booleans (n,)."""
        return np.asarray((self.violations(reflectors, figures) <= 0.0).all(axis=1))

    def objectives(self, reflectors: Reflectors, figures: Figures) -> FloatArray:
        """Return what is to be made small, (n, n_goals), worst over the band, finite.

        Sizes in SI, figures in their unit; goals to maximise change sign. A figure that is missing
        counts as `MISSING`. Yield is stood for by the smallest margin.
        """
        sizes = self.sizes(reflectors)
        columns = [
            self._tightest(reflectors, figures)
            if goal.name == "yield"
            else _objective(goal, sizes, figures)
            for goal in self.requirements.goals
        ]
        return np.stack(columns, axis=1)

    def worst(self, figures: Figures) -> dict[str, FloatArray]:
        """Return every figure at its worst over the band, each (n,); NaN where it is missing.

        Worst is small for gains, ratios and resistance, large for the rest, far from zero for
        reactance. A beamwidth is worst where it comes nearest to its limits, else where widest.
        """
        found = {}
        for name in Figures.names():
            values = getattr(figures, name)
            if name in _SMALL_IS_WORST:
                found[name] = values.min(axis=1)
            elif name == "reactance_ohm":
                found[name] = _at(values, np.abs(values))
            elif name.startswith("beamwidth"):
                found[name] = _at(values, self._closeness(name, values))
            else:
                found[name] = values.max(axis=1)
        return found

    def worse(self, first: FloatArray, second: FloatArray) -> FloatArray:
        """Return of two rows of worst values, (n, n_figures) each, the worse of every figure."""
        both = np.stack([first, second], axis=2)
        figures = Figures(**{name: both[:, i] for i, name in enumerate(Figures.names())})
        return np.column_stack(list(self.worst(figures).values()))

    def _tightest(self, reflectors: Reflectors, figures: Figures) -> FloatArray:
        misses = self.violations(reflectors, figures)[:, : len(self.limits)]
        measured = misses / np.maximum(self._reach, LEAST_REACH)
        return np.asarray(measured.max(axis=1, initial=-MISSING))

    def _closeness(self, name: str, values: FloatArray) -> FloatArray:
        margins = [limit.margins(values) for limit in self.limits if limit.figure == name]
        return -np.minimum.reduce(margins) if margins else values


def _at(values: FloatArray, badness: FloatArray) -> FloatArray:
    """Return the value (n,) at the frequency of most `badness`; NaN if one is NaN."""
    rows = np.arange(values.shape[0])
    chosen = values[rows, np.argmax(badness, axis=1)]
    return np.where(np.isnan(values).any(axis=1), np.nan, chosen)


def _margin(limit: Limit, sizes: dict[str, FloatArray], figures: Figures) -> FloatArray:
    if limit.figure in sizes:
        margin = limit.margins(sizes[limit.figure] / SIZES[limit.figure])
    else:
        margin = limit.margins(getattr(figures, limit.figure)).min(axis=1)
    # Exactly on the limit is met, whatever the last bits of a sine say.
    margin = np.where(np.abs(margin) <= 1e-9 * max(1.0, abs(limit.value)), 0.0, margin)
    most = MISSING * limit.scale
    return np.clip(np.where(np.isnan(margin), -most, margin), -most, most)


def _objective(goal: Goal, sizes: dict[str, FloatArray], figures: Figures) -> FloatArray:
    if goal.name in sizes:
        values = sizes[goal.name][:, None]
    else:
        values = getattr(figures, GOAL_FIGURES[goal.name])
    worst = (values if goal.sense == "min" else -values).max(axis=1)
    return np.asarray(np.nan_to_num(worst, nan=MISSING, posinf=MISSING, neginf=-MISSING))
