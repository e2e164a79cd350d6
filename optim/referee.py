"""Judging designs: from the journal while it lasts, then by a model; never the same one twice."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np

from models import Figures
from models.conventions import FloatArray
from optim.archive import Archive, Judged
from optim.evaluate import Evaluator
from optim.journal import Journal
from optim.margins import Judge
from optim.space import DesignSpace

__all__ = ["Referee", "columns", "worse_of"]

Holds = Callable[[Judged], np.ndarray]


class Referee:
    """One model judging one stage of a search on one grid of frequencies.

    Parameters
    ----------
    stage : str
        Its name in the journal.
    space : DesignSpace
    rules : Judge
        Turns figures into margins and objectives.
    evaluator : Evaluator
    frequencies : (n_freq,)
        Hz.
    further : (n_further,), optional
        Frequencies at which only those designs are judged that hold at the first ones, Hz. What a
        design that fails is judged by is then a lower bound of what it misses.
    journal : Journal, optional
        Left out: nothing is recorded.
    """

    def __init__(
        self,
        stage: str,
        space: DesignSpace,
        rules: Judge,
        evaluator: Evaluator,
        frequencies: FloatArray,
        journal: Journal | None,
        *,
        further: FloatArray | None = None,
    ) -> None:
        self.stage = stage
        self.space = space
        self.model = evaluator.model
        self.labels = [limit.label for limit in rules.limits]
        self.rules = rules
        self.archive = Archive(Judged.none(space.low.size, self.sizes))
        self._evaluator = evaluator
        self._frequencies = frequencies
        self._further = np.empty(0) if further is None else further
        self._journal = journal

    @property
    def sizes(self) -> tuple[int, int, int, int]:
        """Numbers of objectives, margins, violations and figures of a judged design."""
        rules = self.rules
        return (
            len(rules.requirements.goals),
            len(rules.limits),
            len(rules.constraints),
            len(Figures.names()),
        )

    def judge(self, designs: FloatArray, holds: Holds | None = None) -> Judged:
        """Return n snapped designs (n, n_var) judged; those not yet known are evaluated.

        Parameters
        ----------
        designs : (n, n_var)
        holds : callable, optional
            Which judged designs, (n,), are worth the further frequencies; the feasible ones if
            left out.
        """
        keys = [row.tobytes() for row in designs]
        first = {key: i for i, key in reversed(list(enumerate(keys)))}
        new = sorted(i for key, i in first.items() if key not in self.archive)
        if new:
            self.archive.add(self._evaluated(designs[new], holds))
        return self.archive.find(keys)

    def _evaluated(self, designs: FloatArray, worthy: Holds | None) -> Judged:
        journal = self._journal
        recorded = None if journal is None else journal.replay(self.stage, designs)
        if recorded is not None:
            return Judged.from_numbers(designs, recorded, self.sizes)
        judged = self._judged(designs, self._frequencies)
        holds = np.flatnonzero(judged.feasible if worthy is None else worthy(judged))
        if len(holds) and len(self._further):
            more = self._judged(designs[holds], self._further)
            whole = worse_of(self.rules, judged[holds], more)
            order = np.arange(len(judged))
            order[holds] = len(judged) + np.arange(len(holds))
            judged = Judged.concatenate([judged, whole])[order]
        if journal is not None:
            journal.append(self.stage, designs, judged.numbers())
        return judged

    def _judged(self, designs: FloatArray, frequencies: FloatArray) -> Judged:
        reflectors, rules = self.space.reflectors(designs), self.rules
        figures = self._evaluator.figures(reflectors, frequencies)
        return Judged(
            designs=designs,
            objectives=rules.objectives(reflectors, figures),
            margins=rules.margins(reflectors, figures),
            violations=rules.violations(reflectors, figures),
            worst=np.column_stack(list(rules.worst(figures).values())),
        )


def worse_of(rules: Judge, first: Judged, second: Judged) -> Judged:
    """Return the same designs, judged at two sets of frequencies, as judged at all of them."""
    return Judged(
        designs=first.designs,
        objectives=np.maximum(first.objectives, second.objectives),
        margins=np.minimum(first.margins, second.margins),
        violations=np.maximum(first.violations, second.violations),
        worst=rules.worse(first.worst, second.worst),
    )


def columns(rules: Judge) -> list[str]:
    """Return the names of the numbers of a judged design, in order."""
    return [
        *(f"goal {goal.name}" for goal in rules.requirements.goals),
        *(f"margin {limit.label}" for limit in rules.limits),
        *(f"violation {limit.label}" for limit in rules.constraints),
        *(f"worst {name}" for name in Figures.names()),
    ]
