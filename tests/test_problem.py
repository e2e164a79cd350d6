"""The genetic algorithm as it is set up here, on a problem whose front is known."""

from pathlib import Path

import numpy as np
import pytest

from models.conventions import FloatArray
from optim.archive import Archive, Judged
from optim.problem import door, genetic, whole
from optim.space import DesignSpace
from tests.search_specs import EASY, read

SIZES = (2, 1, 1, 1)
GENERATIONS = 12


def bred(space: DesignSpace, seed: int) -> Archive:
    """Return what is bred on goals spacing and width, under spacing + width at least 0.8 m."""
    archive = Archive(Judged.none(5, SIZES))
    rng = np.random.default_rng(seed)
    start = space.low + (space.high - space.low) * rng.random((40, 5))
    algorithm = genetic(space, archive, start, population=20, n_goals=2, rng=rng)
    for _ in range(GENERATIONS):
        asked = algorithm.ask()
        designs: FloatArray = asked.get("X")
        goals = designs[:, 1:3]
        miss = 0.8 - goals.sum(axis=1, keepdims=True)
        archive.add(Judged.from_numbers(designs, np.hstack([goals, -miss, miss, miss]), SIZES))
        objectives, violation = whole(archive.find([row.tobytes() for row in designs]))
        asked.set("F", objectives, "G", violation[:, None])
        algorithm.tell(infills=asked)
    return archive


@pytest.fixture(scope="module")
def space(tmp_path_factory: pytest.TempPathFactory) -> DesignSpace:
    requirements = read(tmp_path_factory.mktemp("space"), EASY)
    return DesignSpace.from_requirements(requirements)


def test_offspring_are_new_buildable_and_inside(space: DesignSpace) -> None:
    designs = bred(space, 1).all.designs
    assert len(designs) == 40 + 20 * (GENERATIONS - 1)
    assert len({row.tobytes() for row in designs}) == len(designs)
    assert np.array_equal(space.snap(designs), designs)
    assert (designs >= space.low).all()
    assert (designs <= space.high).all()


def test_front_is_found(space: DesignSpace) -> None:
    front = bred(space, 1).front.objectives
    assert len(front) >= 8
    assert front.sum(axis=1).mean() < 0.83


def test_chance_comes_from_the_generator_alone(space: DesignSpace) -> None:
    np.random.seed(0)  # noqa: NPY002
    one = bred(space, 7).all.designs
    np.random.seed(1)  # noqa: NPY002
    assert np.array_equal(bred(space, 7).all.designs, one)
    assert not np.array_equal(bred(space, 8).all.designs, one)


def test_a_door_takes_its_limits_for_the_goal() -> None:
    numbers = np.array([[5.0, 5.0, -1.0, 1.0, 2.0, -3.0, 0.5, 0.0]])
    judged = Judged.from_numbers(np.zeros((1, 1)), numbers, (2, 1, 4, 1))
    objectives, others = door([0, 2])(judged)
    assert objectives.tolist() == [[1.0]]
    assert others.tolist() == [2.5]


def test_a_spent_space_ends_the_asking(tmp_path: Path) -> None:
    text = EASY.replace("plate_width_mm = [300, 900]", "plate_width_mm = 300").replace(
        "[200, 500]", "[200, 210]"
    )
    text = text.replace("[290, 350]", "300\nplate_length_mm = 300").replace("[60, 90]", "90")
    space = DesignSpace.from_requirements(read(tmp_path, text))
    archive = Archive(Judged.none(5, SIZES))
    rng = np.random.default_rng(1)
    start = space.low + (space.high - space.low) * np.linspace(0.0, 1.0, 9)[:, None]
    algorithm = genetic(space, archive, start, population=4, n_goals=2, rng=rng)
    asked, seen = algorithm.ask(), 0
    while asked is not None:
        designs = asked.get("X")
        seen += len(designs)
        archive.add(Judged.from_numbers(designs, np.zeros((len(designs), 5)), SIZES))
        asked.set("F", designs[:, 1:3], "G", np.zeros((len(designs), 1)))
        algorithm.tell(infills=asked)
        asked = algorithm.ask()
    assert seen == 3
