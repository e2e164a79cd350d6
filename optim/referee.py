"""Judging designs: from the journal while it lasts, then by a model; never the same one twice."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np

from models import Figures
from models.conventions import FloatArray
from optim.archive import Archive, BoolArray, Judged
from optim.evaluate import Evaluator
from optim.journal import Journal
from optim.margins import Judge
from optim.space import DesignSpace

__all__ = ["Referee", "columns", "worse_of"]

Holds = Callable[[Judged], BoolArray]


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
        Frequencies at which only those designs are judged that show promise at the first ones, Hz.
        More frequencies only make a design worse: what the others are judged by is a lower bound
        of what they miss, and nothing else would put them on the front.
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
        self._whole: set[bytes] = set()

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
            Which judged designs, (n,), are worth the further frequencies; if left out, those that
            are feasible and that no design of the front beats.
        """
        worthy = holds or self._promising
        keys = [row.tobytes() for row in designs]
        first = {key: i for i, key in reversed(list(enumerate(keys)))}
        new = sorted(i for key, i in first.items() if key not in self.archive)
        known = self.archive.find([key for key in first if key in self.archive])
        short = known[worthy(known) & ~self.whole(known)]
        if len(new) or len(short):
            self.archive.add(self._evaluated(designs[new], short, worthy))
        return self.archive.find(keys)

    def whole(self, judged: Judged) -> BoolArray:
        """Return which of these designs have been judged at all frequencies, (n,)."""
        return np.array([key in self._whole for key in judged.keys], dtype=bool)

    def _promising(self, judged: Judged) -> BoolArray:
        front = self.archive.front.objectives[:, None, :]
        return judged.feasible & ~(front <= judged.objectives).all(axis=2).any(axis=0)

    def _evaluated(self, new: FloatArray, short: Judged, worthy: Holds) -> Judged:
        """Return new designs judged, and those that were judged `short` judged at the rest."""
        designs = np.concatenate([new, short.designs])
        journal = self._journal
        recorded = None if journal is None else journal.replay(self.stage, designs)
        if recorded is None:
            judged = Judged.concatenate([self._judged(new, self._frequencies), short])
            whole = np.append(worthy(judged[: len(new)]), np.ones(len(short), dtype=bool))
            if len(self._further):
                rows = np.flatnonzero(whole)
                more = self._judged(designs[rows], self._further)
                judged = judged.replaced(rows, worse_of(self.rules, judged[rows], more))
            recorded = np.column_stack([judged.numbers(), whole])
            if journal is not None:
                journal.append(self.stage, designs, recorded)
        judged = Judged.from_numbers(designs, recorded[:, :-1], self.sizes)
        whole = recorded[:, -1].astype(bool) | (len(self._further) == 0)
        self._whole.update(key for key, full in zip(judged.keys, whole, strict=True) if full)
        return judged

    def _judged(self, designs: FloatArray, frequencies: FloatArray) -> Judged:
        if not len(designs):
            return self.archive.all[:0]
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
    """Return the names of the numbers that are recorded of a judged design, in order."""
    return [
        *(f"goal {goal.name}" for goal in rules.requirements.goals),
        *(f"margin {limit.label}" for limit in rules.limits),
        *(f"violation {limit.label}" for limit in rules.constraints),
        *(f"worst {name}" for name in Figures.names()),
        "at all frequencies",
    ]
