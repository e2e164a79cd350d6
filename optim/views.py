"""The views of a corner reflector on a drawing: front, section in the H-plane, plates laid flat.

Millimetres on paper, reduced from metres by N of the scale 1:N. The front view is that from
boresight; the section has the apex on top and boresight downwards. Dimension lines stand one
`LEVEL` off the outlines; text that does not fit between its arrows goes outside.
"""

from __future__ import annotations

from typing import Final, NamedTuple

import numpy as np

from models.geometry import Reflectors
from optim.drafting import Point, Sheet, millimetres, reach

__all__ = [
    "LEVEL",
    "TITLES",
    "Shape",
    "Words",
    "base",
    "blank_view",
    "front_outline",
    "front_view",
    "plan_outline",
    "plan_view",
    "shape_of",
    "words_of",
]

LEVEL: Final = 10.0
"""Distance of a dimension line from the outline, and from the next, mm."""
_METAL: Final = "#e4e4e4"
TITLES: Final = ("Front view, from boresight", "Section in the H-plane", "Both plates laid flat")


class Shape(NamedTuple):
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
        """Return the taller of plates and dipole."""
        return max(self.length, self.dipole)


class Words(NamedTuple):
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


def shape_of(reflectors: Reflectors, reduction: float) -> Shape:
    """Return the first design in mm on paper at the scale 1:`reduction`."""
    paper = 1e3 / reduction
    half = float(reflectors.apex_angle[0]) / 2.0
    plate = float(reflectors.plate_width[0]) * paper
    return Shape(
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


def words_of(reflectors: Reflectors) -> Words:
    """Return the texts for the first design."""
    angle = np.degrees(float(reflectors.apex_angle[0]))
    bend = 180.0 - angle
    flat = bend < 5e-3
    return Words(
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


def base(shape: Shape, words: Words) -> float:
    """Return how far below the apex the section ends, text past the rim included, mm."""
    past = reach(words.plate, shape.plate)
    if past == 0.0:
        return shape.depth
    along = (shape.plate + past) * np.cos(shape.half_angle)
    return max(shape.depth, float(along - LEVEL * np.sin(shape.half_angle)) - 5.0)


def _rectangle(centre: Point, half_width: float, half_height: float) -> tuple[Point, ...]:
    x, y = centre
    return (
        (x - half_width, y - half_height),
        (x + half_width, y - half_height),
        (x + half_width, y + half_height),
        (x - half_width, y + half_height),
    )


def front_outline(sheet: Sheet, centre: Point, shape: Shape) -> None:
    """Draw plates and dipole as seen from boresight about `centre`."""
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


def plan_outline(sheet: Sheet, apex: Point, shape: Shape) -> None:
    """Draw plates and dipole cut in the H-plane, boresight downwards from `apex`."""
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


def front_view(sheet: Sheet, centre: Point, shape: Shape, words: Words) -> None:
    """Draw the front view with plate length, dipole length and dipole diameter."""
    x, y = centre
    side, half, arm = shape.half_width, shape.length / 2.0, shape.dipole / 2.0
    top = y + shape.height / 2.0
    sheet.text((x - side, top + 15.0), TITLES[0], bold=True)
    front_outline(sheet, centre, shape)
    sheet.dimension(
        (x - side, y + half),
        (x - side, y - half),
        through=(x - side - LEVEL, y),
        along=(0.0, -1.0),
        words=words.length,
    )
    sheet.dimension(
        (x, y + arm),
        (x, y - arm),
        through=(x + side + LEVEL, y),
        along=(0.0, -1.0),
        words=words.dipole,
    )
    sheet.leader((x, y + arm), (x + 3.0, top + 6.5), words.diameter)


def plan_view(sheet: Sheet, apex: Point, shape: Shape, words: Words) -> None:
    """Draw the section with apex angle, spacing, plate width, box width and depth."""
    x, y = apex
    side, foot, low = shape.half_width, y - shape.depth, y - base(shape, words)
    sheet.text((x - side, y + 17.0), TITLES[1], bold=True)
    sheet.centre_line((x, y + 4.0), (x, foot - 4.0))
    plan_outline(sheet, apex, shape)
    radius = 0.6 * min(shape.plate, shape.spacing)
    half = np.degrees(shape.half_angle)
    sheet.arc(apex, radius, -90.0 - half, -90.0 + half)
    sheet.leader(apex, (x + 3.0, y + 9.0), words.angle)
    outward = np.array([-np.cos(shape.half_angle), np.sin(shape.half_angle)]) * LEVEL
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
        at = x + side + LEVEL * (level + 1)
        sheet.dimension(apex, end, through=(at, y), along=(0.0, -1.0), words=text)
    sheet.dimension(
        (x + side, y - shape.rim),
        (x - side, y - shape.rim),
        through=(x, low - LEVEL),
        along=(-1.0, 0.0),
        words=words.width,
    )
    sheet.line(((x, low - LEVEL - 2.0), (x, low - LEVEL - 9.0)), weight=0.9)
    sheet.arrow((x, low - LEVEL - 9.5), np.array([0.0, -1.0]))
    sheet.text((x - 2.5, low - LEVEL - 6.5), "boresight", align="right")


def blank_view(sheet: Sheet, centre: Point, shape: Shape, words: Words) -> None:
    """Draw both plates laid flat with their bend line."""
    x, y = centre
    half = shape.length / 2.0
    sheet.text((x - shape.plate, y + half + 15.0), TITLES[2], bold=True)
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
        through=(x, y - half - LEVEL),
        along=(-1.0, 0.0),
        words=words.blank,
    )
    sheet.dimension(
        (x + shape.plate, y + half),
        (x + shape.plate, y - half),
        through=(x + shape.plate + LEVEL, y),
        along=(0.0, -1.0),
        words=words.length,
    )
