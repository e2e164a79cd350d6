"""What the workshop cuts: the flat blank, its bend and holes, and what fits on a sheet; metres.

Frame of a blank: x across the bend line, y along it (along the dipole), origin at the middle of the
bend line; the inside of the antenna faces up. Plates are measured on their inside faces from the
line in which these would meet, sharp, to the rim.

The bend is round: its inside radius r is the sheet's thickness t, and the neutral line lies K·t
from the inside, K = 0.42 (assumptions; common practice for soft aluminium, K runs from 0.33 to
0.5). For a bend by β = π − apex angle the round takes β(r + K·t) of the blank in place of
2r·tan(β/2) of the sharp faces. A trial bend in the sheet in hand replaces both assumptions.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np

from models.build import Build
from models.geometry import Reflectors

__all__ = [
    "K_FACTOR",
    "STOCK_SHEETS",
    "Blank",
    "Hole",
    "Sheets",
    "blank_of",
    "plate_of",
    "sheet_use",
]

K_FACTOR: Final = 0.42
"""Neutral line from the inside face over thickness; common practice."""

STOCK_SHEETS: Final = ((1.0, 2.0), (1.25, 2.5), (1.5, 3.0))
"""Sheets as sold, m; common practice."""

GAP: Final = 0.005
"""Between pieces cut from one sheet, m."""

BOOM_OVER_DIPOLE: Final = 2.0
"""Diameter of the boom that carries the dipole over the dipole's own; a proposal."""

SCREW_HOLES: Final = (3.4e-3, 4.5e-3, 5.5e-3, 6.6e-3)
"""Clearance holes of M3, M4, M5 and M6, m (ISO 273, medium; from memory)."""

_FLAT: Final = 1e-6
"""Bends by less than this, radians, are none."""


@dataclass(frozen=True, kw_only=True)
class Hole:
    """A round hole at (x, y) of the blank, m; what it is for."""

    x: float
    y: float
    diameter: float
    use: str


@dataclass(frozen=True, kw_only=True)
class Blank:
    """A piece of sheet, flat; a rectangle of `width` (across the bend) by `length`, m.

    Parameters
    ----------
    width, length, thickness : float
        m.
    bend_angle : float
        By how much the sheet is turned, radians; 0 where it stays flat.
    radius : float
        Inside radius of the bend, m; 0 without a bend.
    bend_zone : float
        Width of the strip that becomes round, in the middle of the blank, m.
    setback : float
        From the sharp apex line to where a plate starts to be flat, m.
    pieces : int
        How many an antenna needs.
    holes : tuple of Hole
    to_feed : float
        From the inside of the bent sheet to the dipole's axis, along the boom, m.
    """

    width: float
    length: float
    thickness: float
    bend_angle: float = 0.0
    radius: float = 0.0
    bend_zone: float = 0.0
    setback: float = 0.0
    pieces: int = 1
    holes: tuple[Hole, ...] = ()
    to_feed: float

    @property
    def bent(self) -> bool:
        """Whether there is a bend."""
        return self.bend_angle > 0.0

    @property
    def area(self) -> float:
        """Of one piece, holes not taken off, m²."""
        return self.width * self.length


@dataclass(frozen=True, kw_only=True)
class Sheets:
    """How a piece lies on a stock sheet.

    Parameters
    ----------
    size : (short, long)
        Of the sheet, m.
    count : int
        Pieces a sheet yields.
    used : float
        Their share of the sheet's area, 0 to 1.
    needed : int
        Sheets for one antenna; 0 where a piece does not fit.
    """

    size: tuple[float, float]
    count: int
    used: float
    needed: int


def blank_of(reflectors: Reflectors, build: Build) -> Blank | None:
    """Return the blank from which both plates of the first design are bent.

    None where the bend's round would take up a whole plate: such plates are cut as two.
    """
    apex_angle = float(reflectors.apex_angle[0])
    width, length = float(reflectors.plate_width[0]), float(reflectors.plate_length[0])
    spacing, thickness = float(reflectors.spacing[0]), build.sheet_thickness
    bend = np.pi - apex_angle
    if bend < _FLAT:
        return Blank(
            width=2.0 * width,
            length=length,
            thickness=thickness,
            holes=_holes(reflectors, half_width=width, flat_from=0.0),
            to_feed=spacing,
        )
    radius = thickness
    setback = radius * float(np.tan(bend / 2.0))
    zone = bend * (radius + K_FACTOR * thickness)
    # The round's inside stands off the sharp line by this much on the bisector.
    inset = radius * (1.0 / float(np.sin(apex_angle / 2.0)) - 1.0)
    if setback >= width or inset >= spacing:
        return None
    half = width - setback + zone / 2.0
    return Blank(
        width=2.0 * half,
        length=length,
        thickness=thickness,
        bend_angle=float(bend),
        radius=radius,
        bend_zone=zone,
        setback=setback,
        holes=_holes(reflectors, half_width=half, flat_from=zone / 2.0),
        to_feed=spacing - inset,
    )


def plate_of(reflectors: Reflectors, build: Build) -> Blank:
    """Return one of two plates of the first design, cut apart and joined along the apex line.

    Square edges whose inside corners meet give the apex angle without any allowance.
    """
    return Blank(
        width=float(reflectors.plate_width[0]),
        length=float(reflectors.plate_length[0]),
        thickness=build.sheet_thickness,
        pieces=2,
        to_feed=float(reflectors.spacing[0]),
    )


def sheet_use(blank: Blank, size: tuple[float, float]) -> Sheets:
    """Return how many pieces a stock sheet of `size` (m) yields, `GAP` between them.

    Rows of pieces one way round, and what is left beside them filled the other way round; the best
    number of rows either way. Cuts run from edge to edge, so a guillotine can make them.
    """
    count = max(
        _rows(blank.width, blank.length, size[0], size[1]),
        _rows(blank.width, blank.length, size[1], size[0]),
    )
    needed = -(-blank.pieces // count) if count else 0
    return Sheets(
        size=size, count=count, used=count * blank.area / (size[0] * size[1]), needed=needed
    )


def _fit(piece: float, room: float) -> int:
    """Return how many pieces fit side by side."""
    return max(int((room + GAP) / (piece + GAP) + 1e-9), 0)


def _rows(width: float, length: float, across: float, along: float) -> int:
    """Return the most pieces on a sheet: some rows, and turned ones in the strip left over."""
    most = 0
    for rows in range(_fit(length, along) + 1):
        left = along - rows * (length + GAP)
        turned = _fit(width, left) * _fit(length, across)
        most = max(most, rows * _fit(width, across) + turned)
    return most


def _holes(reflectors: Reflectors, *, half_width: float, flat_from: float) -> tuple[Hole, ...]:
    """Return the hole of the boom on the bend line and four of its bracket, or none.

    The bracket sits on the flat of both plates; the plates must hold it twice over.
    """
    boom = BOOM_OVER_DIPOLE * float(reflectors.dipole_diameter[0])
    fitting = [hole for hole in SCREW_HOLES if hole <= max(boom / 2.0, SCREW_HOLES[0])]
    screw = fitting[-1]
    # Two diameters from the edge of a hole to the bend, to the boom and to the rim.
    x = max(flat_from, boom / 2.0) + 2.5 * screw
    y = boom / 2.0 + 2.5 * screw
    half_length = float(reflectors.plate_length[0]) / 2.0
    if 2.0 * x > half_width or 2.0 * y > half_length:
        return ()
    bracket = [
        Hole(x=side * x, y=up * y, diameter=screw, use="bracket")
        for side in (-1.0, 1.0)
        for up in (-1.0, 1.0)
    ]
    return (Hole(x=0.0, y=0.0, diameter=boom, use="boom and feed line"), *bracket)
