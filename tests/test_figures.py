"""Figures of merit from patterns whose figures are known in closed form."""

from __future__ import annotations

import numpy as np
import pytest

from models.figures import Terms, figures_of_merit, vswr
from models.pattern import CUT_ANGLES, Pattern


def pattern(h: np.ndarray, e: np.ndarray | None = None, resistance: float = 50.0) -> Pattern:
    one = np.ones((1, 1))
    return Pattern(
        angles=CUT_ANGLES,
        h_field=h[None, None].astype(complex),
        e_field=(h if e is None else e)[None, None].astype(complex),
        power=one,
        resistance=resistance * one,
        reactance=0.0 * one,
        efficiency=0.5 * one,
        doubt_db=np.nan * one,
    )


@pytest.mark.parametrize("power", [1.0, 4.0, 20.0, 120.0])
def test_beamwidth_of_cosine_patterns(power: float) -> None:
    # |f| = cosⁿ(θ/2): the half-power angle is 2·acos(2^{-1/2n}).
    exact = 4.0 * np.degrees(np.arccos(0.5 ** (0.5 / power)))
    found = figures_of_merit(pattern(np.cos(CUT_ANGLES / 2.0) ** power)).beamwidth_h_deg[0, 0]
    assert found == pytest.approx(exact, abs=0.02)


def test_beamwidth_of_a_narrow_beam() -> None:
    # A beam of 12° from samples every 2°.
    beam = np.exp(-np.log(2.0) / 2.0 * (np.degrees(CUT_ANGLES) / 6.0) ** 2) + 1e-3
    assert figures_of_merit(pattern(beam)).beamwidth_h_deg[0, 0] == pytest.approx(12.0, abs=0.05)


def test_a_beam_that_never_falls_has_the_whole_turn() -> None:
    figures = figures_of_merit(pattern(np.ones(CUT_ANGLES.size)))
    assert figures.beamwidth_h_deg[0, 0] == pytest.approx(360.0)
    assert figures.sidelobe_db[0, 0] == pytest.approx(0.0)


def test_gains() -> None:
    figures = figures_of_merit(pattern(np.ones(CUT_ANGLES.size), resistance=150.0))
    assert figures.directivity_dbi[0, 0] == pytest.approx(0.0)
    assert figures.gain_dbi[0, 0] == pytest.approx(-3.0103, abs=1e-4)
    assert figures.vswr[0, 0] == pytest.approx(3.0)
    # Mismatch of VSWR 3: 1 − |½|² of the power.
    assert figures.realized_gain_dbi[0, 0] == pytest.approx(-3.0103 - 1.2494, abs=1e-4)


def test_front_to_back_takes_the_rear_sector_of_both_planes() -> None:
    degrees = np.degrees(CUT_ANGLES)
    h = np.where(degrees < 90, 1.0, 0.01)
    e = np.where(degrees < 90, 1.0, np.where(degrees < 152, 0.1, 0.02))
    narrow = figures_of_merit(pattern(h, e), Terms(rear_sector=np.radians(20.0)))
    wide = figures_of_merit(pattern(h, e), Terms(rear_sector=np.radians(40.0)))
    assert narrow.front_to_back_db[0, 0] == pytest.approx(33.98, abs=0.01)
    assert wide.front_to_back_db[0, 0] == pytest.approx(20.0)
    assert wide.front_to_back_180_db[0, 0] == pytest.approx(40.0)


def test_side_lobe_is_the_highest_past_the_first_minimum() -> None:
    # sin(x)/x: first side lobe −13.26 dB (handbooks).
    x = 12.0 * np.sin(CUT_ANGLES / 2.0)
    cut = np.sinc(x / np.pi)
    assert figures_of_merit(pattern(cut)).sidelobe_db[0, 0] == pytest.approx(-13.26, abs=0.15)


def test_boresight_dip() -> None:
    cut = 1.0 + 0.5 * np.sin(CUT_ANGLES) ** 2
    assert figures_of_merit(pattern(cut)).boresight_dip_db[0, 0] == pytest.approx(3.52, abs=0.01)


def test_envelope_and_its_corners() -> None:
    cut = np.exp(-CUT_ANGLES)
    level = -8.6859 * CUT_ANGLES
    mask = ((0.0, 0.0), (np.radians(20.5), 0.0), (np.radians(61.0), -16.0), (np.pi, -16.0))
    excess = figures_of_merit(pattern(cut), Terms(mask_h=mask)).mask_h_db[0, 0]
    assert excess == pytest.approx(16.0 - 8.6859 * np.radians(61.0), abs=0.02)
    # A mask inside one step of the cut is not overlooked.
    tight = ((np.radians(30.2), -20.0), (np.radians(31.0), -20.0))
    found = figures_of_merit(pattern(cut), Terms(mask_e=tight)).mask_e_db[0, 0]
    assert found == pytest.approx(20.0 - 8.6859 * np.radians(30.2), abs=0.02)
    assert level[0] == 0.0


def test_step_in_an_envelope() -> None:
    cut = np.exp(-CUT_ANGLES)
    step = ((0.0, 0.0), (np.radians(30.0), 0.0), (np.radians(30.0), -6.0), (np.pi, -6.0))
    found = figures_of_merit(pattern(cut), Terms(mask_h=step)).mask_h_db[0, 0]
    assert found == pytest.approx(6.0 - 8.6859 * np.radians(30.0), abs=0.02)


def test_envelope_about_a_null() -> None:
    # |f| = cos²θ, with an exact null beside the ends of the dipole, as in `modal`.
    cut = np.cos(CUT_ANGLES) ** 2
    cut[np.isclose(CUT_ANGLES, np.pi / 2.0)] = 0.0

    def excess(cut: np.ndarray, first: float, last: float) -> float:
        mask = ((np.radians(first), -30.0), (np.radians(last), -30.0))
        return float(figures_of_merit(pattern(cut), Terms(mask_e=mask)).mask_e_db[0, 0])

    def exact(degrees: float) -> float:
        return float(30.0 + 40.0 * np.log10(abs(np.cos(np.radians(degrees)))))

    assert excess(cut, 68.0, 90.0) == pytest.approx(exact(68.0), abs=1e-9)
    assert excess(cut, 90.0, 110.0) == pytest.approx(exact(110.0), abs=1e-9)
    assert excess(cut, 88.0, 92.0) == pytest.approx(exact(88.0), abs=1e-9)
    # Where a model has nothing at all, as `image` behind its plates, it has no answer either.
    cut[46:] = 0.0
    assert excess(cut, 68.0, 88.0) == pytest.approx(exact(68.0), abs=1e-9)
    assert np.isnan(excess(cut, 0.0, 120.0))


def test_folded_dipole_has_four_times_the_impedance() -> None:
    terms = Terms(impedance_ratio=4.0, reference_ohm=200.0)
    figures = figures_of_merit(pattern(np.ones(CUT_ANGLES.size)), terms)
    assert figures.resistance_ohm[0, 0] == pytest.approx(200.0)
    assert figures.vswr[0, 0] == pytest.approx(1.0)


def test_vswr_of_unknown_and_of_reactive_loads() -> None:
    assert np.isnan(vswr(np.array(np.nan), np.array(np.nan), 50.0))
    assert vswr(np.array(0.0), np.array(30.0), 50.0) > 1e9
