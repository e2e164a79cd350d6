"""Prices of limits where the smallest size follows from the box alone."""

from __future__ import annotations

import numpy as np
import pytest
from rich.console import Console

from optim.evaluate import Evaluator
from optim.evolve import evolve
from optim.margins import Judge
from optim.progress import Progress
from optim.referee import Referee
from optim.requirements import Goal, Limit, Requirements
from optim.space import DesignSpace
from optim.trade_prices import Price, costliest, levels, moved, prices, step_of
from tests.search_specs import read

# Resistance grows with spacing below λ/3, and nothing else depends on it: the smallest volume has
# the least depth that the resistance allows, and a wider resistance limit costs depth.
SPEC = """
title = "Depth for resistance"
[band]
low_mhz = 420
high_mhz = 420
points = 1
[require]
resistance_ohm = { min = 30 }
[size]
depth_mm = { max = 260 }
width_mm = { max = 800 }
[search]
apex_angle_deg = 180
spacing_mm = [60, 250]
plate_width_mm = 300
plate_length_mm = 400
dipole_length_mm = 330
[build]
length_step_mm = 1
[goals]
minimise = ["volume"]
[run]
scout = "image"
prove = "none"
"""


@pytest.fixture(scope="module")
def found(tmp_path_factory: pytest.TempPathFactory) -> tuple[Requirements, Referee, list[Price]]:
    requirements = read(tmp_path_factory.mktemp("prices"), SPEC)
    space = DesignSpace.from_requirements(requirements)
    rng = np.random.default_rng(1)
    with Evaluator(requirements, "image") as evaluator, Progress(console=Console(quiet=True)) as p:
        frequencies = requirements.band.frequencies()
        referee = Referee("trade", space, Judge(requirements), evaluator, frequencies, None)
        start = space.low + (space.high - space.low) * rng.random((12, 5))
        evolve(referee, space.snap(start), population=12, generations=4, rng=rng, progress=p)
        return requirements, referee, prices(requirements, referee, rng, p)


def test_price_of_resistance_is_that_of_every_spacing_tried(
    found: tuple[Requirements, Referee, list[Price]],
) -> None:
    _, referee, priced = found
    price = next(p for p in priced if p.limit.key == "resistance_ohm")
    space = referee.space
    spacing = np.arange(60, 251) / 1000.0
    rows = np.column_stack([np.full(spacing.size, space.low[c]) for c in range(5)])
    rows[:, 1] = spacing
    everything = referee.judge(rows)
    for value, size in zip(price.values, price.sizes, strict=True):
        sizes, misses = moved(0, price.limit, value)(everything)
        assert size == pytest.approx(sizes[misses <= 0.0].min(), rel=0.01)
    assert price.values.tolist() == [20.0, 25.0, 30.0, 35.0, 40.0]
    assert np.all(np.diff(price.sizes) > 0.0)
    assert price.dropped < price.sizes[0]
    assert price.change(-1.0) < 0.0 < price.change(1.0)


def test_a_limit_far_off_costs_nothing(found: tuple[Requirements, Referee, list[Price]]) -> None:
    _, _, priced = found
    width = next(p for p in priced if p.limit.key == "width_mm")
    assert not width.moves
    assert costliest(priced)[0].limit.key == "resistance_ohm"


def test_goal_of_the_view_is_the_size_alone(
    found: tuple[Requirements, Referee, list[Price]],
) -> None:
    requirements, referee, _ = found
    assert requirements.goals[0] == Goal("volume", "min")
    judged = referee.archive.all
    objectives, misses = moved(0, requirements.limits[0], requirements.limits[0].value)(judged)
    assert objectives.shape == (len(judged), 1)
    assert np.array_equal(misses <= 0.0, judged.feasible)


@pytest.mark.parametrize(
    ("key", "sense", "value", "expected"),
    [
        ("gain_dbi", "min", 11.0, [10.0, 10.5, 11.0, 11.5, 12.0]),
        ("beamwidth_h_deg", "max", 60.0, [70.0, 65.0, 60.0, 55.0, 50.0]),
        ("beamwidth_e_deg", "max", 8.0, [18.0, 13.0, 8.0, 3.0]),
        ("vswr", "max", 1.8, [2.2, 2.0, 1.8, 1.6, 1.4]),
        ("width_mm", "max", 500.0, [550.0, 525.0, 500.0, 475.0, 450.0]),
        ("sidelobe_db", "max", -0.5, [0.0, -0.5, -1.0, -1.5]),
        ("resistance_ohm", "min", 10.0, [5.0, 10.0, 15.0, 20.0]),
    ],
)
def test_levels_go_from_easy_to_hard(
    key: str, sense: str, value: float, expected: list[float]
) -> None:
    limit = Limit(key, key, "min" if sense == "min" else "max", value, "")
    assert levels(limit).tolist() == pytest.approx(expected)
    assert step_of(limit) > 0.0
