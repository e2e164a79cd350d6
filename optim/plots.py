"""The pictures of a finished search: front, sizes, band curves, cuts of each design.

Everything goes into one folder as SVG. Axes follow the goals: a
size across, a figure upwards, a third goal by colour. Values are the worst over the band.
"""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING, Final

import numpy as np
from matplotlib.figure import Figure

from models import Figures, radiate
from models.conventions import FloatArray
from models.figures import figures_of_merit
from optim.drawing import draw_sketches
from optim.margins import GOAL_FIGURES, MISSING, SIZES
from optim.plot_band import draw_band
from optim.plot_cuts import draw_cuts
from optim.plot_front import Axis, draw_front
from optim.quantities import FIGURES, YIELD
from optim.quantities import SIZES as ABOUT_SIZES
from optim.style import save

if TYPE_CHECKING:
    from optim.archive import Judged
    from optim.requirements import Requirements
    from optim.result import Result

__all__ = ["FOLDER", "draw_run", "front_of"]

FOLDER: Final = "pictures"


def draw_run(folder: Path, result: Result) -> list[Path]:
    """Draw every picture of `result` into `folder`; return the files, in a reader's order.

    Parameters
    ----------
    folder : Path
    result : Result

    Raises
    ------
    OSError
        Where a file cannot be written.
    """
    folder.mkdir(parents=True, exist_ok=True)
    requirements = result.requirements
    judged, rows = result.shown()
    pictures = {"front": front_of(result)}
    if rows:
        names = list(rows)
        reflectors = result.space.reflectors(judged.designs[list(rows.values())])
        frequencies = requirements.band.refined().frequencies()
        pattern = radiate(
            reflectors, frequencies, model=result.found.model, build=requirements.build
        )
        pictures["sizes"] = draw_sketches(reflectors, names, title=requirements.title)
        pictures["band"] = draw_band(
            title=requirements.title,
            frequencies_hz=frequencies,
            figures=figures_of_merit(pattern, requirements.terms),
            names=names,
            bounds=requirements.limits,
        )
        for row, name in enumerate(names):
            words = name.replace("_", " ")
            pictures[f"{name}_cuts"] = draw_cuts(
                title=f"{words}: {requirements.title}",
                pattern=pattern.rows([row]),
                frequencies_hz=frequencies,
                terms=requirements.terms,
                model=result.found.model,
            )
    for name, picture in pictures.items():
        save(picture, folder / f"{name}.svg")
    return [folder / f"{name}.svg" for name in pictures]


def front_of(result: Result) -> Figure:
    """Return the picture of the front, or of the nearest designs where nothing meets the limits."""
    requirements = result.requirements
    judged, rows = result.shown()
    across, upwards, third = _axes_of([goal.name for goal in requirements.goals])
    gains = {"gain", "realized_gain"}
    line = across == "frontal_area" and upwards in gains
    return draw_front(
        title=requirements.title,
        x=_axis(across, result, judged),
        y=_axis(upwards, result, judged),
        colour=None if third is None else _axis(third, result, judged),
        meets=np.full(len(judged), result.met),
        recommended=rows,
        # Of a uniformly lit aperture the low edge of the band is the worst.
        aperture_hz=requirements.band.low_hz if line else None,
    )


def _axes_of(goals: list[str]) -> tuple[str, str, str | None]:
    """Return what goes across, upwards and into colour: sizes across, figures upwards."""
    sizes = [goal for goal in goals if goal in SIZES]
    figures = [goal for goal in goals if goal not in SIZES]
    if not sizes:
        sizes = figures[1:2] or ["frontal_area"]
    if not figures:
        figures = sizes[1:2] or ["gain"]
    rest = [goal for goal in goals if goal not in {sizes[0], figures[0]}]
    return sizes[0], figures[0], rest[0] if rest else None


def _axis(name: str, result: Result, judged: Judged) -> Axis:
    requirements, figure = result.requirements, GOAL_FIGURES.get(name, name)
    about = (FIGURES | ABOUT_SIZES | {"yield": YIELD})[figure]
    worst = "" if name in SIZES else ", worst in the band"
    limits = {limit.sense: limit.value for limit in requirements.limits if limit.figure == figure}
    return Axis(
        label=about._replace(short=f"{about.short or about.words}{worst}").label,
        unit=about.unit,
        values=_values(name, result, judged, requirements),
        minimum=limits.get("min"),
        maximum=limits.get("max"),
    )


def _values(name: str, result: Result, judged: Judged, requirements: Requirements) -> FloatArray:
    """Return a goal of every judged design in its unit, (n,); NaN where it is missing."""
    for column, goal in enumerate(requirements.goals):
        if goal.name == name:
            found = judged.objectives[:, column] * (1.0 if goal.sense == "min" else -1.0)
            found = np.where(np.abs(found) >= MISSING, np.nan, found)
            return np.asarray(found / SIZES.get(name, 1.0))
    if name in SIZES:
        return np.asarray(
            getattr(result.space.reflectors(judged.designs), name) / SIZES[name], dtype=np.float64
        )
    return np.asarray(judged.worst[:, Figures.names().index(GOAL_FIGURES[name])])
