"""Margins, violations and objectives, against numbers worked out by hand."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from models import Figures, Reflectors
from models.conventions import FloatArray
from optim.margins import GUARDS, MISSING, Judge
from optim.requirements import read_requirements

SPEC = """
[band]
low_mhz = 900
high_mhz = 960
[require]
gain_dbi = { min = 10 }
beamwidth_h_deg = { min = 30, max = 60 }
front_to_back_db = { min = 20 }
vswr = { max = 2 }
resistance_ohm = { min = 20 }
mask_h = [[0, 0], [90, -10]]
[size]
width_mm = { max = 500 }
frontal_area_m2 = { max = 0.2 }
wind_load_n = { max = 200, wind_speed_m_s = 40 }
[goals]
minimise = ["frontal_area", "vswr", "beamwidth_h"]
maximise = ["gain", "front_to_back"]
"""


def judge(folder: Path, spec: str = SPEC) -> Judge:
    path = folder / "spec.toml"
    path.write_text(spec, encoding="utf-8")
    return Judge(read_requirements(path))


def flat(**given: list[list[float]]) -> Figures:
    """Return figures (1 or more designs, 3 frequencies); harmless ones where not given."""
    rows = len(next(iter(given.values())))
    usual = {
        "gain_dbi": 11.0,
        "beamwidth_h_deg": 45.0,
        "front_to_back_db": 25.0,
        "vswr": 1.5,
        "resistance_ohm": 50.0,
        "mask_h_db": -1.0,
        "boresight_dip_db": 0.0,
        "doubt_db": np.nan,
    }
    columns: dict[str, FloatArray] = {
        name: np.full((rows, 3), usual.get(name, np.nan)) for name in Figures.names()
    }
    columns |= {name: np.array(values, dtype=float) for name, values in given.items()}
    return Figures(**columns)


def square(n: int = 1) -> Reflectors:
    """Return n designs of 400 × 400 mm front."""
    return Reflectors(
        apex_angle=np.full(n, np.pi / 2),
        spacing=0.15,
        plate_width=0.4 / np.sqrt(2.0),
        plate_length=0.4,
        dipole_length=0.15,
        dipole_diameter=0.003,
    )


def test_margins_by_hand(tmp_path: Path) -> None:
    j = judge(tmp_path)
    figures = flat(
        gain_dbi=[[10.5, 11, 9.75]],
        beamwidth_h_deg=[[33, 45, 58]],
        front_to_back_db=[[20, 22, 30]],
        vswr=[[1.2, 1.9, 1.4]],
        resistance_ohm=[[60, 18, 40]],
        mask_h_db=[[-3, 0.5, -1]],
    )
    margins = dict(
        zip([limit.label for limit in j.limits], j.margins(square(), figures)[0], strict=True)
    )
    # Drag ½·1.225·40²·1.17·0.16 N, the coefficient of a square plate from data books.
    assert margins == pytest.approx(
        {
            "gain_dbi.min": -0.25,
            "beamwidth_h_deg.min": 3.0,
            "beamwidth_h_deg.max": 2.0,
            "front_to_back_db.min": 0.0,
            "vswr.max": 0.1,
            "resistance_ohm.min": -2.0,
            "mask_h": -0.5,
            "width_mm.max": 100.0,
            "frontal_area_m2.max": 0.04,
            "wind_load_n.max": 200.0 - 0.5 * 1.225 * 1600.0 * 1.17 * 0.16,
        }
    )


def test_violations_are_margins_in_their_scale_with_sign(tmp_path: Path) -> None:
    j = judge(tmp_path)
    figures = flat(gain_dbi=[[9.75] * 3], beamwidth_h_deg=[[66.0] * 3], resistance_ohm=[[18.0] * 3])
    violations = dict(
        zip(
            [limit.label for limit in j.constraints],
            j.violations(square(), figures)[0],
            strict=True,
        )
    )
    assert violations["gain_dbi.min"] == pytest.approx(0.25)  # 1 dB
    assert violations["beamwidth_h_deg.max"] == pytest.approx(2.0)  # 3°
    assert violations["resistance_ohm.min"] == pytest.approx(2.0)  # 5 % of 20 Ω
    assert violations["width_mm.max"] == pytest.approx(-4.0)  # 5 % of 500 mm
    assert not j.feasible(square(), figures)[0]


def test_exactly_on_the_limit_is_met(tmp_path: Path) -> None:
    j = judge(tmp_path, SPEC.replace("max = 500", "max = 400"))
    figures = flat(gain_dbi=[[10.0] * 3])
    assert j.feasible(square(), figures)[0]


def test_what_a_model_cannot_give_meets_nothing(tmp_path: Path) -> None:
    j = judge(tmp_path)
    figures = flat(gain_dbi=[[11, np.nan, 11]], vswr=[[1.1, np.inf, 1.2]])
    margins = j.margins(square(), figures)[0]
    violations = j.violations(square(), figures)[0]
    assert np.isfinite(margins).all()
    assert margins[0] == -MISSING
    assert violations[0] == MISSING
    assert violations[[limit.label for limit in j.limits].index("vswr.max")] == pytest.approx(
        MISSING
    )
    assert np.isfinite(j.objectives(square(), figures)).all()


def test_split_beam_and_unvouched_design_are_refused(tmp_path: Path) -> None:
    j = judge(tmp_path)
    assert j.constraints[-2:] == GUARDS
    figures = flat(
        boresight_dip_db=[[0, 0.4, 0], [0, 0.7, 0], [0, 0, 0], [0, 0, 0]],
        doubt_db=[[0.1, 0.2, 0.1], [0, 0, 0], [0.1, np.inf, 0.1], [np.nan] * 3],
    )
    assert j.feasible(square(4), figures).tolist() == [True, False, False, True]
    violations = j.violations(square(4), figures)
    assert violations[1, -2] == pytest.approx(0.2)
    assert violations[2, -1] == MISSING
    assert j.margins(square(4), figures).shape == (4, len(j.limits))


def test_dipole_through_the_plates_is_refused(tmp_path: Path) -> None:
    # Plates at 30°: a rod of 6 mm touches them where its axis is 6 mm from the apex line.
    usual = square(3).matrix()
    usual[:, 0], usual[:, 5] = np.pi / 3.0, 6e-3
    usual[:, 1] = 5.9e-3, 6.1e-3, 0.1
    found = judge(tmp_path).violations(
        Reflectors.from_matrix(usual), flat(gain_dbi=[[11.0] * 3] * 3)
    )
    assert found[:, -1].tolist() == [MISSING, 0.0, 0.0]


def test_objectives_have_sign_and_are_worst_over_the_band(tmp_path: Path) -> None:
    j = judge(tmp_path)
    figures = flat(
        gain_dbi=[[11, 12, 10.5]],
        vswr=[[1.2, 1.8, 1.5]],
        beamwidth_h_deg=[[40, 50, 45]],
        front_to_back_db=[[22, 30, 25]],
    )
    assert j.objectives(square(), figures)[0] == pytest.approx([0.16, 1.8, 50, -10.5, -22])


def test_wind_load_is_not_clipped(tmp_path: Path) -> None:
    goals = SPEC.partition("[goals]")[0] + '[goals]\nminimise = ["wind_load"]\n'
    j = judge(tmp_path, goals)
    large = Reflectors(
        apex_angle=np.pi / 2,
        spacing=1.0,
        plate_width=[4.0, 5.0],
        plate_length=4.0,
        dipole_length=1.0,
        dipole_diameter=0.01,
    )
    small, big = j.objectives(large, flat(gain_dbi=[[10] * 3, [10] * 3]))[:, 0]
    assert MISSING < small < big


def test_worst_over_the_band(tmp_path: Path) -> None:
    figures = flat(
        gain_dbi=[[11, 12, 10.5]],
        vswr=[[1.2, 1.8, 1.5]],
        sidelobe_db=[[-20, -12, -15]],
        reactance_ohm=[[-30, 5, 20]],
        beamwidth_h_deg=[[32, 50, 55]],
        beamwidth_e_deg=[[40, 50, 45]],
        front_to_back_db=[[22, np.nan, 25]],
    )
    worst = judge(tmp_path).worst(figures)
    assert worst["gain_dbi"] == pytest.approx([10.5])
    assert worst["vswr"] == pytest.approx([1.8])
    assert worst["sidelobe_db"] == pytest.approx([-12])
    assert worst["reactance_ohm"] == pytest.approx([-30])
    assert worst["beamwidth_h_deg"] == pytest.approx([32])  # 2° from 30, 5° from 60
    assert worst["beamwidth_e_deg"] == pytest.approx([50])  # no limit: the widest
    assert np.isnan(worst["front_to_back_db"]).all()
    assert set(worst) == set(Figures.names())


@settings(derandomize=True, max_examples=100, deadline=None)
@given(
    values=st.lists(
        st.lists(st.floats(width=64) | st.just(np.nan), min_size=3, max_size=3),
        min_size=1,
        max_size=4,
    ),
    name=st.sampled_from(["gain_dbi", "beamwidth_h_deg", "vswr", "doubt_db", "boresight_dip_db"]),
)
def test_whatever_the_figures_the_judgement_is_finite(
    values: list[list[float]], name: str, tmp_path_factory: pytest.TempPathFactory
) -> None:
    j = judge(tmp_path_factory.getbasetemp())
    figures, designs = flat(**{name: values}), square(len(values))
    violations = j.violations(designs, figures)
    assert np.isfinite(violations).all()
    assert np.isfinite(j.objectives(designs, figures)).all()
    margins = j.margins(designs, figures)
    # A limit is met by its margin exactly where its violation says so.
    assert np.array_equal(margins >= 0.0, violations[:, : margins.shape[1]] <= 0.0)
