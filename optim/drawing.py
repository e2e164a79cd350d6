"""Dimensioned drawings of a corner reflector to scale (mm), and a sketch of several side by side.

The sheet is A4 across; printed at its own size it is to the scale that it states.
Front view as seen from boresight, the H-plane section below it with boresight downwards, and the
blank of both plates laid flat with its bend line. Plates are measured along the sheet from the apex
line to the rim; what a bend adds or takes, holes, boom and feed are left to the workshop.
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

__all__ = ["SHEET", "draw_sheet", "draw_sketches", "scale_for"]

SHEET: Final = (297.0, 210.0)
"""A4 across, mm."""

_FRAME: Final = 8.0
_LEVEL: Final = 10.0
"""Distance of a dimension line from the outline, and from the next, mm."""
_BLOCK: Final = (122.0, 64.0)
_METAL: Final = "#e4e4e4"
_STEPS: Final = tuple(m * 10.0**e for e in range(-3, 5) for m in (1.0, 2.0, 2.5, 5.0, 7.5))
"""Reductions 1:N for which there are rulers; below 1 they enlarge."""
_ROUND: Final = tuple(m * 10.0**e for e in range(-3, 6) for m in (1.0, 2.0, 5.0))
"""Lengths of a scale bar, mm."""
_TITLES: Final = ("Front view, from boresight", "Section in the H-plane", "Both plates laid flat")


class _Shape(NamedTuple):
    """One design in mm on paper."""

    half_angle: float
    spacing: float
    plate: float
    length: float
    dipole: float
    diameter: float
    half_width: float
    rim: float
    depth: float

    @property
    def height(self) -> float:
        return max(self.length, self.dipole)


class _Words(NamedTuple):
    """The texts of the dimensions, mm and degrees of the antenna itself."""

    angle: str
    bend: str
    spacing: str
    plate: str
    blank: str
    length: str
    dipole: str
    diameter: str
    width: str
    depth: str


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
    reduction = scale_for(reflectors)
    shape, words = _shape(reflectors, reduction), _words(reflectors)
    layout = _layout(shape, words)
    with house_style():
        sheet = Sheet(*SHEET)
        right, top = SHEET[0] - _FRAME, SHEET[1] - _FRAME
        sheet.outline(((_FRAME, _FRAME), (right, _FRAME), (right, top), (_FRAME, top)), weight=0.9)
        _front_view(sheet, layout.front, shape, words)
        _plan_view(sheet, layout.plan, shape, words)
        _blank_view(sheet, layout.blank, shape, words)
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
            shape, x = _shape(design, reduction), 4.0 + column * (row + 0.5)
            y = height - head - 11.0 - shape.height / 2.0
            _front_outline(sheet, (x, y), shape)
            _plan_outline(sheet, (x, y - shape.height / 2.0 - 7.0), shape)
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


def scale_for(reflectors: Reflectors) -> float:
    """Return N of the scale 1:N at which the first design fills the sheet best.

    Raises
    ------
    ValueError
        Where no scale down to the smallest fits.
    """
    words = _words(reflectors)
    for reduction in _STEPS:
        shape = _shape(reflectors, reduction)
        used = _layout(shape, words).used
        if used[0] <= SHEET[0] - _FRAME and used[1] >= _FRAME:
            return reduction
    msg = f"no scale down to 1:{_STEPS[-1]:g} fits {millimetres(reflectors.longest_side[0])} mm"
    raise ValueError(msg)


def _shape(reflectors: Reflectors, reduction: float) -> _Shape:
    paper = 1e3 / reduction
    half = float(reflectors.apex_angle[0]) / 2.0
    plate = float(reflectors.plate_width[0]) * paper
    return _Shape(
        half_angle=half,
        spacing=float(reflectors.spacing[0]) * paper,
        plate=plate,
        length=float(reflectors.plate_length[0]) * paper,
        dipole=float(reflectors.dipole_length[0]) * paper,
        diameter=float(reflectors.dipole_diameter[0]) * paper,
        half_width=plate * np.sin(half),
        rim=plate * np.cos(half),
        depth=float(reflectors.depth[0]) * paper,
    )


def _words(reflectors: Reflectors) -> _Words:
    angle = np.degrees(float(reflectors.apex_angle[0]))
    bend = 180.0 - angle
    flat = bend < 5e-3
    return _Words(
        angle=f"apex angle {_degrees(angle)}",
        bend="flat, no bend" if flat else f"bend line: bend by {_degrees(bend)}",
        spacing=millimetres(reflectors.spacing[0]),
        plate=millimetres(reflectors.plate_width[0]),
        blank=millimetres(2.0 * reflectors.plate_width[0]),
        length=millimetres(reflectors.plate_length[0]),
        dipole=millimetres(reflectors.dipole_length[0]),
        diameter=f"dipole ⌀ {millimetres(reflectors.dipole_diameter[0])}",
        width=millimetres(reflectors.width[0], decimals=1),
        depth=millimetres(reflectors.depth[0], decimals=1),
    )


def _degrees(angle: float) -> str:
    return f"{angle:.2f}".rstrip("0").rstrip(".") + "°"


def _layout(shape: _Shape, words: _Words) -> _Layout:
    """Place the views: section below the front view, blank beside it, title block below that."""
    side = shape.plate * np.sin(shape.half_angle)
    lean = _LEVEL * np.cos(shape.half_angle)
    spill = reach(words.plate, shape.plate) * np.sin(shape.half_angle)
    left = max(
        _LEVEL + 7.0, lean + 5.0 + spill, _LEVEL + reach(words.width, 2.0 * shape.half_width)
    )
    right = 2.0 * _LEVEL + 5.0
    label = text_width(words.angle) + 10.0
    heading = text_width(_TITLES[0]) + 2.0 - side
    column = left + side + max(side + right, label, text_width(words.diameter) + 8.0, heading)
    front_x = _FRAME + 3.0 + left + side
    blank_left = max(4.0, reach(words.plate, shape.plate), reach(words.blank, 2.0 * shape.plate))
    blank_x = _FRAME + 3.0 + column + 6.0 + blank_left + shape.plate
    blank_right = max(shape.plate + _LEVEL + 5.0, text_width(words.bend) + 8.0)
    top = SHEET[1] - _FRAME - 20.0
    middle = top - shape.height / 2.0
    drop = max(reach(words.length, shape.length), reach(words.dipole, shape.dipole))
    plan_y = top - shape.height - max(4.0, drop) - 23.0
    spills = (reach(words.depth, shape.depth), reach(words.spacing, shape.spacing))
    below = max(_base(shape, words) - shape.depth + _LEVEL + 13.0, *spills)
    blank_end = top - shape.height - max(_LEVEL + 4.0, drop)
    return _Layout(
        front=(front_x, middle),
        plan=(front_x, plan_y),
        blank=(blank_x, middle),
        used=(
            max(blank_x + blank_right, _FRAME + 3.0 + column + _BLOCK[0]),
            min(plan_y - shape.depth - below, blank_end - _BLOCK[1] - 6.0),
        ),
    )


def _base(shape: _Shape, words: _Words) -> float:
    """Return how far below the apex the section ends, text past the rim included, mm."""
    past = reach(words.plate, shape.plate)
    if past == 0.0:
        return shape.depth
    along = (shape.plate + past) * np.cos(shape.half_angle)
    return max(shape.depth, float(along - _LEVEL * np.sin(shape.half_angle)) - 5.0)


def _rectangle(centre: Point, half_width: float, half_height: float) -> tuple[Point, ...]:
    x, y = centre
    return (
        (x - half_width, y - half_height),
        (x + half_width, y - half_height),
        (x + half_width, y + half_height),
        (x - half_width, y + half_height),
    )


def _front_outline(sheet: Sheet, centre: Point, shape: _Shape) -> None:
    x, y = centre
    sheet.outline(_rectangle(centre, shape.half_width, shape.length / 2.0), fill=_METAL)
    sheet.line(((x, y - shape.length / 2.0), (x, y + shape.length / 2.0)), weight=0.9)
    # Two arms and the gap between them, wide enough to be seen.
    gap = min(0.8, shape.dipole / 10.0)
    arm = (shape.dipole / 2.0 - gap) / 2.0
    for sense in (-1.0, 1.0):
        place = (x, y + sense * (gap + arm))
        sheet.outline(
            _rectangle(place, shape.diameter / 2.0, arm), fill="#555555", weight=0.8, order=3.5
        )


def _plan_outline(sheet: Sheet, apex: Point, shape: _Shape) -> None:
    x, y = apex
    rims = [(x + sense * shape.half_width, y - shape.rim) for sense in (-1.0, 1.0)]
    sheet.line((rims[0], apex, rims[1]), weight=2.0)
    turn = np.linspace(0.0, 2.0 * np.pi, 25)[:-1]
    radius = max(shape.diameter / 2.0, 0.35)
    sheet.outline(
        [(x + radius * np.cos(t), y - shape.spacing + radius * np.sin(t)) for t in turn],
        fill="#555555",
        weight=0.6,
        order=3.5,
    )


def _front_view(sheet: Sheet, centre: Point, shape: _Shape, words: _Words) -> None:
    x, y = centre
    side, half, arm = shape.half_width, shape.length / 2.0, shape.dipole / 2.0
    top = y + shape.height / 2.0
    sheet.text((x - side, top + 15.0), _TITLES[0], bold=True)
    _front_outline(sheet, centre, shape)
    sheet.dimension(
        (x - side, y + half),
        (x - side, y - half),
        through=(x - side - _LEVEL, y),
        along=(0.0, -1.0),
        words=words.length,
    )
    sheet.dimension(
        (x, y + arm),
        (x, y - arm),
        through=(x + side + _LEVEL, y),
        along=(0.0, -1.0),
        words=words.dipole,
    )
    sheet.leader((x, y + arm), (x + 3.0, top + 6.5), words.diameter)


def _plan_view(sheet: Sheet, apex: Point, shape: _Shape, words: _Words) -> None:
    x, y = apex
    side, foot, base = shape.half_width, y - shape.depth, y - _base(shape, words)
    sheet.text((x - side, y + 17.0), _TITLES[1], bold=True)
    sheet.centre_line((x, y + 4.0), (x, foot - 4.0))
    _plan_outline(sheet, apex, shape)
    radius = 0.6 * min(shape.plate, shape.spacing)
    half = np.degrees(shape.half_angle)
    sheet.arc(apex, radius, -90.0 - half, -90.0 + half)
    sheet.leader(apex, (x + 3.0, y + 9.0), words.angle)
    outward = np.array([-np.cos(shape.half_angle), np.sin(shape.half_angle)]) * _LEVEL
    sheet.dimension(
        apex,
        (x - side, y - shape.rim),
        through=(x + float(outward[0]), y + float(outward[1])),
        along=(-np.sin(shape.half_angle), -np.cos(shape.half_angle)),
        words=words.plate,
    )
    for level, (end, text) in enumerate(
        (
            ((x, y - shape.spacing), words.spacing),
            ((x + side if shape.rim >= shape.depth else x, foot), words.depth),
        )
    ):
        at = x + side + _LEVEL * (level + 1)
        sheet.dimension(apex, end, through=(at, y), along=(0.0, -1.0), words=text)
    sheet.dimension(
        (x + side, y - shape.rim),
        (x - side, y - shape.rim),
        through=(x, base - _LEVEL),
        along=(-1.0, 0.0),
        words=words.width,
    )
    sheet.line(((x, base - _LEVEL - 2.0), (x, base - _LEVEL - 9.0)), weight=0.9)
    sheet.arrow((x, base - _LEVEL - 9.5), np.array([0.0, -1.0]))
    sheet.text((x - 2.5, base - _LEVEL - 6.5), "boresight", align="right")


def _blank_view(sheet: Sheet, centre: Point, shape: _Shape, words: _Words) -> None:
    x, y = centre
    half = shape.length / 2.0
    sheet.text((x - shape.plate, y + half + 15.0), _TITLES[2], bold=True)
    sheet.outline(_rectangle(centre, shape.plate, half), fill=_METAL)
    sheet.centre_line((x, y - half - 3.0), (x, y + half + 3.0))
    sheet.leader((x, y + half), (x + 3.0, y + half + 6.5), words.bend)
    sheet.dimension(
        (x, y + half),
        (x - shape.plate, y + half),
        through=(x, y + half + 4.0),
        along=(-1.0, 0.0),
        words=words.plate,
    )
    sheet.dimension(
        (x + shape.plate, y - half),
        (x - shape.plate, y - half),
        through=(x, y - half - _LEVEL),
        along=(-1.0, 0.0),
        words=words.blank,
    )
    sheet.dimension(
        (x + shape.plate, y + half),
        (x + shape.plate, y - half),
        through=(x + shape.plate + _LEVEL, y),
        along=(0.0, -1.0),
        words=words.length,
    )


def _title_block(
    sheet: Sheet,
    reflectors: Reflectors,
    words: _Words,
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
        (left + 3.0, foot + 4.0), "All dimensions in mm; plates along the sheet, apex line to rim."
    )


def _bar_length(reduction: float, room: float) -> float:
    """Return the longest round length, mm, that takes at most `room` mm on paper."""
    return max(step for step in _ROUND if step / reduction <= room)
