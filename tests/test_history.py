"""The course of a search: hypervolume against its closed form, shares against a count."""

import json
from pathlib import Path

import numpy as np
import pytest

from optim.history import AIR, course_of, courses, volumes
from optim.journal import JournalError, decode, encode
from optim.run import Options, run
from tests.search_specs import write


def test_hypervolume_of_two_corners() -> None:
    batches = [np.array([[1.0, 30.0]]), np.array([[0.0, 30.0], [1.0, 10.0]]), np.empty((0, 2))]
    # Goals as shares of their extents: the worst corner first, then both other corners of a
    # square; rectangles up to the reference at 1 + AIR (derived).
    corner, side = AIR * AIR, (1.0 + AIR) * AIR
    last = 2.0 * side - corner
    assert volumes(batches) == pytest.approx([corner / last, 1.0, 1.0])


def test_nothing_feasible_covers_nothing() -> None:
    assert volumes([np.empty((0, 2)), np.empty((0, 2))]).tolist() == [0.0, 0.0]


def test_shares_and_counts() -> None:
    columns = ["goal gain", "margin a", "violation a", "violation doubt", "worst gain"]
    first = np.array([[1.0, 0.0, -1.0, 0.0, 0.0], [2.0, 0.0, 0.5, -1.0, 0.0]])
    course = course_of("scout", "ray", columns, [first, first[:1]])
    assert course.designs.tolist() == [2.0, 3.0]
    assert course.feasible.tolist() == [0.5, 1.0]


def test_of_a_run(tmp_path: Path) -> None:
    result = run(write(tmp_path), Options(out=tmp_path / "run", jobs=1, quiet=True))
    (course,) = courses(tmp_path / "run" / "journal.jsonl")
    assert (course.stage, course.model) == ("scout", "image")
    assert course.designs[-1] <= result.found.evaluations["image"]
    assert np.all(np.diff(course.volume) >= -1e-12)
    assert course.volume[-1] == pytest.approx(1.0)


@pytest.mark.parametrize("change", ["scout", "numbers"])
def test_what_no_search_writes_is_told(tmp_path: Path, change: str) -> None:
    run(write(tmp_path), Options(out=tmp_path / "run", jobs=1, quiet=True))
    path = tmp_path / "run" / "journal.jsonl"
    header, batch, *rest = path.read_text().splitlines(keepends=True)
    if change == "scout":
        header = header.replace('"scout":"image"', '"scout":"\\ud800"')
    else:
        entry = json.loads(batch)
        numbers = decode(entry["numbers"], len(entry["designs"]))
        numbers[0, 0] = -np.inf
        batch = json.dumps(entry | {"numbers": encode(numbers)}) + "\n"
    path.write_text("".join([header, batch, *rest]))
    with pytest.raises(JournalError, match="no search writes"):
        courses(path)


def test_without_a_journal(tmp_path: Path) -> None:
    assert courses(tmp_path / "journal.jsonl") == []
