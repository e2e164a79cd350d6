"""Which designs are put before the reader, on fronts small enough to see the answer."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from models.conventions import FloatArray
from optim.archive import Judged
from optim.recommend import (
    MOST_ROWS,
    binding_limits,
    front_rows,
    nearest_rows,
    relaxation_rows,
    relaxed_value,
    roles,
    sorted_rows,
)
from optim.requirements import Goal, Limit

GOALS = (Goal("frontal_area", "min"), Goal("gain", "max"))


def judged(objectives: list[list[float]], violations: list[list[float]]) -> Judged:
    """Return designs under two limits and one guard, margins in their steps."""
    conditions = np.array(violations, dtype=np.float64)
    return Judged(
        designs=np.arange(len(objectives), dtype=np.float64)[:, None],
        objectives=np.array(objectives, dtype=np.float64),
        margins=-conditions[:, :2],
        violations=conditions,
        worst=np.zeros((len(objectives), 1)),
    )


def test_roles_of_a_bent_front() -> None:
    front = judged(
        [[1.0, -8.0], [1.2, -11.0], [2.0, -12.0]], [[-0.1, -1, 0], [-0.5, -1, 0], [-2, -1, 0]]
    )
    assert roles(front, GOALS, np.ones(3)) == {"smallest": 0, "balanced": 1, "most_margin": 2}


def test_roles_that_coincide_are_given_once() -> None:
    front = judged([[1.0, -8.0]], [[-1.0, -1.0, 0.0]])
    assert roles(front, GOALS, np.ones(1)) == {"smallest": 0}


def test_smallest_is_by_frontal_area_where_nothing_is_minimised() -> None:
    front = judged([[-9.0], [-8.0]], [[-1, -1, 0], [-1, -1, 0]])
    assert roles(front, (Goal("gain", "max"),), np.array([2.0, 1.0]))["smallest"] == 1


def test_front_is_feasible_unbeaten_and_not_too_long() -> None:
    angle = np.linspace(0.0, np.pi / 2, 500)
    curve = np.column_stack([1.0 - np.sin(angle), 1.0 - np.cos(angle)]).tolist()
    others = [[1.0, 0.0, 0.0], [-1.0, -1.0, -1.0]]
    conditions: list[list[float]] = [*([[-1.0, -1.0, -1.0]] * 500), *others]
    objectives: list[list[float]] = [*curve, [-1.0, -1.0], [5.0, 5.0]]
    rows = front_rows(judged(objectives, conditions))
    assert len(rows) == MOST_ROWS
    assert rows.max() < 500
    assert {0, 499} <= set(rows.tolist())


def test_nearest_miss_least_and_differ_in_what_they_miss() -> None:
    violations = [[0.5, -1.0, 0], [0.4, -1.0, 0], [-1.0, 0.6, 0], [0.3, 0.4, 0], [-1.0, -1.0, 9]]
    near = nearest_rows(judged([[0.0]] * 5, violations))
    assert near.tolist() == [1, 2, 3]


def test_relaxing_one_limit_takes_its_best_design() -> None:
    violations = [[0.5, -1, 0], [0.4, -1, 0], [-1, 0.6, 0], [0.1, 0.1, 0], [0.01, -1, 1]]
    assert relaxation_rows(judged([[0.0]] * 5, violations)).tolist() == [1, 2]


def test_relaxing_two_where_no_single_one_helps() -> None:
    violations = [[0.5, 0.5, 0], [0.3, 0.4, 0], [0.1, -1, 2]]
    assert relaxation_rows(judged([[0.0]] * 3, violations)).tolist() == [1]


def test_what_no_model_vouches_for_is_not_offered() -> None:
    assert len(relaxation_rows(judged([[0.0]] * 2, [[-1, -1, 1000], [1000, -1, 0]]))) == 0


def test_binding_is_missed_or_barely_met() -> None:
    assert binding_limits(judged([[0.0]], [[-0.05, -3, 0]])).tolist() == [0]
    assert binding_limits(judged([[0.0]] * 2, [[-5, -3, 0], [-5, 0.2, 5]])).tolist() == [1]


def test_sorted_by_first_goal_then_the_next() -> None:
    rows = sorted_rows(judged([[2.0, 1.0], [1.0, 3.0], [1.0, 2.0]], [[-1.0] * 3] * 3))
    assert rows.tolist() == [2, 1, 0]


@given(
    st.floats(-100.0, 2000.0).filter(lambda value: abs(value) > 1e-3),
    st.floats(-500.0, -1e-3),
    st.sampled_from(["min", "max"]),
)
@settings(derandomize=True, max_examples=300, deadline=None)
def test_relaxed_value_lets_the_design_in_and_is_close(
    value: float, margin: float, sense: str
) -> None:
    limit = Limit("gain_dbi", "gain_dbi", "min" if sense == "min" else "max", value, "")
    reached = value + margin if sense == "min" else value - margin
    relaxed = relaxed_value(limit, margin)
    slack = reached - relaxed if sense == "min" else relaxed - reached
    assert -1e-6 <= slack <= 0.0100001 * abs(reached) + 1e-9


@pytest.mark.parametrize(
    ("sense", "value", "margin", "expected"),
    [("max", 20.0, -11.13, 31.2), ("min", 10.5, -1.073, 9.42), ("max", 700.0, -404.2, 1110.0)],
)
def test_relaxed_value_in_numbers(sense: str, value: float, margin: float, expected: float) -> None:
    limit = Limit("", "", "min" if sense == "min" else "max", value, "")
    assert relaxed_value(limit, margin) == pytest.approx(expected, rel=1e-12)


def test_arrays_are_left_alone() -> None:
    front = judged([[1.0, -8.0], [2.0, -12.0]], [[-1.0] * 3] * 2)
    before: FloatArray = front.objectives.copy()
    roles(front, GOALS, np.ones(2))
    assert np.array_equal(front.objectives, before)
