"""A drawing sheet and its pens: outlines, dimensions with arrows, leaders; all in mm on paper.

Coordinates are millimetres from the sheet's lower left corner. A dimension puts its text between
the arrows where it fits and past the second end where it does not; the text clears what is under
it, so a dimension line that must cross another stays readable.
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING, Final

import numpy as np
from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.figure import Figure
from matplotlib.patches import Arc, Circle, Polygon

from models.conventions import FloatArray
from optim.style import BLACK, GREY, INCH, TYPE, text_width

if TYPE_CHECKING:
    from matplotlib.axes import Axes

__all__ = ["Point", "Sheet", "millimetres", "reach"]

Point = tuple[float, float]

_ARROW: Final = 2.6
_TAIL: Final = 3.0
_GAP: Final = 0.8
_OVER: Final = 1.6
_CAP: Final = TYPE / 72.0 * INCH * 0.73
"""Height of a capital letter, mm."""


def millimetres(metres: float, *, decimals: int = 2) -> str:
    """Return a length in mm with as many digits as it has, `decimals` (1 or 2) at most."""
    return f"{metres * 1e3:.{decimals}f}".rstrip("0").rstrip(".")


def reach(text: str, span: float) -> float:
    """Return how far a dimension over `span` reaches past its second end, mm; 0 where it fits."""
    if text_width(text) + 2.0 * _ARROW + 1.0 <= span:
        return 0.0
    return (_TAIL if span > 2.5 * _ARROW else _ARROW + _TAIL) + text_width(text)


class Sheet:
    """Paper of `width` by `height` mm to draw on; `figure` is the picture."""

    def __init__(self, width: float, height: float) -> None:
        self.figure = Figure(figsize=(width / INCH, height / INCH))
        FigureCanvasAgg(self.figure)
        self.axes: Axes = self.figure.add_axes((0.0, 0.0, 1.0, 1.0))
        self.axes.set(xlim=(0.0, width), ylim=(0.0, height))
        self.axes.set_axis_off()

    def line(
        self,
        points: Sequence[Point],
        *,
        weight: float = 0.6,
        dashes: str | tuple[float, tuple[float, ...]] = "-",
        colour: str = BLACK,
    ) -> None:
        """Draw straight lines through `points`, `weight` in points."""
        x, y = zip(*points, strict=True)
        self.axes.plot(x, y, color=colour, linewidth=weight, linestyle=dashes, zorder=2)

    def centre_line(self, start: Point, end: Point) -> None:
        """Draw the long-and-short dashes of an axis or a bend."""
        self.line((start, end), weight=0.6, dashes=(0, (10, 2.5, 2, 2.5)), colour=GREY)

    def outline(
        self, points: Sequence[Point], *, fill: str = "none", weight: float = 1.3, order: float = 1
    ) -> None:
        """Draw a closed outline."""
        self.axes.add_patch(
            Polygon(
                points,
                closed=True,
                facecolor=fill,
                edgecolor=BLACK,
                linewidth=weight,
                joinstyle="miter",
                zorder=order,
            )
        )

    def text(
        self,
        place: Point,
        words: str,
        *,
        size: float = TYPE,
        bold: bool = False,
        align: str = "left",
        turn: float = 0.0,
        clear: bool = False,
    ) -> None:
        """Set text on one line, vertically centred on `place`; `clear` blanks what is under it."""
        self.axes.text(
            *place,
            words,
            fontsize=size,
            fontweight="bold" if bold else "normal",
            horizontalalignment=align,
            verticalalignment="center" if clear else "center_baseline",
            rotation=turn,
            rotation_mode="anchor",
            color=BLACK,
            bbox={"facecolor": "white", "edgecolor": "none", "pad": 0.6} if clear else None,
            zorder=6,
        )

    def arrow(self, tip: Point, direction: FloatArray) -> None:
        """Draw a slim filled arrowhead whose `tip` points along the unit vector `direction`."""
        across = np.array([-direction[1], direction[0]]) * _ARROW / 6.0
        foot = np.array(tip) - direction * _ARROW
        self.axes.add_patch(
            Polygon(
                np.stack([np.array(tip), foot + across, foot - across]),
                facecolor=BLACK,
                linewidth=0.0,
                zorder=4,
            )
        )

    def dimension(
        self, start: Point, end: Point, *, through: Point, along: Point, words: str
    ) -> None:
        """Dimension the distance of two points.

        Parameters
        ----------
        start, end : Point
            What is measured. Text that does not fit goes past `end`.
        through : Point
            A point on the dimension line.
        along : Point
            Direction of the dimension line, from `start` towards `end`; any length above 0.
        words : str
            The text.
        """
        u = np.array(along) / np.hypot(*along)
        anchor = np.array(through)
        first, second = (anchor + u * float((np.array(p) - anchor) @ u) for p in (start, end))
        for feature, foot in ((np.array(start), first), (np.array(end), second)):
            away = foot - feature
            length = float(np.hypot(*away))
            if length > _GAP:
                ray = away / length
                self.line((_point(feature + ray * _GAP), _point(foot + ray * _OVER)), weight=0.45)
        span, wide = float((second - first) @ u), text_width(words)
        past = reach(words, span)
        outward = span <= 2.5 * _ARROW and past > 0.0
        tail = _ARROW + _TAIL if outward else 0.0
        self.line((_point(first - u * tail), _point(second + u * past)), weight=0.45)
        self.arrow(_point(first), u if outward else -u)
        self.arrow(_point(second), -u if outward else u)
        # Text reads from below or from the right, above its line.
        turn = float(np.degrees(np.arctan2(u[1], u[0])))
        turn = turn - 180.0 * np.round(turn / 180.0 - 1e-9)
        up = np.array([-np.sin(np.radians(turn)), np.cos(np.radians(turn))])
        middle = (first + second) / 2.0 if past == 0.0 else second + u * (past - wide / 2.0)
        place = middle + up * (_CAP / 2.0 + 1.0)
        self.text(_point(place), words, align="center", turn=turn, clear=True)

    def leader(self, tip: Point, knee: Point, words: str) -> None:
        """Point an arrow at `tip` from text that starts right of `knee`."""
        self.line((tip, knee, (knee[0] + 2.0, knee[1])), weight=0.45)
        way = np.array(tip) - np.array(knee)
        self.arrow(tip, way / np.hypot(*way))
        self.text((knee[0] + 2.8, knee[1]), words)

    def arc(self, centre: Point, radius: float, start_deg: float, end_deg: float) -> None:
        """Draw a thin arc, counter-clockwise, with an arrowhead at each end where they fit."""
        self.axes.add_patch(
            Arc(
                centre,
                2.0 * radius,
                2.0 * radius,
                theta1=start_deg,
                theta2=end_deg,
                color=BLACK,
                linewidth=0.45,
                zorder=2,
            )
        )
        if radius * np.radians(end_deg - start_deg) < 3.0 * _ARROW:
            return
        # A straight head on a bent line: turn it by half the angle that it spans.
        lean = _ARROW / radius / 2.0
        for angle_deg, sense in ((start_deg, -1.0), (end_deg, 1.0)):
            angle = np.radians(angle_deg)
            tip = np.array(centre) + radius * np.array([np.cos(angle), np.sin(angle)])
            heading = angle - sense * lean
            self.arrow(_point(tip), sense * np.array([-np.sin(heading), np.cos(heading)]))

    def circle(self, centre: Point, radius: float) -> None:
        """Draw a round hole."""
        self.axes.add_patch(
            Circle(centre, radius, facecolor="white", edgecolor=BLACK, linewidth=0.8, zorder=3)
        )

    def scale_bar(self, place: Point, length: float, words: str) -> None:
        """Draw a bar of `length` mm on paper from `place`, half of it filled, with its text."""
        x, y = place
        for part, fill in ((0.0, BLACK), (0.5, "white")):
            left, right = x + part * length, x + (part + 0.5) * length
            self.outline(
                ((left, y), (right, y), (right, y + 1.6), (left, y + 1.6)), fill=fill, weight=0.6
            )
        self.text((x + length + 2.0, y + 0.8), words)


def _point(vector: FloatArray) -> Point:
    return float(vector[0]), float(vector[1])
