"""The data of a finished run as files: front.csv and summary.json, in the files' units.

Numbers are written with fixed decimals, so the same designs give the same bytes. A figure that a
model cannot give is an empty cell, or null.
"""

from __future__ import annotations

import csv
import io
import json
import math
from collections.abc import Mapping
from typing import Any, Final

import numpy as np

from models import Figures, Reflectors
from models.build import mass
from models.conventions import FloatArray
from models.geometry import DIMENSIONS
from optim.archive import Judged
from optim.quantities import FIGURES
from optim.recommend import relaxed_value
from optim.requirements import Limit, Requirements
from optim.units import to_file

__all__ = [
    "DIMENSION_KEYS",
    "aligned",
    "dimensions",
    "figures",
    "front_csv",
    "margins",
    "relaxation",
    "sizes",
    "summary_json",
]

DIMENSION_KEYS: Final = {
    name: f"{name}_deg" if name == "apex_angle" else f"{name}_mm" for name in DIMENSIONS
}

_SIZE_UNITS: Final = {
    "width_mm": "mm",
    "height_mm": "mm",
    "depth_mm": "mm",
    "frontal_area_m2": "m²",
    "mass_kg": "kg",
}

_DECIMALS: Final = {"dBi": 3, "dB": 3, "°": 2, "Ω": 2, "": 3, "mm": 2, "m²": 6, "kg": 4}
"""Decimals in the files, by unit."""


def dimensions(reflectors: Reflectors, row: int) -> dict[str, float]:
    """Return the six dimensions of one design, deg and mm, by their keys."""
    return {
        key: to_file(name, float(getattr(reflectors, name)[row]))
        for name, key in DIMENSION_KEYS.items()
    }


def sizes(reflectors: Reflectors, requirements: Requirements) -> dict[str, FloatArray]:
    """Return the finished antennas' sizes in the files' units, each (n,)."""
    return {
        "width_mm": 1e3 * reflectors.width,
        "height_mm": 1e3 * reflectors.height,
        "depth_mm": 1e3 * reflectors.depth,
        "frontal_area_m2": reflectors.frontal_area,
        "mass_kg": mass(reflectors, requirements.build),
    }


def figures(judged: Judged, row: int) -> dict[str, float]:
    """Return the worst value over the band of every figure of one design."""
    return dict(zip(Figures.names(), judged.worst[row].tolist(), strict=True))


def margins(judged: Judged, row: int, requirements: Requirements) -> dict[str, float]:
    """Return the margin to every limit of one design, in the limit's unit, by the limit's label."""
    labels = [limit.label for limit in requirements.limits]
    return dict(zip(labels, judged.margins[row].tolist(), strict=True))


def relaxation(judged: Judged, row: int, requirements: Requirements) -> list[tuple[Limit, float]]:
    """Return the limits that one design violates, each with the value at which it would not."""
    found = zip(requirements.limits, judged.margins[row].tolist(), strict=True)
    return [(limit, relaxed_value(limit, margin)) for limit, margin in found if margin < 0.0]


def front_csv(front: Judged, reflectors: Reflectors, requirements: Requirements, model: str) -> str:
    """Return front.csv: one line a design, in the order of `front`."""
    text = io.StringIO()
    writer = csv.writer(text, lineterminator="\n")
    writer.writerow([*DIMENSION_KEYS.values(), *_SIZE_UNITS, *FIGURES, "smallest_margin", "model"])
    size = sizes(reflectors, requirements)
    for row in range(len(front)):
        worst = figures(front, row)
        writer.writerow(
            [
                *(f"{value!r}" for value in dimensions(reflectors, row).values()),
                *(_cell(size[name][row], _DECIMALS[unit]) for name, unit in _SIZE_UNITS.items()),
                *(_cell(worst[name], _DECIMALS[about.unit]) for name, about in FIGURES.items()),
                _cell(front.smallest_margin[row], 4),
                model,
            ]
        )
    return text.getvalue()


def summary_json(summary: Mapping[str, Any]) -> str:
    """Return summary.json: no NaN, no infinity, a newline at the end."""
    return json.dumps(_plain(summary), indent=2, ensure_ascii=False, allow_nan=False) + "\n"


def aligned(lines: list[list[str]]) -> list[str]:
    """Return the lines of a table: first column to the left, the others to the right."""
    widths = np.array([[len(cell) for cell in line] for line in lines]).max(axis=0)
    return [
        "  ".join(
            cell.ljust(width) if column == 0 else cell.rjust(width)
            for column, (cell, width) in enumerate(zip(line, widths, strict=True))
        ).rstrip()
        for line in lines
    ]


def _cell(value: float, digits: int) -> str:
    if math.isnan(value):
        return ""
    return f"{value:.{digits}f}" if math.isfinite(value) else str(float(value))


def _plain(value: Any) -> Any:
    if isinstance(value, Mapping):
        return {str(key): _plain(inner) for key, inner in value.items()}
    if isinstance(value, list | tuple):
        return [_plain(inner) for inner in value]
    if isinstance(value, np.generic):
        value = value.item()
    if isinstance(value, float):
        return float(f"{value:.6g}") if math.isfinite(value) else None
    return value
