"""The drawing is read back by the library and measured."""

from __future__ import annotations

import io
import os
import subprocess
import sys
from pathlib import Path
from typing import Any, cast

import numpy as np
import pytest
from ezdxf import units
from ezdxf._options import options
from ezdxf.filemanagement import read
from ezdxf.math import area

from models import Build, Reflectors
from optim.cutting import Blank, blank_of
from optim.dxf import LAYERS, blank_dxf


def _blank(angle_deg: float = 70.0) -> Blank:
    design = Reflectors(
        apex_angle=np.radians(angle_deg),
        spacing=0.17,
        plate_width=0.345,
        plate_length=0.4,
        dipole_length=0.16,
        dipole_diameter=0.006,
    )
    blank = blank_of(design, Build(sheet_thickness=2e-3))
    assert blank is not None
    return blank


def _read(blank: Blank) -> tuple[Any, dict[str, list[Any]]]:
    document = read(io.StringIO(blank_dxf(blank, name="most_margin")))
    layers: dict[str, list[Any]] = {name: [] for name in LAYERS}
    for entity in document.modelspace():
        layers[entity.dxf.layer].append(entity)
    return document, layers


def test_outline_bend_and_holes_are_those_of_the_blank() -> None:
    blank = _blank()
    document, layers = _read(blank)
    assert document.units == units.MM
    assert document.header["$INSUNITS"] == 4  # millimetres, by the format's own table
    assert not document.audit().errors
    (outline,) = layers["OUTLINE"]
    assert outline.closed
    corners = np.array(outline.get_points("xy"))
    np.testing.assert_allclose(np.ptp(corners, axis=0), [1e3 * blank.width, 400.0], atol=0.1)
    assert area(outline.vertices()) == pytest.approx(1e6 * blank.area, rel=1e-9)
    (line,) = layers["BEND"]
    # Half way between the rims, over the whole length.
    middle = corners[:, 0].mean()
    assert line.dxf.start.x == pytest.approx(middle, abs=0.1)
    assert line.dxf.end.x == pytest.approx(middle, abs=0.1)
    assert abs(line.dxf.end.y - line.dxf.start.y) == pytest.approx(400.0, abs=0.1)
    boom, *bracket = blank.holes
    (drilled,) = layers["DRILL"]
    assert (drilled.dxf.center.x, 2.0 * drilled.dxf.radius) == (0.0, 1e3 * boom.diameter)
    found = sorted((c.dxf.center.x, c.dxf.center.y, 2.0 * c.dxf.radius) for c in layers["HOLES"])
    holes = sorted((1e3 * h.x, 1e3 * h.y, 1e3 * h.diameter) for h in bracket)
    assert len(holes) == 4
    np.testing.assert_allclose(found, holes, atol=1e-6)


def test_notes_state_the_bend_both_ways() -> None:
    _, layers = _read(_blank())
    notes = " ".join(text.dxf.text for text in layers["NOTES"])
    assert "bend by 110.00 deg to 70.00 deg between the plates" in notes
    assert "neutral line at 0.42 thickness" in notes


def test_flat_sheet_has_no_bend_line() -> None:
    _, layers = _read(_blank(180.0))
    assert layers["BEND"] == []
    assert layers["DRILL"] == []
    assert (len(layers["OUTLINE"]), len(layers["HOLES"])) == (1, 5)


def test_same_bytes_and_the_library_left_as_it_was() -> None:
    kept = options.write_fixed_meta_data_for_testing
    first, second = (blank_dxf(_blank(), name="smallest") for _ in range(2))
    assert first == second
    assert options.write_fixed_meta_data_for_testing == kept


def test_names_cannot_add_to_the_drawing() -> None:
    hostile = "a\n  0\nLINE\n  8\nOUTLINE\n%%d^J"
    document = read(io.StringIO(blank_dxf(_blank(), name=hostile)))
    kinds = [entity.dxftype() for entity in document.modelspace()]
    assert kinds.count("LINE") == 1
    texts = [cast(Any, e).dxf.text for e in document.modelspace() if e.dxftype() == "TEXT"]
    assert not any("%%" in text or "^" in text for text in texts)


def test_same_bytes_in_every_process() -> None:
    # Another seed of the hashes is another order of every set.
    program = (
        "import hashlib, numpy as np\n"
        "from models import Build, Reflectors\n"
        "from optim.cutting import blank_of\n"
        "from optim.dxf import blank_dxf\n"
        "design = Reflectors(apex_angle=1.2, spacing=0.17, plate_width=0.345, plate_length=0.4,\n"
        "                    dipole_length=0.16, dipole_diameter=0.006)\n"
        "text = blank_dxf(blank_of(design, Build()), name='smallest')\n"
        "print(hashlib.sha256(text.encode()).hexdigest())\n"
    )
    digests = {
        subprocess.run(
            [sys.executable, "-c", program],
            env={**os.environ, "PYTHONHASHSEED": seed},
            cwd=Path(__file__).parents[1],
            capture_output=True,
            text=True,
            check=True,
        ).stdout
        for seed in ("1", "2", "3")
    }
    assert len(digests) == 1
