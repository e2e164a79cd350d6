"""What a reader needs of any picture: type large enough, on the paper, nothing on top of it."""

from __future__ import annotations

from itertools import combinations
from typing import Any, NamedTuple

import numpy as np
from matplotlib.backends.backend_agg import RendererAgg
from matplotlib.figure import Figure

from models.conventions import FloatArray


class Words(NamedTuple):
    """One line of text as drawn: its corners (4, 2) in pixels and its size in points."""

    text: str
    corners: FloatArray
    points: float


class _Recorder(RendererAgg):
    """Draws, and keeps every line of text that really lands on the picture."""

    def __init__(self, width: float, height: float, dpi: float) -> None:
        super().__init__(width, height, dpi)  # type: ignore[no-untyped-call]
        self.words: list[Words] = []

    def draw_text(
        self,
        gc: Any,
        x: float,
        y: float,
        s: str,
        prop: Any,
        angle: float,
        ismath: Any = False,
        mtext: Any = None,
    ) -> None:
        size = self.get_text_width_height_descent(s, prop, ismath)  # type: ignore[no-untyped-call]
        wide, high, _ = size
        turn = np.radians(angle)
        right = np.array([np.cos(turn), np.sin(turn)]) * wide
        up = np.array([-np.sin(turn), np.cos(turn)]) * high
        foot = np.array([x, self.height - y])
        corners = np.stack([foot, foot + right, foot + right + up, foot + up])
        self.words.append(Words(s, corners, float(prop.get_size_in_points())))
        super().draw_text(gc, x, y, s, prop, angle, ismath, mtext)  # type: ignore[no-untyped-call]


def words_of(figure: Figure) -> list[Words]:
    """Return every line of text that `figure` shows."""
    width, height = figure.get_size_inches() * figure.dpi
    recorder = _Recorder(width, height, figure.dpi)
    figure.draw(recorder)
    return [words for words in recorder.words if words.text.strip()]


def assert_readable(figure: Figure, *, air: float = 0.0) -> None:
    """Assert that all text is 8 points or more, within the picture and apart by `air` pixels."""
    words = words_of(figure)
    assert words
    width, height = figure.get_size_inches() * figure.dpi
    for one in words:
        assert one.points >= 8.0, one.text
        assert one.corners.min() >= -1.0, one.text
        assert np.all(one.corners.max(axis=0) <= np.array([width, height]) + 1.0), one.text
    for one, other in combinations(words, 2):
        assert not _touch(one.corners, other.corners, air), f"{one.text!r} on {other.text!r}"


def _touch(one: FloatArray, other: FloatArray, air: float) -> bool:
    """Return whether two rectangles overlap: no side of either parts them."""
    for box in (one, other):
        for side in (box[1] - box[0], box[3] - box[0]):
            way = side / max(float(np.hypot(*side)), 1e-9)
            a, b = one @ way, other @ way
            # One pixel of slack: the boxes are those of the renderer's whole pixels.
            if a.max() - 1.0 + air <= b.min() or b.max() - 1.0 + air <= a.min():
                return False
    return True
