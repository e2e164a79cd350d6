"""Ranges given and derived, steps, and designs snapped onto them."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from models.conventions import C0
from optim.requirements import Requirements, read_requirements
from optim.space import DesignSpace
from optim.units import VARIABLES

SPEC = """
[band]
low_mhz = 902
high_mhz = 928
[require]
gain_dbi = { min = 10.5 }
"""
WAVELENGTH = C0 / 915e6


def requirements(folder: Path, more: str = "", spec: str = SPEC) -> Requirements:
    path = folder / "spec.toml"
    path.write_text(spec + more, encoding="utf-8")
    return read_requirements(path)


def space(folder: Path, more: str = "", spec: str = SPEC) -> DesignSpace:
    return DesignSpace.from_requirements(requirements(folder, more, spec))


def test_derived_ranges_hold_the_usual_proportions(tmp_path: Path) -> None:
    # Balanis, Antenna Theory, corner reflector (from memory): aperture 1-2 λ, λ/3 < S < 2λ/3,
    # plate width about twice the spacing at 90°, plate length 1.2-1.5 times the feed.
    s = space(tmp_path)
    usual = np.array(
        [
            [np.pi / 2, WAVELENGTH / 3, 2 * WAVELENGTH / 3, 1.2 * 0.47 * WAVELENGTH],
            [np.pi / 2, 2 * WAVELENGTH / 3, 4 * WAVELENGTH / 3, 1.5 * 0.47 * WAVELENGTH],
            [np.pi / 3, WAVELENGTH / 2, 2 * WAVELENGTH, 1.5 * 0.47 * WAVELENGTH],
        ]
    )
    assert (usual >= s.low[:4]).all()
    assert (usual <= s.high[:4] + s.steps[:4]).all()
    assert len(s.derived) == 8


def test_given_ranges_are_kept(tmp_path: Path) -> None:
    more = """
    [search]
    apex_angle_deg = 73
    spacing_mm = [100.25, 170]
    plate_width_mm = [200, 400]
    [build]
    length_step_mm = 5
    """
    s = space(tmp_path, more)
    assert s.low[:3] == pytest.approx([np.radians(73), 0.10025, 0.2], rel=1e-15)
    assert s.high[:3] == pytest.approx([np.radians(73), 0.170, 0.4], rel=1e-15)
    assert s.fixed.tolist() == [True, False, False, False, True]
    assert not any(note.startswith(("apex", "spacing", "plate_width")) for note in s.derived)


def test_dipole_is_free_only_where_a_match_is_asked_for(tmp_path: Path) -> None:
    assert space(tmp_path).fixed[4]
    matched = space(tmp_path, spec=SPEC + "vswr = { max = 2 }\n")
    assert matched.low[4] < 0.4 * WAVELENGTH
    assert matched.high[4] > 0.52 * WAVELENGTH


def test_high_gain_widens_the_plates(tmp_path: Path) -> None:
    # Aperture for G = 17 dBi at half efficiency: side √(50.1/(4π·0.5)) = 2.82 λ (closed form).
    s = space(tmp_path, spec=SPEC.replace("10.5", "17"))
    assert s.high[2] == pytest.approx(2.82 * WAVELENGTH, abs=0.01 * WAVELENGTH)
    assert space(tmp_path, spec=SPEC.replace("10.5", "99")).high[2] <= 6 * WAVELENGTH


@pytest.mark.parametrize(
    "caps",
    [
        "width_mm = { max = 350 }",
        "height_mm = { max = 300 }",
        "depth_mm = { max = 150 }",
        "width_mm = { max = 350 }\ndepth_mm = { max = 150 }",
        "frontal_area_m2 = { max = 0.06 }",
        "mass_kg = { max = 0.6 }",
    ],
)
def test_caps_cut_ranges_but_no_design_that_fits(tmp_path: Path, caps: str) -> None:
    free = space(tmp_path)
    r = requirements(tmp_path, f"[size]\n{caps}")
    cut = DesignSpace.from_requirements(r)
    assert (cut.high < free.high).any()
    assert any("cut by" in note for note in cut.derived)
    x = free.snap(np.random.default_rng(5).uniform(free.low, free.high, (4000, 5)))
    d = free.reflectors(x)
    sizes = {
        "width": 1e3 * d.width,
        "height": 1e3 * d.height,
        "depth": 1e3 * d.depth,
        "frontal_area": d.frontal_area,
        "mass": d.sheet_area * r.build.sheet_thickness * r.build.sheet_density,
    }
    fits = np.ones(len(d), dtype=bool)
    for limit in r.limits:
        if limit.figure in sizes:
            fits &= sizes[limit.figure] <= limit.value
    assert fits.any()
    assert (x[fits] <= cut.high + cut.steps).all()


def test_cap_below_everything_leaves_the_smallest(tmp_path: Path) -> None:
    s = space(tmp_path, "[size]\nheight_mm = { max = 20 }")
    assert (s.low <= s.high).all()
    assert s.high[3] == s.low[3]


BOUNDS = st.tuples(st.floats(0.08, 0.6), st.floats(0.0, 0.3))


@settings(derandomize=True, max_examples=100, deadline=None)
@given(
    apex=st.tuples(st.floats(0.3, 2.0), st.floats(0.0, 1.1)),
    lengths=st.tuples(BOUNDS, BOUNDS, BOUNDS, BOUNDS),
    step_mm=st.sampled_from([0.05, 0.5, 1.0, 2.0, 5.0, 10.0]),
    angle_deg=st.sampled_from([0.1, 0.5, 1.0, 2.5, 5.0]),
    seed=st.integers(0, 1000),
)
def test_snap_is_idempotent_and_stays_inside(
    apex: tuple[float, float],
    lengths: tuple[tuple[float, float], ...],
    step_mm: float,
    angle_deg: float,
    seed: int,
) -> None:
    low = np.array([start for start, _ in (apex, *lengths)])
    high = low + np.array([extent for _, extent in (apex, *lengths)])
    steps = np.array([np.radians(angle_deg), *[step_mm / 1000.0] * 4])
    s = DesignSpace(low, high, steps, 0.003, ())
    x = np.random.default_rng(seed).uniform(low - 0.05, high + 0.05, (20, 5))
    snapped = s.snap(x)
    assert (snapped >= low).all()
    assert (snapped <= high).all()
    assert np.array_equal(s.snap(snapped), snapped)
    whole = snapped / steps
    off = np.abs(whole - np.rint(whole)) > 1e-6
    no_step = np.floor(high / steps + 1e-9) < np.ceil(low / steps - 1e-9)
    assert not off[:, ~(no_step | s.fixed)].any()
    inside = (x >= low) & (x <= high) & ~no_step & ~s.fixed
    # A whole step may lie outside an end, so the way to the next one is less than a step.
    assert (np.abs(snapped - x)[inside] < np.broadcast_to(steps, x.shape)[inside] * 1.001).all()


def test_fixed_values_are_not_moved() -> None:
    fixed = np.array([1.2345678, 0.1234567, 0.3333333, 0.7777777, 0.1515151])
    s = DesignSpace(fixed, fixed, np.array([0.01, *[0.005] * 4]), 0.003, ())
    assert np.array_equal(s.snap(np.zeros((3, 5))), np.tile(fixed, (3, 1)))


def test_range_without_a_step_uses_its_ends_and_says_so(tmp_path: Path) -> None:
    s = space(tmp_path, "[search]\nspacing_mm = [100.2, 100.7]")
    x = np.tile(s.low, (2, 1))
    x[1, 1] = 0.1006
    assert s.snap(x)[:, 1].tolist() == [0.1002, 0.1007]
    assert any("no whole step" in note for note in s.derived)


def test_rows_and_reflectors_are_inverse(tmp_path: Path) -> None:
    s = space(tmp_path)
    x = s.snap(np.random.default_rng(3).uniform(s.low, s.high, (10, 5)))
    d = s.reflectors(x)
    assert np.array_equal(s.rows(d), x)
    assert d.dipole_diameter == pytest.approx(np.full(10, s.dipole_diameter))
    assert d.plate_width == pytest.approx(x[:, VARIABLES.index("plate_width")])


@settings(derandomize=True, max_examples=30, deadline=None)
@given(scale=st.sampled_from([0.1, 0.5, 2.0, 10.0]))
def test_derived_ranges_scale_with_the_wavelength(
    scale: float, tmp_path_factory: pytest.TempPathFactory
) -> None:
    r = requirements(tmp_path_factory.getbasetemp())
    band = replace(r.band, low_hz=r.band.low_hz / scale, high_hz=r.band.high_hz / scale)
    near, far = (
        DesignSpace.from_requirements(r),
        DesignSpace.from_requirements(replace(r, band=band)),
    )
    # Ends stand on whole steps, so they scale up to a step.
    assert far.low[1:] == pytest.approx(scale * near.low[1:], abs=2e-3 * max(scale, 1.0))
    assert far.high[1:] == pytest.approx(scale * near.high[1:], abs=2e-3 * max(scale, 1.0))
    assert far.low[0] == near.low[0]
