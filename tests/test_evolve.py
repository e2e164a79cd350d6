"""When breeding stops: how far a front has moved, and for how long it has not."""

import numpy as np
import pytest

from optim.archive import Archive, Judged
from optim.evolve import Standstill, advance, standing
from optim.problem import door, whole


def test_advance_is_the_share_of_the_extent() -> None:
    before = np.array([[0.0, 10.0], [1.0, 0.0]])
    assert advance(before, before) == 0.0
    assert advance(before, np.array([[0.0, 9.0], [1.0, 0.0]])) == pytest.approx(1 / 9)
    assert advance(np.empty((0, 2)), before) == np.inf
    assert advance(before, np.array([[0.0, 10.0], [0.5, 5.0], [1.0, 0.0]])) == pytest.approx(0.5)


def test_standstill_waits_its_patience() -> None:
    archive = Archive(Judged.none(1, (2, 1, 1, 1)))
    numbers = np.array([[1.0, 2.0, 0.5, -0.5, 9.0], [2.0, 1.0, 0.5, -0.5, 9.0]])
    archive.add(Judged.from_numbers(np.array([[0.0], [1.0]]), numbers, (2, 1, 1, 1)))
    rule = Standstill(3)
    reached = [rule.reached(*standing(archive, whole)) for _ in range(5)]
    assert reached == [False, False, False, True, True]


def test_standstill_waits_for_less_violation_while_nothing_is_feasible() -> None:
    rule, nothing = Standstill(2), np.empty((0, 2))
    misses = [5.0, 4.0, 3.0, 2.999, 2.998]
    assert [rule.reached(nothing, miss) for miss in misses] == [False, False, False, False, True]
    assert not rule.reached(np.array([[1.0, 1.0]]), 0.0)


def test_standing_of_a_door_is_the_least_violation_under_the_others() -> None:
    archive = Archive(Judged.none(1, (1, 2, 2, 1)))
    numbers = np.array(
        [
            [7.0, -2.0, 0.0, 2.0, 0.0, 9.0],
            [8.0, -1.0, -3.0, 1.0, 3.0, 9.0],
            [9.0, -4.0, 1.0, 4.0, -1.0, 9.0],
        ]
    )
    archive.add(Judged.from_numbers(np.arange(3.0)[:, None], numbers, (1, 2, 2, 1)))
    front, miss = standing(archive, door([0]))
    assert (front.tolist(), miss) == ([[2.0]], 0.0)
    front, miss = standing(archive, door([1]))
    assert (front.tolist(), miss) == ([], 1.0)
    front, miss = standing(archive, whole)
    assert (front.tolist(), miss) == ([], 2.0)
