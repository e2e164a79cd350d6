"""The data sheet of one design: two A4 pages of what it does, how it is built and what to mind.

Figures by the deciding model over the band, on the grid on which the design was checked; sizes in
mm, mass in kg, wind load in N with the wind it is for. The same data gives the same bytes.
"""

from __future__ import annotations

import io
import textwrap
from collections.abc import Callable, Sequence
from typing import TYPE_CHECKING, Final, cast

import numpy as np
from matplotlib.backends.backend_pdf import PdfPages
from matplotlib.figure import Figure
from matplotlib.projections.polar import PolarAxes

from models import MODELS, Build
from optim import datasheet_plots
from optim.cautions import cautions
from optim.drafting import Sheet
from optim.quantities import FIGURES, MASKS, SIZES, minus, number
from optim.style import INCH, house_style, plain
from optim.subject import Subject
from optim.tables import DIMENSION_KEYS
from optim.units import to_file
from optim.views import Shape, front_outline, plan_outline, shape_of

if TYPE_CHECKING:
    from matplotlib.axes import Axes

__all__ = ["data_sheet", "pages"]

PAGE: Final = (210.0, 297.0)
"""A4 upright, mm."""

_LEFT: Final = 16.0
_RIGHT: Final = PAGE[0] - 16.0
_ROW: Final = 4.7
_CHARACTERS: Final = 112
"""Of small type on a line of the page."""
_COLUMNS: Final = (100.0, 122.0, 160.0, _RIGHT)
"""Right ends of the columns of numbers: least, most, asked, margin, mm."""

_SIZES: Final = ("width", "height", "depth", "frontal_area", "mass", "wind_load")


def data_sheet(subject: Subject) -> bytes:
    """Return the data sheet of `subject` as PDF."""
    title = plain(subject.requirements.title, width=160.0, size=13.0)
    about = {"Title": title, "Creator": "apexfront", "Producer": None, "CreationDate": None}
    held = io.BytesIO()
    with house_style(), PdfPages(held, metadata=about) as document:
        for page in pages(subject):
            document.savefig(page)
    return held.getvalue()


def pages(subject: Subject) -> list[Figure]:
    """Return the pages as pictures."""
    with house_style():
        return [_first(subject), _second(subject)]


def _first(subject: Subject) -> Figure:
    sheet = _page(subject, 1)
    y = _figures(sheet, subject, 258.0)
    y = _build(sheet, subject, y - 6.0)
    _row_of_plots(sheet, subject, foot=22.0, top=min(y - 13.0, 80.0))
    return sheet.figure


def _second(subject: Subject) -> Figure:
    sheet = _page(subject, 2)
    for x, plane in ((_LEFT + 3.0, "h"), (115.0, "e")):
        axes = _axes(sheet, (x, 170.0, 76.0, 76.0), projection="polar")
        datasheet_plots.cut(cast(PolarAxes, axes), subject, plane)
    y = 160.0
    for column, place in datasheet_plots.shown_columns(subject.frequencies.size).items():
        mark = datasheet_plots.LINES[place]
        sheet.line(
            ((_LEFT, y), (_LEFT + 12.0, y)), weight=1.6, dashes=mark.dashes, colour=mark.colour
        )
        sheet.text((_LEFT + 15.0, y), _said(subject, column))
        y -= _ROW
    y = _heading(sheet, "Cautions", y - 4.0)
    told = cautions(
        subject.reflectors,
        band=subject.requirements.band,
        wind_speed=subject.requirements.wind_speed,
        peak_gain_dbi=subject.peak_gain_dbi,
    )
    for head, text in told:
        sheet.text((_LEFT, y), head, bold=True)
        for line in textwrap.wrap(text, width=_CHARACTERS):
            y -= 4.2
            sheet.text((_LEFT, y), line)
        y -= 6.4
    return sheet.figure


def _page(subject: Subject, number: int) -> Sheet:
    """Return a page with title, what the design is, and the foot line."""
    sheet = Sheet(*PAGE)
    asked, band = subject.requirements, subject.requirements.band
    for row, line in enumerate(
        plain(asked.title, width=_RIGHT - _LEFT, size=13.0).splitlines() or [""]
    ):
        sheet.text((_LEFT, 282.0 - 6.2 * row), line, size=13.0, bold=True)
    mhz = " to ".join(f"{f:.6g}" for f in dict.fromkeys((band.low_hz / 1e6, band.high_hz / 1e6)))
    name = plain(subject.name, width=60.0, lines=1)
    sheet.text((_LEFT, 269.5), f"Corner reflector, {name}: {mhz} MHz", bold=True)
    sheet.text((_RIGHT, 269.5), f"page {number} of 2", align="right")
    sheet.line(((_LEFT, 266.0), (_RIGHT, 266.0)), weight=0.9)
    count = subject.frequencies.size
    sheet.text(
        (_LEFT, 9.0),
        f"Figures computed by {subject.model} ({MODELS[subject.model].summary}) at {count} "
        f"frequenc{'y' if count == 1 else 'ies'}; not measured.",
        size=8.0,
    )
    return sheet


def _heading(sheet: Sheet, words: str, y: float) -> float:
    """Write a heading and return where what follows starts."""
    sheet.text((_LEFT, y), words, size=10.0, bold=True)
    return y - 5.8


def _figures(sheet: Sheet, subject: Subject, y: float) -> float:
    """Write figures and sizes against what is asked; return where they end."""
    sheet.text((_LEFT, y), "Figures over the band", size=10.0, bold=True)
    for x, words in zip(_COLUMNS, ("least", "most", "asked", "margin"), strict=True):
        sheet.text((x, y), words, bold=True, align="right")
    y -= 5.4
    found: dict[str, list[tuple[str, float]]] = {}
    for limit, margin in subject.asked():
        words = "inside" if limit.figure in MASKS else f"{_SENSE[limit.sense]} {limit.value:g}"
        found.setdefault(limit.figure, []).append((words, margin))
    masks = {name: about for name, about in MASKS.items() if name in found}
    for name, (words, unit, decimals, _) in (FIGURES | masks).items():
        values = getattr(subject.figures, name)[0]
        ends = [number(end, decimals) for end in (values.min(), values.max())]
        y = _line(sheet, y, (words, unit), ends, found.get(name, []), decimals)
    sizes = subject.sizes()
    more = {
        "mass": ", plates and solid dipole",
        "wind_load": f" at {subject.requirements.wind_speed:g} m/s",
    }
    for name in _SIZES:
        words, unit, decimals, _ = SIZES[name]
        words += more.get(name, "")
        one = ["", number(sizes[name], decimals)]
        y = _line(sheet, y, (words, unit), one, found.get(name, []), decimals)
    if subject.yields is not None:
        expected, low, high = subject.yields
        least = subject.requirements.min_yield
        wanted = [] if least is None else [(f"at least {least:g}", expected - least)]
        words = f"yield within tolerances ({low:.3f} to {high:.3f})"
        y = _line(sheet, y, (words, ""), ["", number(expected, 3)], wanted, 3)
    return y


_SENSE: Final = {"min": "at least", "max": "at most"}


def _line(
    sheet: Sheet,
    y: float,
    words: tuple[str, str],
    ends: Sequence[str],
    asked: Sequence[tuple[str, float]],
    decimals: int,
) -> float:
    """Write one figure, a line for each of its limits; return where the next goes."""
    sheet.line(((_LEFT, y + _ROW / 2.0), (_RIGHT, y + _ROW / 2.0)), weight=0.3, colour="#c8c8c8")
    name, unit = words
    sheet.text((_LEFT, y), f"{name}, {unit}" if unit else name)
    for x, end in zip(_COLUMNS, ends, strict=False):
        sheet.text((x, y), end, align="right")
    for row, (limit, margin) in enumerate(asked):
        low = y - _ROW * row
        sheet.text((_COLUMNS[2], low), limit, align="right")
        signed = minus(f"{margin:+.{max(decimals, 1)}f}")
        short = "" if margin >= 0.0 else "missed "
        told = f"{short}{signed}" if np.isfinite(margin) else "not known"
        sheet.text((_COLUMNS[3], low), told, align="right", bold=not margin >= 0.0)
    return y - _ROW * max(len(asked), 1)


def _build(sheet: Sheet, subject: Subject, y: float) -> float:
    """Draw the antenna and list its dimensions; return where they end."""
    y = _heading(sheet, "Dimensions", y)
    reflectors, asked = subject.reflectors, subject.requirements
    rows = []
    for name, key in DIMENSION_KEYS.items():
        value = to_file(name, float(getattr(reflectors, name)[0]))
        unit = "°" if key.endswith("_deg") else " mm"
        slack = asked.tolerance.get(name, 0.0)
        more = f" ± {to_file(name, slack):g}{unit}" if slack else ""
        words = name.replace("_", " ")
        rows.append((words, f"{value:.7g}{'' if more else unit}{more}"))
    thickness = 1e3 * asked.build.sheet_thickness
    rows.append(("sheet", f"{thickness:g} mm, {asked.build.sheet_density:g} kg/m³"))
    folded = asked.terms.impedance_ratio != 1.0
    rows.append(("feed", "folded dipole" if folded else "plain dipole"))
    for row, texts in enumerate(rows):
        for x, text in zip((_LEFT, _LEFT + 34.0), texts, strict=True):
            sheet.text((x, y - _ROW * row), text)
    room = _ROW * len(rows) + 2.0
    _thumbnail(sheet, _shape(subject, room), y + 2.0, room)
    return y - room


def _shape(subject: Subject, room: float) -> Shape:
    """Return the design reduced so that front view and section fit side by side in `room` mm."""
    r = subject.reflectors
    tall = max(float(r.height[0]), float(r.depth[0]))
    wide = float(r.width[0])
    reduction = max(1e3 * tall / (room - 6.0), 1e3 * wide / 40.0)
    return shape_of(r, reduction, Build())


def _thumbnail(sheet: Sheet, shape: Shape, top: float, room: float) -> None:
    for x, words in ((122.0, "from boresight"), (171.0, "section, boresight down")):
        sheet.text((x, top - room), words, align="center")
    front_outline(sheet, (122.0, top - 0.5 * (room - 5.0)), shape)
    plan_outline(sheet, (171.0, top - 0.5 * (room - 5.0 - shape.depth)), shape)


def _row_of_plots(sheet: Sheet, subject: Subject, *, foot: float, top: float) -> None:
    draw: tuple[Callable[[Axes, Subject], None], ...] = (
        datasheet_plots.gain,
        datasheet_plots.impedance,
        datasheet_plots.match,
    )
    for column, plot in enumerate(draw):
        x = _LEFT + 9.0 + column * 61.0
        plot(_axes(sheet, (x, foot, 45.0, top - foot)), subject)


def _axes(
    sheet: Sheet, place: tuple[float, float, float, float], projection: str | None = None
) -> Axes:
    """Return axes at (left, foot, width, height), mm."""
    width, height = (inches * INCH for inches in sheet.figure.get_size_inches())
    x, y, w, h = place
    return sheet.figure.add_axes(
        (x / width, y / height, w / width, h / height), projection=projection
    )


def _said(subject: Subject, column: int) -> str:
    """Return the figures at one frequency in words."""
    f = subject.figures
    gain = f.gain_dbi if np.isfinite(f.gain_dbi[0, column]) else f.directivity_dbi
    kind = "gain" if gain is f.gain_dbi else "directivity"
    return (
        f"{subject.frequencies[column] / 1e6:.6g} MHz: {kind} {number(gain[0, column], 2)} dBi, "
        f"beamwidth H {number(f.beamwidth_h_deg[0, column], 1)}° "
        f"E {number(f.beamwidth_e_deg[0, column], 1)}°, "
        f"front-to-back {number(f.front_to_back_db[0, column], 1)} dB"
    )
