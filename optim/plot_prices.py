"""The picture of prices: the smallest antenna (its size goal) as each limit is moved (its unit).

One panel a limit, costliest first, on one scale; the filled mark is the value asked for. Easier is
to the left of every panel. The dashed line is the size without the limit.
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING, Final

import numpy as np
from matplotlib.figure import Figure
from matplotlib.font_manager import FontProperties

from optim.plot_band import PANELS
from optim.quantities import SIZES
from optim.requirements import Limit
from optim.style import BLACK, GREY, MARKS, TYPE, house_style, new_figure, no_data, plain
from optim.trade_prices import Price

if TYPE_CHECKING:
    from matplotlib.axes import Axes

__all__ = ["draw_prices", "words_of"]

_COLUMNS: Final = 3
MOST_PANELS: Final = 9


def draw_prices(
    *, title: str, found: Sequence[Price], size: str, unit: float, model: str
) -> Figure:
    """Return the picture of prices, at most nine, in the order given.

    Parameters
    ----------
    title : str
        Free text.
    found : sequence of Price
    size : str
        What the sizes are, with their unit, as in "frontal area (m²)".
    unit : float
        That unit in SI.
    model : str
        That judged.
    """
    shown = [price for price in found if price.moves][:MOST_PANELS] or list(found)[:1]
    flat = "; ".join(words_of(price.limit) for price in found if not price.moves)
    rows = max(-(-len(shown) // _COLUMNS), 1)
    with house_style():
        figure = new_figure(7.6, 1.3 + 2.0 * rows, title=title)
        panels = figure.subplots(rows, _COLUMNS, sharey=True, squeeze=False).ravel()
        for axes, price in zip(panels, shown, strict=False):
            _panel(axes, price, unit)
        for axes in panels[len(shown) :]:
            axes.remove()
        for axes in panels[: len(shown) : _COLUMNS]:
            axes.set_ylabel(f"smallest\n{size}")
        handles = {
            label: handle
            for axes in panels[: len(shown)]
            for handle, label in zip(*axes.get_legend_handles_labels(), strict=True)
        }
        if handles:
            legend = figure.legend(
                list(handles.values()), list(handles), loc="outside lower left", ncols=4
            )
            note = f"Smallest designs found by short searches, judged by {model}."
            if flat:
                some = any(np.isfinite(price.asked) for price in found)
                fact = "No effect within a step" if some else "No design found, a step either way"
                note += "\n" + plain(f"{fact}: {flat}", width=175.0, lines=3)
            legend.set_title(note, FontProperties(size=TYPE))
            legend.set_alignment("left")
    return figure


def _panel(axes: Axes, price: Price, unit: float) -> None:
    values, sizes = price.values, price.sizes / unit
    mark = MARKS[0]
    axes.set_title(words_of(price.limit))
    axes.plot(values, sizes, color=mark.colour, marker="o", markerfacecolor="white", label="moved")
    here = values == price.limit.value
    if np.isfinite(sizes[here]).any():
        axes.plot(
            values[here],
            sizes[here],
            linestyle="none",
            marker="o",
            markersize=8,
            color=BLACK,
            label="as asked",
        )
    missing = ~np.isfinite(sizes)
    if missing.all() and not np.isfinite(price.dropped):
        no_data(axes, "no design found")
    elif missing.any():
        for value in values[missing]:
            axes.axvline(value, color=MARKS[1].colour, linestyle=":", label="no design found")
    if np.isfinite(price.dropped):
        axes.axhline(
            price.dropped / unit, color=GREY, linestyle="--", label="without this limit", zorder=1
        )
    if values.size > 1:
        air = 0.08 * float(np.ptp(values))
        ends = values[0], values[-1]
        way = np.sign(ends[1] - ends[0])
        axes.set_xlim(ends[0] - way * air, ends[1] + way * air)
    axes.locator_params(axis="x", nbins=5)
    axes.locator_params(axis="y", nbins=5)


def words_of(limit: Limit) -> str:
    """Return a limit as a panel's title: what, in which unit, at least or at most."""
    if limit.figure in PANELS:
        what = PANELS[limit.figure].replace("degrees", "°").replace("ratio ", "")
    else:
        what = f"{limit.figure.replace('_', ' ')} ({SIZES[limit.figure].unit})"
    return f"{what} at {'least' if limit.sense == 'min' else 'most'}"
