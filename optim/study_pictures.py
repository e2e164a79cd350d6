"""Pictures of a whole study: smallest frontal area (m²) against what was varied, and all fronts.

Every point is one run: the antenna of the smallest frontal area that meets its requirements. Where
none does, a cross stands at the upper edge. Lines join the smallest at levels that are numbers.
"""

from __future__ import annotations

import itertools
import re
from collections.abc import Iterator, Mapping
from pathlib import Path
from typing import TYPE_CHECKING, Final

import numpy as np
from matplotlib.figure import Figure

from optim.study_file import Factor, Study, StudyRun
from optim.study_folder import Outcome
from optim.style import BLACK, GREY, MARKS, Mark, house_style, new_figure, no_data, plain, save

if TYPE_CHECKING:
    from matplotlib.axes import Axes

__all__ = ["draw_fronts", "draw_smallest", "draw_study", "label_of"]

UNITS: Final = {
    "dbi": "dBi",
    "db": "dB",
    "deg": "°",
    "mm": "mm",
    "m2": "m²",
    "kg": "kg",
    "n": "N",
    "mhz": "MHz",
    "ohm": "Ω",
    "s_m": "S/m",
    "m_s": "m/s",
    "kg_m3": "kg/m³",
}
"""Units by the suffix of a key; the longest that fits counts."""

AREA: Final = "smallest frontal area (m²)"


def draw_study(folder: Path, study: Study, outcomes: Mapping[int, Outcome]) -> list[Path]:
    """Draw every picture of a study into `folder`, as SVG and PNG; return the files.

    Raises
    ------
    OSError
        Where a file cannot be written.
    """
    folder.mkdir(parents=True, exist_ok=True)
    varied = [factor for factor in study.factors if len(factor.levels) > 1]
    pictures = {
        f"smallest_by_{re.sub(r'[^a-z0-9]+', '_', factor.name.lower())}": draw_smallest(
            study, outcomes, factor
        )
        for factor in varied
    }
    pictures["fronts"] = draw_fronts(study, outcomes)
    paths = []
    for name, figure in pictures.items():
        for suffix in (".svg", ".png"):
            paths.append(folder / f"{name}{suffix}")
            save(figure, paths[-1])
    return paths


def draw_smallest(study: Study, outcomes: Mapping[int, Outcome], factor: Factor) -> Figure:
    """Return the picture of the smallest frontal area against the levels of one factor.

    Another factor of at most six levels is told apart by marker and line; what else was varied,
    and the repeats, are points one above the other.
    """
    series = _series(study, factor)
    with house_style():
        figure = new_figure(7.2, 4.6, title=study.title)
        axes = figure.add_subplot()
        axes.set(xlabel=label_of(factor.name), ylabel=AREA)
        places = _places(axes, factor)
        for index, (name, runs) in enumerate(_grouped(study, series)):
            found = [
                (places[_level(study, run, factor)], area)
                for run in runs
                if (area := outcomes[run.number].area) is not None
            ]
            mark = MARKS[index % len(MARKS)]
            _series_of(axes, found, mark, name, joined=factor.numeric)
        _unmet(axes, study, outcomes, factor, places)
        if not axes.lines:
            no_data(axes, "no run done")
        axes.margins(x=0.06, y=0.14)
        if axes.get_legend_handles_labels()[0]:
            figure.legend(loc="outside lower left", ncols=2, columnspacing=2.0)
    return figure


def draw_fronts(study: Study, outcomes: Mapping[int, Outcome]) -> Figure:
    """Return all fronts in one picture: gain (dBi, worst in the band) over frontal area (m²)."""
    numbers = [len(factor.levels) for factor in study.factors]
    factor = study.factors[int(np.argmax(numbers))] if numbers else None
    shared = factor if factor is not None and len(factor.levels) <= len(MARKS) else None
    with house_style():
        figure = new_figure(7.2, 4.6, title=study.title)
        axes = figure.add_subplot()
        axes.set(xlabel="frontal area (m²)", ylabel="gain, worst in the band (dBi)")
        for index, (name, runs) in enumerate(_grouped(study, shared)):
            mark = MARKS[index % len(MARKS)] if shared else MARKS[0]
            for run in runs:
                curve = np.array(sorted(outcomes[run.number].curve)).reshape(-1, 2)
                if len(curve):
                    axes.plot(
                        curve[:, 0],
                        curve[:, 1],
                        color=mark.colour,
                        marker=mark.marker,
                        markersize=3.5,
                        linestyle="none",
                        label=name,
                    )
                    name = "_"  # noqa: PLW2901  each level once in the legend
        if not axes.lines:
            no_data(axes, "no run meets its requirements")
        if any(not str(line.get_label()).startswith("_") for line in axes.lines):
            figure.legend(loc="outside lower left", ncols=2, columnspacing=2.0)
    return figure


def label_of(name: str) -> str:
    """Return the axis label of a factor: words and unit of `require.gain_dbi.min` and its like."""
    table, *parts = name.split(".")
    words, shown = [], ""
    for part in parts or [table]:
        unit = max((u for u in UNITS if part.endswith(f"_{u}")), key=len, default=None)
        if unit is not None:
            shown = f" ({UNITS[unit]})"
        words += part.removesuffix(f"_{unit}").split("_")
    return " ".join(words) + shown


def _series(study: Study, shown: Factor) -> Factor | None:
    """Return the factor told apart by marks: the one with most levels that still has marks."""
    others = [f for f in study.factors if f is not shown and 1 < len(f.levels) <= len(MARKS)]
    return max(others, key=lambda factor: len(factor.levels), default=None)


def _grouped(study: Study, factor: Factor | None) -> Iterator[tuple[str, list[StudyRun]]]:
    """Yield the label and the runs of each level; all runs without a factor."""
    if factor is None:
        yield "_", list(study.runs)
        return
    for level, words in enumerate(factor.words):
        runs = [run for run in study.runs if _level(study, run, factor) == level]
        yield plain(f"{label_of(factor.name)}: {words}", width=75.0), runs


def _level(study: Study, run: StudyRun, factor: Factor) -> int:
    return run.levels[study.factors.index(factor)]


def _places(axes: Axes, factor: Factor) -> list[float]:
    """Return where the levels stand on the axis; levels that are no numbers stand in a row."""
    if factor.numeric:
        return [float(level) for level in factor.levels]
    places = list(range(len(factor.levels)))
    step = max(1, len(places) // 12)
    width = 150.0 / max(len(places[::step]), 1)
    words = [plain(words, width=width, lines=3) for words in factor.words[::step]]
    axes.set_xticks(places[::step], words)
    return [float(place) for place in places]


def _series_of(
    axes: Axes, found: list[tuple[float, float]], mark: Mark, name: str, *, joined: bool
) -> None:
    if not found:
        return
    points = np.array(sorted(found))
    axes.plot(
        points[:, 0],
        points[:, 1],
        linestyle="none",
        marker=mark.marker,
        markersize=6,
        color=mark.colour,
        markeredgecolor=BLACK,
        markeredgewidth=0.5,
        label=name,
    )
    if not joined:
        return
    least = [
        (x, min(area for _, area in rows))
        for x, rows in itertools.groupby(points.tolist(), key=lambda row: row[0])
    ]
    axes.plot(
        *np.array(least).T, color=mark.colour, linestyle=mark.dashes, linewidth=1.2, zorder=1.5
    )


def _unmet(
    axes: Axes,
    study: Study,
    outcomes: Mapping[int, Outcome],
    factor: Factor,
    places: list[float],
) -> None:
    """Mark the levels at which runs found nothing, or failed."""
    for status, marker, height in (("not met", "x", 0.97), ("failed", "1", 0.92)):
        hit = sorted(
            {
                places[_level(study, run, factor)]
                for run in study.runs
                if outcomes[run.number].status == status
            }
        )
        if hit:
            axes.plot(
                hit,
                [height] * len(hit),
                transform=axes.get_xaxis_transform(),
                linestyle="none",
                marker=marker,
                markersize=8,
                color=GREY,
                label=f"a run here: {status}",
            )
