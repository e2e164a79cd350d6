"""The outcome in words, from a result made by hand."""

import json
from dataclasses import replace
from pathlib import Path

import numpy as np

from models import Figures
from optim.archive import Judged
from optim.designfile import read_design
from optim.requirements import Band
from optim.result import Result
from optim.search import Found
from optim.space import DesignSpace
from tests.search_specs import read

SIZES = (3, 3, 5, len(Figures.names()))


def row(spacing: float, area: float, gain: float, beam: float) -> Judged:
    """Return a design with these worst values; the resistance is 10 ohm over its limit."""
    margins = [gain - 11.0, 60.0 - beam, 10.0]
    violations = [11.0 - gain, (beam - 60.0) / 3.0, -20.0, -0.5, 0.0]
    numbers = [area, beam, -gain, *margins, *violations, *([1.0] * SIZES[-1])]
    return Judged.from_numbers(
        np.array([[np.pi / 2, spacing, 0.6, 0.7, 0.33]]), np.array([numbers]), SIZES
    )


def result(folder: Path, **found: Judged) -> Result:
    requirements = read(folder)
    none = Judged.none(5, SIZES)
    parts = {"front": none, "nearest": none, "relaxed": none, **found}
    space = DesignSpace.from_requirements(requirements)
    outcome = Found(**parts, model="image", evaluations={"image": 9}, spreads={})
    return Result(requirements, space, outcome)


def test_met_in_words(tmp_path: Path) -> None:
    front = Judged.concatenate([row(0.3, 0.5, 11.05, 50.0), row(0.4, 0.9, 13.0, 45.0)])
    lines = result(tmp_path, front=front).text().splitlines()
    assert lines[0] == (
        "Met: 2 designs on the front, by image at 5 frequencies from 420 to 440 MHz."
    )
    table = {line.split()[0]: line.split()[1:] for line in lines[2:]}
    assert table["asked"] == ["smallest", "balanced"]
    assert table["spacing_mm"] == ["300", "400"]
    assert table["gain_dbi"] == ["min", "11", "11.05", "(+0.05)", "13", "(+2)"]
    assert table["beamwidth_h_deg"] == ["max", "60", "50", "(+10)", "45", "(+15)"]


def test_one_frequency_in_words(tmp_path: Path) -> None:
    one = result(tmp_path, front=row(0.3, 0.5, 11.05, 50.0))
    single = replace(one.requirements, band=Band(430e6, 430e6, 1))
    assert next(replace(one, requirements=single).verdict()) == (
        "Met: 1 design on the front, by image at 430 MHz."
    )


def test_not_met_in_words(tmp_path: Path) -> None:
    near = row(0.3, 0.5, 10.4, 50.0)
    text = result(tmp_path, nearest=near, relaxed=near).text()
    assert text.startswith("Not met: no design found meets every requirement")
    assert "10.4 (-0.6)" in text
    assert text.endswith("Relax gain_dbi.min from 11 to 10.4 and a design exists.")


def test_nothing_to_relax_is_said(tmp_path: Path) -> None:
    text = result(tmp_path, nearest=row(0.3, 0.5, 10.4, 50.0)).text()
    assert text.endswith("No relaxing of limits alone lets one of the designs found in.")


def test_binding_is_what_the_recommended_barely_meet(tmp_path: Path) -> None:
    front = Judged.concatenate([row(0.3, 0.5, 11.05, 50.0), row(0.4, 0.9, 13.0, 45.0)])
    result(tmp_path, front=front).write(tmp_path, {"seconds": 1.0})
    summary = json.loads((tmp_path / "summary.json").read_text())
    assert summary["binding"] == ["gain_dbi.min"]
    assert summary["designs_on_front"] == 2
    assert sorted(path.name for path in (tmp_path / "recommended").iterdir()) == [
        "balanced.toml",
        "smallest.toml",
    ]


def test_design_files_of_the_longest_title_are_read(tmp_path: Path) -> None:
    one = result(tmp_path, front=row(0.3, 0.5, 11.05, 50.0))
    named = replace(one, requirements=replace(one.requirements, title="x" * 200))
    named.write(tmp_path, {})
    assert read_design(tmp_path / "recommended" / "smallest.toml").title.endswith("x: smallest")
