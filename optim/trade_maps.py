"""Maps: every figure of merit, worst over the band, over two dimensions with the others held.

Axes are SI and radians inside; `rows` are the designs of the map, the first variable running
fastest. Figures and sizes are in their own units.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np

from models.conventions import FloatArray
from optim.evaluate import Evaluator
from optim.margins import Judge
from optim.requirements import Requirements
from optim.space import DesignSpace
from optim.units import VARIABLES

__all__ = ["POINTS", "Map", "chosen_pairs", "map_of"]

POINTS: Final = 31
"""Along each axis."""

PAIRS: Final = (
    ("spacing", "apex_angle"),
    ("plate_width", "plate_length"),
    ("spacing", "dipole_length"),
    ("plate_width", "apex_angle"),
)
MOST_PAIRS: Final = 3


@dataclass(frozen=True, kw_only=True, eq=False)
class Map:
    """Figures over two variables.

    Parameters
    ----------
    across, upwards : str
        Variables.
    x, y : (n_x,), (n_y,)
        Their values, SI and radians.
    at : (5,)
        The design that the map goes through.
    worst : dict
        Figure to (n_y, n_x), worst over the band, in its unit.
    frontal_area : (n_y, n_x)
        m².
    margins : (n_y, n_x, n_limits)
        In the limit's unit.
    violations : (n_y, n_x, n_con)
        Of all conditions, guards included, in steps, at most 0 where met.
    """

    across: str
    upwards: str
    x: FloatArray
    y: FloatArray
    at: FloatArray
    worst: dict[str, FloatArray]
    frontal_area: FloatArray
    margins: FloatArray
    violations: FloatArray

    @property
    def smallest_margin(self) -> FloatArray:
        """Of all conditions, in steps, (n_y, n_x)."""
        return np.asarray(-self.violations.max(axis=2))

    @property
    def border(self) -> FloatArray:
        """Smallest margin, in steps, of the conditions that rule out some of the map, (n_y, n_x).

        Infinite where none does. A condition met everywhere, however barely, has no border here.
        """
        bounding = (self.violations > 0.0).any(axis=(0, 1))
        # Exactly 0 is met, by no known distance: a step stands in, or the border would run there.
        violations = np.where(self.violations == 0.0, -1.0, self.violations)
        return np.asarray(-violations[..., bounding].max(axis=2, initial=-np.inf))

    @property
    def rows(self) -> FloatArray:
        """The designs, (n_y · n_x, 5)."""
        return _rows(self.at, self.across, self.upwards, self.x, self.y)


def chosen_pairs(space: DesignSpace) -> list[tuple[str, str]]:
    """Return the pairs worth a map: those whose variables are both free, at most three."""
    free = {name for name, fixed in zip(VARIABLES, space.fixed, strict=True) if not fixed}
    return [pair for pair in PAIRS if set(pair) <= free][:MOST_PAIRS]


def map_of(
    requirements: Requirements,
    space: DesignSpace,
    evaluator: Evaluator,
    frequencies: FloatArray,
    at: FloatArray,
    pair: tuple[str, str],
    points: int,
) -> Map:
    """Return the map of `pair` through the design `at` (5,), over the ranges, `points` a side."""
    across, upwards = pair
    columns = [VARIABLES.index(name) for name in pair]
    x, y = (np.linspace(space.low[c], space.high[c], points) for c in columns)
    # The line through the design is on the map, so that its mark stands on what is drawn.
    x[np.abs(x - at[columns[0]]).argmin()] = at[columns[0]]
    y[np.abs(y - at[columns[1]]).argmin()] = at[columns[1]]
    reflectors = space.reflectors(_rows(at, across, upwards, x, y))
    figures = evaluator.figures(reflectors, frequencies)
    judge, shape = Judge(requirements), (y.size, x.size)
    return Map(
        across=across,
        upwards=upwards,
        x=x,
        y=y,
        at=at,
        worst={name: v.reshape(shape) for name, v in judge.worst(figures).items()},
        frontal_area=reflectors.frontal_area.reshape(shape),
        margins=judge.margins(reflectors, figures).reshape(*shape, -1),
        violations=judge.violations(reflectors, figures).reshape(*shape, -1),
    )


def _rows(at: FloatArray, across: str, upwards: str, x: FloatArray, y: FloatArray) -> FloatArray:
    rows = np.tile(at, (x.size * y.size, 1))
    rows[:, VARIABLES.index(across)] = np.tile(x, y.size)
    rows[:, VARIABLES.index(upwards)] = np.repeat(y, x.size)
    return rows
