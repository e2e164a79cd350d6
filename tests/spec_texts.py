"""Texts of requirements files, the least and the most, for tests of reading them."""

from __future__ import annotations

from pathlib import Path

from optim.requirements import Requirements, read_requirements

GOOD = """
title = "Invented link"
[band]
low_mhz = 902
high_mhz = 928
[require]
gain_dbi = { min = 10.5 }
"""


def written(folder: Path, text: str | bytes, name: str = "spec.toml") -> Path:
    path = folder / name
    path.write_bytes(text.encode() if isinstance(text, str) else text)
    return path


def read(folder: Path, text: str) -> Requirements:
    return read_requirements(written(folder, text))


def with_lines(**tables: str) -> str:
    """Return the good file with lines added to its tables."""
    text = GOOD
    for name, lines in tables.items():
        if f"[{name}]" in text:
            text = text.replace(f"[{name}]", f"[{name}]\n{lines}")
        else:
            text += f"\n[{name}]\n{lines}\n"
    return text


FULL = """
title = "All keys"
[band]
low_mhz = 470
high_mhz = 694.5
points = 9
[require]
gain_dbi = { min = 9 }
realized_gain_dbi = { min = 8.5 }
beamwidth_h_deg = { min = 30, max = 60 }
beamwidth_e_deg = { max = 55 }
front_to_back_db = { min = 20, rear_sector_deg = 45 }
sidelobe_db = { max = -12 }
vswr = { max = 1.8, reference_ohm = 75 }
resistance_ohm = { min = 20 }
mask_h = [[0, 0], [20, 0], [60, -16], [180, -16]]
mask_e = [[20, 0], [20, -6], [180, -9]]
[size]
width_mm = { max = 900 }
height_mm = { max = 800 }
depth_mm = { max = 700 }
frontal_area_m2 = { max = 0.6 }
mass_kg = { max = 5 }
wind_load_n = { max = 500, wind_speed_m_s = 35 }
[search]
apex_angle_deg = [60, 120]
spacing_mm = 200
plate_width_mm = [200, 1000]
plate_length_mm = [200, 1000]
dipole_length_mm = [200, 280]
[build]
sheet_thickness_mm = 1.5
sheet_density_kg_m3 = 7850
conductivity_s_m = 6e6
dipole_diameter_mm = 6
length_step_mm = 2
angle_step_deg = 0.5
feed = "folded"
[tolerance]
apex_angle_deg = 1
plate_width_mm = 2
min_yield = 0.9
[goals]
minimise = ["mass", "beamwidth_h"]
maximise = ["front_to_back"]
[run]
population = 40
generations = 7
seed = 0
scout = "image"
prove = "none"
"""
