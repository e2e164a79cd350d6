"""Design files: round trips and refusals."""

from __future__ import annotations

import tomllib
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from models import Build, Terms
from optim.designfile import Design, design_text, read_design, write_design
from optim.faults import SpecError
from optim.requirements import Band
from optim.space import DesignSpace
from optim.units import FILE_KEYS, from_file, to_file

GOOD = """
title = "Invented"
[reflector]
apex_angle_deg = 90
spacing_mm = 164
plate_width_mm = 328
plate_length_mm = 328
[dipole]
length_mm = 154
diameter_mm = 3
[band]
low_mhz = 902
high_mhz = 928
"""


def read(folder: Path, text: str) -> Design:
    path = folder / "design.toml"
    path.write_text(text, encoding="utf-8")
    return read_design(path)


def test_contract_keys_arrive_in_si(tmp_path: Path) -> None:
    design = read(tmp_path, GOOD)
    assert design.title == "Invented"
    assert design.reflectors.matrix()[0] == pytest.approx(
        [np.pi / 2, 0.164, 0.328, 0.328, 0.154, 0.003]
    )
    assert design.band == Band(902e6, 928e6, 3)
    assert design.build == Build()
    assert design.terms == Terms()


def test_build_is_read(tmp_path: Path) -> None:
    more = '[build]\nsheet_thickness_mm = 1\nfeed = "folded"\nreference_ohm = 200\n'
    design = read(tmp_path, GOOD + more)
    assert design.build.sheet_thickness == 0.001
    assert (design.terms.impedance_ratio, design.terms.reference_ohm) == (4.0, 200.0)


SNAPPED = st.tuples(
    st.integers(60, 240).map(lambda n: n * 0.5),  # degrees
    *[st.integers(200, 800).map(lambda n: n * 0.5) for _ in range(3)],  # mm
    st.integers(250, 350).map(lambda n: n * 0.5),
)


@settings(derandomize=True, max_examples=60, deadline=None)
@given(
    row=SNAPPED,
    title=st.text(
        st.characters(exclude_categories=["Cc", "Cs", "Zl", "Zp"]), min_size=1, max_size=200
    ),
    low=st.floats(700.0, 900.0),
    points=st.integers(2, 201),
)
def test_what_is_written_reads_back_as_the_same_numbers(
    row: tuple[float, ...],
    title: str,
    low: float,
    points: int,
    tmp_path_factory: pytest.TempPathFactory,
) -> None:
    x = np.array([[from_file(name, v) for name, v in zip(FILE_KEYS, row, strict=True)]])
    steps = np.array([from_file("apex_angle", 0.5), *[0.0005] * 4])
    space = DesignSpace(x[0] * 0.5, x[0] * 1.3, steps, 0.003, ())
    design = Design(
        title,
        space.reflectors(space.snap(x)),
        Band(low * 1e6, 1e9, points),
        Build(conductivity=3.1e7),
    )
    path = tmp_path_factory.getbasetemp() / "round.toml"
    write_design(path, design)
    again = read_design(path)
    assert np.array_equal(again.reflectors.matrix(), design.reflectors.matrix())
    assert again.title == title
    assert again.build == design.build
    assert again.band.points == points
    assert again.band.low_hz == pytest.approx(design.band.low_hz, rel=1e-15)
    assert design_text(again).splitlines()[1:] == design_text(design).splitlines()[1:]


@settings(derandomize=True, max_examples=200, deadline=None)
@given(value=st.floats(1e-4, 3.0), name=st.sampled_from(["apex_angle", "spacing"]))
def test_any_number_survives_the_change_of_units(value: float, name: str) -> None:
    assert from_file(name, to_file(name, value)) == pytest.approx(value, rel=4e-16)


def test_snapped_numbers_are_short_in_the_file(tmp_path: Path) -> None:
    low = np.array([np.radians(50.0), 0.08, 0.1, 0.1, 0.15])
    space = DesignSpace(low, low * 2.5, np.array([np.radians(1.0), *[0.001] * 4]), 0.003, ())
    x = space.snap(np.random.default_rng(2).uniform(space.low, space.high, (50, 5)))
    for row in x:
        text = design_text(Design("t", space.reflectors(row[None, :]), Band(9e8, 9e8, 1)))
        reflector = tomllib.loads(text)["reflector"]
        assert all(isinstance(value, int) for value in reflector.values())


BROKEN = {
    "misspelt": (GOOD.replace("spacing_mm", "spacin_mm"), ["reflector.spacin_mm", "spacing_mm"]),
    "missing": (GOOD.replace("length_mm = 154", ""), ["dipole.length_mm"]),
    "no dipole at all": (GOOD.replace("[dipole]", "[dipol]"), ["dipol", "dipole.length_mm"]),
    "flat and beyond": (GOOD.replace("= 90", "= 181"), ["reflector.apex_angle_deg", "181"]),
    "negative": (GOOD.replace("164", "-164"), ["reflector.spacing_mm", "-164"]),
    "many wavelengths": (GOOD.replace("= 164", "= 99164"), ["reflector.spacing_mm", "wavelengths"]),
    "infinite": (
        GOOD.replace("328", "inf"),
        ["reflector.plate_width_mm", "reflector.plate_length_mm"],
    ),
    "dipole in the plates": (
        GOOD.replace("164", "8").replace("= 90", "= 10"),
        ["reflector.spacing_mm", "clears"],
    ),
    "two diameters": (
        GOOD + "[build]\ndipole_diameter_mm = 4\n",
        ["build.dipole_diameter_mm", "3"],
    ),
    "requirements instead": (
        GOOD + "[require]\ngain_dbi = { min = 3 }\n",
        ["require", "no such key"],
    ),
}


@pytest.mark.parametrize(("text", "fragments"), BROKEN.values(), ids=BROKEN.keys())
def test_broken_design_is_refused(tmp_path: Path, text: str, fragments: list[str]) -> None:
    with pytest.raises(SpecError) as caught:
        read(tmp_path, text)
    assert all(fragment in str(caught.value) for fragment in fragments)
