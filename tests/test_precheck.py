"""What is ruled out before a search, and who can judge what."""

from __future__ import annotations

import csv
from pathlib import Path

import numpy as np
import pytest

from models import MODELS
from models.conventions import C0
from optim.precheck import aperture_gain_dbi, blind_spots, findings
from optim.requirements import Requirements, read_requirements
from optim.space import DesignSpace

BAND = "[band]\nlow_mhz = 902\nhigh_mhz = 928\n"


def understood(folder: Path, text: str) -> tuple[Requirements, DesignSpace]:
    path = folder / "spec.toml"
    path.write_text(BAND + text, encoding="utf-8")
    requirements = read_requirements(path)
    return requirements, DesignSpace.from_requirements(requirements)


def ruled_out(folder: Path, text: str) -> list[str]:
    return [f.text for f in findings(*understood(folder, text)) if f.ruled_out]


def test_aperture_gain_by_hand() -> None:
    # 4π·(1.5 λ)²/λ² = 28.27 = 14.51 dBi for a box of one wavelength, λ/2 added to both sides.
    wavelength = C0 / 1e9
    assert aperture_gain_dbi(wavelength, wavelength, 1e9) == pytest.approx(14.514, abs=1e-3)


@pytest.mark.parametrize(
    ("spacing", "width", "length", "published_dbi"),
    [(0.324, 0.8, 1.4, 11.42), (0.436, 0.8, 1.4, 11.28), (0.323, 1.6, 1.6, 13.38)],
)
def test_published_corners_are_not_ruled_out(
    tmp_path: Path, spacing: float, width: float, length: float, published_dbi: float
) -> None:
    # L. B. Cebik, Corner Reflectors Revisited Again (2005), parts 1-2: 90° corners, in λ.
    wavelength_mm = 1e3 * C0 / 902e6
    text = f"""[require]\ngain_dbi = {{ min = {published_dbi} }}
    [search]
    apex_angle_deg = 90
    spacing_mm = {spacing * wavelength_mm}
    plate_width_mm = {width * wavelength_mm}
    plate_length_mm = {length * wavelength_mm}
    """
    assert ruled_out(tmp_path, text) == []
    box = np.sqrt(2.0) * width * C0 / 902e6, length * C0 / 902e6
    assert aperture_gain_dbi(*box, 902e6) > published_dbi


@pytest.mark.parametrize(
    ("text", "name"),
    [
        ("[require]\ngain_dbi = { min = 25 }\n[size]\nwidth_mm = { max = 500 }", "gain_dbi"),
        (
            "[require]\ngain_dbi = { min = 12 }\n[size]\nfrontal_area_m2 = { max = 0.03 }",
            "gain_dbi",
        ),
        ("[require]\ngain_dbi = { min = 5 }\n[size]\nheight_mm = { max = 100 }", "height_mm"),
        ("[require]\ngain_dbi = { min = 5 }\n[size]\nwidth_mm = { max = 90 }", "width_mm"),
        ("[require]\ngain_dbi = { min = 5 }\n[size]\ndepth_mm = { max = 60 }", "depth_mm"),
        ("[require]\ngain_dbi = { min = 5 }\n[size]\nmass_kg = { max = 0.05 }", "mass_kg"),
        (
            "[require]\ngain_dbi = { min = 5 }\n"
            "[size]\nwind_load_n = { max = 5, wind_speed_m_s = 60 }",
            "wind_load_n",
        ),
        ("[require]\nmask_h = [[0, -1], [90, -10]]", "mask_h"),
    ],
)
def test_impossible_requirement_is_ruled_out(tmp_path: Path, text: str, name: str) -> None:
    assert any(line.startswith(name) for line in ruled_out(tmp_path, text))


def test_what_can_be_had_is_not_ruled_out(tmp_path: Path) -> None:
    text = """[require]\ngain_dbi = { min = 10.5 }\nbeamwidth_h_deg = { max = 60 }
    [size]
    width_mm = { max = 600 }
    depth_mm = { max = 400 }
    mass_kg = { max = 3 }
    """
    assert findings(*understood(tmp_path, text)) == []


def test_no_cap_is_ruled_out_that_a_design_meets(tmp_path: Path) -> None:
    requirements, space = understood(tmp_path, "[require]\ngain_dbi = { min = 5 }")
    rng = np.random.default_rng(4)
    smallest = space.reflectors(space.snap(rng.uniform(space.low, space.high, (3000, 5))))
    for name, sizes in (("width_mm", smallest.width), ("depth_mm", smallest.depth)):
        cap = 1e3 * float(sizes.min()) + 0.01
        text = f"[require]\ngain_dbi = {{ min = 5 }}\n[size]\n{name} = {{ max = {cap} }}"
        assert ruled_out(tmp_path, text) == []
    assert requirements.band.points == 3


def test_narrow_beam_is_a_hint_not_a_verdict(tmp_path: Path) -> None:
    found = findings(*understood(tmp_path, "[require]\nbeamwidth_h_deg = { max = 14 }"))
    assert [f.ruled_out for f in found] == [False]
    assert "common practice" in found[0].text


def test_models_without_an_honest_match_are_named(tmp_path: Path) -> None:
    text = "[require]\nvswr = { max = 2 }\nfront_to_back_db = { min = 15 }"
    requirements, space = understood(tmp_path, text + '\n[run]\nscout = "image"\nprove = "none"')
    for name, model in MODELS.items():
        assert ("vswr.max" in blind_spots(requirements, space, name)) is not model.gives_match
    assert "front_to_back_db.min" in blind_spots(requirements, space, "image")
    hints = [f.text for f in findings(requirements, space)]
    assert any("image" in text and "vswr.max" in text for text in hints)


def test_aperture_bound_holds_for_finite_corners_of_another_code() -> None:
    # Directivities of corners of finite plates from an independent boundary-element solution.
    path = Path(__file__).parent / "published" / "finite_corners.csv"
    with path.open(encoding="utf-8") as stream:
        rows = list(csv.DictReader(line for line in stream if not line.startswith("#")))
    assert len(rows) > 20
    for row in rows:
        half = np.radians(float(row["apex_angle_deg"])) / 2.0
        width = 2.0 * float(row["plate_width_wl"]) * np.sin(half)
        height = max(float(row["plate_length_wl"]), 0.5)
        most = aperture_gain_dbi(width * C0 / 1e9, height * C0 / 1e9, 1e9)
        assert float(row["directivity_dbi"]) < most
