"""`ray` against the table of finite corners, the exact infinite corner, and its own promises."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from models import Build, Figures, Reflectors, evaluate, radiate, wedge
from models.conventions import C0, ETA0
from models.dipole_port import at_terminals
from models.pattern import CUT_ANGLES

LOSSLESS = Build(conductivity=np.inf)
TABLE = np.genfromtxt(
    Path(__file__).parent / "published" / "finite_corners.csv", delimiter=",", names=True
)


def corners(angle_deg: object, spacing: object, width: object, length: object) -> Reflectors:
    """Return corners with a thin half-wave dipole, lengths in wavelengths (f = c / 1 m)."""
    return Reflectors(
        apex_angle=np.radians(np.asarray(angle_deg, dtype=np.float64)),
        spacing=np.asarray(spacing, dtype=np.float64),
        plate_width=np.asarray(width, dtype=np.float64),
        plate_length=np.asarray(length, dtype=np.float64),
        dipole_length=0.5,
        dipole_diameter=1e-4,
    )


@pytest.fixture(scope="module")
def table_figures() -> Figures:
    columns = ("apex_angle_deg", "spacing_wl", "plate_width_wl", "plate_length_wl")
    return evaluate(corners(*(TABLE[name] for name in columns)), C0, model="ray")


# tests/published/CITATION.md: 60 finite corners by a separate converged integral equation.


def test_directivity_of_finite_corners(table_figures: Figures) -> None:
    error = np.abs(table_figures.directivity_dbi[:, 0] - TABLE["directivity_dbi"])
    assert np.median(error) <= 0.2
    assert np.percentile(error, 95) <= 0.8


@pytest.mark.parametrize(("plane", "allowed"), [("h", 2.0), ("e", 3.0)])
def test_beamwidths_of_finite_corners(table_figures: Figures, plane: str, allowed: float) -> None:
    name = f"beamwidth_{plane}_deg"
    error = np.abs(getattr(table_figures, name)[:, 0] - TABLE[name])
    assert np.median(error) <= allowed


def test_front_to_back_of_finite_corners(table_figures: Figures) -> None:
    below = TABLE["front_to_back_db"] < 30.0
    error = np.abs(table_figures.front_to_back_db[:, 0] - TABLE["front_to_back_db"])[below]
    assert np.median(error) <= 2.5
    assert np.percentile(error, 90) <= 6.0


@pytest.mark.parametrize(
    ("angle", "width", "length"),
    [
        (50.0, 80.0, 60.0),
        (53.0, 40.0, 60.0),
        (57.0, 40.0, 100.0),
        (60.0, 40.0, 40.0),
        (64.3, 40.0, 100.0),
        (72.0, 40.0, 60.0),
        (83.7, 40.0, 40.0),
        (90.0, 40.0, 100.0),
        (104.0, 40.0, 60.0),
        (111.0, 40.0, 40.0),
        (123.0, 40.0, 73.0),
        (130.0, 40.0, 100.0),
    ],
)
def test_beam_of_very_wide_plates_is_that_of_the_infinite_corner(
    angle: float, width: float, length: float
) -> None:
    # Exact: models.wedge, itself checked against image sums and Harrington's series. At 50° plates
    # of 40 wavelengths are not wide enough: endless ones of that width, solved exactly by `modal`,
    # are 0.06 dB off themselves.
    spacing = np.array([0.3, 0.37, 0.5, 0.64, 0.7])
    pattern = radiate(corners(angle, spacing, width, length), C0, model="ray")
    exact = np.abs(wedge.field(np.radians(angle), 2.0 * np.pi * spacing[:, None], CUT_ANGLES))
    beam = np.logical_and.accumulate(exact**2 > exact[:, :1] ** 2 / 2.0, axis=1)
    assert beam.sum() > 20
    error = 20.0 * np.log10(np.abs(pattern.h_field[:, 0][beam]) / exact[beam])
    assert np.abs(error).max() <= 0.05


@pytest.mark.parametrize("angle", [60.0, 75.0, 90.0])
def test_power_before_very_wide_plates(angle: float) -> None:
    # Exact: models.wedge, as above.
    spacing = np.array([0.35, 0.5, 0.65])
    pattern = radiate(corners(angle, spacing, 40.0, 100.0), C0, model="ray")
    resistance = wedge.radiation_resistance(np.radians(angle), 2.0 * np.pi * spacing, np.pi)
    np.testing.assert_allclose(pattern.power[:, 0] * ETA0 / np.pi, resistance, rtol=0.012)


def test_added_impedance() -> None:
    # Stored values of two independent full-wave solutions with a sinusoidal current: 131.3 Ω and
    # +18.9 Ω above the dipole alone (73.13 Ω) for (90°, .5, 1, 1), 87.2 Ω and +31.1 Ω for the flat
    # sheet 1 × 1 at a quarter wave; what plates add is brought to the terminals.
    two = corners([90.0, 180.0], [0.5, 0.25], [1.0, 0.5], 1.0)
    figures = evaluate(two, C0, model="ray", build=LOSSLESS)
    added = np.array([58.17 + 18.9j, 14.07 + 31.1j], dtype=np.complex128)
    radius = np.pi * two.dipole_diameter
    there, _ = at_terminals(added, 2.0 * np.pi * two.dipole_length, radius)
    np.testing.assert_allclose(figures.resistance_ohm[:, 0], there.real, rtol=0.03)
    np.testing.assert_allclose(figures.reactance_ohm[:, 0], there.imag, atol=4.0)


def test_resonant_corners() -> None:
    # L. B. Cebik, Corner Reflectors Revisited Again (2005): 90°, plates 1.4 × 0.8 λ, dipole .008 λ
    # thick, resonant at 50, 70 and 100 Ω; wire grids, so ±5 Ω.
    designs = Reflectors(
        apex_angle=np.pi / 2.0,
        spacing=np.array([0.324, 0.370, 0.436]),
        plate_width=0.8,
        plate_length=1.4,
        dipole_length=np.array([0.4240, 0.4268, 0.4388]),
        dipole_diameter=0.008,
    )
    figures = evaluate(designs, C0, model="ray")
    assert figures.resistance_ohm[:, 0] == pytest.approx([50.0, 70.0, 100.0], abs=5.0)
    assert figures.reactance_ohm[:, 0] == pytest.approx(0.0, abs=5.0)


def test_match_is_that_of_the_full_wave_model() -> None:
    # Another method throughout: `moment`, itself checked against finite elements.
    rng, n = np.random.default_rng(11), 60
    designs = Reflectors(
        apex_angle=np.radians(rng.uniform(60.0, 130.0, n)),
        spacing=rng.uniform(0.25, 0.75, n),
        plate_width=rng.uniform(0.6, 2.6, n),
        plate_length=rng.uniform(0.6, 2.6, n),
        dipole_length=rng.uniform(0.4, 0.5, n),
        dipole_diameter=rng.uniform(0.004, 0.02, n),
    )
    ray, moment = (evaluate(designs, C0, model=name) for name in ("ray", "moment"))
    near = moment.vswr < 3.0
    assert near.sum() > 20
    error = np.abs(ray.vswr - moment.vswr)[near]
    assert np.median(error) < 0.05
    assert np.quantile(error, 0.9) < 0.15
    realized = np.abs(ray.realized_gain_dbi - moment.realized_gain_dbi)[near]
    assert np.median(realized) < 0.15


@pytest.mark.parametrize("turns", [1.5, 2.0, 2.5, 3.0, 3.5])
def test_continuous_where_images_come_and_go(turns: float) -> None:
    # Images, rims and ends appear and vanish at α = 180°/1.5, /2 …; nothing may jump there.
    angle = 180.0 / turns + np.array([-2e-3, -1e-3, 1e-3, 2e-3])
    figures = evaluate(corners(angle, 0.5, 1.2, 1.1), C0, model="ray")
    for name, allowed in (("directivity_dbi", 3e-3), ("front_to_back_db", 1e-2)):
        assert np.abs(np.diff(getattr(figures, name)[:, 0])).max() < allowed


def test_finite_across_shadow_boundaries_and_behind() -> None:
    # Edge theory without the transition function is infinite there (common practice).
    pattern = radiate(corners([50.0, 72.0, 90.0, 120.0, 180.0], 0.5, 1.0, 1.0), C0, model="ray")
    for field in (pattern.h_field, pattern.e_field):
        assert np.all(np.isfinite(field))
        jumps = np.abs(np.diff(field, axis=-1)) / np.abs(field).max(axis=-1, keepdims=True)
        assert jumps.max() < 0.16  # two degrees


def test_a_finite_corner_may_beat_the_infinite_one() -> None:
    # L. B. Cebik, Corner Reflectors Revisited Again (2005), part 1: 90°, 1.6 × 1.6 λ, S = .323 λ
    # has 13.38 dBi where infinite plates have 12.3; a wire grid acts a little larger: ±0.5 dB.
    figures = evaluate(corners(90.0, 0.323, 1.6, 1.6), C0, model="ray")
    assert figures.directivity_dbi[0, 0] == pytest.approx(13.38, abs=0.5)
    assert figures.beamwidth_e_deg[0, 0] == pytest.approx(40.0, abs=4.0)
    assert figures.beamwidth_h_deg[0, 0] == pytest.approx(34.0, abs=4.0)


designs = st.tuples(
    st.floats(45.0, 180.0), st.floats(0.2, 0.8), st.floats(0.5, 3.0), st.floats(0.5, 3.0)
)


@settings(derandomize=True, max_examples=40, deadline=None)
@given(design=designs, scale=st.floats(0.02, 50.0))
def test_scale_invariance(design: tuple[float, ...], scale: float) -> None:
    one = corners(*design)
    matrix = one.matrix()
    matrix[:, 1:] *= scale
    other = Reflectors.from_matrix(matrix)
    first = evaluate(one, C0, model="ray", build=LOSSLESS)
    second = evaluate(other, C0 / scale, model="ray", build=LOSSLESS)
    assert second.directivity_dbi == pytest.approx(first.directivity_dbi, abs=2e-3)
    assert second.resistance_ohm == pytest.approx(first.resistance_ohm, rel=2e-3)


@settings(derandomize=True, max_examples=40, deadline=None)
@given(design=designs)
def test_power_is_positive_and_gain_bounded(design: tuple[float, ...]) -> None:
    figures = evaluate(corners(*design), C0, model="ray")
    assert np.isfinite(figures.directivity_dbi).all()
    assert figures.resistance_ohm[0, 0] > 0.0
    # No more than a uniform aperture half a wavelength larger all round.
    _, _, width, length = design
    across = 2.0 * width * np.sin(np.radians(design[0]) / 2.0)
    bound = 10.0 * np.log10(4.0 * np.pi * (across + 1.0) * (length + 1.0))
    assert figures.directivity_dbi[0, 0] < bound


def test_a_row_does_not_depend_on_its_company() -> None:
    rng = np.random.default_rng(3)
    many = corners(
        rng.uniform(50, 130, 30),
        rng.uniform(0.25, 0.75, 30),
        rng.uniform(0.6, 2.6, 30),
        rng.uniform(0.6, 2.6, 30),
    )
    together = evaluate(many, C0, model="ray")
    alone = [evaluate(many[i], C0, model="ray").directivity_dbi[0, 0] for i in range(len(many))]
    np.testing.assert_allclose(together.directivity_dbi[:, 0], alone, atol=2e-4)
