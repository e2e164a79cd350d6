"""Speed of the models on one core, as ratios: to each other and to a general-purpose library.

Run by name: pytest tests/benchmarks/test_models.py -s. Seconds depend on the machine and on who
else is on it; the ratios and the counts are what to compare.
"""

from __future__ import annotations

import sys
import time
from collections.abc import Callable

import numpy as np
import pytest
from threadpoolctl import threadpool_limits

from models import Reflectors, evaluate
from models.conventions import C0
from tests.test_against_finite_elements import finite_elements


def sorted_times(call: Callable[[], object], times: int) -> list[float]:
    """Return the processor times of a call, s, least first."""
    seconds = []
    with threadpool_limits(1):
        call()
        for _ in range(times):
            start = time.process_time()
            call()
            seconds.append(time.process_time() - start)
    return sorted(seconds)


def best(call: Callable[[], object], times: int) -> float:
    """Return the least processor time of a call, s."""
    return sorted_times(call, times)[0]


def designs(n: int, low: float, high: float) -> Reflectors:
    """Return n corners with plates of `low` to `high` wavelengths at c / 1 m."""
    rng = np.random.default_rng(0)
    return Reflectors(
        apex_angle=np.radians(rng.uniform(50.0, 130.0, n)),
        spacing=rng.uniform(0.25, 0.75, n),
        plate_width=rng.uniform(low, high, n),
        plate_length=rng.uniform(low, high, n),
        dipole_length=0.47,
        dipole_diameter=0.01,
    )


def test_ray_in_a_generation() -> None:
    many, frequencies = designs(200, 0.6, 2.6), C0 * np.linspace(0.9, 1.1, 5)
    times = sorted_times(lambda: evaluate(many, frequencies, model="ray"), 25)
    one = best(lambda: evaluate(many[0], C0, model="ray"), 12)
    few = best(lambda: evaluate(many[:25], frequencies, model="ray"), 25)
    least, median = times[0] / 1000.0, times[12] / 1000.0
    sys.stdout.write(
        f"\nray: {1.0 / least:.0f} pairs a second at best, {1.0 / median:.0f} in the median; "
        f"{1e6 * least:.0f} and {1e6 * median:.0f} µs; 25 alone {1e6 * few / 125.0:.0f} µs\n"
    )
    # A batch is what makes it fast: a pair in it costs a small part of one alone.
    assert least < 0.1 * one


def test_moment_near_one_wavelength() -> None:
    many = designs(64, 0.9, 1.1)
    full = best(lambda: evaluate(many, C0, model="moment"), 12) / 64.0
    ray = best(lambda: evaluate(many, C0, model="ray"), 12) / 64.0
    sys.stdout.write(f"\nmoment: {1e3 * full:.2f} ms a pair near 1 λ, {full / ray:.1f} × ray\n")
    assert full / ray < 12.0


@pytest.mark.parametrize("side", [0.5, 1.0, 1.5, 2.0, 3.0, 4.0, 5.0])
def test_cost_against_plate_size(side: float) -> None:
    many = designs(16 if side < 2.5 else 2, side, side)
    full = best(lambda: evaluate(many, C0, model="moment"), 3 if side < 2.5 else 1) / len(many)
    ray = best(lambda: evaluate(designs(64, side, side), C0, model="ray"), 3) / 64.0
    sys.stdout.write(f"\n{side:.1f} λ: moment {1e3 * full:.2f} ms, ray {1e3 * ray:.2f} ms\n")
    assert full > ray


def test_against_a_general_purpose_library() -> None:
    corner = Reflectors(
        apex_angle=np.pi / 2.0,
        spacing=0.35,
        plate_width=0.4,
        plate_length=0.6,
        dipole_length=0.5,
        dipole_diameter=0.002,
    )
    start = time.perf_counter()
    finite_elements(np.pi / 2.0, 0.35, 0.4, 0.6)
    elements = time.perf_counter() - start
    alone = best(lambda: evaluate(corner, C0, model="moment"), 5)
    many = best(lambda: evaluate(designs(64, 0.4, 0.6), C0, model="moment"), 5) / 64.0
    sys.stdout.write(
        f"\nedge elements {elements:.1f} s; moment {1e3 * alone:.1f} ms alone, {1e3 * many:.2f} ms "
        f"in a batch: {elements / many:.0f} times as fast\n"
    )
    assert elements / many > 100.0
