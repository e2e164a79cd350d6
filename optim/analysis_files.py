"""The files of one design judged by one model: data as JSON, cuts, band curves and the drawing."""

from __future__ import annotations

import json
from pathlib import Path

from optim.analysis import Analysis, as_json
from optim.drawing import draw_sheet
from optim.plot_band import draw_band
from optim.plot_cuts import draw_cuts
from optim.style import save

__all__ = ["write"]


def write(folder: Path, analysis: Analysis) -> list[str]:
    """Write the files of an analysis into `folder`, made if need be; return their names.

    Raises
    ------
    OSError
        Where something cannot be written.
    """
    design, title = analysis.design, analysis.design.title
    band = design.band.low_hz, design.band.high_hz
    folder.mkdir(parents=True, exist_ok=True)
    data = json.dumps(as_json(analysis), indent=2, allow_nan=False)
    (folder / "analysis.json").write_text(data + "\n", encoding="utf-8")
    pictures = {
        "cuts.png": draw_cuts(
            title=title,
            pattern=analysis.pattern,
            frequencies_hz=analysis.frequencies,
            terms=design.terms,
            model=analysis.model,
        ),
        "band.png": draw_band(
            title=title,
            frequencies_hz=analysis.frequencies,
            figures=analysis.figures,
            names=[analysis.model],
        ),
        "drawing.svg": draw_sheet(design.reflectors, title=title, build=design.build, band_hz=band),
    }
    for name, figure in pictures.items():
        save(figure, folder / name)
    return ["analysis.json", *pictures]
