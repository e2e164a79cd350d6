"""Archives and fronts, against the definition of dominance taken literally."""

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st
from hypothesis.extra.numpy import arrays

from models.conventions import FloatArray
from optim.archive import Archive, Judged, diverse, nondominated

points = arrays(
    np.float64,
    st.tuples(st.integers(0, 30), st.integers(1, 4)),
    elements=st.integers(0, 5).map(float),
)


def judged(objectives: FloatArray, violations: FloatArray, first: int = 0) -> Judged:
    n = len(objectives)
    return Judged(
        designs=np.arange(first, first + n, dtype=np.float64)[:, None],
        objectives=objectives,
        margins=-violations[:, :1],
        violations=violations,
        worst=np.zeros((n, 2)),
    )


def dominates(a: FloatArray, b: FloatArray) -> bool:
    return bool((a <= b).all() and (a < b).any())


@given(points)
@settings(derandomize=True, max_examples=80, deadline=None)
def test_nondominated_is_the_definition(objectives: FloatArray) -> None:
    literal = [
        i
        for i, row in enumerate(objectives)
        if not any(dominates(other, row) for other in objectives)
        and not any((other == row).all() for other in objectives[:i])
    ]
    assert nondominated(objectives).tolist() == literal


@given(points, st.integers(1, 10))
@settings(derandomize=True, max_examples=50, deadline=None)
def test_diverse_keeps_the_best_of_each_goal(objectives: FloatArray, count: int) -> None:
    rows = diverse(objectives, count)
    assert len(rows) == min(count, len(objectives)) == len(set(rows.tolist()))
    if objectives.shape[1] <= count and len(objectives):
        assert (objectives[rows].min(axis=0) == objectives.min(axis=0)).all()


def test_diverse_fills_the_largest_gap() -> None:
    line = np.array([0.0, 0.1, 0.2, 0.55, 0.9, 1.0])
    assert diverse(np.column_stack([line, -line]), 3).tolist() == [0, 3, 5]


@given(st.integers(0, 1000), st.integers(1, 5))
@settings(derandomize=True, max_examples=50, deadline=None)
def test_front_grows_batch_by_batch_as_if_at_once(seed: int, batches: int) -> None:
    rng = np.random.default_rng(seed)
    archive = Archive(Judged.none(1, (2, 1, 2, 2)))
    parts = [
        judged(
            rng.integers(0, 6, (8, 2)).astype(np.float64), rng.uniform(-2, 1, (8, 2)), first=8 * i
        )
        for i in range(batches)
    ]
    for part in parts:
        archive.add(part)
    known = Judged.concatenate(parts)
    feasible = known[np.flatnonzero((known.violations <= 0.0).all(axis=1))]
    expected = feasible[nondominated(feasible.objectives)]
    assert archive.front.objectives.tolist() == expected.objectives.tolist()
    assert len(archive) == 8 * batches
    assert archive.feasible == len(feasible)
    assert archive.least_violation == np.maximum(known.violations, 0.0).sum(axis=1).min()
    assert archive.find(known.keys[::-1]).designs.tolist() == known.designs[::-1].tolist()


def test_numbers_come_apart_as_they_went_together() -> None:
    rng = np.random.default_rng(3)
    one = Judged(
        designs=rng.random((4, 5)),
        objectives=rng.random((4, 2)),
        margins=rng.random((4, 3)),
        violations=rng.random((4, 5)),
        worst=rng.random((4, 6)),
    )
    other = Judged.from_numbers(one.designs, one.numbers(), (2, 3, 5, 6))
    for name in ("objectives", "margins", "violations", "worst"):
        assert np.array_equal(getattr(one, name), getattr(other, name))
