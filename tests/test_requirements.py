"""Requirements files that are right, and what is understood and derived."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from models.conventions import C0
from optim.requirements import Band, Limit, read_requirements
from tests.spec_texts import FULL, GOOD, read, with_lines, written


def test_every_key_of_the_file_arrives_in_si(tmp_path: Path) -> None:
    r = read(tmp_path, FULL)
    assert r.title == "All keys"
    assert r.band == Band(470e6, 694.5e6, 9)
    assert [limit.label for limit in r.limits] == [
        "gain_dbi.min",
        "realized_gain_dbi.min",
        "beamwidth_h_deg.min",
        "beamwidth_h_deg.max",
        "beamwidth_e_deg.max",
        "front_to_back_db.min",
        "sidelobe_db.max",
        "vswr.max",
        "resistance_ohm.min",
        "mask_h",
        "mask_e",
        "width_mm.max",
        "height_mm.max",
        "depth_mm.max",
        "frontal_area_m2.max",
        "mass_kg.max",
        "wind_load_n.max",
    ]
    assert Limit("resistance_ohm", "resistance_ohm", "min", 20.0, "resistance_ohm.min") in r.limits
    assert Limit("depth_mm", "depth", "max", 700.0, "depth_mm.max") in r.limits
    assert r.terms.rear_sector == pytest.approx(np.pi / 4)
    assert (r.terms.reference_ohm, r.terms.impedance_ratio) == (75.0, 4.0)
    assert r.terms.mask_e is not None
    envelope = [[np.pi / 9, 0.0], [np.pi / 9, -6.0], [np.pi, -9.0]]
    assert np.array(r.terms.mask_e) == pytest.approx(np.array(envelope))
    assert (r.build.sheet_thickness, r.build.sheet_density) == (0.0015, 7850.0)
    assert (r.wind_speed, r.dipole_diameter, r.length_step) == (35.0, 0.006, 0.002)
    assert r.angle_step == pytest.approx(np.pi / 360)
    assert r.ranges["apex_angle"] == pytest.approx((np.pi / 3, 2 * np.pi / 3))
    assert r.ranges["spacing"] == (0.2, 0.2)
    assert r.tolerance == pytest.approx({"apex_angle": np.pi / 180, "plate_width": 0.002})
    assert r.min_yield == 0.9
    assert [(goal.name, goal.sense) for goal in r.goals] == [
        ("mass", "min"),
        ("beamwidth_h", "min"),
        ("front_to_back", "max"),
    ]
    assert (r.run.population, r.run.generations, r.run.seed) == (40, 7, 0)
    assert (r.run.scout, r.run.prove) == ("image", None)
    assert r.needs_match


def test_defaults(tmp_path: Path) -> None:
    r = read(tmp_path, GOOD)
    wavelength = C0 / 915e6
    assert r.band.points == 3
    assert [limit.label for limit in r.limits] == ["gain_dbi.min", "resistance_ohm.min"]
    assert r.limits[1].value == 10.0
    assert r.terms.rear_sector == pytest.approx(np.radians(30.0))
    assert [(goal.name, goal.sense) for goal in r.goals] == [
        ("frontal_area", "min"),
        ("gain", "max"),
    ]
    assert wavelength / 130 < r.dipole_diameter < wavelength / 75
    assert r.length_step == 0.001
    assert all(ends is None for ends in r.ranges.values())
    assert not r.needs_match


@pytest.mark.parametrize("goal", ['minimise = ["vswr"]', 'maximise = ["realized_gain"]'])
def test_goals_alone_can_need_a_match(tmp_path: Path, goal: str) -> None:
    assert read(tmp_path, with_lines(goals=goal)).needs_match


@pytest.mark.parametrize(
    ("low", "high"), [(470, 694), (902, 928), (100, 400), (300, 301), (88, 108)]
)
def test_derived_points_are_odd_and_at_most_six_percent_apart(
    tmp_path: Path, low: float, high: float
) -> None:
    band = read(tmp_path, GOOD.replace("902", f"{low}").replace("928", f"{high}")).band
    f = band.frequencies()
    assert (f[0], f[-1]) == (low * 1e6, high * 1e6)
    assert band.points % 2 == 1
    assert band.points >= 3
    assert (f[1:] / f[:-1]).max() <= 1.06 + 1e-9
    fine = band.refined().frequencies()
    assert fine.size == 2 * band.points - 1
    assert fine[::2] == pytest.approx(f)


def test_one_frequency_is_one_point(tmp_path: Path) -> None:
    band = read(tmp_path, GOOD.replace("928", "902")).band
    assert band.points == 1
    assert band.refined().points == 1


def test_title_is_never_interpreted(tmp_path: Path) -> None:
    title = "[bold]$x$ {0} %s <b> é"
    assert read(tmp_path, GOOD.replace("Invented link", title)).title == title


def test_byte_order_mark_and_carriage_returns_are_read(tmp_path: Path) -> None:
    path = written(tmp_path, b"\xef\xbb\xbf" + GOOD.replace("\n", "\r\n").encode())
    assert read_requirements(path).title == "Invented link"
