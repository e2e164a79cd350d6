"""The small drawings: to one scale, parsed as XML, dimensions as they are."""

from xml.etree import ElementTree as ET

import numpy as np
import pytest

from models import Reflectors
from optim.report_sketch import HEIGHT, ROOM, WIDTH, scale_of, sketch

DESIGNS = Reflectors(
    apex_angle=np.radians([60.0, 90.0, 180.0]),
    spacing=[0.2, 0.17, 0.08],
    plate_width=[0.5, 0.3, 0.2],
    plate_length=[0.4, 0.7, 0.5],
    dipole_length=0.16,
    dipole_diameter=0.003,
)


@pytest.mark.parametrize("row", range(3))
def test_drawing_is_to_scale_and_on_the_paper(row: int) -> None:
    scale = scale_of(DESIGNS)
    drawing = ET.fromstring(sketch(DESIGNS, row, scale))
    plate = next(part for part in drawing if part.get("class") == "plate")
    start, across = str(plate.get("d")).split("h")[:2]
    width = float(across.split("v")[0])
    assert width == pytest.approx(scale * DESIGNS.width[row], abs=0.1)
    assert width <= ROOM[0] + 0.1
    x, y = (float(v) for v in start[1:].split())
    assert x >= 0.0
    assert y >= 14.0
    for text in drawing.iter("text"):
        assert 0.0 <= float(str(text.get("x"))) <= WIDTH
        assert 0.0 <= float(str(text.get("y"))) <= HEIGHT


def test_dimensions_are_those_of_the_design() -> None:
    words = "".join(ET.fromstring(sketch(DESIGNS, 1, 100.0)).itertext())
    # Two plates of 300 mm at 90°: 424.3 mm across, 212.1 mm deep (derived).
    assert "424.3 × 700 mm" in words
    assert "depth 212.1 mm" in words
    assert "apex 90°" in words
