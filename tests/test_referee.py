"""Judging: figures through limits, each design once, and from the journal when it knows them."""

from pathlib import Path

import numpy as np
import pytest

from models import Figures, Reflectors, evaluate
from models.conventions import FloatArray
from optim.evaluate import Evaluator
from optim.margins import Judge
from optim.referee import Referee, columns
from optim.space import DesignSpace
from tests.search_specs import judging, read

DESIGNS = np.array([[np.pi / 2, 0.3, 0.6, 0.7, 0.33], [np.pi / 3, 0.4, 0.5, 0.6, 0.33]])


def test_judged_are_the_models_figures_against_the_limits(tmp_path: Path) -> None:
    requirements = read(tmp_path)
    with judging(tmp_path) as referee:
        judged = referee.judge(DESIGNS)
    direct = evaluate(
        referee.space.reflectors(DESIGNS), requirements.band.frequencies(), model="image"
    )
    gain, beam = direct.gain_dbi.min(axis=1), direct.beamwidth_h_deg.max(axis=1)
    np.testing.assert_allclose(judged.margins[:, 0], gain - 11.0, rtol=1e-12)
    np.testing.assert_allclose(judged.margins[:, 1], 60.0 - beam, rtol=1e-12)
    np.testing.assert_allclose(judged.violations[:, 1], (beam - 60.0) / 3.0, rtol=1e-12)
    np.testing.assert_allclose(judged.objectives[:, 2], -gain, rtol=1e-12)
    np.testing.assert_allclose(judged.worst[:, Figures.names().index("gain_dbi")], gain)


def test_each_design_is_judged_once(tmp_path: Path) -> None:
    with judging(tmp_path) as referee:
        referee.judge(DESIGNS[[0, 0]])
        again = referee.judge(DESIGNS[[1, 0, 1]])
    assert len(referee.archive) == 2
    assert np.array_equal(again.designs, DESIGNS[[1, 0, 1]])
    assert (tmp_path / "journal.jsonl").read_text().count("\n") == 3


def test_answers_come_from_the_journal_first(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    with judging(tmp_path) as referee:
        judged = referee.judge(DESIGNS)
    with judging(tmp_path) as referee:
        monkeypatch.setattr("optim.evaluate.evaluate", None)
        replayed = referee.judge(DESIGNS)
    assert replayed.numbers().tobytes() == judged.numbers().tobytes()


def test_what_the_front_beats_is_not_looked_at_further(tmp_path: Path) -> None:
    requirements = read(tmp_path)
    first, asked, finer = requirements.band.split()
    further = np.concatenate([asked, finer])
    asked_of: list[tuple[int, int]] = []

    class Counting(Evaluator):
        def figures(self, reflectors: Reflectors, frequencies: FloatArray) -> Figures:
            asked_of.append((len(reflectors), len(frequencies)))
            return super().figures(reflectors, frequencies)

    space = DesignSpace.from_requirements(requirements)
    evaluator = Counting(requirements, "image")
    rules = Judge(requirements)
    referee = Referee("scout", space, rules, evaluator, first, None, further=further)
    # Plates do not change the image model's figures: the larger ones only cost area.
    good = np.array([[np.pi / 3, 0.35, 0.5, 0.6, 0.33]])
    worse = good + np.array([0.0, 0.0, 0.1, 0.1, 0.0])
    assert referee.judge(good).feasible.all()
    assert referee.judge(worse).feasible.all()
    assert asked_of == [(1, 3), (1, 2), (1, 3)]
    assert referee.whole(referee.archive.all).tolist() == [True, False]
    assert len(referee.archive.front) == 1
    # Asked for, the rest is made up for, and the outcome is that of all frequencies at once.
    made_up = referee.judge(worse, lambda judged: np.ones(len(judged), dtype=bool))
    assert asked_of[3:] == [(1, 2)]
    assert referee.whole(made_up).all()
    assert len(referee.archive) == 2
    everything = np.concatenate([first, further])
    at_once = Referee("scout", space, rules, evaluator, everything, None).judge(worse)
    assert made_up.numbers().tobytes() == at_once.numbers().tobytes()


def test_columns_name_every_number(tmp_path: Path) -> None:
    with judging(tmp_path) as referee:
        names = columns(referee.rules)
        numbers = referee.judge(DESIGNS).numbers()
    # The journal also says which designs were judged at all frequencies.
    assert len(names) - 1 == sum(referee.sizes) == numbers.shape[1]
    assert names[:4] == [
        "goal frontal_area",
        "goal beamwidth_h",
        "goal gain",
        "margin gain_dbi.min",
    ]
