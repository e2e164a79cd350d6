"""The full-wave model against converged values, published corners and itself."""

from pathlib import Path

import numpy as np
import pytest

from models import Build, Figures, Reflectors, evaluate, moment, moment_case
from models.conventions import C0
from models.figures import figures_of_merit

LOSSLESS = Build(conductivity=np.inf)
ONE_METRE = np.array([C0])
TABLE = Path(__file__).parent / "published" / "finite_corners.csv"


def sinusoidal(reflectors: Reflectors) -> Figures:
    return figures_of_merit(moment.radiate(reflectors, ONE_METRE, LOSSLESS, feed="sinusoidal"))


def corners(apex_angle: float, **sizes: float | np.ndarray) -> Reflectors:
    given = {"spacing": 0.5, "plate_width": 1.0, "plate_length": 1.0, "dipole_length": 0.5}
    return Reflectors(
        apex_angle=np.radians(apex_angle), **{"dipole_diameter": 0.002, **given, **sizes}
    )


def test_finite_corners() -> None:
    # tests/published/CITATION.md; two rows whose H-plane lobes meet near half power have no
    # half-power beamwidth to compare.
    table = np.genfromtxt(TABLE, delimiter=",", names=True)
    figures = sinusoidal(
        Reflectors(
            apex_angle=np.radians(table["apex_angle_deg"]),
            spacing=table["spacing_wl"],
            plate_width=table["plate_width_wl"],
            plate_length=table["plate_length_wl"],
            dipole_length=0.5,
            dipole_diameter=0.001,
        )
    )

    def errors(name: str) -> np.ndarray:
        return np.asarray(np.abs(getattr(figures, name)[:, 0] - table[name]))

    assert np.median(errors("directivity_dbi")) < 0.01
    assert np.quantile(errors("directivity_dbi"), 0.95) < 0.08
    assert np.median(errors("beamwidth_h_deg")) < 0.1
    assert np.quantile(errors("beamwidth_h_deg"), 0.95) < 1.0
    assert np.median(errors("beamwidth_e_deg")) < 0.1
    assert np.quantile(errors("beamwidth_e_deg"), 0.95) < 0.5
    plain = table["front_to_back_db"] < 30.0
    assert np.median(errors("front_to_back_db")[plain]) < 0.1
    assert np.quantile(errors("front_to_back_db")[plain], 0.9) < 1.0
    assert np.median(errors("front_to_back_180_db")[plain]) < 0.2


def test_corner_and_flat_sheet() -> None:
    # Converged values on which two independent codes agree; resistance at the current maximum and
    # reactance added by the plates, with a sinusoidal half-wave dipole (alone 73.13 + j42.54 Ω).
    figures = sinusoidal(
        Reflectors(
            apex_angle=np.radians([90.0, 180.0]),
            spacing=[0.5, 0.25],
            plate_width=[1.0, 0.5],
            plate_length=1.0,
            dipole_length=0.5,
            dipole_diameter=1e-4,
        )
    )
    assert figures.directivity_dbi[:, 0] == pytest.approx([10.667, 8.19], abs=0.01)
    assert figures.beamwidth_h_deg[:, 0] == pytest.approx([47.04, 92.85], abs=0.15)
    assert figures.beamwidth_e_deg[:, 0] == pytest.approx([58.6, 60.6], abs=0.15)
    assert figures.front_to_back_180_db[:, 0] == pytest.approx([23.2, 16.07], abs=0.15)
    assert figures.resistance_ohm[:, 0] == pytest.approx([131.3, 87.2], abs=0.15)
    assert figures.reactance_ohm[:, 0] - 42.54 == pytest.approx([18.9, 31.1], abs=0.2)


def test_tall_plates_approach_infinite_length() -> None:
    # 10.783 dBi: exact radial mode matching of infinitely long plates with a half-wave dipole.
    # Radiation resistance 125.98 Ω there. The ends' effect on the beam dies out slowly, like 1/L.
    tall = sinusoidal(corners(90.0, plate_length=np.array([4.0, 8.0])))
    assert tall.resistance_ohm[:, 0] == pytest.approx(125.98, abs=0.2)
    assert tall.directivity_dbi[:, 0] == pytest.approx([10.783, 10.783], abs=0.15)
    assert tall.directivity_dbi[1, 0] == pytest.approx(10.783, abs=0.03)


def test_corners_with_resonant_dipoles() -> None:
    # L. B. Cebik, Corner Reflectors Revisited Again (2005): wire grids, so ±0.5 dB, ±5 Ω, ±4°.
    designs = corners(
        90.0,
        spacing=np.array([0.324, 0.370, 0.436]),
        plate_width=0.8,
        plate_length=1.4,
        dipole_length=np.array([0.4240, 0.4268, 0.4388]),
        dipole_diameter=0.008,
    )
    figures = evaluate(designs, C0, model="moment")
    assert figures.directivity_dbi[:, 0] == pytest.approx([11.42, 11.37, 11.28], abs=0.5)
    assert figures.resistance_ohm[:, 0] == pytest.approx([50.0, 70.0, 100.0], abs=5.0)
    assert figures.reactance_ohm[:, 0] == pytest.approx(0.0, abs=5.0)  # resonant
    assert figures.beamwidth_e_deg[:, 0] == pytest.approx(46.0, abs=4.0)
    assert figures.beamwidth_h_deg[:, 0] == pytest.approx(54.0, abs=4.0)
    large = corners(90.0, spacing=0.323, plate_width=1.6, plate_length=1.6)
    figures = evaluate(large, C0, model="moment")
    assert figures.directivity_dbi[0, 0] == pytest.approx(13.38, abs=0.5)
    assert figures.beamwidth_e_deg[0, 0] == pytest.approx(40.0, abs=4.0)
    assert figures.beamwidth_h_deg[0, 0] == pytest.approx(34.0, abs=4.0)


def test_loss() -> None:
    # Loss goes with the surface resistance, the square root of resistivity.
    design = corners(90.0)
    good, poor = (
        evaluate(design, 300e6, model="moment", build=Build(conductivity=sigma))
        for sigma in (4e7, 1e5)
    )
    lossless = evaluate(design, 300e6, model="moment", build=LOSSLESS)
    assert lossless.gain_dbi[0, 0] == lossless.directivity_dbi[0, 0]
    added = [f.resistance_ohm[0, 0] - lossless.resistance_ohm[0, 0] for f in (good, poor)]
    assert added[1] / added[0] == pytest.approx(20.0, rel=1e-6)
    assert 0.0 < lossless.gain_dbi[0, 0] - good.gain_dbi[0, 0] < 0.02


def test_finer_grids_agree(monkeypatch: pytest.MonkeyPatch) -> None:
    designs = corners(75.0, spacing=np.array([0.35, 0.6]), plate_width=0.9, plate_length=1.3)
    usual = evaluate(designs, C0, model="moment")
    monkeypatch.setattr(moment_case, "DENSITY", 15.0)
    finer = evaluate(designs, C0, model="moment")
    assert usual.directivity_dbi == pytest.approx(finer.directivity_dbi, abs=0.02)
    assert usual.front_to_back_db == pytest.approx(finer.front_to_back_db, abs=0.3)
    assert usual.resistance_ohm == pytest.approx(finer.resistance_ohm, rel=0.01)
    assert usual.reactance_ohm == pytest.approx(finer.reactance_ohm, abs=0.5)


def test_fields_that_agree_by_chance_are_looked_at_again(monkeypatch: pytest.MonkeyPatch) -> None:
    # A search came back with it: far fields of the first grids agree to 0.04 dB, 0.24 dB off.
    design = corners(88.0, spacing=0.188, plate_width=1.16, plate_length=1.273, dipole_length=0.578)
    usual = evaluate(design, C0, model="moment")
    monkeypatch.setattr(moment_case, "DENSITY", 15.0)
    finer = evaluate(design, C0, model="moment")
    assert usual.directivity_dbi == pytest.approx(finer.directivity_dbi, abs=0.05)
    assert usual.resistance_ohm == pytest.approx(finer.resistance_ohm, rel=0.03)


def test_what_the_grids_cannot_agree_on_is_not_vouched_for(monkeypatch: pytest.MonkeyPatch) -> None:
    design = corners(55.0, spacing=0.26, plate_width=2.4)
    monkeypatch.setattr(moment_case, "DENSITY", 3.6)
    monkeypatch.setattr(moment, "LADDER", (2, 3, 4, 5))
    assert evaluate(design, C0, model="moment").doubt_db[0, 0] == np.inf
    monkeypatch.undo()
    assert evaluate(design, C0, model="moment").doubt_db[0, 0] < moment.VOUCHED_DB


def test_scale_and_company_do_not_matter() -> None:
    rng = np.random.default_rng(11)
    designs = corners(
        90.0,
        spacing=rng.uniform(0.25, 0.75, 9),
        plate_width=rng.uniform(0.2, 1.6, 9),
        plate_length=rng.uniform(0.5, 1.6, 9),
        dipole_length=rng.uniform(0.42, 0.5, 9),
    )
    designs = Reflectors.from_matrix(
        np.column_stack([rng.uniform(0.6, np.pi, 9), designs.matrix()[:, 1:]])
    )
    whole = moment.radiate(designs, np.array([C0, 0.9 * C0]), LOSSLESS)
    for row in (0, 8):
        alone = moment.radiate(designs[[row]], ONE_METRE, LOSSLESS)
        assert alone.h_field[0, 0] == pytest.approx(whole.h_field[row, 0], rel=1e-9)
        assert alone.resistance[0, 0] == pytest.approx(whole.resistance[row, 0], rel=1e-9)
    sizes = designs.matrix() * np.array([1.0, 7.0, 7.0, 7.0, 7.0, 7.0])
    scaled = moment.radiate(Reflectors.from_matrix(sizes), ONE_METRE / 7.0, LOSSLESS)
    # Single precision rounds other sizes otherwise.
    assert scaled.e_field[:, 0] == pytest.approx(whole.e_field[:, 0], abs=1e-4)
    again = moment.radiate(designs, np.array([C0, 0.9 * C0]), LOSSLESS)
    assert np.array_equal(again.h_field, whole.h_field)


@pytest.mark.parametrize("apex_angle", [45.0, 60.0, 90.0, 135.0, 180.0])
def test_power_radiated_is_power_accepted(apex_angle: float) -> None:
    # The doubt holds the balance of an integral over the sphere with the input resistance.
    designs = corners(apex_angle, plate_width=np.array([0.2, 0.7, 1.2]), dipole_length=0.46)
    assert np.all(evaluate(designs, C0, model="moment").doubt_db < 0.1)
