"""Every design a stage has judged, with its numbers, and which of them nothing beats.

Designs are rows of the five variables (SI, radians), snapped to what can be built; objectives are
to be minimised; margins are in their limit's unit, positive where it is met; violations are in
steps of margin, at most 0 where a condition is met. The order is that of the evaluations.
"""

from __future__ import annotations

from dataclasses import dataclass, fields
from functools import cached_property

import numpy as np

from models.conventions import FloatArray

__all__ = ["Archive", "BoolArray", "IntArray", "Judged", "diverse", "nondominated"]

IntArray = np.ndarray[tuple[int, ...], np.dtype[np.intp]]
BoolArray = np.ndarray[tuple[int, ...], np.dtype[np.bool_]]


@dataclass(frozen=True, kw_only=True, eq=False)
class Judged:
    """n designs and the numbers they were judged by.

    Parameters
    ----------
    designs : (n, n_var)
        Snapped variables.
    objectives : (n, n_goals)
        To be minimised; NaN where the model gives none.
    margins : (n, n_limits)
        Worst over the band, in the limit's unit, positive where the limit is met.
    violations : (n, n_con)
        In steps of margin, at most 0 where a condition is met: first the limits, then the guards.
    worst : (n, n_figures)
        Worst value of each figure over the band.
    """

    designs: FloatArray
    objectives: FloatArray
    margins: FloatArray
    violations: FloatArray
    worst: FloatArray

    def __len__(self) -> int:
        """Return the number of designs."""
        return len(self.designs)

    def __getitem__(self, rows: slice | IntArray | BoolArray | list[int]) -> Judged:
        """Return the designs at `rows`."""
        return Judged(**{field.name: getattr(self, field.name)[rows] for field in fields(self)})

    @classmethod
    def concatenate(cls, parts: list[Judged]) -> Judged:
        """Return the designs of all `parts`, in order."""
        return cls(
            **{f.name: np.concatenate([getattr(p, f.name) for p in parts]) for f in fields(cls)}
        )

    @classmethod
    def none(cls, n_var: int, sizes: tuple[int, int, int, int]) -> Judged:
        """Return no designs, with `sizes` columns of numbers."""
        return cls.from_numbers(np.empty((0, n_var)), np.empty((0, sum(sizes))), sizes)

    def replaced(self, rows: IntArray, others: Judged) -> Judged:
        """Return the designs with `others` in the place of `rows`."""
        order = np.arange(len(self))
        order[rows] = len(self) + np.arange(len(rows))
        return Judged.concatenate([self, others])[order]

    def numbers(self) -> FloatArray:
        """Return everything but the designs as one matrix, (n, n_numbers)."""
        return np.hstack([getattr(self, field.name) for field in fields(self)[1:]])

    @classmethod
    def from_numbers(
        cls, designs: FloatArray, numbers: FloatArray, sizes: tuple[int, int, int, int]
    ) -> Judged:
        """Return what `numbers()` took apart; `sizes` counts the columns of each part."""
        parts = np.split(numbers, np.cumsum(sizes)[:-1], axis=1)
        names = [field.name for field in fields(cls)[1:]]
        return cls(designs=designs, **dict(zip(names, parts, strict=True)))

    @cached_property
    def keys(self) -> list[bytes]:
        """What tells designs apart: the bytes of their rows."""
        return [row.tobytes() for row in self.designs]

    @cached_property
    def feasible(self) -> BoolArray:
        """Whether a design meets every condition, (n,)."""
        return np.asarray((self.violations <= 0.0).all(axis=1))

    @cached_property
    def total_violation(self) -> FloatArray:
        """Sum of what is violated, (n,)."""
        return np.asarray(np.maximum(self.violations, 0.0).sum(axis=1))

    @cached_property
    def smallest_margin(self) -> FloatArray:
        """Least of the margins in their steps, (n,); infinite where nothing is required."""
        misses = self.violations[:, : self.margins.shape[1]]
        return np.asarray(-misses.max(axis=1, initial=-np.inf))


class Archive:
    """The judged designs of one stage, each once.

    Parameters
    ----------
    none : Judged
        No designs, of the shape to come.

    Attributes
    ----------
    all : Judged
        Everything judged so far.
    front : Judged
        The feasible designs that no feasible design beats.
    feasible : int
        Number of designs that meet every condition.
    least_violation : float
        Least total violation of a design.
    """

    def __init__(self, none: Judged) -> None:
        self.all = none
        self._places: dict[bytes, int] = {}
        self.front = none
        self.feasible = 0
        self.least_violation = np.inf

    def __len__(self) -> int:
        """Return the number of designs."""
        return len(self._places)

    def __contains__(self, key: bytes) -> bool:
        """Whether the design whose row has the bytes `key` has been judged."""
        return key in self._places

    def add(self, judged: Judged) -> None:
        """Take in designs; those known already are replaced, and are none of the front."""
        places = [self._places.setdefault(key, len(self._places)) for key in judged.keys]
        before = self.all
        order = np.arange(len(self._places))
        order[places] = len(before) + np.arange(len(judged))
        self.all = everything = Judged.concatenate([before, judged])[order]
        self.feasible = int(everything.feasible.sum())
        self.least_violation = float(everything.total_violation.min(initial=np.inf))
        rivals = Judged.concatenate([self.front, judged[judged.feasible]])
        self.front = rivals[nondominated(rivals.objectives)]

    def find(self, keys: list[bytes]) -> Judged:
        """Return the designs whose rows have the bytes `keys`; each must be known."""
        return self.all[[self._places[key] for key in keys]]


def nondominated(objectives: FloatArray) -> IntArray:
    """Return the rows of `objectives` (n, n_goals) that no other row dominates, in order.

    Of rows with equal objectives the first one stays.
    """
    order = np.lexsort(objectives.T[::-1])
    kept: list[int] = []
    front = np.empty((0, objectives.shape[1]))
    for row in order:
        if not (front <= objectives[row]).all(axis=1).any():
            kept.append(int(row))
            front = objectives[kept]
    return np.array(sorted(kept), dtype=np.intp)


def diverse(objectives: FloatArray, count: int) -> IntArray:
    """Return `count` rows of `objectives` (n, n_goals) spread as evenly as can be, in order.

    The best row of each goal first, then always the row farthest from those taken, distances as
    shares of each goal's range.
    """
    n = len(objectives)
    if n <= count:
        return np.arange(n)
    low = objectives.min(axis=0)
    extent = objectives.max(axis=0) - low
    place = (objectives - low) / np.where(extent > 0.0, extent, 1.0)
    taken = list(dict.fromkeys(place.argmin(axis=0).tolist()))[:count]
    distance = np.min([((place - place[row]) ** 2).sum(axis=1) for row in taken], axis=0)
    distance[taken] = -1.0
    while len(taken) < count:
        row = int(distance.argmax())
        taken.append(row)
        distance = np.minimum(distance, ((place - place[row]) ** 2).sum(axis=1))
        distance[row] = -1.0
    return np.array(sorted(taken), dtype=np.intp)
