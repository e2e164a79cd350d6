"""Maps against single designs judged one by one."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from models import evaluate
from optim.evaluate import Evaluator
from optim.space import DesignSpace
from optim.trade_maps import Map, chosen_pairs, map_of
from tests.search_specs import EASY, read

AT = np.array([np.pi / 2.0, 0.33, 0.6, 0.7, 0.32])


def made(folder: Path, pair: tuple[str, str]) -> Map:
    requirements = read(folder)
    space = DesignSpace.from_requirements(requirements)
    with Evaluator(requirements, "image") as evaluator:
        return map_of(requirements, space, evaluator, requirements.band.frequencies(), AT, pair, 5)


def test_every_point_is_that_design(tmp_path: Path) -> None:
    chart = made(tmp_path, ("spacing", "dipole_length"))
    space = DesignSpace.from_requirements(read(tmp_path))
    row, column = 3, 1
    design = AT.copy()
    design[1], design[4] = chart.x[column], chart.y[row]
    reflectors = space.reflectors(design[None, :])
    figures = evaluate(reflectors, [420e6, 430e6, 440e6], model="image")
    assert chart.worst["gain_dbi"][row, column] == pytest.approx(figures.gain_dbi.min())
    assert chart.frontal_area[row, column] == pytest.approx(float(reflectors.frontal_area[0]))
    assert np.array_equal(chart.rows[row * chart.x.size + column], design)


def test_the_design_lies_on_the_map(tmp_path: Path) -> None:
    chart = made(tmp_path, ("spacing", "dipole_length"))
    assert 0.33 in chart.x
    assert 0.32 in chart.y
    assert (chart.x[0], chart.x[-1]) == (0.2, 0.5)
    assert np.all(np.diff(chart.x) > 0.0)


def test_border_leaves_out_what_is_met_everywhere(tmp_path: Path) -> None:
    chart = made(tmp_path, ("spacing", "dipole_length"))
    assert chart.border.shape == (5, 5)
    assert np.all(chart.border >= chart.smallest_margin)
    assert np.array_equal(chart.border < 0.0, chart.smallest_margin < 0.0)
    assert (chart.border < 0.0).any()


def test_pairs_are_of_free_variables(tmp_path: Path) -> None:
    space = DesignSpace.from_requirements(read(tmp_path))
    assert chosen_pairs(space)[0] == ("spacing", "apex_angle")
    assert len(chosen_pairs(space)) == 3
    fixed = EASY.replace("spacing_mm = [200, 500]", "spacing_mm = 300")
    pairs = chosen_pairs(DesignSpace.from_requirements(read(tmp_path, fixed)))
    assert all("spacing" not in pair for pair in pairs)
