"""Judging: figures through limits, each design once, and from the journal when it knows them."""

from pathlib import Path

import numpy as np
import pytest

from models import Figures, evaluate
from optim.referee import columns
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


def test_columns_name_every_number(tmp_path: Path) -> None:
    with judging(tmp_path) as referee:
        names = columns(referee.rules)
        numbers = referee.judge(DESIGNS).numbers()
    assert len(names) == sum(referee.sizes) == numbers.shape[1]
    assert names[:4] == [
        "goal frontal_area",
        "goal beamwidth_h",
        "goal gain",
        "margin gain_dbi.min",
    ]
