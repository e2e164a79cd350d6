"""Dimensioned drawings of a corner reflector to scale (mm), and a sketch of several side by side.

The sheet is A4 across; printed at its own size it is to the scale that it states.
Front view as seen from boresight, the H-plane section below it with boresight downwards, and the
flat blank of `optim.cutting` with bend line and holes. Plates are measured along their inside faces
from the apex line, sharp, to the rim; boom, feed and mast clamps are left to the workshop.
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import Final, NamedTuple

import numpy as np
from matplotlib.figure import Figure

from models.build import Build, mass
from models.geometry import Reflectors
from optim.drafting import Point, Sheet, millimetres, reach
from optim.style import house_style, plain, text_width
from optim.views import (
    LEVEL,
    TITLES,
    Shape,
    Words,
    base,
    blank_view,
    front_outline,
    front_view,
    plan_outline,
    plan_view,
    shape_of,
    under_blank,
    words_of,
)

__all__ = ["SHEET", "draw_sheet", "draw_sketches", "scale_for"]

SHEET: Final = (297.0, 210.0)
"""A4 across, mm."""

_FRAME: Final = 8.0
_BLOCK: Final = (122.0, 64.0)
_STEPS: Final = tuple(m * 10.0**e for e in range(-3, 5) for m in (1.0, 2.0, 2.5, 5.0, 7.5))
"""Reductions 1:N for which there are rulers; below 1 they enlarge."""
_ROUND: Final = tuple(m * 10.0**e for e in range(-3, 6) for m in (1.0, 2.0, 5.0))
"""Lengths of a scale bar, mm."""


class _Layout(NamedTuple):
    """Where the views stand on the sheet, and how much paper they want, mm."""

    front: Point
    plan: Point
    blank: Point
    used: Point


def draw_sheet(
    reflectors: Reflectors,
    *,
    title: str,
    name: str = "",
    build: Build | None = None,
    band_hz: tuple[float, float] | None = None,
) -> Figure:
    """Return the dimensioned drawing of the first design on an A4 sheet.

    Parameters
    ----------
    reflectors : Reflectors
        Its first design is drawn.
    title : str
        Free text, cut to two lines.
    name : str
        What the design is called, for instance its role.
    build : Build, optional
        Sheet thickness and density.
    band_hz : (low, high), optional
        Hz.
    """
    build = build or Build()
    reduction = scale_for(reflectors, build)
    shape, words = shape_of(reflectors, reduction, build), words_of(reflectors, build)
    layout = _layout(shape, words)
    with house_style():
        sheet = Sheet(*SHEET)
        right, top = SHEET[0] - _FRAME, SHEET[1] - _FRAME
        sheet.outline(((_FRAME, _FRAME), (right, _FRAME), (right, top), (_FRAME, top)), weight=0.9)
        front_view(sheet, layout.front, shape, words)
        plan_view(sheet, layout.plan, shape, words)
        blank_view(sheet, layout.blank, shape, words)
        _title_block(sheet, reflectors, words, reduction, title, name, build, band_hz)
    return sheet.figure


def draw_sketches(reflectors: Reflectors, names: Sequence[str], *, title: str = "") -> Figure:
    """Return front views and H-plane sections of n designs side by side, all to one scale.

    Parameters
    ----------
    reflectors : Reflectors
        n designs.
    names : sequence of str, n
        What each is called.
    title : str
        Free text.
    """
    column, count = 58.0, len(reflectors)
    width = max(column * count + 8.0, 90.0)
    room = (column - 8.0, 62.0)
    tallest = float((reflectors.height + reflectors.depth).max())
    reduction = 1e3 * max(float(reflectors.width.max()) / room[0], tallest / room[1])
    head = 8.0 if title else 0.0
    height = tallest * 1e3 / reduction + 34.0 + head
    with house_style():
        sheet = Sheet(width, height)
        if title:
            heading = plain(title, width=width - 8.0, size=10.0, lines=1)
            sheet.text((4.0, height - 5.0), heading, size=10.0, bold=True)
        for row, name in enumerate(names):
            design = reflectors[row]
            shape, x = shape_of(design, reduction, Build()), 4.0 + column * (row + 0.5)
            y = height - head - 11.0 - shape.height / 2.0
            front_outline(sheet, (x, y), shape)
            plan_outline(sheet, (x, y - shape.height / 2.0 - 7.0), shape)
            label = plain(name.replace("_", " "), width=column - 6.0, lines=1)
            sheet.text((x, height - head - 6.0), label, bold=True, align="center")
            box = " × ".join(
                f"{float(side[0]) * 1e3:.0f}"
                for side in (design.width, design.height, design.depth)
            )
            sheet.text((x, 11.0), f"{box} mm", align="center")
        bar = _bar_length(reduction, 25.0)
        sheet.scale_bar((4.0, 3.5), bar / reduction, f"{bar:g} mm")
        sheet.text((width - 4.0, 4.3), "width × height × depth", align="right")
    return sheet.figure


def scale_for(reflectors: Reflectors, build: Build) -> float:
    """Return N of the scale 1:N at which the first design fills the sheet best.

    Raises
    ------
    ValueError
        Where no scale down to the smallest fits.
    """
    words = words_of(reflectors, build)
    for reduction in _STEPS:
        shape = shape_of(reflectors, reduction, build)
        used = _layout(shape, words).used
        if used[0] <= SHEET[0] - _FRAME and used[1] >= _FRAME:
            return reduction
    msg = f"no scale down to 1:{_STEPS[-1]:g} fits {millimetres(reflectors.longest_side[0])} mm"
    raise ValueError(msg)


def _layout(shape: Shape, words: Words) -> _Layout:
    """Place the views: section below the front view, blank beside it, title block below that."""
    side = shape.plate * np.sin(shape.half_angle)
    lean = LEVEL * np.cos(shape.half_angle)
    spill = reach(words.plate, shape.plate) * np.sin(shape.half_angle)
    left = max(LEVEL + 7.0, lean + 5.0 + spill, LEVEL + reach(words.width, 2.0 * shape.half_width))
    right = 2.0 * LEVEL + 5.0
    label = text_width(words.angle) + 10.0
    heading = text_width(TITLES[0]) + 2.0 - side
    column = left + side + max(side + right, label, text_width(words.diameter) + 8.0, heading)
    front_x = _FRAME + 3.0 + left + side
    blank_left = max(4.0, reach(words.half_blank, shape.blank), reach(words.blank, 2 * shape.blank))
    blank_x = _FRAME + 3.0 + column + 6.0 + blank_left + shape.blank
    notes = max(map(text_width, (words.flat, *words.notes))) + 2.0 - shape.blank
    blank_right = max(shape.blank + LEVEL + 5.0, text_width(words.bend) + 8.0, notes)
    top = SHEET[1] - _FRAME - 20.0
    middle = top - shape.height / 2.0
    drop = max(reach(words.length, shape.length), reach(words.dipole, shape.dipole))
    plan_y = top - shape.height - max(4.0, drop) - 23.0
    spills = (reach(words.depth, shape.depth), reach(words.spacing, shape.spacing))
    below = max(base(shape, words) - shape.depth + LEVEL + 13.0, *spills)
    blank_end = min(
        top - shape.height - drop,
        middle - shape.length / 2.0 - under_blank(shape, words),
    )
    return _Layout(
        front=(front_x, middle),
        plan=(front_x, plan_y),
        blank=(blank_x, middle),
        used=(
            max(blank_x + blank_right, _FRAME + 3.0 + column + _BLOCK[0]),
            min(plan_y - shape.depth - below, blank_end - _BLOCK[1] - 6.0),
        ),
    )


def _title_block(
    sheet: Sheet,
    reflectors: Reflectors,
    words: Words,
    reduction: float,
    title: str,
    name: str,
    build: Build,
    band_hz: tuple[float, float] | None,
) -> None:
    left, foot = SHEET[0] - _FRAME - _BLOCK[0], _FRAME
    right, top = left + _BLOCK[0], foot + _BLOCK[1]
    sheet.outline(
        ((left, foot), (right, foot), (right, top), (left, top)), fill="white", weight=0.9
    )
    lines = plain(title, width=_BLOCK[0] - 6.0, size=10.0).splitlines()
    for row, line in enumerate(lines):
        sheet.text((left + 3.0, top - 5.5 - 4.8 * row), line, size=10.0, bold=True)
    scale = f"1:{reduction:g}" if reduction >= 1.0 else f"{1.0 / reduction:g}:1"
    band = "" if band_hz is None else f"{band_hz[0] / 1e6:.6g} to {band_hz[1] / 1e6:.6g} MHz"
    subtitle = ", ".join(
        word for word in (plain(name.replace("_", " "), width=60.0, lines=1), band) if word
    )
    sheet.text((left + 3.0, top - 16.0), subtitle)
    sheet.line(((left, top - 19.0), (right, top - 19.0)))
    columns = (
        (
            ("apex angle", words.angle.removeprefix("apex angle ")),
            ("spacing", f"{words.spacing} mm"),
            ("plate width, each", f"{words.plate} mm"),
            ("plate length", f"{words.length} mm"),
            ("dipole length", f"{words.dipole} mm"),
            ("dipole diameter", f"{millimetres(reflectors.dipole_diameter[0])} mm"),
        ),
        (
            ("box width", f"{words.width} mm"),
            ("box height", f"{millimetres(reflectors.height[0])} mm"),
            ("box depth", f"{words.depth} mm"),
            ("frontal area", f"{float(reflectors.frontal_area[0]):.4g} m²"),
            ("sheet", f"{millimetres(build.sheet_thickness)} mm"),
            ("mass", f"{float(mass(reflectors, build)[0]):.3g} kg"),
        ),
    )
    for start, label_width, column in zip((left, left + 70.0), (31.0, 22.0), columns, strict=True):
        for row, (label, value) in enumerate(column):
            y = top - 23.0 - 4.5 * row
            sheet.text((start + 3.0, y), label)
            sheet.text((start + label_width + 2.0, y), value)
    sheet.line(((left, top - 49.0), (right, top - 49.0)))
    bar = _bar_length(reduction, 45.0)
    sheet.scale_bar((left + 3.0, foot + 9.5), bar / reduction, f"{bar:g} mm")
    sheet.text((left + 76.0, foot + 10.3), f"scale {scale} on A4", bold=True)
    sheet.text(
        (left + 3.0, foot + 4.0),
        "All dimensions in mm; plates on the inside, sharp apex line to rim.",
    )


def _bar_length(reduction: float, room: float) -> float:
    """Return the longest round length, mm, that takes at most `room` mm on paper."""
    return max(step for step in _ROUND if step / reduction <= room)
