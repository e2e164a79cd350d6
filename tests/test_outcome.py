"""A run read back from its folder is the run that was written, bit for bit."""

import json
from dataclasses import fields, replace
from pathlib import Path

import numpy as np
import pytest

from optim.faults import SpecError
from optim.journal import decode, encode
from optim.outcome import FILE, REQUIREMENTS, read_outcome, write_outcome
from optim.run import Options, run
from optim.tolerance import Influence, Spread
from tests.report_runs import changed
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


@pytest.fixture(scope="module")
def folder(tmp_path_factory: pytest.TempPathFactory) -> Path:
    place = tmp_path_factory.mktemp("run")
    text = EASY.replace("[goals]", "[tolerance]\nspacing_mm = 1\n[goals]")
    run(write(place, text), Options(out=place / "run", jobs=1, quiet=True, seed=3))
    return place / "run"


@pytest.mark.parametrize(
    ("path", "value"),
    [
        ("versions", ...),
        ("versions", {"numpy": 2}),
        ("title", "two\nlines"),
        ("file", 3),
        ("run/scout", "guess"),
        ("run/prove", ["image"]),
        ("run/seed", "one"),
        ("model", "guess"),
        ("evaluations", {"image": -1}),
        ("evaluations", "many"),
        ("parts/front", ...),
        ("parts/front/rows", 997),
        ("parts/front/numbers", ""),
        ("parts/nearest/rows", 3),
        ("parts/front/columns/margins", 7),
        ("parts/front/columns", {}),
        ("parts/front/numbers", "AAAA"),
        ("parts/nearest/numbers", None),
        ("spreads/0", ...),
        ("spreads/0/high", ""),
        ("spreads/0/high", 1e999),
        ("spreads/0/method", "guess"),
        ("spreads/0/influences", {}),
        ("spreads/0/influences/spacing/share", None),
        ("spreads/0/reach", "?"),
    ],
)
def test_hand_edited_files_are_told(folder: Path, path: str, value: object) -> None:
    before = (folder / FILE).read_bytes()
    content = json.loads(before)
    way = tuple(int(key) if key.isdigit() else key for key in path.split("/"))
    changed(content, way, value)
    read_outcome(folder)
    try:
        (folder / FILE).write_text(json.dumps(content), encoding="utf-8")
        with pytest.raises(SpecError, match=r"found\.json: a damaged file") as told:
            read_outcome(folder)
        assert "\n" not in str(told.value)
    finally:
        (folder / FILE).write_bytes(before)


@pytest.mark.parametrize(("column", "number"), [(0, np.nan), (1, -0.3), (2, 1e200), (7, np.inf)])
def test_numbers_that_no_search_finds_are_told(folder: Path, column: int, number: float) -> None:
    before = (folder / FILE).read_bytes()
    content = json.loads(before)
    front = content["parts"]["front"]
    matrix = decode(front["numbers"], front["rows"])
    matrix[-1, column] = number
    front["numbers"] = encode(matrix)
    try:
        (folder / FILE).write_text(json.dumps(content), encoding="utf-8")
        with pytest.raises(SpecError, match=r"found\.json: a damaged file"):
            read_outcome(folder)
    finally:
        (folder / FILE).write_bytes(before)


def test_requirements_changed_since_the_search_are_told(folder: Path) -> None:
    path = folder / REQUIREMENTS
    before = path.read_bytes()
    try:
        path.write_text(before.decode().replace("min = 11", "min = 12"))
        with pytest.raises(SpecError, match=r"requirements\.toml: a file changed since"):
            read_outcome(folder)
    finally:
        path.write_bytes(before)


def test_a_mark_before_the_text_is_no_change(tmp_path: Path) -> None:
    spec = write(tmp_path)
    spec.write_bytes(b"\xef\xbb\xbf" + spec.read_bytes())
    result = run(spec, Options(out=tmp_path / "run", jobs=1, quiet=True))
    back, _ = read_outcome(tmp_path / "run")
    assert back.requirements.sha256 == result.requirements.sha256
