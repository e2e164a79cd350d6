"""One design judged by one model: figures over the band, sizes, and what to be wary of.

`as_json` is what scripts rely on; a figure that the model cannot give is None there.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from typing import Final

import numpy as np

from models import MODELS, Figures, radiate
from models.build import mass
from models.conventions import C0, FloatArray
from models.figures import figures_of_merit
from models.images import image_count
from models.pattern import Pattern
from optim.designfile import Design
from optim.margins import GREATEST_DIP_DB
from optim.quantities import FIGURES
from optim.requirements import DEFAULT_RESISTANCE_OHM
from optim.tables import aligned

__all__ = ["Analysis", "analyse", "as_json", "words"]

SMALL_PLATE: Final = 0.6
"""Plates narrower or shorter than this many wavelengths are small to a ray."""

MOST_COLUMNS: Final = 5


@dataclass(frozen=True, eq=False)
class Analysis:
    """What `model` says about `design` at `frequencies` (Hz, (n_freq,))."""

    design: Design
    model: str
    frequencies: FloatArray
    pattern: Pattern
    figures: Figures
    warnings: tuple[str, ...]

    def sizes(self) -> dict[str, float]:
        """Return the sizes by their names in the output."""
        r = self.design.reflectors
        return {
            "width_mm": 1e3 * float(r.width[0]),
            "height_mm": 1e3 * float(r.height[0]),
            "depth_mm": 1e3 * float(r.depth[0]),
            "frontal_area_m2": float(r.frontal_area[0]),
            "sheet_area_m2": float(r.sheet_area[0]),
            "mass_kg": float(mass(r, self.design.build)[0]),
        }


def analyse(design: Design, model: str) -> Analysis:
    """Return what `model` (a name of `models.MODELS`) says about `design` over its band."""
    frequencies = design.band.frequencies()
    pattern = radiate(design.reflectors, frequencies, model=model, build=design.build)
    figures = figures_of_merit(pattern, design.terms)
    warnings = (*_limits_of(model, design), *_oddities(figures))
    return Analysis(design, model, frequencies, pattern, figures, warnings)


def as_json(analysis: Analysis) -> dict[str, object]:
    """Return the analysis as plain numbers, None for a figure that is not finite."""
    figures = {
        name: [float(v) if np.isfinite(v) else None for v in getattr(analysis.figures, name)[0]]
        for name in FIGURES
    }
    return {
        "model": analysis.model,
        "frequencies_mhz": [float(f) / 1e6 for f in analysis.frequencies],
        **figures,
        **analysis.sizes(),
        "warnings": list(analysis.warnings),
    }


def words(analysis: Analysis) -> str:
    """Return the analysis as a page of plain text."""
    sizes = analysis.sizes()
    box = " × ".join(f"{sizes[f'{side}_mm']:.0f}" for side in ("width", "height", "depth"))
    return "\n".join(
        [
            analysis.design.title,
            f"model {analysis.model}: {MODELS[analysis.model].summary}",
            "",
            *aligned(list(_rows(analysis))),
            "",
            f"width × height × depth {box} mm; frontal area {sizes['frontal_area_m2']:.4f} m², "
            f"sheet {sizes['sheet_area_m2']:.4f} m², mass {sizes['mass_kg']:.2f} kg",
            *(f"Note: {warning}" for warning in analysis.warnings),
        ]
    )


def _rows(analysis: Analysis) -> Iterator[list[str]]:
    """Yield the figures as rows of a table, at up to five frequencies spread over the band."""
    count = analysis.frequencies.size
    shown = np.unique(np.linspace(0, count - 1, min(count, MOST_COLUMNS)).round().astype(int))
    yield ["MHz", *(f"{analysis.frequencies[place] / 1e6:g}" for place in shown)]
    for name, (label, unit, decimals, _) in FIGURES.items():
        values = getattr(analysis.figures, name)[0][shown]
        cells = [f"{v:.{decimals}f}" if np.isfinite(v) else "–" for v in values]
        yield [f"{label}, {unit}" if unit else label, *cells]


def _limits_of(model: str, design: Design) -> Iterator[str]:
    """Yield where `design` lies outside what `model` is made for."""
    r, wavelength = design.reflectors, C0 / design.band.low_hz
    if model == "image":
        yield "image takes both plates as infinite: their size plays no part, nothing is behind"
        if np.isnan(image_count(r.apex_angle)[0]):
            angle = np.degrees(r.apex_angle[0])
            yield f"image gives nothing at an apex angle of {angle:g}°, only at 180°/n"
    if model == "modal":
        yield "modal takes both plates as endless along the dipole: plate length plays no part"
    if model == "ray":
        for name in ("plate_width", "plate_length"):
            share = float(getattr(r, name)[0]) / wavelength
            if share < SMALL_PLATE:
                words = name.replace("_", " ")
                yield f"{words} is {share:.2f} λ at the lowest frequency, ray is made for 0.6 λ up"
    if not MODELS[model].gives_match:
        yield f"{model} takes the dipole's current as a sine: no honest reactance, VSWR or match"


def _oddities(figures: Figures) -> Iterator[str]:
    """Yield what in the figures themselves calls for care; figures of one design."""
    if np.isposinf(figures.doubt_db).any():
        yield "the model cannot vouch for these figures"
    if np.isnan(figures.directivity_dbi).any():
        yield "the model gives no directivity for this design at some or all frequencies"
    dip = figures.boresight_dip_db[0]
    if (dip > GREATEST_DIP_DB).any():
        yield f"the beam dips on boresight, {np.nanmax(dip):.1f} dB below its peak"
    resistance = figures.resistance_ohm[0]
    if (resistance < DEFAULT_RESISTANCE_OHM).any():
        yield f"input resistance falls to {np.nanmin(resistance):.2g} Ω, hard to match"
