"""The folder of a study: outcomes that are whole or not there, one writer, gathered results."""

from __future__ import annotations

import json
from dataclasses import asdict, replace
from pathlib import Path

import pytest

from optim import study_folder
from optim.study_file import StudyError, read_study
from optim.study_folder import Outcome, StudyFolder, gathered, write_whole
from tests.search_specs import write

OUTCOME = Outcome(
    status="met", front=2, smallest={"frontal_area_m2": "0.125"}, curve=[[0.125, 11.0]], seconds=2.5
)


def test_outcomes_come_back(tmp_path: Path) -> None:
    folder = StudyFolder(tmp_path)
    assert folder.outcome(3) is None
    folder.settle(3, OUTCOME)
    assert folder.outcome(3) == OUTCOME
    assert folder.run(3) == tmp_path / "runs" / "0003"
    assert OUTCOME.area == 0.125
    assert replace(OUTCOME, smallest={}).area is None


WHOLE = json.dumps(asdict(OUTCOME))


@pytest.mark.parametrize(
    "content",
    [
        "",
        '{"status": "met"',
        "[]",
        '{"status": "met"}',
        WHOLE.replace('"met"', "[1]"),
        WHOLE.replace("2.5", '"long"'),
        WHOLE.replace('"0.125"', '"small"'),
        WHOLE.replace("frontal", "rear"),
        WHOLE.replace("[[", "["),
        "[" * 100_000,
    ],
)
def test_what_is_no_outcome_is_none(tmp_path: Path, content: str) -> None:
    folder = StudyFolder(tmp_path)
    folder.run(1).mkdir(parents=True)
    (folder.run(1) / "outcome.json").write_text(content)
    assert folder.outcome(1) is None


def test_a_write_that_fails_leaves_what_was_there(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    path = tmp_path / "file"
    write_whole(path, "old")

    def full(_handle: int) -> None:
        raise OSError(28, "No space left on device")

    monkeypatch.setattr("os.fsync", full)
    with pytest.raises(OSError, match="No space left"):
        write_whole(path, "new")
    assert path.read_text() == "old"


def test_one_writer(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(study_folder, "PATIENCE", 0.05)
    write(tmp_path)
    (tmp_path / "study.toml").write_text('spec = "spec.toml"\nrepeats = 2')
    study, folder = read_study(tmp_path / "study.toml"), StudyFolder(tmp_path / "out")
    assert not folder.in_use()
    with folder.opened(study, {"numpy": "2"}, resume=False):
        assert folder.in_use()
        other = StudyFolder(tmp_path / "out").opened(study, {"numpy": "2"}, resume=True)
        with pytest.raises(StudyError, match="another study is writing"), other:
            pass
    assert not folder.in_use()
    with pytest.raises(StudyError, match=r"versions: .*'2'. recorded"):
        folder.opened(study, {"numpy": "3"}, resume=True).__enter__()
    (folder.path / "study.json").write_text("rubbish")
    with pytest.raises(StudyError, match="no file of a study"):
        folder.header()


def test_gathered_takes_the_smallest(tmp_path: Path) -> None:
    summary = {"status": "met", "binding": ["size.width_mm.max"], "seconds": 4.0}
    (tmp_path / "summary.json").write_text(json.dumps(summary))
    (tmp_path / "front.csv").write_text(
        "frontal_area_m2,gain_dbi,model\n0.2,12,ray\n0.1,11,ray\n0.1,10,moment\n"
    )
    outcome = gathered(tmp_path)
    assert outcome.smallest == {"frontal_area_m2": "0.1", "gain_dbi": "11", "model": "ray"}
    assert outcome.curve == [[0.2, 12.0], [0.1, 11.0], [0.1, 10.0]]
    assert outcome.reason == ""
    (tmp_path / "front.csv").write_text("frontal_area_m2,gain_dbi,model\n")
    (tmp_path / "summary.json").write_text(json.dumps(summary | {"status": "not met"}))
    assert gathered(tmp_path).reason == "binds: size.width_mm.max"
