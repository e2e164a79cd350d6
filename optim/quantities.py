"""What every figure and size is called, in which unit, and to how many decimals it is read.

Figures are those of `models.Figures`; sizes are in the unit of their caps.
"""

from __future__ import annotations

import math
from typing import Final, NamedTuple

__all__ = ["FIGURES", "MASKS", "OF_A_MATCH", "SIZES", "YIELD", "About", "minus", "number"]


class About(NamedTuple):
    """What there is to say of a quantity beside its number."""

    words: str
    unit: str
    decimals: int
    short: str = ""
    """Words where there is little room, if not `words`."""

    @property
    def label(self) -> str:
        """Short words and unit, as on an axis."""
        words = self.short or self.words
        return f"{words} ({self.unit})" if self.unit else words


FIGURES: Final = {
    "directivity_dbi": About("directivity", "dBi", 2),
    "gain_dbi": About("gain", "dBi", 2),
    "realized_gain_dbi": About("realized gain", "dBi", 2),
    "beamwidth_h_deg": About("half-power beamwidth, H-plane", "°", 1, "H-plane beamwidth"),
    "beamwidth_e_deg": About("half-power beamwidth, E-plane", "°", 1, "E-plane beamwidth"),
    "front_to_back_db": About("front-to-back ratio, rear sector", "dB", 1, "front-to-back ratio"),
    "front_to_back_180_db": About("front-to-back ratio at 180°", "dB", 1),
    "sidelobe_db": About("highest side lobe", "dB", 1, "side lobe level"),
    "boresight_dip_db": About("beam peak above boresight", "dB", 2),
    "resistance_ohm": About("input resistance", "Ω", 1),
    "reactance_ohm": About("input reactance", "Ω", 1),
    "vswr": About("VSWR", "", 2),
}
"""In the order of every output."""

MASKS: Final = {
    "mask_h_db": About("excess over the H-plane envelope", "dB", 2, "H-plane over envelope"),
    "mask_e_db": About("excess over the E-plane envelope", "dB", 2, "E-plane over envelope"),
}

SIZES: Final = {
    "width": About("box width", "mm", 1),
    "height": About("box height", "mm", 1),
    "depth": About("box depth", "mm", 1),
    "frontal_area": About("frontal area", "m²", 4),
    "volume": About("volume of the box", "m³", 4),
    "longest_side": About("longest side of the box", "mm", 1),
    "sheet_area": About("sheet area", "m²", 4),
    "mass": About("mass", "kg", 2),
    "wind_load": About("wind load", "N", 0),
}

YIELD: Final = About("yield", "", 3)

OF_A_MATCH: Final = ("realized_gain_dbi", "reactance_ohm", "vswr")
"""Figures that only a model which solves the dipole gives honestly."""


def number(value: float, decimals: int) -> str:
    """Return a number to read, a dash where it is missing."""
    return minus(f"{value:.{decimals}f}") if math.isfinite(value) else "–"


def minus(text: str) -> str:
    """Return a number as text with a proper minus sign."""
    return text.replace("-", "−")
