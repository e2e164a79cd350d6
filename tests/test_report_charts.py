"""The report's pictures keep to their grammar and render; names inside them start anew."""

import re

import numpy as np
import pytest
import vl_convert
from altair.utils.schemapi import validate_jsonschema
from altair.vegalite.v6.schema.core import load_schema

from optim import report_charts as charts
from optim.history import Course

ENVELOPE = [(0.0, 0.0), (60.0, -16.0), (180.0, -16.0)]
COURSE = Course(
    stage="scout",
    model="ray",
    designs=np.array([10.0, 20.0]),
    feasible=np.array([0.1, 0.5]),
    volume=np.array([0.2, 1.0]),
)
PICTURES = {
    "front": charts.front_chart("frontal_area", "gain_dbi", "smallest_margin"),
    "polar": charts.polar_chart("H"),
    "cut": charts.cut_chart("E", ENVELOPE),
    "cut without envelope": charts.cut_chart("E", None),
    "band": charts.band_chart("gain (dBi)", [("≥ 11 dBi", 11.0)]),
    "roles": charts.role_cuts_chart("H", {"smallest": [0.0, -1.0, None]}, ENVELOPE),
    "difference": charts.difference_chart([{"figure": "gain", "difference": 0.1}]),
    "course": charts.course_chart([COURSE], "volume", "space covered"),
}


@pytest.mark.parametrize("name", PICTURES)
def test_picture_keeps_to_the_grammar(name: str) -> None:
    assert charts.GRAMMAR in vl_convert.get_vegalite_versions()
    assert validate_jsonschema(PICTURES[name], load_schema()) is None


@pytest.mark.parametrize("name", ["roles", "difference", "course"])
def test_still_is_the_same_every_time(name: str) -> None:
    one, other = (charts.as_svg(PICTURES[name], label="x", prefix="p") for _ in range(2))
    assert one == other
    assert one.startswith('<svg role="img" aria-label="x" ')
    assert set(re.findall(r"url\(#([\w-]+)\)", one)) <= set(re.findall(r'id="([\w-]+)"', one))


def test_level_below_the_floor_is_in_the_middle_of_the_web() -> None:
    web = charts.polar_chart("H")["datasets"]
    radii = {row["ring"]: np.hypot(row["x"], row["y"]) for row in web["rings"]}
    assert radii[0.0] == pytest.approx(1.0, abs=1e-3)
    assert radii[-20.0] == pytest.approx(0.5, abs=1e-3)


def test_pictures_do_not_share_their_titles() -> None:
    assert charts.polar_chart("E")["title"] == "E-plane"
    assert charts.polar_chart("H")["title"] == "H-plane"
    assert charts.cut_chart("H", None)["datasets"]["envelope"] == []
