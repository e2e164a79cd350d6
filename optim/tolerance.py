"""Yield: the share of the antennas built (0 to 1) that meet every limit, as the workshop's ± allow.

Deviations are independent and uniform over the ± values (an assumption: a workshop that sorts its
parts does better, one with a worn jig worse); both plates deviate alike, the dipole stays centred.
An apex angle past 180° counts as 180°. A scrambled Sobol sample of full solves (Sobol 1967; Owen
1995) is fitted by a quadratic in the deviations, one for each limit and frequency, and the fitted
margins are counted over eight scrambled Sobol samples of their own.

The interval is the yield with every margin moved for better and for worse by the largest
leave-one-out error of its fit, widened by the 95 % t-interval of the eight counts. Where the fit is
poor, or the model does not vouch for a sample, the solves themselves are counted, with the Wilson
(1927) 95 % interval, which is conservative for a Sobol sample. Valid for deviations small enough
that the margins bend rather than wave.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, fields
from typing import Final

import numpy as np
from scipy.stats import norm, qmc, t
from threadpoolctl import threadpool_limits

from models import Figures
from models.conventions import FloatArray
from optim.evaluate import Evaluator
from optim.journal import Journal
from optim.margins import MISSING, Judge
from optim.requirements import Requirements
from optim.space import DesignSpace
from optim.units import VARIABLES

__all__ = ["STAGE", "Builds", "Influence", "Spread", "columns", "wilson"]

STAGE: Final = "yield"
"""Name of the solves in the journal."""

SCRAMBLES: Final = 8
POINTS: Final = 9
"""Scrambled samples that the fit is counted on, and the power of two of points in each."""

CONFIDENCE: Final = 0.95
AT_A_TIME: Final = 16
"""Designs studied in one batch of the journal."""

SMALLEST_PART: Final = 0.05
"""No deviation leaves less than this part of a dimension."""


@dataclass(frozen=True, kw_only=True)
class Influence:
    """What one dimension's tolerance does.

    Parameters
    ----------
    plus_minus : float
        m or radians.
    share : float
        Of the variance of the smallest margin, what goes if this dimension is held exactly.
    yield_if_exact : float
        Yield with this dimension held exactly.
    """

    plus_minus: float
    share: float
    yield_if_exact: float


@dataclass(frozen=True, kw_only=True, eq=False)
class Spread:
    """How the antennas built from one design spread.

    Parameters
    ----------
    expected, low, high : float
        Yield and its interval, 0 to 1.
    method : str
        "fit" or "count".
    samples : int
        Full solves a frequency.
    influences : dict
        By variable, the one that matters most first.
    reach : (n_limits,)
        Half the range of each margin over the sample, in steps of margin.
    """

    expected: float
    low: float
    high: float
    method: str
    samples: int
    influences: dict[str, Influence]
    reach: FloatArray

    @property
    def matters_most(self) -> str:
        """The variable whose tolerance moves the smallest margin most."""
        return next(iter(self.influences))


class Builds:
    """Antennas as the workshop builds them, judged at the band's points by one model.

    Parameters
    ----------
    requirements : Requirements
        With at least one tolerance.
    space : DesignSpace
    evaluator : Evaluator
    journal : Journal, optional
        Gives answers while it has them and takes every new one.
    """

    def __init__(
        self,
        requirements: Requirements,
        space: DesignSpace,
        evaluator: Evaluator,
        journal: Journal | None = None,
    ) -> None:
        self.solves = 0
        self._rules = Judge(requirements)
        self._space = space
        self._evaluator = evaluator
        self._journal = journal
        self._frequencies = requirements.band.frequencies()
        tolerance = np.array([requirements.tolerance.get(name, 0.0) for name in VARIABLES])
        self._free = np.flatnonzero(tolerance > 0.0)
        self._tolerance = tolerance[self._free]
        rng = np.random.default_rng([requirements.run.seed, 1])
        # Three solves a coefficient of the quadratic, on a power of two.
        power = int(np.ceil(np.log2(3 * _terms(np.zeros((1, self._free.size))).shape[1])))
        self._sample = self._deviations(power, rng)
        self._scrambles = [self._deviations(POINTS, rng) for _ in range(SCRAMBLES)]
        self._known: dict[bytes, Spread] = {}

    def spreads(self, designs: FloatArray) -> list[Spread]:
        """Return the spread of every design, (n, n_var) snapped; each is studied once."""
        keys = [row.tobytes() for row in designs]
        new = designs[[i for i, key in enumerate(keys) if key not in self._known]]
        for first in range(0, len(new), AT_A_TIME):
            batch = new[first : first + AT_A_TIME]
            for design, misses in zip(batch, self._misses(batch), strict=True):
                self._known[design.tobytes()] = self._spread(misses)
        return [self._known[key] for key in keys]

    def built(self, design: FloatArray, deviations: FloatArray) -> FloatArray:
        """Return one design (n_var,) as built with `deviations` (n, n_free) of ± 1, (n, n_var)."""
        rows = np.tile(design, (len(deviations), 1))
        rows[:, self._free] += deviations * self._tolerance
        rows[:, 0] = np.minimum(rows[:, 0], np.pi)
        return np.maximum(rows, SMALLEST_PART * design)

    def misses(self, designs: FloatArray) -> FloatArray:
        """Return the violations of designs (n, n_var) frequency by frequency, (n, n_freq, n_con).

        In steps of margin, at most 0 where a condition is met; the conditions are the judge's.
        """
        reflectors = self._space.reflectors(designs)
        figures = self._evaluator.figures(reflectors, self._frequencies)
        each = [self._rules.violations(reflectors, at) for at in _one_by_one(figures)]
        return np.stack(each, axis=1)

    def _deviations(self, power: int, rng: np.random.Generator) -> FloatArray:
        points = qmc.Sobol(self._free.size, rng=rng).random_base2(power)
        return np.asarray(2.0 * points - 1.0)

    def _misses(self, designs: FloatArray) -> FloatArray:
        """Return the violations of the sample of each design, (n, n_sample, n_freq · n_con)."""
        rows = np.concatenate([self.built(design, self._sample) for design in designs])
        self.solves += len(rows)
        numbers = None if self._journal is None else self._journal.replay(STAGE, rows)
        if numbers is None:
            numbers = self.misses(rows).reshape(len(rows), -1)
            if self._journal is not None:
                self._journal.append(STAGE, rows, numbers)
        return numbers.reshape(len(designs), len(self._sample), -1)

    def _spread(self, misses: FloatArray) -> Spread:
        with threadpool_limits(1, "blas"):
            fit = _Fit(self._sample, misses)
            counts = np.array([fit.met(points) for points in self._scrambles])
            interval = _interval(counts)
            method = "fit"
            passed = float((misses <= 0.0).all(axis=1).mean())
            counted = wilson(passed, len(misses))
            expected = float(counts[:, 1].mean())
            vouched = (misses < MISSING / 2.0).all()
            if not vouched or np.ptp(interval) > np.ptp(counted):
                expected, interval, method = passed, counted, "count"
            influences = self._influences(fit)
        n_con = len(self._rules.constraints)
        worst = misses.reshape(len(misses), -1, n_con).max(axis=1)[:, : len(self._rules.limits)]
        return Spread(
            expected=expected,
            low=min(interval[0], expected),
            high=max(interval[1], expected),
            method=method,
            samples=len(misses),
            influences=influences,
            reach=np.ptp(worst, axis=0) / 2.0,
        )

    def _influences(self, fit: _Fit) -> dict[str, Influence]:
        points = np.concatenate(self._scrambles)
        whole = float(fit.smallest_margin(points).var())
        found = {}
        for column, plus_minus in enumerate(self._tolerance):
            exact = points.copy()
            exact[:, column] = 0.0
            margin = fit.smallest_margin(exact)
            found[VARIABLES[self._free[column]]] = Influence(
                plus_minus=float(plus_minus),
                share=1.0 - float(margin.var()) / whole if whole > 0.0 else 0.0,
                yield_if_exact=float((margin >= 0.0).mean()),
            )
        return dict(sorted(found.items(), key=lambda item: -item[1].share))


def columns(requirements: Requirements) -> list[str]:
    """Return the names of the numbers of the journal's stage, in order."""
    return [
        f"violation {limit.label} at {frequency / 1e6:.6g} MHz"
        for frequency in requirements.band.frequencies()
        for limit in Judge(requirements).constraints
    ]


def wilson(share: float, count: int) -> tuple[float, float]:
    """Return the 95 % interval of a share counted in `count` independent trials (Wilson 1927)."""
    z2 = float(norm.ppf(0.5 + CONFIDENCE / 2.0)) ** 2
    middle = (share + z2 / (2.0 * count)) / (1.0 + z2 / count)
    half = np.sqrt(z2 * (share * (1.0 - share) + z2 / (4.0 * count)) / count) / (1.0 + z2 / count)
    return float(max(middle - half, 0.0)), float(min(middle + half, 1.0))


class _Fit:
    """Quadratics through violations (n, n_columns) over deviations (n, k) of ± 1."""

    def __init__(self, deviations: FloatArray, misses: FloatArray) -> None:
        # A column all met by far bends no yield, and may bend too much to fit.
        near = misses.max(axis=0) > -np.ptp(misses, axis=0)
        misses = misses[:, near] if near.any() else misses
        orthogonal, triangle = np.linalg.qr(_terms(deviations))
        self._weights = np.linalg.solve(triangle, orthogonal.T @ misses)
        left = 1.0 - (orthogonal**2).sum(axis=1)
        residual = misses - _terms(deviations) @ self._weights
        self._error = np.abs(residual / left[:, None]).max(axis=0)

    def smallest_margin(self, deviations: FloatArray) -> FloatArray:
        """Return the smallest margin in steps, (n,)."""
        return np.asarray(-(_terms(deviations) @ self._weights).max(axis=1))

    def met(self, deviations: FloatArray) -> list[float]:
        """Return the share that meets all: margins at their worst, as fitted, at their best."""
        misses = _terms(deviations) @ self._weights
        return [
            float(((misses + side * self._error).max(axis=1) <= 0.0).mean())
            for side in (1.0, 0.0, -1.0)
        ]


def _terms(deviations: FloatArray) -> FloatArray:
    """Return the terms of a full quadratic, (n, 1 + k + k (k + 1) / 2)."""
    first, second = np.triu_indices(deviations.shape[1])
    products = deviations[:, first] * deviations[:, second]
    return np.column_stack([np.ones(len(deviations)), deviations, products])


def _interval(counts: FloatArray) -> tuple[float, float]:
    """Return the interval of shares counted on several samples, (n_samples, 3) as in `met`."""
    factor = float(t.ppf(0.5 + CONFIDENCE / 2.0, len(counts) - 1)) / np.sqrt(len(counts))
    # Never finer than three in all the points: none seen to fail is no proof that none does.
    least = 3.0 / (len(counts) * 2.0**POINTS)
    noise = np.maximum(factor * counts.std(axis=0, ddof=1), least)
    middle = counts.mean(axis=0)
    return float(max(middle[0] - noise[0], 0.0)), float(min(middle[2] + noise[2], 1.0))


def _one_by_one(figures: Figures) -> Iterator[Figures]:
    """Yield the figures of each frequency, (n, 1)."""
    names = [field.name for field in fields(figures)]
    for place in range(figures.doubt_db.shape[1]):
        yield Figures(**{name: getattr(figures, name)[:, place : place + 1] for name in names})
