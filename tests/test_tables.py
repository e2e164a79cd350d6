"""Tables: fixed decimals, empty cells for what is missing, strict JSON."""

import json
from pathlib import Path

import numpy as np
import pytest

from models import Figures
from optim.archive import Judged
from optim.space import DesignSpace
from optim.tables import dimensions, front_csv, margins, relaxation, sizes, summary_json
from tests.search_specs import read


def one(worst: float) -> Judged:
    designs = np.array([[np.pi / 2, 0.35, 0.6, 0.7, 0.33]])
    return Judged(
        designs=designs,
        objectives=np.zeros((1, 3)),
        margins=np.array([[0.25, -1.5, 3.0]]),
        violations=np.array([[-0.25, 0.5, -6.0, 0.0, 0.0]]),
        worst=np.full((1, len(Figures.names())), worst),
    )


def test_one_line_by_hand(tmp_path: Path) -> None:
    requirements = read(tmp_path)
    reflectors = DesignSpace.from_requirements(requirements).reflectors(one(1.0).designs)
    line = front_csv(one(1.23456), reflectors, requirements, "image").splitlines()[1]
    # Width 2·600·sin 45°, depth 600·cos 45°; mass of two 0.42 m² sheets of 2 mm and an 8 mm rod.
    mass = 2700.0 * (2 * 0.6 * 0.7 * 0.002 + np.pi / 4 * 0.008**2 * 0.33)
    assert line == (
        f"90.0,350.0,600.0,700.0,330.0,8.0,848.53,700.00,424.26,0.593970,{mass:.4f},"
        "1.235,1.235,1.235,1.23,1.23,1.235,1.235,1.235,1.235,1.23,1.23,1.235,-0.5000,image"
    )


def test_missing_is_empty_and_infinite_is_said(tmp_path: Path) -> None:
    requirements = read(tmp_path)
    reflectors = DesignSpace.from_requirements(requirements).reflectors(one(1.0).designs)
    cells = [
        front_csv(one(value), reflectors, requirements, "image").splitlines()[1].split(",")[11]
        for value in (np.nan, np.inf, -np.inf)
    ]
    assert cells == ["", "inf", "-inf"]


def test_numbers_by_their_names(tmp_path: Path) -> None:
    requirements = read(tmp_path)
    reflectors = DesignSpace.from_requirements(requirements).reflectors(one(1.0).designs)
    assert dimensions(reflectors, 0)["apex_angle_deg"] == 90.0
    assert sizes(reflectors, requirements)["height_mm"][0] == pytest.approx(700.0)
    assert margins(one(1.0), 0, requirements)["beamwidth_h_deg.max"] == -1.5
    ((limit, value),) = relaxation(one(1.0), 0, requirements)
    assert (limit.label, value) == ("beamwidth_h_deg.max", 61.5)


def test_summary_is_strict_json() -> None:
    text = summary_json({"a": np.float64(np.nan), "b": [np.inf, np.int64(3), "ä"], "c": {"d": 0.1}})
    assert json.loads(text) == {"a": None, "b": [None, 3, "ä"], "c": {"d": 0.1}}
    assert "NaN" not in text
