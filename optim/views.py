"""The views of a corner reflector on a drawing: front, section in the H-plane, plates laid flat.

Millimetres on paper, reduced from metres by N of the scale 1:N. The front view is that from
boresight; the section has the apex on top and boresight downwards. Dimension lines stand one
`LEVEL` off the outlines; text that does not fit between its arrows goes outside. The flat sheet is
that of `optim.cutting`, what the bend adds or takes included.
"""

from __future__ import annotations

from collections.abc import Iterator
from typing import Final, NamedTuple

import numpy as np

from models.build import Build
from models.geometry import Reflectors
from optim.cutting import K_FACTOR, Blank, blank_of, plate_of
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
    "piece_of",
    "plan_outline",
    "plan_view",
    "shape_of",
    "under_blank",
    "words_of",
]

LEVEL: Final = 10.0
"""Distance of a dimension line from the outline, and from the next, mm."""
NOTE: Final = 4.2
"""Between the lines of notes, mm."""
_METAL: Final = "#e4e4e4"
TITLES: Final = (
    "Front view, from boresight",
    "Section in the H-plane",
    "Both plates laid flat",
    "One of two plates",
)


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
    blank: float
    """Half the width of the flat sheet."""
    holes: tuple[tuple[float, float, float], ...]
    """Across, along and diameter, from the middle of the flat sheet."""

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
    flat: str
    blank: str
    half_blank: str
    notes: tuple[str, ...]
    length: str
    dipole: str
    diameter: str
    width: str
    depth: str


def piece_of(reflectors: Reflectors, build: Build) -> Blank:
    """Return the flat sheet that is drawn: both plates in one, or one of two where it must be."""
    return blank_of(reflectors, build) or plate_of(reflectors, build)


def shape_of(reflectors: Reflectors, reduction: float, build: Build) -> Shape:
    """Return the first design in mm on paper at the scale 1:`reduction`."""
    paper = 1e3 / reduction
    piece = piece_of(reflectors, build)
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
        blank=piece.width / 2.0 * paper,
        holes=tuple((h.x * paper, h.y * paper, h.diameter * paper) for h in piece.holes),
    )


def words_of(reflectors: Reflectors, build: Build) -> Words:
    """Return the texts for the first design."""
    angle = np.degrees(float(reflectors.apex_angle[0]))
    piece = piece_of(reflectors, build)
    bend = f"bend line: bend by {_degrees(np.degrees(piece.bend_angle))}"
    return Words(
        angle=f"apex angle {_degrees(angle)}",
        bend=bend if piece.bent else "flat, no bend",
        spacing=millimetres(reflectors.spacing[0]),
        plate=millimetres(reflectors.plate_width[0]),
        flat=TITLES[2 if piece.pieces == 1 else 3],
        blank=millimetres(piece.width, decimals=1),
        half_blank=millimetres(piece.width / 2.0, decimals=1) if piece.bent else "",
        notes=tuple(_notes(piece)),
        length=millimetres(reflectors.plate_length[0]),
        dipole=millimetres(reflectors.dipole_length[0]),
        diameter=f"dipole ⌀ {millimetres(reflectors.dipole_diameter[0])}",
        width=millimetres(reflectors.width[0], decimals=1),
        depth=millimetres(reflectors.depth[0], decimals=1),
    )


def _notes(piece: Blank) -> Iterator[str]:
    if piece.bent:
        radius = millimetres(piece.radius)
        yield f"this face inside; inside radius {radius}, neutral line at {K_FACTOR:g} of thickness"
    if piece.holes:
        boom, *bracket = piece.holes
        x, y = (millimetres(abs(place)) for place in (bracket[0].x, bracket[0].y))
        yield (
            f"holes: boom ⌀ {millimetres(boom.diameter)} in the middle; bracket {len(bracket)} × "
            f"⌀ {millimetres(bracket[0].diameter)}, {x} across and {y} along from it"
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
    """Draw the flat sheet with its bend line and holes, notes below it."""
    x, y = centre
    side, half = shape.blank, shape.length / 2.0
    sheet.text((x - side, y + half + 15.0), words.flat, bold=True)
    sheet.outline(_rectangle(centre, side, half), fill=_METAL)
    if words.half_blank:
        sheet.centre_line((x, y - half - 3.0), (x, y + half + 3.0))
        sheet.dimension(
            (x, y + half),
            (x - side, y + half),
            through=(x, y + half + 4.0),
            along=(-1.0, 0.0),
            words=words.half_blank,
        )
    sheet.leader((x, y + half), (x + 3.0, y + half + 6.5), words.bend)
    for across, along, diameter in shape.holes:
        sheet.circle((x + across, y + along), diameter / 2.0)
    sheet.dimension(
        (x + side, y - half),
        (x - side, y - half),
        through=(x, y - half - LEVEL),
        along=(-1.0, 0.0),
        words=words.blank,
    )
    sheet.dimension(
        (x + side, y + half),
        (x + side, y - half),
        through=(x + side + LEVEL, y),
        along=(0.0, -1.0),
        words=words.length,
    )
    below = y - half - under_blank(shape, words)
    for row, note in enumerate(words.notes):
        sheet.text((x - side, below + NOTE * (len(words.notes) - row - 0.5)), note)


def under_blank(shape: Shape, words: Words) -> float:
    """Return how far below the flat sheet its dimensions and notes end, mm."""
    return max(LEVEL + 4.0, reach(words.length, shape.length) + 1.0) + NOTE * len(words.notes)
