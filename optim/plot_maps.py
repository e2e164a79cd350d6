"""The picture of a map: one panel a figure over two dimensions (mm or degrees).

Each panel is shaded by its figure, worst over the band, and hatched where its own requirement rules
designs out; the heavy line surrounds what meets everything. The star is the design that the map
goes through.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Final

import numpy as np
from matplotlib import colormaps
from matplotlib.colors import ListedColormap
from matplotlib.figure import Figure
from matplotlib.lines import Line2D
from matplotlib.patches import Patch

from models.conventions import FloatArray
from optim.margins import SIZES
from optim.plot_band import PANELS
from optim.requirements import Limit
from optim.style import BLACK, house_style, new_figure
from optim.trade_maps import Map
from optim.units import VARIABLES, to_file

if TYPE_CHECKING:
    from collections.abc import Sequence

    from matplotlib.axes import Axes

__all__ = ["AXES", "draw_map", "in_file_units"]

AXES: Final = {
    name: f"{name.replace('_', ' ')} ({'degrees' if name == 'apex_angle' else 'mm'})"
    for name in VARIABLES
}
ALWAYS: Final = (
    "gain_dbi",
    "beamwidth_h_deg",
    "beamwidth_e_deg",
    "front_to_back_db",
    "vswr",
)
_EDGE: Final = "#d55e00"
_SHADES: Final = ListedColormap(colormaps["cividis"](np.linspace(0.3, 1.0, 256)))
"""Light enough throughout for hatching on top."""

_MET: Final = -1e-6
"""A margin from here on is met: exactly on the limit is inside."""

_ENDS: Final = (5.0, 95.0)
"""Shades end at these percentiles (or at the design), so that what is far off flattens nothing."""


def in_file_units(variable: str, values: FloatArray) -> FloatArray:
    """Return values of a variable in degrees or mm."""
    return np.degrees(values) if variable == "apex_angle" else 1000.0 * values


def draw_map(
    *,
    title: str,
    chart: Map,
    limits: Sequence[Limit],
    name: str,
    model: str,
    frequencies_hz: FloatArray,
) -> Figure:
    """Return the picture of a map.

    Parameters
    ----------
    title : str
        Free text.
    chart : Map
    limits : sequence of Limit
        Columns of the map's margins.
    name : str
        Of the design that the map goes through.
    model : str
        That gave the figures.
    frequencies_hz : (n_freq,)
        At which they are worst, Hz.
    """
    own = {
        figure: [i for i, limit in enumerate(limits) if limit.figure == figure] for figure in PANELS
    }
    shown = [f for f in PANELS if _worth_a_panel(chart, f, own[f])]
    panels = [(PANELS[f], chart.worst[f], own[f]) for f in shown]
    sizes = [i for i, limit in enumerate(limits) if limit.figure in SIZES]
    panels.append(("frontal area (m²), caps", chart.frontal_area, sizes))
    columns = 4 if len(panels) in {7, 8} else 3
    rows = -(-len(panels) // columns)
    with house_style():
        figure = new_figure(0.4 + 2.75 * columns, 1.35 + 2.45 * rows, title=title)
        places = figure.subplots(rows, columns, sharex=True, sharey=True, squeeze=False).ravel()
        for place, (axes, panel) in enumerate(zip(places, panels, strict=False)):
            _panel(figure, axes, chart, *panel)
            if place + columns >= len(panels):
                axes.set_xlabel(AXES[chart.across])
                axes.tick_params(labelbottom=True)
            if place % columns == 0:
                axes.set_ylabel(AXES[chart.upwards])
        for axes in places[len(panels) :]:
            axes.remove()
        figure.legend(
            handles=[
                Line2D([], [], color=_EDGE, linewidth=2.4, label="border of what meets everything"),
                Patch(
                    facecolor="none",
                    edgecolor=BLACK,
                    hatch="////",
                    label="ruled out by the requirement on what the panel shows",
                ),
                _star([], [], label=f"{name.replace('_', ' ')}; held: {_held(chart)}"),
                Line2D([], [], linestyle="none", label=_by(model, frequencies_hz)),
            ],
            loc="outside lower left",
        )
    return figure


def _worth_a_panel(chart: Map, figure: str, own: list[int]) -> bool:
    """Return whether a figure is always shown, or its requirement rules out part of the map."""
    if not np.isfinite(chart.worst[figure]).any():
        return False
    return figure in ALWAYS or bool((chart.margins[..., own] < _MET).any())


def _held(chart: Map) -> str:
    return ", ".join(
        f"{name.replace('_', ' ')} {to_file(name, float(value)):g}"
        + ("°" if name == "apex_angle" else " mm")
        for name, value in zip(VARIABLES, chart.at, strict=True)
        if name not in {chart.across, chart.upwards}
    )


def _by(model: str, frequencies_hz: FloatArray) -> str:
    if frequencies_hz.size == 1:
        return f"at {frequencies_hz[0] / 1e6:g} MHz, by {model}"
    band = f"{frequencies_hz[0] / 1e6:g} to {frequencies_hz[-1] / 1e6:g} MHz"
    return f"worst of {frequencies_hz.size} frequencies, {band}, by {model}"


def _star(x: list[float], y: list[float], label: str = "_") -> Line2D:
    return Line2D(
        x,
        y,
        marker="*",
        markersize=13,
        color="white",
        markeredgecolor=BLACK,
        linestyle="none",
        clip_on=False,
        zorder=6,
        label=label,
    )


def _panel(
    figure: Figure, axes: Axes, chart: Map, label: str, values: FloatArray, own: list[int]
) -> None:
    x, y = in_file_units(chart.across, chart.x), in_file_units(chart.upwards, chart.y)
    axes.set_title(label, pad=10.0)  # room for a star on the upper edge
    axes.grid(visible=False)
    low, high = np.percentile(values[np.isfinite(values)], _ENDS)
    here = values[np.ix_(chart.y == _of(chart, chart.upwards), chart.x == _of(chart, chart.across))]
    low, high = min(low, *here.ravel()), max(high, *here.ravel())
    shade = axes.pcolormesh(
        x, y, values, cmap=_SHADES, shading="nearest", vmin=low, vmax=high, rasterized=True
    )
    figure.colorbar(shade, ax=axes, pad=0.02, extend="both")
    if own:
        _ruled_out(axes, x, y, chart.margins[..., own].min(axis=2))
    # What is missing counts as a thousand steps: cut, so that the line stands where it belongs.
    border = np.clip(chart.border, -1.0, 1.0)
    if border.min() < _MET <= border.max():
        axes.contour(
            x, y, border, levels=[_MET], colors=[_EDGE], linewidths=2.4, linestyles="solid"
        )
    place = [
        in_file_units(name, np.array([_of(chart, name)])).tolist()
        for name in (chart.across, chart.upwards)
    ]
    axes.add_line(_star(place[0], place[1]))
    axes.set(xlim=(x[0], x[-1]), ylim=(y[0], y[-1]))
    axes.locator_params(nbins=5)


def _of(chart: Map, name: str) -> float:
    """Return a dimension of the design that the map goes through, m or radians."""
    return float(chart.at[VARIABLES.index(name)])


def _ruled_out(axes: Axes, x: FloatArray, y: FloatArray, margin: FloatArray) -> None:
    if margin.min() >= _MET:
        return
    axes.contourf(x, y, margin, levels=[margin.min() - 1.0, _MET], colors="none", hatches=["////"])
    if margin.max() >= _MET:
        axes.contour(
            x, y, margin, levels=[_MET], colors=[BLACK], linewidths=1.2, linestyles="solid"
        )
