"""The blank as a DXF drawing, mm, one layer a purpose; the same blank gives the same bytes.

Frame: that of `optim.cutting`. OUTLINE and HOLES are cut through; DRILL is what is cut after
bending, because a hole in a bend tears; BEND and NOTES are not cut.
"""

from __future__ import annotations

import io
from typing import TYPE_CHECKING, Final

import numpy as np
from ezdxf import units
from ezdxf._options import options
from ezdxf.filemanagement import new

from optim.cutting import K_FACTOR, Blank

if TYPE_CHECKING:
    from ezdxf.document import Drawing

__all__ = ["LAYERS", "blank_dxf"]

LAYERS: Final = {"OUTLINE": 7, "BEND": 5, "HOLES": 1, "DRILL": 6, "NOTES": 8}
"""Layers, and their colours by the format's index."""

_MM: Final = 1e3


def blank_dxf(blank: Blank, *, name: str) -> str:
    """Return the DXF text of `blank`.

    Parameters
    ----------
    blank : Blank
    name : str
        What the design is called; goes into the notes, letters, digits and blanks only.
    """
    # Time stamps and random ids would make every file another: the library can leave them out.
    kept = options.write_fixed_meta_data_for_testing
    options.write_fixed_meta_data_for_testing = True
    try:
        document = new("R2010", units=units.MM)
        _draw(document, blank, "".join(c if c.isalnum() else " " for c in name))
        # The library adds classes in the order of a set, which is another in every process.
        for kind in sorted(document.entitydb.dxf_types_in_use()):
            document.classes.add_class(kind)
        text = io.StringIO()
        document.write(text)
    finally:
        options.write_fixed_meta_data_for_testing = kept
    return text.getvalue()


def _draw(document: Drawing, blank: Blank, name: str) -> None:
    document.header["$MEASUREMENT"] = 1
    document.linetypes.add("BENDLINE", [18.0, 12.0, -2.5, 1.0, -2.5], description="bend")
    for layer, colour in LAYERS.items():
        kind = "BENDLINE" if layer == "BEND" else "Continuous"
        document.layers.add(layer, color=colour, linetype=kind)
    space = document.modelspace()
    x, y = _MM * blank.width / 2.0, _MM * blank.length / 2.0
    corners = [(-x, -y), (x, -y), (x, y), (-x, y)]
    space.add_lwpolyline(corners, close=True, dxfattribs={"layer": "OUTLINE"})
    if blank.bent:
        space.add_line((0.0, -y), (0.0, y), dxfattribs={"layer": "BEND"})
    for hole in blank.holes:
        in_bend = abs(hole.x) < (blank.bend_zone + hole.diameter) / 2.0
        space.add_circle(
            (_MM * hole.x, _MM * hole.y),
            _MM * hole.diameter / 2.0,
            dxfattribs={"layer": "DRILL" if blank.bent and in_bend else "HOLES"},
        )
    height = float(np.clip(0.02 * _MM * max(blank.width, blank.length), 0.5, 10.0))
    for row, line in enumerate(_notes(blank, name)):
        space.add_text(
            line,
            height=height,
            dxfattribs={"layer": "NOTES", "insert": (-x, -y - 2.0 * height * (row + 1.0))},
        )


def _notes(blank: Blank, name: str) -> list[str]:
    sheet = f"{name}: sheet {_MM * blank.thickness:g} mm, dimensions in mm"
    size = f"blank {_MM * blank.width:.1f} x {_MM * blank.length:.1f}, needed {blank.pieces}"
    if not blank.bent:
        return [sheet, size]
    bend = np.degrees(blank.bend_angle)
    return [
        sheet,
        size,
        f"bend by {bend:.2f} deg to {180.0 - bend:.2f} deg between the plates, this face inside",
        f"allowance: inside radius {_MM * blank.radius:g}, neutral line at {K_FACTOR:g} thickness",
        "layer DRILL: the hole on the bend line, drill it after bending",
    ][: 5 if blank.holes else 4]
