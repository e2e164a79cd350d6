"""A run's pictures: which axes its goals ask for, what stands on them, and the files."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from models import evaluate
from models.conventions import C0
from optim.archive import Judged
from optim.margins import Judge
from optim.plots import draw_run, front_of
from optim.requirements import read_requirements
from optim.result import Result
from optim.search import Found
from optim.space import DesignSpace
from tests.picture_checks import assert_readable

_SPEC = """
title = "Gate, $5 each"
[band]
low_mhz = 863
high_mhz = 870
[require]
gain_dbi = {{ min = {gain} }}
resistance_ohm = {{ min = 0 }}
[size]
frontal_area_m2 = {{ max = 0.3 }}
[search]
apex_angle_deg = 90
[goals]
{goals}
[run]
scout = "image"
prove = "none"
"""
_DEFAULT = 'minimise = ["frontal_area"]\nmaximise = ["gain"]'


def _result(folder: Path, gain: float = 11.5, goals: str = _DEFAULT) -> Result:
    """Return a run whose few designs are judged by the image model: gain falls with spacing."""
    path = folder / "gate.toml"
    path.write_text(_SPEC.format(gain=gain, goals=goals), encoding="utf-8")
    requirements = read_requirements(path)
    space = DesignSpace.from_requirements(requirements)
    designs = np.array(
        [[np.pi / 2.0, s, w, 0.3, 0.16] for s, w in ((0.17, 0.3), (0.15, 0.35), (0.13, 0.4))]
    )
    reflectors, judge = space.reflectors(designs), Judge(requirements)
    figures = evaluate(
        reflectors, requirements.band.frequencies(), model="image", terms=requirements.terms
    )
    judged = Judged(
        designs=designs,
        objectives=judge.objectives(reflectors, figures),
        margins=judge.margins(reflectors, figures),
        violations=judge.violations(reflectors, figures),
        worst=np.column_stack(list(judge.worst(figures).values())),
    )
    rows = np.flatnonzero(judged.feasible)
    none = judged[:0]
    met = rows.size > 0
    return Result(
        requirements,
        space,
        Found(
            front=judged[rows] if met else none,
            nearest=none if met else judged,
            relaxed=none,
            model="image",
            evaluations={"image": 3},
        ),
    )


def _series(result: Result, label: str) -> tuple[list[float], list[float]]:
    lines = front_of(result).axes[0].lines
    (line,) = [line for line in lines if str(line.get_label()).startswith(label)]
    x, y = (np.asarray(data, dtype=np.float64) for data in line.get_data())
    return x.tolist(), y.tolist()


def test_size_across_gain_upwards_and_the_low_edge_for_the_aperture(tmp_path: Path) -> None:
    result = _result(tmp_path)
    axes = front_of(result).axes[0]
    assert axes.get_xlabel() == "frontal area (m²)"
    assert axes.get_ylabel() == "gain, worst in the band (dBi)"
    (area,), (gain,) = _series(result, "smallest")
    assert area == pytest.approx(2.0 * 0.3 * np.sin(np.pi / 4.0) * 0.3)
    # Infinite 90° corner, S = λ/2, half-wave dipole: 11.82 dBi (Kraus, Antennas; derived).
    assert gain == pytest.approx(11.82, abs=0.1)
    areas, gains = _series(result, "uniformly lit")
    assert areas[-1] == pytest.approx(10 ** (gains[-1] / 10) * (C0 / 863e6) ** 2 / (4.0 * np.pi))


@pytest.mark.parametrize(
    ("goals", "labels"),
    [
        ('minimise = ["mass"]', ["mass (kg)", "gain, worst in the band (dBi)"]),
        ('maximise = ["gain"]', ["frontal area (m²)", "gain, worst in the band (dBi)"]),
        (
            'minimise = ["longest_side", "beamwidth_h"]\nmaximise = ["gain"]',
            [
                "longest side of the box (mm)",
                "H-plane beamwidth, worst in the band (°)",
                "gain, worst in the band (dBi)",
            ],
        ),
        ('minimise = ["volume", "mass"]', ["volume of the box (m³)", "mass (kg)"]),
        (
            'maximise = ["gain"]\nminimise = ["beamwidth_e"]',
            ["gain, worst in the band (dBi)", "E-plane beamwidth, worst in the band (°)"],
        ),
    ],
)
def test_axes_follow_the_goals(tmp_path: Path, goals: str, labels: list[str]) -> None:
    figure = front_of(_result(tmp_path, goals=goals))
    found = [figure.axes[0].get_xlabel(), figure.axes[0].get_ylabel()]
    found += [axes.get_ylabel() for axes in figure.axes[1:]]
    assert found == labels
    assert_readable(figure)


def test_longest_side_is_in_millimetres(tmp_path: Path) -> None:
    (side,), _ = _series(_result(tmp_path, goals='minimise = ["longest_side"]'), "smallest")
    assert side == pytest.approx(2.0 * 300.0 * np.sin(np.pi / 4.0))


def test_nearest_designs_are_crosses(tmp_path: Path) -> None:
    result = _result(tmp_path, gain=20.0)
    assert not result.met
    areas, _ = _series(result, "nearest designs, requirements not met")
    assert len(areas) == 3
    assert_readable(front_of(result))


def test_files_of_a_run(tmp_path: Path) -> None:
    result = _result(tmp_path, gain=12.0)
    assert len(result.found.front) == 1
    files = draw_run(tmp_path / "pictures", result)
    _, rows = result.shown()
    stems = {"front", "sizes", "band"} | {f"{role}_cuts" for role in rows}
    assert {f.name for f in files} == {f"{stem}.svg" for stem in stems}
    assert sorted(files) == sorted((tmp_path / "pictures").iterdir())


def test_a_run_without_any_design_still_has_its_front(tmp_path: Path) -> None:
    result = _result(tmp_path)
    none = result.found.front[:0]
    empty = Result(
        result.requirements,
        result.space,
        Found(front=none, nearest=none, relaxed=none, model="image", evaluations={}),
    )
    assert {f.name for f in draw_run(tmp_path / "pictures", empty)} == {"front.svg"}
