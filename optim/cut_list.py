"""The cut list of one antenna: pieces, bend and sheets, as text and CSV; mm and degrees.

Numbers are those of `optim.cutting`, written to 0.1 mm (holes to 0.01 mm).
"""

from __future__ import annotations

import csv
import io
from collections.abc import Iterator

import numpy as np

from models import Build, Reflectors
from models.build import mass
from optim.cutting import (
    GAP,
    K_FACTOR,
    STOCK_SHEETS,
    Blank,
    Sheets,
    blank_of,
    plate_of,
    sheet_use,
)

__all__ = ["cut_list_csv", "cut_list_text", "pieces_of"]


def pieces_of(reflectors: Reflectors, build: Build) -> dict[str, Blank]:
    """Return the ways to cut the first design, by name: one bent blank, or two plates."""
    blank = blank_of(reflectors, build)
    one = {} if blank is None else {"bent from one sheet": blank}
    return {**one, "cut as two plates": plate_of(reflectors, build)}


def cut_list_text(reflectors: Reflectors, build: Build, *, name: str, folded: bool = False) -> str:
    """Return the cut list as a page of plain text.

    Parameters
    ----------
    reflectors : Reflectors
        Its first design.
    build : Build
    name : str
        What the design is called.
    folded : bool
        Whether the feed is a folded dipole of two equal wires.
    """
    return "\n".join(_lines(reflectors, build, name, folded=folded)) + "\n"


def cut_list_csv(reflectors: Reflectors, build: Build) -> str:
    """Return the cut list as CSV: one line a way to cut and stock sheet, and one for the rod."""
    text = io.StringIO()
    writer = csv.writer(text, lineterminator="\n")
    writer.writerow(
        [
            "part",
            "pieces",
            "width_mm",
            "length_mm",
            "thickness_mm",
            "bend_deg",
            "inside_radius_mm",
            "sheet_mm",
            "pieces_a_sheet",
            "share_used",
            "sheets_an_antenna",
        ]
    )
    for way, piece in pieces_of(reflectors, build).items():
        for size in STOCK_SHEETS:
            use = sheet_use(piece, size)
            writer.writerow(
                [
                    way,
                    piece.pieces,
                    f"{1e3 * piece.width:.1f}",
                    f"{1e3 * piece.length:.1f}",
                    f"{1e3 * piece.thickness:g}",
                    f"{np.degrees(piece.bend_angle):.2f}",
                    f"{1e3 * piece.radius:g}",
                    _sheet(use),
                    use.count,
                    f"{use.used:.3f}",
                    use.needed or "",
                ]
            )
    rod, diameter = _rod(reflectors)
    writer.writerow(["dipole", 1, f"{diameter:.2f}", f"{rod:.1f}", *[""] * 7])
    return text.getvalue()


def _rod(reflectors: Reflectors) -> tuple[float, float]:
    """Return length and diameter of the dipole, mm."""
    return 1e3 * float(reflectors.dipole_length[0]), 1e3 * float(reflectors.dipole_diameter[0])


def _sheet(use: Sheets) -> str:
    return " x ".join(f"{1e3 * side:g}" for side in use.size)


def _lines(reflectors: Reflectors, build: Build, name: str, *, folded: bool) -> Iterator[str]:
    rod, diameter = _rod(reflectors)
    apex_angle = np.degrees(float(reflectors.apex_angle[0]))
    yield f"Cut list: {name.replace('_', ' ')}. One antenna, all dimensions in mm."
    yield ""
    yield f"sheet        {1e3 * build.sheet_thickness:g} thick, {build.sheet_density:g} kg/m³"
    yield f"mass         {float(mass(reflectors, build)[0]):.3g} kg, plates and a solid dipole"
    form = "folded, of two equal wires" if folded else "two halves, gap in the middle"
    yield f"dipole       rod ⌀ {diameter:g}, {rod:.1f} end to end; {form}"
    ways = pieces_of(reflectors, build)
    for way, piece in ways.items():
        yield ""
        yield f"{way[0].upper()}{way[1:]}"
        yield f"  {piece.pieces} × {1e3 * piece.width:.1f} × {1e3 * piece.length:.1f}"
        yield from _bend(piece, apex_angle)
        for hole in piece.holes:
            yield (
                f"  hole ⌀ {1e3 * hole.diameter:g} for {hole.use}, "
                f"{1e3 * hole.x:+.2f} across and {1e3 * hole.y:+.2f} along from the blank's middle"
            )
        if not piece.holes and piece.pieces == 1:
            yield "  no holes: the plates are too small for the bracket proposed here"
        yield (
            f"  dipole axis {1e3 * piece.to_feed:.1f} in front of the inside of the sheet, halfway "
            "along it"
        )
        for size in STOCK_SHEETS:
            use = sheet_use(piece, size)
            if use.count:
                each = f"{use.count} to a sheet of {_sheet(use)}, {100.0 * use.used:.0f} % used"
                yield f"  {each}, {use.needed} sheet{'s' * (use.needed > 1)} for one antenna"
            else:
                yield f"  does not fit on a sheet of {_sheet(use)}"
    if len(ways) == 1:
        yield ""
        yield "One blank is not given: its bend would take up the plates."
    yield ""
    yield f"Pieces lie {1e3 * GAP:g} apart, cut from edge to edge; no margin along the sheet's rim."
    yield "Holes are a proposal: a boom of twice the dipole's diameter through the apex, held by a"
    yield "bracket. Drill the boom's hole after bending. Clamps to the mast are left to the maker."
    yield "Two plates meet with their inside edges along the apex line, joined by an angle strip."


def _bend(piece: Blank, apex_angle: float) -> Iterator[str]:
    if not piece.bent:
        if piece.pieces == 1:
            yield "  stays flat"
        return
    yield (
        f"  bend line {500.0 * piece.width:.1f} from either rim; bend by "
        f"{np.degrees(piece.bend_angle):.2f}° to an angle of {apex_angle:.2f}° between the plates"
    )
    yield (
        f"  bend allowance assumes inside radius {1e3 * piece.radius:g} (the thickness), neutral "
        f"line at {K_FACTOR:g} of the thickness:"
    )
    yield (
        f"  the round takes {1e3 * piece.bend_zone:.2f} of the blank; plates are measured inside, "
        "sharp apex line to rim."
    )
    yield "  Bend a trial strip first; allow for springback."
