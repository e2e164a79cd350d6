"""One look for every picture: size (mm or inches on paper), type, colours, and how files are saved.

Colours are those of Okabe & Ito (2008), told apart by colour-blind readers; line and marker styles
differ as well, so a grey print reads too. No text is smaller than 8 points at the size a
picture is made for. The same data gives the same bytes: no dates, no random ids.
"""

from __future__ import annotations

import textwrap
import warnings
from collections.abc import Iterator
from contextlib import contextmanager
from functools import lru_cache
from pathlib import Path
from typing import TYPE_CHECKING, Any, Final, NamedTuple

import numpy as np
from matplotlib import style
from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.figure import Figure
from matplotlib.font_manager import FontProperties
from matplotlib.textpath import TextPath

if TYPE_CHECKING:
    from matplotlib.axes import Axes

__all__ = [
    "BLACK",
    "FORBIDDEN",
    "GREY",
    "INCH",
    "MARKS",
    "TYPE",
    "Mark",
    "house_style",
    "mark_of",
    "new_figure",
    "no_data",
    "plain",
    "rule_out",
    "save",
    "text_width",
]

TYPE: Final = 8.5
"""Size of small type, points."""

INCH: Final = 25.4
"""mm."""

BLACK: Final = "#1a1a1a"
GREY: Final = "#6b6b6b"
FORBIDDEN: Final[dict[str, Any]] = {
    "facecolor": "#f3d3c3",
    "edgecolor": "#d08a6c",
    "hatch": "///",
    "linewidth": 0.0,
    "zorder": 0.5,
}
"""Fill of what a requirement rules out, light enough for text and lines on top."""


class Mark(NamedTuple):
    """How one series of a picture is drawn: colour, marker and dashes."""

    colour: str
    marker: str
    dashes: str


MARKS: Final = (
    Mark("#0072b2", "s", "-"),
    Mark("#d55e00", "D", "--"),
    Mark("#009e73", "^", "-."),
    Mark("#cc79a7", "v", ":"),
    Mark("#e69f00", "P", "-"),
    Mark("#56b4e9", "X", "--"),
)

_ROLES: Final = {"smallest": 0, "balanced": 1, "most_margin": 2}

_SETTINGS: Final = {
    "font.family": "DejaVu Sans",
    "font.size": 9.0,
    "axes.titlesize": 9.5,
    "axes.titlelocation": "left",
    "axes.labelsize": 9.0,
    "axes.edgecolor": BLACK,
    "axes.linewidth": 0.8,
    "axes.grid": True,
    "axes.axisbelow": True,
    "axes.formatter.useoffset": False,
    "axes.unicode_minus": True,
    "grid.color": "#d9d9d9",
    "grid.linewidth": 0.6,
    "xtick.labelsize": TYPE,
    "ytick.labelsize": TYPE,
    "legend.fontsize": TYPE,
    "legend.frameon": False,
    "lines.linewidth": 1.6,
    "hatch.linewidth": 0.5,
    "figure.dpi": 100.0,
    "savefig.dpi": 160.0,
    "svg.fonttype": "path",
    "svg.hashsalt": "apexfront",
    "text.usetex": False,
    "text.parse_math": False,
}


@contextmanager
def house_style() -> Iterator[None]:
    """Draw under these settings whatever the user's own matplotlib settings are.

    A letter that the type does not have is drawn as an empty box, without a word.
    """
    with style.context(["default", _SETTINGS]), warnings.catch_warnings():
        warnings.filterwarnings("ignore", message=r"Glyph .* missing from font")
        yield


def new_figure(width: float, height: float, *, title: str | None = None) -> Figure:
    """Return an empty figure of `width` by `height` inches that lays itself out, with its title."""
    figure = Figure(figsize=(width, height), layout="constrained")
    FigureCanvasAgg(figure)
    if title:
        figure.suptitle(
            plain(title, width=width * INCH - 6.0, size=10.5),
            x=0.012,
            horizontalalignment="left",
            fontsize=10.5,
            fontweight="bold",
        )
    return figure


def mark_of(name: str, index: int) -> Mark:
    """Return the mark of a series: a role keeps its own, anything else goes by its `index`."""
    return MARKS[_ROLES.get(name, index) % len(MARKS)]


def plain(text: str, *, width: float, size: float = TYPE, lines: int = 2) -> str:
    """Return free text on at most `lines` lines, cut with an ellipsis.

    Control characters become blanks; words longer than a line are broken. The house style turns
    mathtext off, so a dollar sign is a dollar sign.

    Parameters
    ----------
    text : str
        Anything.
    width : float
        Of a line, mm on paper.
    size : float
        Of the type (bold), points.
    lines : int
        Most lines.
    """
    printable = "".join(c if c.isprintable() else " " for c in text)
    # Few characters are as narrow as 0.3 of the type size: start there, and break earlier until
    # the widest line fits.
    columns = max(int(width / (0.3 * size / 72.0 * INCH)), 2)
    while True:
        wrapped = textwrap.wrap(printable, width=columns, max_lines=lines, placeholder=" …") or [""]
        if columns <= 2 or max(text_width(line, size) for line in wrapped) <= width:
            return "\n".join(wrapped)
        columns = max(int(0.95 * columns), 2)


@lru_cache(maxsize=512)
def text_width(text: str, size: float = TYPE) -> float:
    """Return the width of a line of bold `text` set in `size` points, mm.

    Upright type is a little narrower, so what fits bold fits.
    """
    if not text.strip():
        return 0.0
    # A dollar sign would start mathtext; another glyph of its width stands in.
    font = FontProperties(family="DejaVu Sans", weight="bold")
    path = TextPath((0.0, 0.0), text.replace("$", "S"), size=size, prop=font)
    # Curves stay within their control points; asking for their true extent takes far longer.
    return float(np.ptp(path.vertices[:, 0])) / 72.0 * INCH


def no_data(axes: Axes, message: str) -> None:
    """Write `message` into axes that have nothing to show."""
    axes.text(
        0.5, 0.5, message, transform=axes.transAxes, ha="center", va="center", color=GREY, wrap=True
    )


def rule_out(axes: Axes, direction: str, sense: str, value: float, *, label: str) -> None:
    """Shade what a requirement rules out and draw its limit; set the limits of the axes before.

    Parameters
    ----------
    axes : Axes
        Where.
    direction : str
        "x" or "y": the axis that the requirement is on.
    sense : str
        "min" or "max".
    value : float
        The limit, in the axis's unit.
    label : str
        Of the shade, for the legend; one that starts with an underscore stays out of it.
    """
    ends = axes.get_xlim() if direction == "x" else axes.get_ylim()
    span, line = (axes.axvspan, axes.axvline) if direction == "x" else (axes.axhspan, axes.axhline)
    end = min(*ends, value) if sense == "min" else max(*ends, value)
    span(min(value, end), max(value, end), label=label, **FORBIDDEN)
    line(value, color="#a34a1f", linewidth=1.1, zorder=0.6)


def save(figure: Figure, path: Path) -> None:
    """Write `figure` to `path`, PNG or SVG by its suffix; the same figure gives the same bytes.

    Raises
    ------
    ValueError
        For any other suffix.
    """
    suffix = path.suffix.lower()
    if suffix not in {".png", ".svg"}:
        msg = f"{path}: suffix {path.suffix!r} given, allowed: .png, .svg"
        raise ValueError(msg)
    nothing: dict[str, None] = {"Software": None} if suffix == ".png" else {"Date": None}
    with house_style():
        figure.savefig(path, format=suffix[1:], metadata=nothing)
