"""One design as its papers see it: what was asked, what the deciding model gives over the band."""

from __future__ import annotations

from dataclasses import dataclass, replace
from functools import cached_property

import numpy as np

from models import MODELS, Figures, Reflectors
from models.conventions import FloatArray, decibels
from models.figures import figures_of_merit
from models.pattern import Pattern
from optim.margins import SIZES, Judge
from optim.quantities import OF_A_MATCH
from optim.requirements import Limit, Requirements

__all__ = ["Subject"]


@dataclass(frozen=True, kw_only=True, eq=False)
class Subject:
    """A design and what its papers are made from.

    Parameters
    ----------
    requirements : Requirements
    reflectors : Reflectors
        One row.
    role : str
        What the design is called.
    model : str
        That gave `pattern`.
    pattern : Pattern
        (1, n_freq), at the frequencies of the refined band.
    yields : (expected, low, high), optional
        Share of the antennas built that meet everything, 0 to 1.
    """

    requirements: Requirements
    reflectors: Reflectors
    role: str
    model: str
    pattern: Pattern
    yields: tuple[float, float, float] | None = None

    @cached_property
    def frequencies(self) -> FloatArray:
        """Frequencies of the pattern, Hz, (n_freq,)."""
        return self.requirements.band.refined().frequencies()

    @cached_property
    def figures(self) -> Figures:
        """Figures of merit, (1, n_freq); without the match where the model gives no honest one."""
        figures = figures_of_merit(self.pattern, self.requirements.terms)
        if MODELS[self.model].gives_match:
            return figures
        return replace(figures, **dict.fromkeys(OF_A_MATCH, np.full(figures.vswr.shape, np.nan)))

    @property
    def name(self) -> str:
        """What the design is called, in words."""
        return self.role.replace("_", " ")

    @cached_property
    def peak_gain_dbi(self) -> float:
        """Gain in the strongest direction of both cuts, highest over the band; NaN if not known."""
        p = self.pattern
        strongest = np.maximum(np.abs(p.h_field), np.abs(p.e_field)).max(axis=-1) ** 2
        return float(decibels(strongest / p.power * p.efficiency).max())

    def sizes(self) -> dict[str, float]:
        """Return every size by its name, in the unit of its cap: mm, m², m³, kg, N."""
        found = Judge(self.requirements).sizes(self.reflectors)
        return {name: float(value[0]) / SIZES[name] for name, value in found.items()}

    def asked(self) -> list[tuple[Limit, float]]:
        """Return every limit with its margin in the limit's unit; NaN where a figure is missing."""
        sizes = self.sizes()
        return [(limit, self._margin(limit, sizes)) for limit in self.requirements.limits]

    def _margin(self, limit: Limit, sizes: dict[str, float]) -> float:
        if limit.figure in sizes:
            values = np.array([sizes[limit.figure]])
        else:
            values = getattr(self.figures, limit.figure)[0]
        # Exactly on the limit is met, whatever the last bits say.
        return (
            float(np.round(limit.margins(values).min(), 9))
            if np.isfinite(values).all()
            else float("nan")
        )
