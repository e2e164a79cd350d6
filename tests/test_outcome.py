"""A run read back from its folder is the run that was written, bit for bit."""

import json
from dataclasses import fields, replace
from pathlib import Path

import numpy as np
import pytest

from optim.faults import SpecError
from optim.outcome import FILE, REQUIREMENTS, read_outcome, write_outcome
from optim.run import Options, run
from optim.tolerance import Influence, Spread
from tests.search_specs import EASY, write


def test_what_goes_in_comes_back(tmp_path: Path) -> None:
    result = run(write(tmp_path), Options(out=tmp_path / "run", jobs=1, quiet=True, seed=3))
    spread = Spread(
        expected=1 / 3,
        low=0.1,
        high=0.9,
        method="fit",
        samples=64,
        influences={"spacing": Influence(plus_minus=1e-3, share=0.7, yield_if_exact=0.5)},
        reach=np.array([0.1, np.inf]),
    )
    keys = [result.found.front.keys[row] for row in result.shown()[1].values()]
    found = replace(result.found, spreads=dict.fromkeys(keys, spread))
    write_outcome(tmp_path / "run", replace(result, found=found), {"numpy": "1"})
    back, versions = read_outcome(tmp_path / "run")
    assert versions == {"numpy": "1"}
    for part in ("front", "nearest", "relaxed"):
        for field in fields(result.found.front):
            one = getattr(getattr(result.found, part), field.name)
            other = getattr(getattr(back.found, part), field.name)
            assert one.shape == other.shape
            assert one.tobytes() == other.tobytes()
    assert back.found.evaluations == result.found.evaluations
    assert back.requirements.run == result.requirements.run
    assert back.requirements.limits == result.requirements.limits
    assert back.text() == replace(result, found=found).text()
    assert list(back.found.spreads) == keys
    assert back.found.spreads[keys[0]].influences == spread.influences
    assert back.found.spreads[keys[0]].reach.tobytes() == spread.reach.tobytes()
    assert (tmp_path / "run" / REQUIREMENTS).read_text() == EASY


@pytest.mark.parametrize("text", ["", "[]", "{}", '{"format": 1}', '{"format": 2, "run": {}}'])
def test_damaged_files_are_told(tmp_path: Path, text: str) -> None:
    (tmp_path / REQUIREMENTS).write_text(EASY)
    (tmp_path / FILE).write_text(text)
    with pytest.raises(SpecError, match=r"found\.json: a damaged file"):
        read_outcome(tmp_path)


def test_a_file_without_its_versions_is_damaged(tmp_path: Path) -> None:
    folder = tmp_path / "run"
    run(write(tmp_path), Options(out=folder, jobs=1, quiet=True, seed=3))
    content = json.loads((folder / FILE).read_text(encoding="utf-8"))
    del content["versions"]
    (folder / FILE).write_text(json.dumps(content), encoding="utf-8")
    with pytest.raises(SpecError, match="a damaged file"):
        read_outcome(folder)
